"""Settings: every convention has words and bounds; a change is foreseen, made as foreseen, and refused where faulty."""

from __future__ import annotations

import hashlib
import re
from dataclasses import fields
from html import unescape
from typing import Any

import pytest
from flask.testing import FlaskClient

from registry.petrology.catalogue.conventions import CONVENTION_GROUPS, CONVENTIONS
from registry.petrology.conventions import Conventions
from registry.setting_changes import PATTERNS
from registry.settings import read_typed
from web.settings import CHOICE_WORDS, choices_of, label

BEFORE = Conventions().as_dict()


def words(page: str) -> str:
    return re.sub(r"\s+", " ", unescape(re.sub(r"<[^>]+>", " ", page)))


def contents(site: Any) -> str:
    """A digest of everything that computing writes."""
    tables = ("setting", "derived", "verdict", "verdict_change", "audit_entry", "stale")
    return hashlib.sha256(repr([site.sql(f"SELECT * FROM {table}") for table in tables]).encode()).hexdigest()


def test_conventions_all_have_a_record_with_the_same_default() -> None:
    assert {field.name: field.default for field in fields(Conventions)} == {
        name: record.default for name, record in CONVENTIONS.items()
    }
    assert sum(len(group) for _, group in CONVENTION_GROUPS) == len(CONVENTIONS)


@pytest.mark.parametrize("record", CONVENTIONS.values(), ids=lambda record: record.name)
def test_conventions_take_their_default_and_both_ends_and_nothing_beyond(record: Any) -> None:
    assert record.meaning.endswith(".")
    assert label(record.name) != record.name
    if record.low is None:
        values = [value for value, _ in choices_of(record)]
        assert all(value in CHOICE_WORDS or value.isupper() for value in values)
        assert read_typed({record.name: "nothing"}, BEFORE)[1].keys() == {record.name}
        return
    assert record.low <= record.default <= record.high
    assert read_typed({record.name: f"{record.default!r}"}, BEFORE) == ({}, {})
    for outside in (record.low - abs(record.low) * 0.1 - 0.01, record.high * 1.01 + 0.01, float("inf"), float("nan")):
        assert "expected a number" in read_typed({record.name: repr(outside)}, BEFORE)[1][record.name]


def test_settings_decimal_comma_is_told_with_the_right_spelling() -> None:
    faults = read_typed({"pressure_gpa": "0,3"}, BEFORE)[1]
    assert "write 0.3 with a point" in faults["pressure_gpa"]


def test_settings_limits_must_not_cross() -> None:
    values, faults = read_typed({"loi_warn_wt": "8"}, BEFORE)
    assert values == {} and "8, 6" in faults["loi_warn_wt"]
    assert read_typed({"loi_warn_wt": "8", "loi_fail_wt": "9"}, BEFORE) == (
        {"loi_warn_wt": 8.0, "loi_fail_wt": 9.0},
        {},
    )


def test_settings_page_shows_every_convention_and_takes_nothing_where_not_writable(client: FlaskClient) -> None:
    page = client.get("/settings").text
    for name in CONVENTIONS:
        assert re.search(rf'<label for="{name}">', page)
    assert page.count(" disabled") == len(CONVENTIONS) + len(PATTERNS)
    assert client.post("/settings", data={"pressure_gpa": "0.3"}).status_code == 403


def test_settings_change_is_foreseen_without_a_trace_then_made_as_foreseen(writable: Any) -> None:
    kept = contents(writable)
    answer = writable.post("/settings", loi_fail_wt="0.7", loi_warn_wt="0.5", do="foresee")
    text = words(answer.text)
    foreseen = int(re.search(r"(\d+) verdicts? would change", text).group(1))  # type: ignore[union-attr]
    assert foreseen > 50
    assert "Loss on ignition, unfit above: 6 wt% → 0.7 wt%" in text
    assert re.search(r": ([0-9]+ \w+ → \w+, )*[0-9]+ favourable → undecided", text)
    assert contents(writable) == kept
    seen = unescape(re.search(r'name="seen" value="([^"]*)"', answer.text).group(1))  # type: ignore[union-attr]
    done = writable.post("/settings", loi_fail_wt="0.7", loi_warn_wt="0.5", do="change", seen=seen)
    assert done.status_code == 303
    assert f"{foreseen} verdicts changed" in words(writable.client.get("/settings").text)
    assert writable.sql("SELECT count(*) FROM verdict_change WHERE cause = 'settings changed'") == [(foreseen,)]
    assert writable.sql("SELECT value FROM setting WHERE name = 'convention.loi_fail_wt'") == [("0.7",)]
    assert writable.sql("SELECT subject, detail FROM audit_entry WHERE subject = 'loi_fail_wt'") == [
        ("loi_fail_wt", "6.0 -> 0.7")
    ]
    assert writable.sql("SELECT count(*) FROM stale") == [(0,)]
    assert "changed" not in words(writable.client.get("/settings").text).split("Iron")[0].replace("change numbers", "")


def test_settings_what_was_typed_after_the_trial_is_foreseen_again(writable: Any) -> None:
    kept = contents(writable)
    answer = writable.post("/settings", pressure_gpa="0.4", do="change", seen="something else")
    assert answer.status_code == 200
    assert "What this would do" in answer.text
    assert contents(writable) == kept


def test_settings_faulty_field_keeps_what_was_typed_and_changes_nothing(writable: Any) -> None:
    kept = contents(writable)
    answer = writable.post("/settings", pressure_gpa="deep", h2o_acid_wt="5", do="change")
    assert answer.status_code == 400
    assert 'value="deep" aria-invalid="true" aria-describedby="fault-pressure_gpa"' in answer.text
    assert 'name="h2o_acid_wt" value="5"' in answer.text
    assert contents(writable) == kept


