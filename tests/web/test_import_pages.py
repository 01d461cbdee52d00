"""The import page from the file to the report: read, corrected, saved as a reading, stored. All data are invented."""

from __future__ import annotations

import io
import os
import re
import sqlite3
import stat
from html import escape, unescape
from pathlib import Path
from typing import Any

from openpyxl import Workbook

from tests.web.import_site import FAULTY, TRACES, Site
from web import create_app, importing


def rows(site: Site, query: str) -> list[tuple[Any, ...]]:
    connection = sqlite3.connect(site.path)
    found = connection.execute(query).fetchall()
    connection.close()
    return found


GOOD = "Sample,Zr fusion (ppm),Sr fusion (ppm)\nKD-1,150,400\nKD-2,160,<1\n"


def test_import_page_good_file_is_shown_tried_out_and_stored(site: Site) -> None:
    address = site.send(("good.csv", GOOD))
    page = site.client.get(address).text
    assert "nothing is stored yet" in page
    assert "2 rows of results in 2 columns" in page
    assert "batch good: 2 lines, 4 results, 1 of them below or above a limit" in page
    assert "zr_ppm" in page
    assert rows(site, "SELECT count(*) FROM batch") == [(1,)]

    answer = site.press(address, "store", lab="Invented laboratory")
    assert "nothing is stored yet" in site.client.get(address).text, "an option was changed: it is tried out first"
    answer = site.press(address, "store")
    assert answer.status_code == 303
    page = site.client.get(address).text
    assert "What was stored" in page
    assert 'href="/batches/good"' in page
    assert rows(site, "SELECT code, lab, file_name FROM batch WHERE code = 'good'") == [
        ("good", "Invented laboratory", "good.csv")
    ]
    assert rows(site, "SELECT zr_ppm FROM composition JOIN sample USING (sample_id) WHERE code = 'KD-1'") == [(150.0,)]


def test_import_page_shows_which_verdicts_would_change(site: Site) -> None:
    """KD-3 corrected to a rock of half the silica: at least one verdict of an invented granite falls or rises."""
    basic = "Sample,SiO2 XRF (%),MgO XRF (%)\nKD-3,48.0,9.0\n"
    address = site.send(("basic.csv", basic))
    page = site.client.get(address).text
    draft = site.jobs.find(address.rsplit("/", 1)[-1])
    assert draft.report["recomputed"] == 1
    assert len(draft.report["changes"]) == draft.report["verdicts_changed"]
    for change in draft.report["changes"]:
        assert change["sample"] == "KD-3"
        assert change["before"] != change["after"]
        assert change["target"] in page
    if not draft.report["changes"]:
        assert "No earlier verdict changes" in page


def test_import_page_bad_file_tells_each_problem_in_its_place(site: Site) -> None:
    before = rows(site, "SELECT count(*) FROM aliquot")
    address = site.send(("bad.csv", FAULTY))
    page = site.client.get(address).text
    assert "problems below have to be settled first" in page
    assert "3002 wt%" in page and "sixty" in page
    assert "<td>MnO (%)</td>" in page and "<td>SiO2 (%)</td>" in page
    assert 'value="store"' not in page
    site.press(address, "store")
    assert rows(site, "SELECT count(*) FROM aliquot") == before


def test_import_page_good_rows_are_stored_and_the_others_offered_with_reasons(site: Site) -> None:
    address = site.send(("bad.csv", FAULTY + "KD-3,64.0,0.2\n"))
    site.press(address, "read", keep_going="on")
    page = site.client.get(address).text
    assert "2 rows are left out; after storing they are offered" in page
    site.press(address, "store")
    assert rows(site, "SELECT count(*) FROM aliquot JOIN batch USING (batch_id) WHERE code = 'bad'") == [(1,)]
    page = site.client.get(address).text
    assert f'href="{address}/refused/0"' in page
    answer = site.client.get(f"{address}/refused/0")
    text = answer.data.decode("utf-8-sig")
    assert "3002" in text and "sixty" in text and "KD-3" not in text
    assert "attachment" in answer.headers["Content-Disposition"]
    answer.close()
    for number in ("1", "-1", "x"):
        assert site.client.get(f"{address}/refused/{number}").status_code == 404


