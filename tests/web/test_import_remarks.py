"""What the registry remarks on an import, on its page: almost-known codes, gaps, materials without certificate."""

from __future__ import annotations

from pathlib import Path

from registry.importing import ImportOptions, import_files
from tests.web.import_site import Site


def test_new_code_almost_like_a_registered_one_is_remarked_on_before_it_is_stored(site: Site) -> None:
    address = site.send(("near.csv", "Sample,SiO2 (%)\nkd 1,65\nT-9,64\n"))
    site.press(address, "read", create_samples="on")
    page = site.client.get(address).text
    assert "A registered sample is written almost the same; this one is added beside it" in page
    assert "perhaps &#39;KD-1&#39;" in page


def test_import_of_sites_says_that_nothing_is_to_be_computed(site: Site) -> None:
    text = "site_code,site_kind,longitude,latitude\nP-1,outcrop,16.2,49.1\n"
    page = site.client.get(site.send(("sites.csv", text))).text
    assert "nothing is to be computed or judged" in page


def test_exchanged_coordinates_are_a_problem_on_the_page(site: Site) -> None:
    text = "site_code,site_kind,epsg,easting,northing\nP-1,outcrop,32719,7350000,450000\n"
    page = site.client.get(site.send(("sites.csv", text))).text
    assert "outside the area of use of their system" in page
    assert "probably exchanged" in page


def test_batch_page_names_materials_without_certificate(site: Site, tmp_path: Path) -> None:
    samples, results = tmp_path / "controls.csv", tmp_path / "C-5.csv"
    samples.write_text("sample_code,sample_kind,reference_material\nIH-1,reference_material,OURGRANITE\n")
    results.write_text("Sample,SiO2 XRF (%)\nKD-1,66\nIH-1,70\n")
    import_files(site.app.extensions["registry"], [samples, results], ImportOptions())
    page = site.client.get("/batches/C-5").text
    assert "No certificate in the registry says what to expect of <strong>OURGRANITE</strong> (1 line)" in page
