"""The invented scenario itself: its files are what the script writes, and its rocks obey mass balance.

The data are invented (seed_demo/README.txt); nothing here is checked against a publication but by the laws named.
"""

from __future__ import annotations

import csv
import io
from pathlib import Path

import numpy as np
import pytest

import seed_demo
from seed_demo.averages import MAJORS
from seed_demo.build_scenario import bags, write
from seed_demo.certificates import LAYOUTS
from seed_demo.differentiation import average, batch_melt_traces, bulk_coefficient, fractionated
from seed_demo.suites import SUITES


def test_scenario_rebuilt_equals_the_files_in_the_folder_byte_for_byte(tmp_path: Path) -> None:
    written = {path.name: path.read_bytes() for path in write(tmp_path)}
    shipped = {path.name: path.read_bytes() for path in seed_demo.files()}
    assert sorted(written) == sorted(shipped)
    for name, content in written.items():
        assert content == shipped[name], f"{name}: run python -m seed_demo.build_scenario and look at the difference"


def test_files_come_in_the_order_of_import() -> None:
    names = [path.name for path in seed_demo.files()]
    assert names[:7] == list(seed_demo.MASTER_FILES)
    assert names[7:] == ["results_A417.csv", "results_K88.csv"]


def test_files_missing_folder_content_is_named(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(seed_demo, "_resources", lambda package: tmp_path)
    with pytest.raises(FileNotFoundError, match=r"lacks areas\.csv"):
        seed_demo.files()


def test_scenario_readme_says_that_it_is_invented() -> None:
    text = (Path(seed_demo.__file__).parent / "README.txt").read_text(encoding="utf-8")
    assert "INVENTED DATA" in text


@pytest.mark.parametrize("name", sorted(SUITES))
@pytest.mark.parametrize("progress", [0.0, 0.5, 1.0])
def test_suite_majors_close_and_stay_positive(name: str, progress: float) -> None:
    magma = SUITES[name].magma(progress, 0.5)
    np.testing.assert_allclose(sum(magma[oxide] for oxide in MAJORS), 100.0, atol=1e-9)
    assert min(magma.values()) > 0.0


def test_fractionation_returns_the_crystals_and_the_parent() -> None:
    """Mass balance: liquid and crystals add up to the parent for an element that one mineral alone holds."""
    parent = average("andesite")
    liquid = fractionated(parent, {"quartz": 1.0}, 0.1)
    lost = parent["SiO2"] - 0.9 * liquid["SiO2"]
    np.testing.assert_allclose(lost, 10.0, atol=1e-9)


def test_fractionation_of_too_much_is_refused() -> None:
    with pytest.raises(ValueError, match=r"TiO2 would be -.* wt% after 80% crystallisation"):
        fractionated(average("granite"), {"biotite": 1.0}, 0.8)


def test_batch_melt_of_everything_returns_the_source() -> None:
    """C = C0 / (D + F (1 - D)) at F = 1, Shaw 1970, Geochim. Cosmochim. Acta 34, 237-243 (from memory)."""
    source = average("metapelite")
    melt = batch_melt_traces(source, {"biotite": 1.0}, 1.0)
    np.testing.assert_allclose([melt[name] for name in ("Rb", "Th")], [source["Rb"], source["Th"]], rtol=1e-12)


def test_bulk_coefficient_weighs_by_mass_share() -> None:
    shares = {"plagioclase_45": 1.0, "quartz": 3.0}
    np.testing.assert_allclose(bulk_coefficient(shares, "Sr"), (3.0 + 3 * 0.02) / 4.0)


def _cells(name: str) -> list[list[str]]:
    layout = LAYOUTS[name]
    path = next(path for path in seed_demo.files() if path.name == f"results_{name}.csv")
    text = path.read_bytes().decode(layout.encoding)
    return list(csv.reader(io.StringIO(text), delimiter=layout.delimiter))


def test_certificates_hold_what_a_team_meets() -> None:
    first, second = _cells("A417"), _cells("K88")
    assert first[0][1] == "SiO2 XRF (%)"
    assert second[1][1] == "%" and "," in second[3][1]
    for cells in (first, second):
        flat = [cell for row in cells for cell in row]
        assert any(cell.startswith("<") for cell in flat) and "" in flat
    titrated = [cell for cell in second[0] if cell.startswith("FeO")]
    assert titrated == []


def test_bags_are_unique_and_each_stands_in_one_certificate() -> None:
    codes = [str(bag.row["sample_code"]) for bag in bags()]
    assert len(codes) == len(set(codes)) == 131
    reported = [row[0] for name in LAYOUTS for row in _cells(name) if row[0] and not row[0].startswith("Sample")]
    assert sorted(reported) == sorted(codes)
    kinds = [bag.row["sample_kind"] for bag in bags()]
    assert {kind: kinds.count(kind) for kind in set(kinds)} == {
        "core": 97, "outcrop": 14, "reference_material": 10, "blank": 5, "duplicate": 5,
    }  # fmt: skip
