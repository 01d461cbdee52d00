"""Editing in forms: what is stored, recomputed and noted, what is refused and said, and who was first."""

from __future__ import annotations

import math
import re
from html import unescape
from typing import Any

import pytest
from flask.testing import FlaskClient

from registry import editing
from registry.intake.kinds import FIELDS
from web.editing import LABELS, PARTS, unit


def words(page: str) -> str:
    return re.sub(r"\s+", " ", unescape(re.sub(r"<[^>]+>", " ", page)))


def faults(page: str) -> dict[str, str]:
    return {name: unescape(text) for name, text in re.findall(r'id="fault-(\w+)">([^<]*)<', page)}


def shown(page: str, name: str) -> str:
    found = re.search(rf'<input type="text"[^>]* name="{name}" value="([^"]*)"', page)
    assert found is not None
    return unescape(found[1])


@pytest.mark.parametrize("kind", list(editing.KINDS))
def test_edit_form_holds_every_field_of_its_kind_once(kind: str) -> None:
    named = [name for _, names in PARTS[kind] for name in names]
    assert sorted(named) == sorted(one.name for one in editing.fields_of(kind))
    assert {*named, editing.KEY_FIELDS[kind]} == {one.name for one in FIELDS[editing.KINDS[kind]]}


def test_edit_units_stand_at_every_field_whose_name_ends_in_one() -> None:
    for name in {name for parts in PARTS.values() for _, names in parts for name in names}:
        ends = name.endswith(("_m", "_m3", "_km3", "_ma", "_si", "_m2", "_c", "_k"))
        assert bool(unit(name)) == (ends or name in ("easting", "northing", "longitude", "latitude")), name
        assert name in LABELS or "_" not in name, name


def test_edit_sample_is_stored_recomputed_and_noted(writable: Any) -> None:
    before = writable.sql("SELECT verdict FROM verdict_sheet WHERE sample_code='PB-001' AND target='porphyry_copper'")
    assert before == [("favourable",)]
    answer = writable.post("/edit/sample/PB-001", magnetic_susceptibility_si="0.0001", alteration="phyllic")
    assert answer.status_code == 303
    text = words(writable.client.get("/edit/sample/PB-001").text)
    assert "Changed: alteration (blank) → phyllic; magnetic susceptibility si 0.012 → 0.0001." in text
    assert writable.sql("SELECT alteration, magnetic_susceptibility_si FROM sample WHERE code = 'PB-001'") == [
        ("phyllic", 0.0001)
    ]
    after = writable.sql("SELECT verdict FROM verdict_sheet WHERE sample_code='PB-001' AND target='porphyry_copper'")
    assert after != before
    assert writable.sql("SELECT count(*) FROM verdict_change WHERE cause = 'edited'")[0][0] >= 1
    assert writable.sql("SELECT count(*) FROM stale") == [(0,)]
    action, subject, detail = writable.sql("SELECT action, subject, detail FROM audit_entry")[0]
    assert (action, subject) == ("edit", "sample PB-001")
    assert "magnetic_susceptibility_si 0.012 -> 0.0001" in detail


def test_edit_emptied_field_is_emptied_and_untouched_ones_stay(writable: Any) -> None:
    page = writable.client.get("/edit/sample/PB-001").text
    whole = {name: shown(page, name) for name in ("lithology", "texture", "site_code", "intrusion", "igsn")}
    assert writable.post("/edit/sample/PB-001", **{**whole, "intrusion": "", "texture": ""}).status_code == 303
    assert writable.sql("SELECT intrusion_id, texture, lithology FROM sample WHERE code = 'PB-001'") == [
        (None, None, "granodiorite")
    ]


def test_edit_nothing_changed_writes_nothing(writable: Any) -> None:
    version = writable.sql("SELECT row_version FROM sample WHERE code = 'PB-002'")
    assert writable.post("/edit/sample/PB-002", lithology="gabbro", from_m="11").status_code == 303
    assert "Nothing was changed" in writable.client.get("/edit/sample/PB-002").text
    assert writable.sql("SELECT row_version FROM sample WHERE code = 'PB-002'") == version
    assert writable.sql("SELECT count(*) FROM audit_entry") == [(0,)]


