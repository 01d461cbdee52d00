"""The invented scenario itself: its files are what the script writes, and its rocks obey mass balance.

The data are invented (seed_demo/README.txt); nothing here is checked against a publication but by the laws named.
"""

from __future__ import annotations

import csv
import io
from collections import Counter
from pathlib import Path

import numpy as np
import openpyxl
import pytest

import seed_demo
from seed_demo.averages import MAJORS, TRACES
from seed_demo.bags import bags
from seed_demo.build_scenario import write
from seed_demo.certificates import certificate_file
from seed_demo.differentiation import accumulated, average, batch_melt_traces, bulk_coefficient, fractionated
from seed_demo.district import AREAS, CONTROL_MATERIALS, CONTROL_ROTA, INTRUSIONS, SWAPPED, Hole
from seed_demo.holes import HOLES
from seed_demo.laboratories import LAYOUTS
from seed_demo.outcrops import OUTCROPS
from seed_demo.suites import SUITES
from seed_demo.workbook import workbook


def test_scenario_rebuilt_equals_the_files_in_the_folder_byte_for_byte(tmp_path: Path) -> None:
    written = {path.name: path.read_bytes() for path in write(tmp_path)}
    shipped = {path.name: path.read_bytes() for path in seed_demo.files()}
    assert sorted(written) == sorted(shipped)
    for name, content in written.items():
        assert content == shipped[name], f"{name}: run python -m seed_demo.build_scenario and look at the difference"


def test_files_come_in_the_order_of_import() -> None:
    names = [path.name for path in seed_demo.files()]
    assert names[:7] == list(seed_demo.MASTER_FILES)
    assert names[7:] == sorted(layout.file for layout in LAYOUTS.values())


