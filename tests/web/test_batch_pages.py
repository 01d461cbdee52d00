"""Batches as pages: states, controls, file, digestions, withdrawing and restoring. All data are invented."""

from __future__ import annotations

import io
import sqlite3
from typing import Any

import pytest

from registry import batching
from registry.store import batch_files
from tests.web.import_site import MAJORS, Site, form_fields
from web import control_charts


def rows(site: Site, query: str) -> list[tuple[Any, ...]]:
    connection = sqlite3.connect(site.path)
    found = connection.execute(query).fetchall()
    connection.close()
    return found


def test_batch_page_gives_the_file_back_byte_for_byte(site: Site) -> None:
    page = site.client.get("/batches/majors").text
    assert 'href="/batch/file/majors"' in page
    answer = site.client.get("/batch/file/majors")
    assert answer.data == MAJORS.encode()
    assert answer.headers["Content-Disposition"] == "attachment; filename=majors.csv"
    assert answer.headers["X-Content-Type-Options"] == "nosniff"
    missing = site.client.get("/batch/file/none")
    assert missing.status_code == 404 and "no batch" in missing.text


def tried(site: Site, change: str, code: str = "majors") -> str:
    """The page after the button on the page of a batch was pressed."""
    form = form_fields(site.client.get(f"/batches/{code}").text)
    form.setlist("do", ["try"])
    return site.client.post(f"/batch/{change}/{code}", data=form).text


def test_batch_change_asked_for_by_its_address_tells_what_it_means_and_tries_nothing(site: Site) -> None:
    page = site.client.get("/batch/withdraw/majors").text
    assert "Its results leave every composition" in page and "computed anew" not in page
    assert 'value="try">See what it changes</button>' in page and ">Withdraw it</button>" in page
    assert site.jobs.all() == []
    missing = site.client.get("/batch/withdraw/majers")
    assert missing.status_code == 404 and "/batches/majors" in missing.text


def test_batch_withdrawn_and_restored_tells_first_what_it_touches(site: Site) -> None:
    verdicts = rows(site, "SELECT sample_id, target_id, verdict FROM verdict ORDER BY 1, 2")
    page = tried(site, "withdraw")
    assert "<strong>3 samples</strong> are computed anew" in page
    assert "nothing is changed yet" in page
    assert rows(site, "SELECT state FROM batch") == [("active",)]
    assert rows(site, "SELECT count(*) FROM verdict_change") == [(0,)]

    answer = site.client.post("/batch/withdraw/majors", data=form_fields(page) | {"do": "confirmed"})
    assert (answer.status_code, answer.headers["Location"]) == (303, "/batches/majors")
    page = site.client.get(answer.headers["Location"]).text
    assert "Batch majors is withdrawn: 3 samples recomputed" in page
    assert "its results are kept and not used" in page
    changed = rows(site, "SELECT count(*) FROM verdict_change")[0][0]
    assert f"{changed} verdict" in page
    assert rows(site, "SELECT sio2_wt FROM composition") == [(None,)] * 3
    refused = site.client.post("/batch/withdraw/majors", data=form_fields(page) | {"do": "confirmed"})
    assert refused.status_code == 400
    assert "Batch &#39;majors&#39; is withdrawn already; nothing was changed." in refused.text

    page = tried(site, "restore")
    assert "<strong>3 samples</strong> are computed anew" in page
    site.client.post("/batch/restore/majors", data=form_fields(page) | {"do": "confirmed"})
    assert rows(site, "SELECT state FROM batch") == [("active",)]
    assert rows(site, "SELECT sample_id, target_id, verdict FROM verdict ORDER BY 1, 2") == verdicts


def test_batch_change_sent_without_its_button_is_only_tried_out(site: Site) -> None:
    answer = site.client.post("/batch/withdraw/majors", data=form_fields(tried(site, "withdraw")))
    assert "nothing is changed yet" in answer.text
    assert rows(site, "SELECT state FROM batch") == [("active",)]


def test_batch_digestions_are_changed_after_confirmation(site: Site) -> None:
    """Aqua regia does not carry SiO2 (methods of digestion): stating it takes silica out of the composition."""
    form = form_fields(site.client.get("/batches/majors").text)
    position = rows(site, "SELECT position FROM batch_column WHERE analyte = 'SiO2'")[0][0]
    form.setlist(f"digestion-{position}", ["aqua_regia"])
    page = site.client.post("/batch/digestions/majors", data=form).text
    assert "1 column gets another digestion" in page
    assert "<li>SiO2 XRF (%): XRF → aqua regia</li>" in page
    assert rows(site, "SELECT digestion FROM batch_column WHERE analyte = 'SiO2'") == [("xrf",)]
    confirm = form_fields(page)
    confirm.setlist("do", ["confirmed"])
    answer = site.client.post("/batch/digestions/majors", data=confirm)
    assert answer.status_code == 303
    assert rows(site, "SELECT digestion FROM batch_column WHERE analyte = 'SiO2'") == [("aqua_regia",)]
    assert rows(site, "SELECT sio2_wt FROM composition") == [(None,)] * 3
    assert rows(site, "SELECT count(*) FROM stale") == [(0,)]