def test_settings_sent_without_the_token_are_refused(writable: Any) -> None:
    assert writable.client.post("/settings", data={"pressure_gpa": "0.3"}).status_code == 400


def test_settings_of_a_large_registry_are_foreseen_and_changed_as_work(
    writable: Any, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr("web.working.PATIENCE_S", 0.0)
    jobs = writable.app.extensions["jobs"]

    def sent(**fields: str) -> str:
        address = writable.post("/settings", loi_fail_wt="0.7", loi_warn_wt="0.5", **fields).headers["Location"]
        assert address.startswith("/work/")
        jobs.wait(address.rsplit("/", 1)[-1], 60)
        return str(writable.client.get(address).text)

    page = sent(do="foresee")
    assert re.search(r"\d+ verdicts would change", words(page))
    assert 'name="loi_fail_wt" value="0.7"' in page
    assert writable.sql("SELECT count(*) FROM verdict_change") == [(0,)]
    seen = unescape(re.search(r'name="seen" value="([^"]*)"', page).group(1))  # type: ignore[union-attr]
    assert "Everything was computed anew" in words(sent(do="change", seen=seen))
    assert writable.sql("SELECT count(*) FROM stale") == [(0,)]
    assert writable.sql("SELECT count(*) FROM verdict_change WHERE cause = 'settings changed'")[0][0] > 50


def test_settings_code_patterns_of_controls_are_set_like_conventions(writable: Any) -> None:
    writable.sql("UPDATE sample SET kind = 'unknown' WHERE code = 'PB-001'")
    page = writable.client.get("/settings").text
    assert '<label for="control_pattern.blank">Blanks</label>' in page
    assert 'id="control_pattern.blank" name="control_pattern.blank" value=""' in page
    fields = {"control_pattern.blank": "^PB-001$", "loi_warn_wt": "2.5"}
    answer = writable.post("/settings", **fields, do="foresee")
    text = words(answer.text)
    assert "Loss on ignition, remarked above: 3 wt% → 2.5 wt%; Blanks: none → ^PB-001$." in text
    assert "1 sample of unknown kind would become a blank and be judged no more: PB-001." in text
    assert 'name="control_pattern.blank" value="^PB-001$"' in answer.text
    assert writable.sql("SELECT kind FROM sample WHERE code = 'PB-001'") == [("unknown",)]
    seen = unescape(re.search(r'name="seen" value="([^"]*)"', answer.text).group(1))  # type: ignore[union-attr]
    assert writable.post("/settings", **fields, do="change", seen=seen).status_code == 303
    assert writable.sql("SELECT value FROM setting WHERE name = 'control_pattern.blank'") == [("^PB-001$",)]
    assert writable.sql("SELECT kind FROM sample WHERE code = 'PB-001'") == [("blank",)]
    page = writable.client.get("/settings").text
    assert 'name="control_pattern.blank" value="^PB-001$"' in page
    assert "1 sample of unknown kind became a blank and is judged no more: PB-001." in words(page)
    text = words(writable.post("/settings", **{"control_pattern.blank": ""}, do="foresee").text)
    assert "The pattern of blanks is taken away; the samples it made controls stay controls" in text


def test_settings_faulty_fields_are_named_and_linked_above(writable: Any) -> None:
    kept = contents(writable)
    answer = writable.post("/settings", **{"control_pattern.blank": "^(BLK", "pressure_gpa": "deep"}, do="change")
    assert answer.status_code == 400
    links = '<a href="#pressure_gpa">Pressure</a>, <a href="#control_pattern.blank">Blanks</a>'
    assert f"Nothing was changed. Correct {links}." in answer.text
    assert "“^(BLK” is no regular expression" in words(answer.text)
    assert 'value="^(BLK" spellcheck="false" aria-invalid="true"' in answer.text
    assert contents(writable) == kept


def test_settings_long_pattern_is_told_of_after_it_was_changed(writable: Any, monkeypatch: pytest.MonkeyPatch) -> None:
    """A cookie holds some 4,000 letters, and a list of codes may be longer; the codes are invented."""
    monkeypatch.setattr("web.working.PATIENCE_S", 60.0)
    pattern = "^(" + "|".join(hashlib.sha256(bytes([one])).hexdigest()[:40] for one in range(200)) + ")$"
    fields = {"control_pattern.blank": pattern}
    seen = unescape(re.search(r'name="seen" value="([^"]*)"', writable.post("/settings", **fields).text)[1])  # type: ignore[index]
    answer = writable.post("/settings", do="change", seen=seen, **fields)
    assert answer.headers["Location"] == "/settings"
    page = writable.client.get("/settings").text
    assert "Everything was computed anew" in page and pattern in unescape(page)
    assert "Everything was computed anew" not in writable.client.get("/settings").text, "it is told once"


@pytest.mark.parametrize(
    "path", ["/samples/a%00b", "/batches/%00", "/sites/%00", "/intrusions/%00", "/edit/sample/%00"]
)
def test_address_with_a_character_that_no_name_holds_is_not_found(writable: Any, path: str) -> None:
    """PostgreSQL takes no text with NUL, so that the registry must not be asked."""
    assert writable.client.get(path).status_code == 404


def test_form_with_a_character_that_cannot_be_typed_is_refused(writable: Any) -> None:
    kept = contents(writable)
    answer = writable.post("/settings", **{"control_pattern.blank": "a\0b"})
    assert answer.status_code == 400
    assert "the field “control_pattern.blank” holds a character that cannot be typed" in answer.text
    assert contents(writable) == kept
