"""Changes that take longer than a request: their progress, their outcome, what waits, what a restart leaves.

The data are invented.
"""

from __future__ import annotations

import io
import re
import shutil
import threading
import time
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest

from registry import batching, change_jobs, setting_changes
from registry.store.engine import writing
from tests.web.import_site import TRACES, Site, form_fields
from web import create_app, working


@pytest.fixture
def site(small_registry_file: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Iterator[Site]:
    monkeypatch.setattr(working, "PATIENCE_S", 0.0)
    made = Site(small_registry_file, tmp_path)
    yield made
    made.close()


class Gate:
    """Lets the work go on when the test says so."""

    def __init__(self, monkeypatch: pytest.MonkeyPatch) -> None:
        self.opened = threading.Event()
        self.begun = threading.Event()
        real = batching.set_state

        def slow(*arguments: Any, **more: Any) -> Any:
            more["progress"]("computing", 40, 160)
            self.begun.set()
            assert self.opened.wait(60)
            return real(*arguments, **more)

        monkeypatch.setattr(batching, "set_state", slow)


@pytest.fixture
def gate(monkeypatch: pytest.MonkeyPatch) -> Iterator[Gate]:
    made = Gate(monkeypatch)
    yield made
    made.opened.set()


def asked(site: Site, do: str, change: str = "withdraw") -> Any:
    form = form_fields(site.client.get(f"/batch/{change}/majors").text)
    form.setlist("do", [do])
    return site.client.post(f"/batch/{change}/majors", data=form)


def ended(site: Site, address: str) -> str:
    job = site.jobs.wait(address.rsplit("/", 1)[-1], 60)
    assert job is not None and not job.under_way
    return site.client.get(address).text


def test_long_trial_shows_its_progress_and_then_what_would_change(site: Site, gate: Gate) -> None:
    answer = asked(site, "try")
    address = answer.headers["Location"]
    assert answer.status_code == 303 and address.startswith("/work/")
    assert gate.begun.wait(60)
    page = site.client.get(address).text
    assert "<h1>A trial of withdrawing batch majors</h1>" in page
    assert "Computing and judging on trial: 40 of 160 samples." in page
    assert '<progress aria-label="How far it is" max="160" value="40">' in page
    assert '<noscript><meta http-equiv="refresh" content="2"></noscript>' in page
    state = site.client.get(f"{address}/state.json").json
    assert (state["state"], state["done"], state["total"], state["under_way"]) == ("working", 40, 160, True)
    assert f'<a href="{address}">' in site.client.get("/batches").text, "every page says what runs"
    assert "Computing and judging on trial: 40 of 160 samples." in site.client.get("/work").text
    gate.opened.set()
    page = ended(site, address)
    assert "<strong>3 samples</strong> are computed anew" in page and ">Withdraw it</button>" in page
    assert re.search(r"[0-9]+ verdicts? would change; nothing is changed yet\.", site.client.get("/work").text)
    assert f'<a href="{address}">' not in site.client.get("/batches").text
    assert "in use" in site.client.get("/batches").text


def test_long_change_is_made_and_its_page_tells_what_came_of_it(site: Site) -> None:
    page = ended(site, asked(site, "confirmed").headers["Location"])
    assert "Batch majors is withdrawn: 3 samples recomputed" in page
    assert '<a href="/batches/majors">Batch majors</a>' in page and "Withdraw it" not in page
    assert ">withdrawn</td>" in site.client.get("/batches").text
    changed = site.client.get("/work").text
    assert re.search(r"3 samples computed anew, [0-9]+ verdicts? changed\.", changed)
    assert ">By<" not in changed, "without accounts nobody is named"
    again = ended(site, asked(site, "confirmed").headers["Location"])
    assert "Batch &#39;majors&#39; is withdrawn already; nothing was changed." in again
    assert "failed" in site.client.get("/work").text


def test_second_change_waits_and_names_the_first_and_the_same_one_is_not_begun_twice(site: Site, gate: Gate) -> None:
    first = asked(site, "confirmed").headers["Location"]
    assert gate.begun.wait(60)
    assert asked(site, "confirmed").headers["Location"] == first
    second = asked(site, "try").headers["Location"]
    assert second != first
    job = site.jobs.find(first.rsplit("/", 1)[-1])
    waits = f"Waits until withdrawing batch majors, started {job.started_at[11:19]} UTC, is through."
    assert waits in site.client.get(second).text
    assert site.client.get(f"{second}/state.json").json["sentence"] == waits
    file = (io.BytesIO(TRACES.encode()), "traces.csv")
    draft = site.client.post("/import", data={"csrf_token": site.token(), "files": [file]}).headers["Location"]
    assert waits in site.client.get(draft).text
    gate.opened.set()
    assert "is withdrawn already" in ended(site, second)


def test_work_that_a_stopped_server_left_is_told_as_not_done(site: Site, gate: Gate, tmp_path: Path) -> None:
    address = asked(site, "confirmed").headers["Location"]
    assert gate.begun.wait(60)
    job = site.jobs.find(address.rsplit("/", 1)[-1])
    site.jobs.folder.save(job)
    site.jobs.folder.release(job.job_id)  # as the end of the process does
    other = create_app(str(site.path), writable=True, drafts=tmp_path / "drafts")
    client = other.test_client()
    page = client.get(address).text
    assert "Nothing was changed: the program was stopped while it worked on this." in page
    assert "<progress" not in page
    assert "at work" not in client.get("/work").text
    assert f'<a href="{address}">' not in client.get("/batches").text
    other.extensions["registry"].close()


def test_work_is_shown_to_those_alone_who_may_start_it(site: Site, tmp_path: Path) -> None:
    address = asked(site, "try").headers["Location"]
    ended(site, address)
    reader = create_app(str(site.path), writable=False, drafts=tmp_path / "drafts")
    client = reader.test_client()
    assert [client.get(path).status_code for path in ("/work", address, f"{address}/state.json")] == [403] * 3
    reader.extensions["registry"].close()
    assert site.client.get("/work/AAAAAAAAAAAAAAAA").status_code == 404
    assert site.client.get("/work/AAAAAAAAAAAAAAAA/state.json").status_code == 404


def test_page_of_an_import_among_the_work_is_the_page_of_the_import(site: Site) -> None:
    address = site.send(("samples.csv", "sample_code,sample_kind\nKD-9,core\n"))
    answer = site.client.get(address.replace("/import/", "/work/"))
    assert (answer.status_code, answer.headers["Location"]) == (303, address)
    page = site.client.get("/work").text
    assert f'<a href="{address}">The import of samples.csv</a>' in page


def test_changes_are_told_target_by_target_in_their_order() -> None:
    kinds = [["Tin", "possible", "undecided", 3], ["Tin", "favourable", "undecided", 2], ["Heat", None, "possible", 1]]
    assert working.by_target(kinds) == [
        ("Tin", [("possible", "undecided", 3), ("favourable", "undecided", 2)]),
        ("Heat", [(None, "possible", 1)]),
    ]


def test_nothing_ran_says_what_would_stand_there(site: Site) -> None:
    assert "Nothing ran during the last day." in site.client.get("/work").text


def test_fault_of_the_program_is_told_and_the_next_change_runs(site: Site, monkeypatch: pytest.MonkeyPatch) -> None:
    def broken(*_arguments: Any, **_more: Any) -> None:
        raise RuntimeError("planted")

    monkeypatch.setattr(setting_changes, "change_settings", broken)
    form = form_fields(site.client.get("/settings").text)
    form.setlist("loi_warn_wt", ["1"])
    form.setlist("do", ["foresee"])
    page = ended(site, site.client.post("/settings", data=form).headers["Location"])
    assert "Nothing was changed, because of a fault in the program" in page and "planted" not in page
    assert "3 samples</strong>" in ended(site, asked(site, "try").headers["Location"])


def test_edit_while_work_is_under_way_is_refused_with_what_runs_since_when(site: Site) -> None:
    form = form_fields(site.client.get("/edit/sample/KD-1").text)
    form.setlist("lithology", ["gabbro"])
    with writing(site.app.extensions["registry"], what="withdrawing batch majors"):
        answer = site.client.post("/edit/sample/KD-1", data=form)
    assert answer.status_code == 503
    assert re.search(r"<p>The registry site\.sqlite is held by withdrawing batch majors since 20\S+Z", answer.text)
    assert "Nothing was changed; try again when it is done. Your browser&#39;s way back leads to what" in answer.text


def test_edit_of_a_body_with_many_samples_leaves_the_rest_to_work(
    writable: Any, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr("registry.recomputing.AT_ONCE", 10)
    monkeypatch.setattr("web.reading.refresh_a_few", lambda registry: 0)
    assert writable.post("/edit/intrusion/Aster stock", half_width_m="1000").status_code == 303
    page = writable.client.get("/edit/intrusion/Aster stock").text
    address = re.search(r'being computed anew in the background: <a href="(/work/[^"]+)">how far it is</a>', page)
    assert address is not None
    writable.app.extensions["jobs"].wait(address[1].rsplit("/", 1)[-1], 60)
    assert writable.sql("SELECT count(*) FROM stale") == [(0,)]
    page = writable.client.get(address[1]).text
    assert "<h1>Computing anew after the edit of intrusion Aster stock</h1>" in page
    assert re.search(r"Done at .* UTC: [0-9]+ samples computed and judged anew\.", page)


def test_change_is_made_although_the_folder_of_its_record_is_deleted_meanwhile(site: Site, gate: Gate) -> None:
    address = asked(site, "confirmed").headers["Location"]
    assert gate.begun.wait(60)
    shutil.rmtree(site.jobs.folder.place)
    gate.opened.set()
    ends = time.monotonic() + 60
    while site.jobs.live():
        assert time.monotonic() < ends
        time.sleep(0.05)
    assert ">withdrawn</td>" in site.client.get("/batches").text
    assert site.client.get(address).status_code == 404
    page = ended(site, asked(site, "try", "restore").headers["Location"])
    assert "3 samples</strong>" in page, "the next one makes its folder anew"


def test_job_that_cannot_be_recorded_is_refused_and_can_be_asked_for_again(
    site: Site, monkeypatch: pytest.MonkeyPatch
) -> None:
    job = change_jobs.Change(site.jobs.folder.new_id(), "2026-12-01T00:00:00Z", action="withdraw", subject="majors")

    def full(_job: Any) -> None:
        raise OSError(28, "No space left on device")

    with monkeypatch.context() as patch:
        patch.setattr(site.jobs.folder, "save", full)
        with pytest.raises(OSError, match="No space left"):
            site.jobs.start(job, lambda: None)
    assert site.jobs.live() == []
    assert site.jobs.start(job, lambda: site.jobs.end(job, "done", "Done."))
    assert site.jobs.wait(job.job_id, 60).state == "done"