def test_import_page_shows_and_stores_every_sheet_of_a_workbook(site: Site) -> None:
    book = Workbook()
    first, second = book.active, book.create_sheet("traces")
    first.title = "majors"
    for sheet, head, line in (
        (first, ["Sample", "SiO2 XRF (%)", "MgO XRF (%)"], ["KD-1", 60.5, 2.1]),
        (second, ["Lab no", "Au (ppb)", "Zr (ppm)"], ["KD-1", 5, 151]),
    ):
        sheet.append(head)
        sheet.append(line)
    held = io.BytesIO()
    book.save(held)
    address = site.send(("book.xlsx", held.getvalue()))
    page = site.client.get(address).text
    assert "2 tables: majors (1 row of results), traces (1 row of results)" in page
    form = site.form(address)
    assert form.getlist("header-0") == ["SiO2 XRF (%)", "MgO XRF (%)"]
    assert form.getlist("header-0.1") == ["Au (ppb)", "Zr (ppm)"]
    form.setlist("fill-0.1", ["four_acid"])
    form.setlist("name-0.1", ["traces of a book"])
    form.setlist("do", ["save:0.1"])
    assert "is saved" in site.client.post(address, data=form).text
    site.press(address, "store")
    assert rows(site, "SELECT digestion, count(*) FROM batch_column WHERE header IN ('Au (ppb)', 'Zr (ppm)')") == [
        ("four_acid", 2)
    ]
    later = site.send(("alone.csv", "Lab no,Au (ppb),Zr (ppm)\nKD-2,7,152\n"))
    assert "traces of a book" in site.client.get(later).text
    again = site.send(("book.xlsx", held.getvalue()))
    site.press(again, "read", sheet__0="traces")
    assert "1 row of results in 2 columns" in site.client.get(again).text


def test_import_page_says_which_results_go_before_which(site: Site) -> None:
    """Fusion goes before XRF of equal rank when its batch is newer: the silica of KD-1 comes from the new file."""
    page = site.client.get(site.send(("new.csv", "Sample,SiO2 XRF (%),MgO XRF (%)\nKD-1,72.4,0.4\n"))).text
    assert "Which results go before which" in page
    assert "sio2_wt (1 sample)" in page and "replaces" in page


def test_import_page_unknown_samples_are_named_and_added_on_request(site: Site) -> None:
    address = site.send(("new.csv", GOOD.replace("KD-1", "NEW-9").replace("KD-2", "kd 2")))
    page = site.client.get(address).text
    assert "This sample is not in the registry" in page
    assert "NEW-9" in page and "did you mean &#39;KD-2&#39;" in page.lower().replace("kd-2", "KD-2")
    assert "tick “Add unknown samples” below" in page and "--create-samples" not in page
    site.press(address, "read", create_samples="on")
    assert "2 samples are new" in site.client.get(address).text
    site.press(address, "store")
    assert rows(site, "SELECT kind FROM sample WHERE code = 'NEW-9'") == [("unknown",)]


def test_import_page_corrected_column_is_read_again(site: Site) -> None:
    address = site.send(("traces.csv", TRACES))
    page = site.client.get(address).text
    assert "No unit is stated and custom gives none for this analyte" in page
    form = site.form(address)
    units = form.getlist("unit_of-0")
    assert units == ["ppm", "ppm", ""]
    form.setlist("unit_of-0", ["ppm", "ppm", "ppb"])
    form.setlist("fill-0", ["fire_assay"])
    form.setlist("do", ["read"])
    site.settled(site.client.post(address, data=form).headers["Location"])
    page = site.client.get(address).text
    assert "au_ppm = value" in page
    assert "Read as you corrected it" in page
    site.press(address, "store")
    assert rows(site, "SELECT analyte, unit, digestion FROM batch_column WHERE header = 'Au'") == [
        ("Au", "ppb", "fire_assay")
    ]
    assert rows(site, "SELECT code FROM batch WHERE certificate = 'T-77'") == [("T-77",)]


def test_import_page_left_out_column_is_not_stored_and_can_be_taken_in_again(site: Site) -> None:
    address = site.send(("good.csv", GOOD))
    form = site.form(address)
    form.add("ignore-0-1", "on")
    form.setlist("do", ["read"])
    site.settled(site.client.post(address, data=form).headers["Location"])
    page = site.client.get(address).text
    assert "left out" in page and "2 lines, 2 results" in page
    form = site.form(address)
    assert "on" in form.getlist("ignore-0-1")
    form.poplist("ignore-0-1")
    form.setlist("do", ["read"])
    site.settled(site.client.post(address, data=form).headers["Location"])
    assert "2 lines, 4 results" in site.client.get(address).text


