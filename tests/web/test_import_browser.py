"""Importing as a person does it in a browser: choose, look, correct, store, see it done. The data are invented."""

from __future__ import annotations

import re
import threading
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest
from selenium.webdriver.support.select import Select

import seed_demo
from tests.web.import_site import TRACES, Site
from tests.web.serving import served, until

pytestmark = [pytest.mark.browser, pytest.mark.slow]  # the everyday run looks at pages in test_browser.py


@pytest.fixture
def address(site: Site) -> Iterator[str]:
    with served(site.app, threads=3) as address:
        yield address


WIDTHS = (1280, 390)


def set_width(browser: Any, width: int) -> None:
    browser.execute_cdp_cmd(
        "Emulation.setDeviceMetricsOverride",
        {"width": width, "height": 900, "deviceScaleFactor": 1, "mobile": width < 500},
    )


@pytest.fixture(params=WIDTHS)
def window(request: pytest.FixtureRequest, browser: Any) -> Iterator[Any]:
    set_width(browser, request.param)
    browser.get_log("browser")
    browser.page_width = request.param
    yield browser
    browser.execute_cdp_cmd("Emulation.clearDeviceMetricsOverride", {})


def sound(window: Any) -> None:
    """The page fits either width and the browser complains of nothing."""
    for width in sorted(WIDTHS, key=lambda width: width == window.page_width):
        set_width(window, width)
        assert window.execute_script("return document.documentElement.scrollWidth") <= width
    assert [entry for entry in window.get_log("browser") if entry["level"] in ("SEVERE", "WARNING")] == []


def until_text(window: Any, text: str) -> None:
    """Wait for what the page comes to say; it may load itself anew meanwhile."""
    said = "return document.querySelector('main')?.innerText ?? ''"
    until(window, lambda: text in window.execute_script(said))


def choose(window: Any, address: str, *files: Path) -> None:
    window.get(f"{address}/import")
    sound(window)
    window.find_element("id", "files").send_keys("\n".join(map(str, files)))
    assert window.find_element("css selector", "[data-chosen]").text.count("MB") == len(files)
    window.find_element("css selector", "form.upload button").click()


def press(window: Any, value: str) -> None:
    window.find_element("css selector", f".form-end button[value={value}]").click()


@pytest.mark.parametrize("window", [390], indirect=True)  # looked at in both
def test_browser_demo_files_are_read_stored_and_done(window: Any, address: str, site: Site) -> None:
    choose(window, address, *seed_demo.files())
    until_text(window, "nothing is stored yet")
    sound(window)
    main = window.find_element("tag name", "main").text
    samples = re.search(r"(\d+) rows of samples: (\d+) new, 0 changed", main)
    assert samples is not None and samples[1] == samples[2]
    batch = re.findall(r"batch (\S+): \d+ lines, [\d\s]+ results, \d+ of them below or above a limit", main)[0]
    press(window, "store")
    until_text(window, "What was stored")
    sound(window)
    window.find_element("link text", batch).click()
    until_text(window, "In use")
    sound(window)
    assert window.find_elements("css selector", "svg.control-chart")


def test_browser_corrected_column_is_read_again(window: Any, address: str, tmp_path: Path) -> None:
    path = tmp_path / "traces.csv"
    path.write_text(TRACES)
    choose(window, address, path)
    until_text(window, "No unit is stated")
    sound(window)
    faulty = window.find_element("css selector", "select[aria-invalid=true]")
    assert faulty.get_attribute("aria-label") == "Unit of Au"
    Select(faulty).select_by_visible_text("ppb")
    press(window, "read")
    until_text(window, "nothing is stored yet")
    sound(window)
    assert "Read as you corrected it" in window.find_element("tag name", "main").text


@pytest.mark.parametrize("window", [1280], indirect=True)  # looked at in both
def test_browser_progress_survives_a_reload_and_ends_by_itself(
    window: Any, address: str, site: Site, monkeypatch: pytest.MonkeyPatch, tmp_path: Path
) -> None:
    from registry import import_jobs

    go_on = threading.Event()
    real = import_jobs.import_files

    def slow(*arguments: Any, **more: Any) -> Any:
        more["progress"]("storing", 25_000, 100_000)
        assert go_on.wait(60)
        return real(*arguments, **more)

    monkeypatch.setattr(import_jobs, "import_files", slow)
    path = tmp_path / "traces.csv"
    path.write_text(TRACES)
    choose(window, address, path)
    until_text(window, "25,000 of 100,000 lines of results")
    window.refresh()
    until_text(window, "25,000 of 100,000 lines of results")
    sound(window)
    bar = window.find_element("css selector", "progress")
    assert (bar.get_attribute("value"), bar.get_attribute("max")) == ("25000", "100000")
    window.get(f"{address}/samples")
    assert window.find_element("css selector", ".count").text == "3"
    window.back()
    go_on.set()
    until_text(window, "No unit is stated")


def test_browser_batch_is_withdrawn_after_a_trial(window: Any, address: str) -> None:
    window.get(f"{address}/batches/majors")
    sound(window)
    window.find_element("css selector", "form.tools button").click()
    until_text(window, "nothing is changed yet")
    sound(window)
    window.find_element("css selector", "main details summary").click()
    table, caption = (window.find_element("css selector", f"main details {part}") for part in ("table", "caption"))
    assert caption.rect["width"] >= 0.9 * table.rect["width"], "words above a table are not squeezed"
    window.find_element("css selector", "button[value=confirmed]").click()
    until_text(window, "Batch majors is withdrawn")
    sound(window)


def test_browser_form_works_without_our_script(window: Any, address: str, tmp_path: Path) -> None:
    path = tmp_path / "good.csv"
    path.write_text("Sample,Zr fusion (ppm),Sr fusion (ppm)\nKD-1,150,400\n")
    window.execute_cdp_cmd("Emulation.setScriptExecutionDisabled", {"value": True})
    try:
        window.get(f"{address}/import")
        window.find_element("id", "files").send_keys(str(path))
        window.find_element("css selector", "form.upload button").click()
        until_text(window, "nothing is stored yet")
        press(window, "store")
        until_text(window, "What was stored")
    finally:
        window.execute_cdp_cmd("Emulation.setScriptExecutionDisabled", {"value": False})