@pytest.mark.parametrize(
    ("field", "typed", "sentence"),
    [
        ("density_kg_m3", "2,7", "write 2.7 with a point"),
        ("density_kg_m3", "2.7", "a number from 500 to 10000 is expected"),
        ("density_kg_m3", "heavy", "“heavy” is not a number"),
        ("collected_on", "03/04/2021", "a date such as 2024-05-31 is expected"),
        ("pulp_available", "perhaps", "yes or no is expected"),
        ("sample_kind", "stone", "one of core, chips, outcrop"),
        ("sample_kind", "", "It may not be empty"),
        ("intrusion", "Aster stok", "did you mean 'Aster stock'?"),
        ("site_code", "DH-9", "This site is not in the registry"),
        ("duplicate_of", "PB-002", "A sample is the duplicate of itself"),
        ("to_m", "900", "This lies beyond the end of hole DH-1"),
        ("to_m", "3", "The interval runs backwards or is empty"),
        ("easting", "500000", "Only one of a pair of coordinates is given"),
    ],
)
def test_edit_faulty_field_is_told_below_it_and_nothing_is_changed(
    writable: Any, field: str, typed: str, sentence: str
) -> None:
    before = writable.sql("SELECT * FROM sample WHERE code = 'PB-002'")
    answer = writable.post("/edit/sample/PB-002", lithology="something else", **{field: typed})
    assert answer.status_code == 400
    told = faults(answer.text)
    assert len(told) == 1
    assert sentence in next(iter(told.values()))
    if field not in ("to_m", "easting"):
        assert list(told) == [field]
    assert shown(answer.text, "lithology") == "something else"
    assert writable.sql("SELECT * FROM sample WHERE code = 'PB-002'") == before
    assert writable.sql("SELECT count(*) FROM audit_entry") == [(0,)]


def test_edit_tells_every_fault_at_once(writable: Any) -> None:
    answer = writable.post("/edit/sample/PB-002", density_kg_m3="2,7", intrusion="Kestrel", from_m="5", to_m="4")
    assert {"density_kg_m3", "intrusion", "from_m"} == set(faults(answer.text))
    assert "3 fields hold what cannot be taken" in answer.text


def test_edit_after_another_says_what_stands_now_and_saving_again_takes_effect(writable: Any) -> None:
    page = writable.client.get("/edit/sample/PB-002").text
    first = re.search(r'name="row_version" value="(\d+)"', page).group(1)  # type: ignore[union-attr]
    writable.sql("UPDATE sample SET lithology = 'norite' WHERE code = 'PB-002'")
    answer = writable.post("/edit/sample/PB-002", row_version=first, lithology="troctolite")
    assert answer.status_code == 409
    assert "changed meanwhile by another" in answer.text
    assert "Lithology now norite, yours troctolite" in words(answer.text)
    assert writable.sql("SELECT lithology FROM sample WHERE code = 'PB-002'") == [("norite",)]
    version = re.search(r'name="row_version" value="(\d+)"', answer.text).group(1)  # type: ignore[union-attr]
    assert version != first
    assert writable.post("/edit/sample/PB-002", row_version=version, lithology="troctolite").status_code == 303
    assert writable.sql("SELECT lithology FROM sample WHERE code = 'PB-002'") == [("troctolite",)]


def test_edit_site_moves_its_samples_but_not_those_with_own_coordinates(writable: Any) -> None:
    own = writable.post("/edit/sample/PB-003", longitude="15.5", latitude="55.1")
    assert own.status_code == 303
    assert writable.sql("SELECT longitude, position_basis FROM sample WHERE code = 'PB-003'") == [
        (15.5, "own coordinates")
    ]
    assert writable.post("/edit/site/DH-1", easting="501000").status_code == 303
    site = writable.sql("SELECT longitude, latitude FROM site WHERE code = 'DH-1'")[0]
    # one kilometre east at 55 degrees north is 0.0156 degrees of longitude (recomputed: 1000 / (111320 cos 55.04))
    assert site[0] == pytest.approx(15.0157, abs=3e-4)
    placed = writable.sql("SELECT longitude, position_basis FROM sample WHERE code = 'PB-002'")[0]
    assert placed[0] == pytest.approx(site[0], abs=1e-3)
    assert placed[1].startswith("desurveyed")
    assert writable.sql("SELECT longitude FROM sample WHERE code = 'PB-003'") == [(15.5,)]


