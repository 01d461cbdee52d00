"""Remarks on an analysis carry the numbers they were made from. The sample is invented to break every rule."""

from __future__ import annotations

from pathlib import Path

import pytest

from registry.importing import ImportOptions, import_files
from registry.store.engine import Registry, reading

HEAD = "Sample,SiO2 (%) XRF,Fe2O3T (%) XRF,FeO (%) titration,Cr2O3 (%) XRF,LOI (%)," + ",".join(
    f"{element} (ppm) fusion" for element in ["Zr", "Hf", "Nb", "Ta", "Cr", "Nd", "Sm", "Gd", "Tb", "Dy"]
)
ROW = "R1,61,5,9,0.1,-3,150,100,10,50,300,20,40,3,0.5,3"


@pytest.fixture
def texts(any_registry: Registry, tmp_path: Path) -> dict[str, str]:
    file = tmp_path / "odd.csv"
    file.write_text(f"{HEAD}\n{ROW}\n")
    import_files(any_registry, [file], ImportOptions(create_samples=True))
    with reading(any_registry) as connection:
        rows = connection.exec_driver_sql("SELECT code, text FROM warning_sheet").all()
    return {code: text for code, text in rows}


def test_remark_on_an_analysis_tells_every_number_it_was_made_from(texts: dict[str, str]) -> None:
    assert "Zr/Hf 1.5 (150 over 100 ppm) lies outside 8 to 90" in texts["zr_hf_outside_nature"]
    assert "Nb/Ta 0.2 (10 over 50 ppm) lies outside 0.5 to 40" in texts["nb_ta_outside_nature"]
    assert (
        "titrated FeO 9 wt% (or reported ferric iron) is above the total iron reported, 5 wt% as Fe2O3"
        in texts["feo_exceeds_total_iron"]
    )
    assert (
        "Cr 300 ppm and the Cr2O3 of the same sample, 0.1 wt%, differ by more than 10 %"
        in texts["cr_disagrees_with_oxide"]
    )
    assert "loss on ignition -3 wt% is a larger gain" in texts["loi_below_oxidation"]
    assert "Sm 40 ppm" in texts["sm_not_smooth"]
    assert "(Pr not known, Nd 20, Gd 3, Tb 0.5)" in texts["sm_not_smooth"]
    assert not [text for text in texts.values() if "{" in text]


def test_total_that_is_not_the_sum_is_told_with_both(any_registry: Registry, tmp_path: Path) -> None:
    """The loss on ignition of an invented granite was left out of the table: 100.0 by the laboratory, 98.0 as read."""
    head = "Sample,SiO2 (%),TiO2 (%),Al2O3 (%),Fe2O3T (%),MnO (%),MgO (%),CaO (%),Na2O (%),K2O (%),P2O5 (%),Total (%)"
    (tmp_path / "lost.csv").write_text(f"{head}\nR1,69.9,0.3,14.5,2.5,0.1,0.7,1.9,3.6,4.4,0.1,100.0\n")
    import_files(any_registry, [tmp_path / "lost.csv"], ImportOptions(create_samples=True))
    with reading(any_registry) as connection:
        (text,) = connection.exec_driver_sql(
            "SELECT text FROM warning_sheet WHERE code = 'total_differs_from_reported'"
        ).scalars()
    assert "the laboratory's total 100 wt% and the sum of what was read, 98 wt%, differ by more than 1.5" in text