def test_files_missing_folder_content_is_named(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(seed_demo, "_resources", lambda package: tmp_path)
    with pytest.raises(FileNotFoundError, match=r"lacks areas\.csv"):
        seed_demo.files()


def test_scenario_readme_says_that_it_is_invented_and_names_the_exchanged_bags() -> None:
    text = (Path(seed_demo.__file__).parent / "README.txt").read_text(encoding="utf-8")
    assert "INVENTED DATA" in text
    for first, second in SWAPPED:
        assert f"{first} and {second}" in text


@pytest.mark.parametrize("name", sorted(SUITES))
@pytest.mark.parametrize("progress", [0.0, 0.5, 1.0])
def test_suite_majors_close_and_stay_positive(name: str, progress: float) -> None:
    rock = SUITES[name].rock(progress, 0.5, 0.5)
    np.testing.assert_allclose(sum(rock[oxide] for oxide in MAJORS), 100.0, atol=1e-9)
    assert min(rock.values()) > 0.0


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


def test_accumulated_crystals_alone_hold_what_their_coefficients_say() -> None:
    liquid = average("basalt")
    rock = accumulated(liquid, {"olivine_88": 1.0}, 0.0, 0.0, 1000.0)
    np.testing.assert_allclose(rock["Ni"], 9.0 * liquid["Ni"])
    np.testing.assert_allclose(rock["MgO"] / rock["SiO2"], 47.8 / 40.5)
    assert rock["S"] == 0.0


def test_accumulated_liquid_alone_is_the_liquid() -> None:
    liquid = average("basalt")
    rock = accumulated(liquid, {"olivine_88": 1.0}, 1.0, 0.0, 1000.0)
    np.testing.assert_allclose(
        [rock[name] for name in (*MAJORS, *TRACES)], [liquid[name] for name in (*MAJORS, *TRACES)]
    )


def test_sulphide_of_little_magma_holds_what_that_magma_held() -> None:
    """C = C0 D (R + 1) / (R + D) tends to C0 (R + 1) for D far above R: Campbell & Naldrett 1979, Econ. Geol. 74."""
    liquid = average("basalt")
    rock = accumulated(liquid, {"olivine_88": 1.0}, 0.0, 0.01, 10.0)
    np.testing.assert_allclose(rock["Pd"], 0.01 * liquid["Pd"] * 11.0 + 0.99 * 0.02 * liquid["Pd"], rtol=1e-3)
    np.testing.assert_allclose(rock["S"], 0.37)


def test_district_holds_what_its_readme_promises() -> None:
    assert len(AREAS) == 2 and len(INTRUSIONS) == 8
    assert len(HOLES) == 15 and len(OUTCROPS) == 60
    assert all(len(hole.surveys) >= 3 for hole in HOLES)
    assert len({body.suite for body in INTRUSIONS}) == 8


@pytest.mark.parametrize("hole", HOLES, ids=lambda hole: hole.code)
def test_log_of_a_hole_runs_from_collar_to_end_without_gap(hole: Hole) -> None:
    ends = [0.0, *(unit.to_m for unit in hole.units)]
    assert [unit.from_m for unit in hole.units] == ends[:-1] and ends[-1] == hole.depth_m
    assert hole.surveys[0][0] == 0.0 and hole.surveys[-1][0] == hole.depth_m


def _bytes(name: str) -> bytes:
    return next(path for path in seed_demo.files() if path.name == LAYOUTS[name].file).read_bytes()


def _cells(name: str) -> list[list[str]]:
    layout = LAYOUTS[name]
    return list(csv.reader(io.StringIO(_bytes(name).decode(layout.encoding)), delimiter=layout.delimiter))


def test_certificates_differ_in_layout() -> None:
    first, second, third, fourth, last = (_cells(name) for name in ("A417", "K88", "T506", "B2231", "Z19"))
    assert first[0][1] == "SiO2 XRF (%)"
    assert second[1][1] == "%" and "," in second[3][1] and _bytes("K88").startswith(b"Sample N\xb0;")
    assert _bytes("T506").startswith(b"\xff\xfe") and third[1][1] == "%" and "ppb" in third[1]
    assert [row[0] for row in fourth[:6]] == [
        "Laboratory: Invented Assay Rooms", "Certificate No: B2231", "Method", "Detection limit", "Sample ID", "",
    ]  # fmt: skip
    assert _bytes("W77").startswith(b"PK") and last[0][1:3] == ["Analyte", "Result"]
    for cells in (first, second, third, fourth, last):
        assert any(cell.startswith("<") for row in cells for cell in row)
    for cells in (first, second, third, fourth):
        assert any("" in row[1:] for row in cells[6:]), "nowhere did the pulp run out"


def test_workbook_is_read_back_as_it_was_written() -> None:
    rows = [["Sample", "Zr (ppm)", "Nb & Ta"], ["A-1", "180", "<2"], ["A-2", "", "0.31"]]
    sheets = openpyxl.load_workbook(io.BytesIO(workbook({"Results": rows, "Notes": [["invented"]]})))
    assert sheets.sheetnames == ["Results", "Notes"]
    assert [list(row) for row in sheets["Results"].iter_rows(values_only=True)] == [
        ["Sample", "Zr (ppm)", "Nb & Ta"], ["A-1", 180, "<2"], ["A-2", None, 0.31],
    ]  # fmt: skip


def test_workbook_names_columns_beyond_z() -> None:
    sheets = openpyxl.load_workbook(io.BytesIO(workbook({"Wide": [[f"c{place}" for place in range(60)]]})))
    assert sheets["Wide"]["AA1"].value == "c26" and sheets["Wide"]["BH1"].value == "c59"


def test_measurement_scatters_by_the_errors_of_the_laboratory() -> None:
    """A thousand measurements of one powder: mean and spread of Zr are the truth and the stated 4 %."""
    material = CONTROL_MATERIALS["QRM-G"].composition | {"LOI": 0.3, "S": 0.01, "FeO": 1.0}
    lines = [(f"x{number}", "", material) for number in range(1000)]
    rows = list(csv.reader(io.StringIO(certificate_file("K88", lines).decode("cp1252")), delimiter=";"))
    zirconium = np.array([float(row[rows[0].index("Zr")].replace(",", ".")) for row in rows[3:]])
    np.testing.assert_allclose(zirconium.mean(), material["Zr"], rtol=0.005)
    np.testing.assert_allclose(zirconium.std() / zirconium.mean(), 0.04, rtol=0.1)


def test_bags_are_unique_and_stand_in_their_certificates() -> None:
    codes = [str(bag.row["sample_code"]) for bag in bags()]
    assert len(codes) == len(set(codes)) == 707
    kinds = Counter(str(bag.row["sample_kind"]) for bag in bags())
    assert kinds == {
        "core": 548, "outcrop": 81, "float": 8, "reference_material": 31, "blank": 20, "duplicate": 19,
    }  # fmt: skip
    sent = Counter(certificate.split(":")[0] for bag in bags() for certificate in bag.certificates)
    assert set(sent) == set(LAYOUTS) == set(CONTROL_ROTA)
    for name in ("A417", "K88", "T506", "B2231"):
        heads = len(LAYOUTS[name].heading_rows) + len(LAYOUTS[name].titles)
        assert len(_cells(name)) - heads == sent[name]
    assert len({row[0] for row in _cells("Z19")[1:]}) == sent["Z19"]


def test_exchanged_bags_hold_each_others_rock() -> None:
    found = {str(bag.row["sample_code"]): bag for bag in bags()}
    for first, second in SWAPPED:
        assert found[first].row["intrusion"] != found[second].row["intrusion"]
        assert found[first].certificates == found[second].certificates
    assert found["KD002-206"].rock["SiO2"] > 70.0 > found["OD001-312"].rock["SiO2"]
    assert found["H004a"].rock["SiO2"] > 55.0 > found["Q021a"].rock["SiO2"]