def test_import_page_saved_reading_is_proposed_for_the_same_shape(site: Site) -> None:
    address = site.send(("traces.csv", TRACES))
    form = site.form(address)
    form.setlist("unit_of-0", ["ppm", "ppm", "ppb"])
    form.setlist("name-0", ["Invented  lab, traces"])
    form.setlist("do", ["save:0"])
    answer = site.client.post(address, data=form)
    assert "The reading “Invented lab, traces” is saved" in answer.text

    again = site.send(("later.csv", TRACES.replace("T-77", "T-78").replace("150", "155")))
    page = site.client.get(again).text
    assert "made for files with exactly these headings" in page
    assert "No unit is stated and custom gives none" in page
    site.press(again, "use:0")
    page = site.client.get(again).text
    assert "Read with “Invented lab, traces”" in page
    assert "nothing is stored yet" in page
    site.press(again, "plain:0")
    assert "No unit is stated and custom gives none" in site.client.get(again).text

    other = site.send(("other.csv", GOOD))
    assert "made for files with exactly these headings" not in site.client.get(other).text
    start = site.client.get("/import").text
    assert "Invented lab, traces" in start
    site.client.post("/import/readings", data={"csrf_token": site.token(), "name": "Invented lab, traces"})
    assert "Invented lab, traces" not in site.client.get("/import").text


def test_import_page_reading_without_a_name_is_refused_with_a_sentence(site: Site) -> None:
    address = site.send(("good.csv", GOOD))
    answer = site.press(address, "save:0", name__0="  ")
    assert answer.status_code == 400
    assert "A saved reading needs a name" in answer.text
    assert site.press(address, "save:7").status_code == 400


def test_import_page_sample_codes_may_come_from_another_column(site: Site) -> None:
    text = "Lab ID,Field ID,Zr fusion (ppm),Sr fusion (ppm)\nKD-1,KD-2,150,400\nKD-2,KD-3,160,300\n"
    address = site.send(("two.csv", text))
    page = site.client.get(address).text
    first = site.field(page.replace("<select", "<input"), "csrf_token")
    assert first
    shown = site.form(address).get("sample_header-0")
    wanted = "Lab ID" if shown == "Field ID" else "Field ID"
    site.press(address, "read", sample_header__0=wanted)
    assert site.form(address).get("sample_header-0") == wanted


def test_import_page_corrected_certificate_supersedes_the_earlier(site: Site) -> None:
    site.press(site.send(("one.csv", "Certificate: C-1\n" + GOOD)), "store")
    address = site.send(("two.csv", "Certificate: C-1\n" + GOOD.replace("150", "151")))
    page = site.client.get(address).text
    assert "it corrects an earlier certificate" in page and "--supersede" not in page
    site.press(address, "read", place="supersede")
    site.press(address, "store")
    assert rows(site, "SELECT state FROM batch WHERE certificate = 'C-1' ORDER BY batch_id") == [
        ("superseded",),
        ("active",),
    ]
    assert rows(site, "SELECT zr_ppm FROM composition JOIN sample USING (sample_id) WHERE code = 'KD-1'") == [(151.0,)]


def test_import_page_offers_the_active_batches_to_be_corrected_and_says_which_is(site: Site) -> None:
    """The corrected file names another certificate than the one that it corrects."""
    site.press(site.send(("one.csv", "Certificate: C-1\n" + GOOD)), "store")
    address = site.send(("two.csv", "Certificate: C-1-rev\n" + GOOD.replace("150", "151")))
    page = site.client.get(address).text
    offered = re.search(r'<select class="inline" name="corrects".*?</select>', page, re.DOTALL)
    assert offered is not None
    assert re.findall(r'<option value="([^"]*)"', offered[0]) == ["", "C-1", "majors"]
    site.press(address, "read", place="supersede", corrects="C-1")
    tried = unescape(site.client.get(address).text)
    assert "Takes the place of batch 'C-1' (one.csv), which is kept and no longer used" in tried
    assert site.form(address).get("corrects") == "C-1"
    assert rows(site, "SELECT state FROM batch WHERE code = 'C-1'") == [("active",)]
    site.press(address, "store")
    assert rows(site, "SELECT code, state FROM batch WHERE code LIKE 'C-1%' ORDER BY code") == [
        ("C-1", "superseded"),
        ("C-1-rev", "active"),
    ]
    later = site.form(site.send(("three.csv", GOOD)))
    assert later.get("place") == "new"
    page = site.client.get(site.send(("four.csv", GOOD.replace("150", "152")))).text
    assert 'value="C-1"' not in page and 'value="C-1-rev"' in page