def test_edit_sample_without_its_own_coordinates_goes_back_to_its_site(writable: Any) -> None:
    writable.post("/edit/sample/PB-003", longitude="15.5", latitude="55.1")
    writable.post("/edit/sample/PB-003", longitude="", latitude="")
    basis = writable.sql("SELECT position_basis, longitude FROM sample WHERE code = 'PB-003'")[0]
    assert basis[0].startswith("desurveyed") and basis[1] != 15.5


def test_edit_hole_may_not_end_above_its_samples(writable: Any) -> None:
    answer = writable.post("/edit/site/DH-1", depth_m="100")
    assert answer.status_code == 400
    assert "reaches 140 m" in faults(answer.text)["depth_m"]


def test_edit_intrusion_recomputes_its_heat(writable: Any) -> None:
    before = writable.sql("SELECT theta_centre FROM intrusion_sheet WHERE intrusion = 'Aster stock'")[0][0]
    assert writable.post("/edit/intrusion/Aster stock", age_ma="0.4", half_width_m="2500").status_code == 303
    after = writable.sql("SELECT theta_centre FROM intrusion_sheet WHERE intrusion = 'Aster stock'")[0][0]
    # infinite cylinder of one temperature, at its axis: 1 - exp(-a2/(4 k t)) (Carslaw and Jaeger 1959, from memory)
    years_s = 0.4e6 * 365.25 * 86400
    assert after == pytest.approx(1.0 - math.exp(-(2500.0**2) / (4.0 * 1e-6 * years_s)), rel=1e-3)
    assert before < 1e-3
    answer = writable.post("/edit/intrusion/Aster stock", parent_sample="PB-9999")
    assert "The registry holds no sample “PB-9999”" in faults(answer.text)["parent_sample"]
    answer = writable.post("/edit/intrusion/Aster stock", half_width_m="", volume_km3="12")
    assert "A volume alone does not fix the size of a cylinder" in faults(answer.text)["volume_km3"]


def test_edit_area_judges_its_samples_anew(writable: Any) -> None:
    assert writable.post("/edit/area/North Block", heat_flow_mw_m2="140").status_code == 303
    assert writable.sql("SELECT heat_flow_mw_m2 FROM area_sheet WHERE area = 'North Block'") == [(140.0,)]
    assert writable.sql("SELECT count(*) FROM stale") == [(0,)]


def test_edit_absent_things_are_404(writable: Any) -> None:
    assert writable.client.get("/edit/sample/none").status_code == 404
    assert writable.client.get("/edit/volcano/PB-001").status_code == 404


def test_edit_is_refused_where_the_site_is_not_writable(client: FlaskClient) -> None:
    assert client.get("/edit/sample/PB-001").status_code == 403
    assert client.post("/edit/sample/PB-001", data={"row_version": "1", "lithology": "x"}).status_code == 403
    assert "Edit what is recorded" not in client.get("/samples/PB-001").text


def test_edit_links_stand_on_the_pages_where_the_site_is_writable(writable: Any) -> None:
    for address, link in (
        ("/samples/PB-001", "/edit/sample/PB-001"), ("/sites/DH-1", "/edit/site/DH-1"),
        ("/intrusions/Aster stock", "/edit/intrusion/Aster%20stock"),
        ("/intrusions/Aster stock", "/edit/area/North%20Block"),
    ):  # fmt: skip
        assert f'href="{link}"' in writable.client.get(address).text


def test_edit_sent_without_the_token_is_refused(writable: Any) -> None:
    answer = writable.client.post("/edit/sample/PB-001", data={"row_version": "1", "lithology": "x"})
    assert answer.status_code == 400
    assert writable.sql("SELECT lithology FROM sample WHERE code = 'PB-001'") == [("granodiorite",)]
