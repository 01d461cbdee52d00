"""Real lavas of eight tectonic settings: none of them is a source of ore, so none may come out favourable or possible.

Data: Ueki, Hino and Kuwatani 2022, Front. Earth Sci., doi:10.3389/feart.2022.994580 (licence forbids copying it here;
read where it lies beside the repository). The expectation is common practice, no source.
"""

import csv
from pathlib import Path

import numpy as np
import pytest

from registry.petrology.analytes import CHOSEN_INDEX
from registry.petrology.conventions import Conventions
from registry.petrology.digestion import DIGESTION_CODE
from registry.pipeline import compute_in_parts, empty_chunk
from registry.targets.definition import load_definitions
from registry.targets.engine import UNDECIDED, UNFAVOURABLE

FILE = Path(__file__).resolve().parents[3] / "shared" / "data" / "igneous_analyses" / "Uekietal_SMR_input.csv"
MAJORS = {
    "SiO2": "sio2_wt", "TiO2": "tio2_wt", "Al2O3": "al2o3_wt", "Fe2O3": "fe2o3t_reported_wt", "MgO": "mgo_wt",
    "CaO": "cao_wt", "Na2O": "na2o_wt", "K2O": "k2o_wt",
}  # fmt: skip
TRACES = "La Ce Nd Sm Gd Yb Lu Ba Hf Nb Rb Sr Ta Th Y Zr".split()  # noqa: SIM905


def lavas():
    with FILE.open(newline="", encoding="utf-8") as handle:
        table = list(csv.DictReader(handle))
    chunk = empty_chunk(len(table))
    for name, column in MAJORS.items() | {(name, f"{name.lower()}_ppm") for name in TRACES}:
        chunk.values[CHOSEN_INDEX[column]] = [float(row[name]) for row in table]
        chunk.digestions[CHOSEN_INDEX[column]] = DIGESTION_CODE["xrf" if name in MAJORS else "fusion"]
    chunk.context = {"lithology": np.full(len(table), "lava", dtype=object)}
    return chunk


@pytest.mark.skipif(not FILE.is_file(), reason=f"the lava analyses are not at {FILE}; they may not be copied")
def test_real_lavas_are_never_favourable_or_possible():
    definitions = list(load_definitions().values())
    found = {definition.code: [] for definition in definitions}
    for _, computed in compute_in_parts(lavas(), definitions, Conventions()):
        for code, verdicts in computed.verdicts.items():
            found[code] += verdicts.verdict.tolist()
    for code, verdicts in found.items():
        assert set(verdicts) <= {UNDECIDED, UNFAVOURABLE}, code
    # gaps do not hide everything: most lavas are excluded as sources of copper, tin and radiogenic heat
    for code in ("porphyry_copper", "tin", "radiogenic_heat"):
        assert found[code].count(UNFAVOURABLE) > len(found[code]) / 2