def test_import_page_correction_without_a_certificate_is_called_after_the_corrected(site: Site) -> None:
    site.press(site.send(("one.csv", "Certificate: C-1\n" + GOOD)), "store")
    for zr, name in (("151", "new.csv"), ("152", "newer.csv")):
        address = site.send((name, GOOD.replace("150", zr)))
        (active,) = rows(site, "SELECT code FROM batch WHERE code LIKE 'C-1%' AND state = 'active'")
        site.press(address, "read", place="supersede", corrects=active[0])
        site.press(address, "store")
    assert rows(site, "SELECT code, state FROM batch WHERE code LIKE 'C-1%' ORDER BY batch_id") == [
        ("C-1", "superseded"),
        ("C-1 corrected 2", "superseded"),
        ("C-1 corrected 3", "active"),
    ]


def test_import_page_two_files_do_not_correct_one_batch(site: Site) -> None:
    site.press(site.send(("one.csv", "Certificate: C-1\n" + GOOD)), "store")
    address = site.send(("two.csv", GOOD.replace("150", "151")), ("three.csv", GOOD.replace("150", "152")))
    site.press(address, "read", place="supersede", corrects="C-1")
    assert "2 files hold results, and one batch" in site.client.get(address).text


def test_import_page_further_part_is_added_to_its_batch(site: Site) -> None:
    site.press(site.send(("one.csv", "Certificate: C-1\n" + GOOD)), "store")
    address = site.send(("more.csv", "Certificate: C-1\nSample,Nb fusion (ppm),Y fusion (ppm)\nKD-1,9,11\n"))
    site.press(address, "read", place="add", add_to="C-1")
    site.press(address, "store")
    assert rows(site, "SELECT count(*) FROM batch WHERE part_of IS NOT NULL") == [(1,)]
    assert "Further parts" in site.client.get("/batches/C-1").text


def test_import_page_master_data_and_results_come_together(site: Site) -> None:
    samples = "sample_code,sample_kind,lithology\nMM-1,outcrop,gabbro\n"
    address = site.send(("results.csv", GOOD.replace("KD-1", "MM-1")), ("samples.csv", samples))
    page = site.client.get(address).text
    assert "1 row of samples: 1 new, 0 changed" in page
    site.press(address, "store")
    assert rows(site, "SELECT lithology FROM sample WHERE code = 'MM-1'") == [("gabbro",)]


def test_import_page_kind_in_doubt_is_chosen(site: Site) -> None:
    address = site.send(("odd.csv", "colour,taste\nred,sweet\n"))
    page = site.client.get(address).text
    assert "The kind of file cannot be told" in page and "Choose under “What it holds”" in page
    site.press(address, "read", kind__0="samples")
    assert "sample_code" in site.client.get(address).text


def test_import_page_hostile_names_and_cells_are_escaped(site: Site) -> None:
    hostile = '<script>alert("x")</script>'
    text = 'Sample,"Zr <b>(ppm)",Sr (ppm)\n"<i>K</i>",<img>,5\n' + "".join(f"K{n},3,4\n" for n in range(8))
    address = site.send((f"{hostile.replace('/', '')}.csv", text), ("../../up.csv", GOOD), ("..", GOOD))
    page = site.client.get(address).text
    assert "<script>alert" not in page and "<img>" not in page
    assert escape("<img>") in page
    assert "../../up.csv" not in page and "up.csv" in page
    draft = site.jobs.find(address.rsplit("/", 1)[-1])
    assert [file.name for file in draft.files][1:] == ["up.csv", "file"]
    assert "<script>alert" not in site.client.get("/import").text


