"""The pages as a browser draws them: pixels, widths, both themes, the keyboard. The registry is invented (conftest)."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from typing import Any

import pytest
from flask import Flask

from tests.web.serving import pixels, served, share, until

pytestmark = pytest.mark.browser
PAGES = (
    "/samples", "/samples?target=porphyry_copper&verdict=favourable&sr_y_min=20&sort=-score", "/samples/PB-001",
    "/samples/PB-002", "/samples/PB-020", "/batches", "/batches/Q-2041", "/targets", "/targets/porphyry_copper",
    "/methods", "/intrusions", "/sites", "/samples?kind=float",
)  # fmt: skip


@pytest.fixture(scope="session")
def address(app: Flask) -> Iterator[str]:
    with served(app) as address:
        yield address


@pytest.fixture
def open_page(browser: Any, address: str) -> Iterator[Callable[..., Any]]:
    """Open a page at a width and in a theme; the browser is put back afterwards."""

    def visit(path: str, width: int = 1280, dark: bool = False) -> Any:
        browser.execute_cdp_cmd(
            "Emulation.setDeviceMetricsOverride",
            {"width": width, "height": 900, "deviceScaleFactor": 1, "mobile": width < 500},
        )
        scheme = {"name": "prefers-color-scheme", "value": "dark" if dark else "light"}
        browser.execute_cdp_cmd("Emulation.setEmulatedMedia", {"features": [scheme]})
        browser.get_log("browser")
        browser.get(address + path)
        return browser

    yield visit
    browser.execute_cdp_cmd("Emulation.clearDeviceMetricsOverride", {})
    browser.execute_cdp_cmd("Emulation.setEmulatedMedia", {"features": []})


@pytest.mark.parametrize("width", [1280, 390])
@pytest.mark.parametrize("path", PAGES)
def test_browser_page_fits_its_width_without_faults(open_page: Callable[..., Any], path: str, width: int) -> None:
    browser = open_page(path, width)
    assert browser.execute_script("return document.documentElement.scrollWidth") <= width
    assert [entry for entry in browser.get_log("browser") if entry["level"] in ("SEVERE", "WARNING")] == []
    assert browser.execute_script("return document.styleSheets.length") == 1


@pytest.mark.parametrize("dark", [False, True], ids=["light", "dark"])
def test_browser_norm_bar_is_drawn_in_its_colours(open_page: Callable[..., Any], dark: bool) -> None:
    """PB-001 is an invented granodiorite: the page lists about 18 % quartz, 16 orthoclase, 37 albite, 17 anorthite."""
    rows = pixels(open_page("/samples/PB-001", dark=dark), "svg.norm-bar")
    assert 0.15 < share(rows, "#56B4E9") < 0.21
    assert 0.12 < share(rows, "#D55E00") < 0.19
    assert 0.32 < share(rows, "#E69F00") < 0.40
    assert 0.13 < share(rows, "#F0E442") < 0.20


def test_browser_norm_strip_of_the_list_is_drawn_at_both_widths(open_page: Callable[..., Any]) -> None:
    for width in (1280, 390):
        rows = pixels(open_page("/samples?text=PB-001", width), "svg.norm-strip")
        assert share(rows, "#E69F00") > 0.3
        assert share(rows, "#56B4E9") > 0.12


def test_browser_hatched_mineral_shows_colour_and_pattern(open_page: Callable[..., Any]) -> None:
    rows = pixels(open_page("/samples/PB-002"), "rect[fill='url(#fill-green-rise)']")
    assert share(rows, "#009E73") > 0.2
    assert share(rows, "#1C1E20") > 0.02


@pytest.mark.parametrize(("dark", "paper"), [(False, "#FBFAF6"), (True, "#17191B")])
def test_browser_theme_follows_the_reader(open_page: Callable[..., Any], dark: bool, paper: str) -> None:
    rows = pixels(open_page("/samples", dark=dark), "h1")
    assert share(rows, paper) > 0.8


def test_browser_verdict_marks_differ_in_ink(open_page: Callable[..., Any]) -> None:
    browser = open_page("/samples")
    browser.find_element("css selector", ".add-part summary").click()
    labels = browser.find_elements("css selector", ".add-part .verdict svg")
    assert len(labels) == 4
    ink = []
    for position in range(1, 5):
        rows = pixels(browser, f".add-part label:nth-of-type({position}) .verdict svg")
        ink.append(1 - share(rows, "#FFFFFF"))
    favourable, possible, unfavourable, undecided = ink
    assert favourable > possible > unfavourable > undecided > 0.01


def test_browser_margin_shows_limit_and_value(open_page: Callable[..., Any]) -> None:
    rows = pixels(open_page("/samples/PB-001"), ".margin-plot")
    assert share(rows, "#7B2436") > 0.008
    assert share(rows, "#1C1E20") > 0.003


def test_browser_sentence_is_edited_in_place(open_page: Callable[..., Any]) -> None:
    browser = open_page("/samples")
    browser.find_element("css selector", ".add-part summary").click()
    until(browser, lambda: browser.switch_to.active_element.get_attribute("name") == "text")
    browser.find_element("css selector", "#add_column option[value='sr_y']").click()
    browser.find_element("id", "add_min").send_keys("20")
    browser.find_element("css selector", ".add-part button").click()
    until(browser, lambda: browser.current_url.endswith("/samples?sr_y_min=20"))
    assert "Sr/Y at least 20" in browser.find_element("css selector", ".sentence").text
    assert browser.find_element("css selector", ".count").text == "40"


def test_browser_part_closes_with_escape_and_keeps_the_focus(open_page: Callable[..., Any]) -> None:
    browser = open_page("/samples")
    summary = browser.find_element("css selector", ".part summary")
    summary.click()
    part = browser.find_element("css selector", ".part")
    until(browser, lambda: browser.switch_to.active_element.get_attribute("name") == "kind")
    browser.switch_to.active_element.send_keys("\ue00c")
    until(browser, lambda: part.get_attribute("open") is None)
    assert browser.switch_to.active_element == summary


def test_browser_open_part_stays_within_the_window(open_page: Callable[..., Any]) -> None:
    for width in (1280, 700, 390):
        browser = open_page("/samples?target=porphyry_copper&kind=core&kind=outcrop&sr_y_min=20", width)
        for summary in browser.find_elements("css selector", ".part summary"):
            summary.click()
            panel = summary.find_element("xpath", "..").find_element("css selector", ".panel").rect
            assert panel["x"] >= 0
            assert panel["x"] + panel["width"] <= width


def test_browser_head_and_first_column_stay_in_view(open_page: Callable[..., Any]) -> None:
    browser = open_page(
        "/samples?columns=sio2_wt,tio2_wt,al2o3_wt,mgo_wt,cao_wt,na2o_wt,k2o_wt,q_wt,or_wt,ab_wt,an_wt,sr_y"
    )
    offsets = browser.execute_script(
        "const f = document.querySelector('.table-frame'); f.scrollTop = 400; f.scrollLeft = 300;"
        "const at = e => e.getBoundingClientRect();"
        "return [at(f.querySelector('thead th')).top - at(f).top,"
        "at(f.querySelectorAll('tbody th')[20]).left - at(f).left, f.scrollTop];"
    )
    assert offsets[2] > 100
    assert abs(offsets[0]) <= 1 and abs(offsets[1]) <= 1


def test_browser_focus_is_visible(open_page: Callable[..., Any]) -> None:
    browser = open_page("/samples")
    browser.find_element("css selector", "body").send_keys("\ue004\ue004")
    width = browser.execute_script("return getComputedStyle(document.activeElement).outlineWidth")
    assert width == "2px"


def test_browser_works_without_our_script(open_page: Callable[..., Any]) -> None:
    browser = open_page("/samples")
    browser.execute_cdp_cmd("Emulation.setScriptExecutionDisabled", {"value": True})
    try:
        browser.refresh()
        browser.find_element("css selector", ".part summary").click()
        browser.find_element("css selector", "input[name=kind][value=float]").click()
        browser.find_element("css selector", ".part[open] button").click()
        until(browser, lambda: browser.current_url.endswith("/samples?kind=float"))
    finally:
        browser.execute_cdp_cmd("Emulation.setScriptExecutionDisabled", {"value": False})


def test_samples_table_fits_at_1280_and_says_that_it_goes_on_where_it_does_not(open_page: Callable[..., Any]) -> None:
    for width, fits in ((1280, True), (900, False), (390, True)):
        browser = open_page("/samples", width)
        room = browser.execute_script(
            "const f = document.querySelector('.table-frame.tall'); return f.clientWidth - f.scrollWidth;"
        )
        notes = [note.text for note in browser.find_elements("css selector", ".goes-on") if note.is_displayed()]
        assert (room >= 0) is fits
        told = "The table goes on to the right: scroll it sideways, or choose fewer columns."
        assert notes == ([] if fits else [told])