def test_batch_digestion_that_is_unknown_or_unchanged_says_so(site: Site) -> None:
    form = form_fields(site.client.get("/batches/majors").text)
    answer = site.client.post("/batch/digestions/majors", data=form, follow_redirects=True)
    assert "No digestion is another than before" in answer.text
    form.setlist("digestion-1", ["boiling"])
    answer = site.client.post("/batch/digestions/majors", data=form)
    assert answer.status_code == 400 and "There is no digestion &#39;boiling&#39;" in answer.text


def test_batch_list_says_states_in_words(site: Site) -> None:
    page = site.client.get("/batches").text
    assert '<td data-label="State">in use</td>' in page and 'class="left-out"' not in page
    page = site.client.get("/batch/withdraw/majors").text
    site.client.post("/batch/withdraw/majors", data=form_fields(page) | {"do": "confirmed"})
    page = site.client.get("/batches").text
    assert '<tr class="left-out">' in page and '<td data-label="State">withdrawn</td>' in page


def point(line: int, z: float | None, state: str = "passed", **more: Any) -> dict[str, Any]:
    return {
        "line_no": line, "sample_code": f"C-{line}", "kind": "reference_material", "material": "QRM", "found": 10.0,
        "expected": 9.0, "z": z, "limit_low": None, "limit_high": None, "state": state, "rule": None, "source": None,
        **more,
    }  # fmt: skip


def analyte(points: list[dict[str, Any]], state: str | None = "passes") -> dict[str, Any]:
    return {"analyte": "Zr", "unit": "ppm", "state": state, "series": points}


def test_chart_puts_deviations_at_their_heights_and_marks_what_lies_beyond() -> None:
    drawn = control_charts.chart(analyte([point(2, 0.0), point(12, 3.0), point(22, -9.1, "failed")]))
    first, second, third = drawn["points"]
    assert first["y"] == control_charts.height_of(0) == (control_charts.TOP + control_charts.BOTTOM) / 2
    assert second["y"] == control_charts.height_of(3) < first["y"]
    assert (third["y"], third["beyond"], third["word"]) == (control_charts.BOTTOM, "down", "failed ↓")
    assert second["x"] == (first["x"] + third["x"]) / 2
    assert "deviation -9.10, failed" in third["title"]


def test_chart_sets_blanks_by_thirds_of_the_way_to_their_limit() -> None:
    blank = point(5, None, kind="blank", found=2.0, expected=1.0, limit_high=4.0)
    assert control_charts.deviation(blank) == 1.0
    assert control_charts.deviation({**blank, "limit_high": None}) is None
    assert control_charts.deviation({**blank, "found": None}) is None
    drawn = control_charts.chart(analyte([blank]))
    assert drawn["points"][0]["shape"] == "square"


def test_chart_of_many_controls_keeps_every_one_that_did_not_pass() -> None:
    points = [point(line, 0.1, "warned" if line % 100 == 0 else "passed") for line in range(1, 1_001)]
    drawn = control_charts.chart(analyte(points))
    assert len(drawn["points"]) <= control_charts.MOST_POINTS
    assert sum(one["state"] == "warned" for one in drawn["points"]) == 10
    assert drawn["left_out"] == 1_000 - len(drawn["points"])


def test_charts_stand_with_the_worst_state_first() -> None:
    controls = {"analytes": [analyte([], "passes"), analyte([], None), analyte([point(3, 4, "failed")], "fails")]}
    assert list(control_charts.charts(controls)) == ["fails", "passes", "not judged"]
    assert control_charts.conspicuous(controls)[0] == 1


