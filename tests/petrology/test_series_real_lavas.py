"""Names and series of 2,063 real lavas (Ueki et al. 2022, doi 10.3389/feart.2022.994580), read where they lie.

The data are not copied into the project; the test skips where they are absent. That ridge basalts are subalkaline
basalt and ocean islands such as the Canaries alkaline is common knowledge of the trade (no source); labels of the
table are read as the places they abbreviate.
"""

import csv
from pathlib import Path

import numpy as np
import pytest

from registry.petrology import series, tas

TABLE = Path(__file__).resolve().parents[3] / "shared/data/igneous_analyses/Uekietal_SMR_input.csv"
pytestmark = pytest.mark.skipif(not TABLE.exists(), reason=f"{TABLE} is absent: the lavas are not part of the project")


@pytest.fixture(scope="module")
def lavas():
    with TABLE.open(encoding="utf-8", newline="") as file:
        rows = list(csv.DictReader(file))
    numbers = {name: np.array([float(row[name]) for row in rows]) for name in ("SiO2", "Na2O", "K2O")}
    return numbers, np.array([row["Number"] for row in rows])


def share(found, word, labels, place):
    return np.mean((found == word)[np.char.startswith(labels, place)])


def test_tas_every_real_lava_has_a_name(lavas):
    numbers, _ = lavas

    assert np.all(tas.tas_field(numbers["SiO2"], numbers["Na2O"] + numbers["K2O"]) >= 0)


def test_tas_ridge_lavas_are_basalt(lavas):
    numbers, labels = lavas
    field = tas.tas_field(numbers["SiO2"], numbers["Na2O"] + numbers["K2O"])

    assert share(field, tas.FIELDS.index("B"), labels, "Mor") > 0.95


@pytest.mark.parametrize(
    ("place", "word"),
    [("Mor", "subalkaline"), ("IBM", "subalkaline"), ("Ton", "subalkaline"), ("Can", "alkaline")],
)
def test_alkalinity_four_of_five_real_lavas_fit_their_setting(lavas, place, word):
    numbers, labels = lavas
    found = series.alkalinity(*numbers.values())
    judged = found.astype(bool)

    assert share(found[judged], word, labels[judged], place) > 0.8