def test_import_page_drafts_are_private_and_dropped(site: Site) -> None:
    address = site.send(("good.csv", GOOD))
    folder = site.jobs.folder.place / address.rsplit("/", 1)[-1]
    assert stat.S_IMODE(os.stat(site.jobs.folder.place).st_mode) == 0o700
    assert stat.S_IMODE(os.stat(folder).st_mode) == 0o700
    assert stat.S_IMODE(os.stat(folder / "0" / "good.csv").st_mode) == 0o600
    answer = site.press(address, "drop")
    assert answer.headers["Location"] == "/import"
    assert not folder.exists()
    assert site.client.get(address).status_code == 404


def test_import_page_without_token_is_refused_with_a_sentence(site: Site) -> None:
    address = site.send(("good.csv", GOOD))
    for path in ("/import", address, "/import/readings", "/batch/withdraw/majors", "/batch/digestions/majors"):
        answer = site.client.post(path, data={"do": "store"})
        assert answer.status_code == 400
        assert "Load the page again and repeat what you did" in answer.text
    assert rows(site, "SELECT count(*) FROM batch WHERE state = 'active'") == [(1,)]


def test_import_page_too_large_upload_is_refused_with_a_sentence(site: Site) -> None:
    site.app.config["MAX_CONTENT_LENGTH"] = 5_000
    data = {"csrf_token": site.token(), "files": [(io.BytesIO(b"x" * 20_000), "large.csv")]}
    answer = site.client.post("/import", data=data)
    assert answer.status_code == 413
    assert "larger than the 200 MB that this page takes" in answer.text
    assert importing.LARGEST_UPLOAD_BYTES == 200 * 1024 * 1024


def test_import_page_without_a_file_says_so(site: Site) -> None:
    answer = site.client.post("/import", data={"csrf_token": site.token(), "files": (io.BytesIO(b""), "")})
    assert answer.status_code == 400
    assert "No file was chosen" in answer.text


def test_import_page_state_is_json_for_the_page_that_asks(site: Site) -> None:
    address = site.send(("good.csv", GOOD))
    answer = site.client.get(f"{address}/state.json")
    assert answer.json is not None
    assert answer.json["state"] == "read" and answer.json["under_way"] is False
    assert site.client.get("/import/AAAAAAAAAAAAAAAA/state.json").status_code == 404


def test_import_page_of_a_site_for_other_machines_takes_nothing(site: Site, tmp_path: Path) -> None:
    application = create_app(str(site.path), writable=False, drafts=tmp_path / "other")
    client = application.test_client()
    page = client.get("/import")
    assert page.status_code == 200 and "nothing can be imported through it" in page.text
    assert "<input" not in page.text and "Set-Cookie" not in page.headers
    for path in ("/import", "/import/AAAAAAAAAAAAAAAA", "/import/readings", "/batch/withdraw/majors"):
        answer = client.post(path, data={"files": (io.BytesIO(b"a,b\n"), "a.csv")})
        assert answer.status_code == 403
        assert "nothing can be changed through it" in answer.text
    assert client.get("/batch/withdraw/majors").status_code == 403
    assert "Withdraw" not in client.get("/batches/majors").text
    assert not (tmp_path / "other").exists()
    application.extensions["registry"].close()


def test_import_page_table_of_eight_hundred_columns_is_corrected(site: Site) -> None:
    analytes = "Cs Zr Nb Sr Y Rb Ba V Cr La Ce Nd Sm Eu Gd Tb Dy Ho Er Tm Yb Lu Hf Ta W Th U Li Be Sc Co Ni Cu Zn Mo Pb"
    analytes += " As Sb Bi Sn"
    head = ",".join(f"{analyte} run {number} (ppm)" for number in range(20) for analyte in analytes.split())
    line = ",".join("150" for _ in range(800))
    address = site.send(("wide.csv", f"Sample,{head}\nKD-1,{line}\n"))
    form = site.form(address)
    assert len(form.getlist("unit_of-0")) == 800
    form.setlist("fill-0", ["fusion"])
    form.setlist("do", ["read"])
    answer = site.client.post(address, data=form)
    assert answer.status_code == 303, answer.text[:2000]
    site.settled(address)
    assert site.form(address).getlist("digestion-0") == ["fusion"] * 800