def test_large_file_of_a_batch_is_handed_out_from_disk(site: Site, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(batch_files, "HELD_BYTES", 1)
    monkeypatch.setattr(batch_files, "PART_BYTES", 16)
    name, file = batching.stored_file(site.app.extensions["registry"], "majors")
    with file:
        assert not isinstance(file, io.BytesIO)
        assert (name, file.read()) == ("majors.csv", MAJORS.encode())


def boxes(points: list[dict[str, Any]]) -> list[tuple[float, float, float]]:
    """Left, right and height of every word that is drawn."""
    return [
        (point["word_x"] - (control_charts.width_of(point["word"]) if point["anchor"] == "end" else 0.0),
         point["word_x"] + (control_charts.width_of(point["word"]) if point["anchor"] == "start" else 0.0), point["y"])
        for point in points if point["word"]
    ]  # fmt: skip


def test_chart_words_beside_marks_never_lie_on_each_other_or_outside() -> None:
    lines = [11, 38, 47, 48, 49, 60]
    drawn = control_charts.chart(analyte([point(line, -9.0, "failed") for line in lines]))["points"]
    words = boxes(drawn)
    assert len(words) >= 2, "those that have room are named"
    assert drawn[0]["word"] == "failed ↓"
    for n, (left, right, height) in enumerate(words):
        assert left >= control_charts.LEFT and right <= control_charts.WIDTH
        for other_left, other_right, other_height in words[n + 1 :]:
            assert right <= other_left or other_right <= left or abs(height - other_height) >= 10
        for mark in drawn:
            assert right <= mark["x"] - 5 or left >= mark["x"] + 5


def test_batch_page_says_digestions_at_a_glance_and_folds_the_columns(site: Site) -> None:
    page = site.client.get("/batches/majors").text
    assert "<dt>XRF</dt><dd>SiO₂, Al₂O₃, Fe₂O₃T, MgO, CaO, Na₂O, K₂O</dd>" in page
    assert '<details class="columns"><summary>7 columns' in page
    address = site.send(("loose.csv", "Sample,Zr (ppm),LOI (%)\nKD-1,150,1.2\n"))
    site.press(address, "store")
    page = site.client.get("/batches/loose").text
    assert "<dt>unknown</dt><dd>Zr</dd>" in page, "what no column tells is asked for"
    assert "<dt>weighed or summed</dt><dd>LOI</dd>" in page
    assert '<details class="columns" open>' in page
    assert 'aria-label="Digestion of Zr (ppm)" class="unsure"' in page
    assert "Digestion of LOI" not in page


def test_batch_page_of_a_superseded_certificate_names_the_one_that_counts_in_place_of_a_button(site: Site) -> None:
    address = site.send(("majors2.csv", MAJORS.replace("72.1", "72.3")), batch="majors")
    site.press(address, "store", place="supersede", batch="majors")
    site.press(address, "store")
    page = site.client.get("/batches/majors").text
    assert "This certificate is superseded" in page and "Restore …" not in page
    link = '<a href="/batches/majors%20corrected%202">majors corrected 2</a>'
    assert f"To let it count again, withdraw {link} first." in page
    site.client.post("/batch/withdraw/majors corrected 2", data=form_fields(page) | {"do": "confirmed"})
    page = site.client.get("/batches/majors").text
    assert "Restore …" in page and "first." not in page


def test_batch_page_says_what_its_controls_say_by_analyte() -> None:
    def said(*states: str) -> str:
        return control_charts.standing([{"analyte": f"A{n}", "state": state} for n, state in enumerate(states)])

    assert said("passes", "passes") == "Its controls pass."
    assert said("fails", "passes", "passes") == "Its controls fail for A0; 2 analytes pass."
    assert said("passes with remarks", "passes") == "Its controls pass, with remarks on A0."
    assert said("fails", "fails", "passes with remarks") == "Its controls fail for A0, A1; A2 passes with remarks."
    assert said() == "Its controls could not be judged."
    many = said(*["fails"] * 12)
    assert many == "Its controls fail for A0, A1, A2, A3, A4, A5, A6, A7 and 4 more."


def test_batch_digestion_of_every_unknown_column_is_stated_at_once(site: Site) -> None:
    address = site.send(("loose.csv", "Sample,Zr (ppm),Nb XRF (ppm),Sr (ppm),LOI (%)\nKD-1,150,9,300,1.2\n"))
    site.press(address, "store")
    form = form_fields(site.client.get("/batches/loose").text)
    form.setlist("fill", ["fusion"])
    page = site.client.post("/batch/digestions/loose", data=form).text
    assert "2 columns get another digestion" in page
    assert "Zr (ppm): unknown → fusion" in page and "Sr (ppm): unknown → fusion" in page
    site.client.post("/batch/digestions/loose", data=form_fields(page) | {"do": "confirmed"})
    query = "SELECT header, digestion FROM batch_column WHERE analyte IN ('Zr', 'Nb', 'Sr', 'LOI') ORDER BY 1"
    assert rows(site, query) == [
        ("LOI (%)", "unknown"), ("Nb XRF (ppm)", "xrf"), ("Sr (ppm)", "fusion"), ("Zr (ppm)", "fusion"),
    ]  # fmt: skip
    page = site.client.get("/batches/loose").text
    assert 'name="fill"' not in page, "nothing is unknown any more"
    form = form_fields(page)
    form.setlist("fill", ["boiling"])
    assert site.client.post("/batch/digestions/loose", data=form).status_code == 400
