"""Intrusions, sites, start, settings and edit forms as a browser draws them: strip and bars, widths, themes."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from typing import Any

import pytest
from flask import Flask

from tests.web.serving import near, pixels, served, share, until

pytestmark = [pytest.mark.browser, pytest.mark.slow]  # the everyday run looks at pages in test_browser.py
PATHS = (
    "/", "/intrusions", "/intrusions?target=porphyry_copper", "/intrusions/Aster stock", "/sites", "/sites/DH-1",
    "/sites/DH-1?value=sr_y&value=mg_number&value=differentiation_index&target=tin", "/sites/OC-7", "/settings",
    "/edit/sample/PB-001", "/edit/site/DH-1", "/edit/intrusion/Aster stock", "/edit/area/North Block", "/methods",
    "/targets/tin",
)  # fmt: skip


@pytest.fixture(scope="module")
def address(logged_app: Flask) -> Iterator[str]:
    with served(logged_app) as address:
        yield address


@pytest.fixture
def visit(browser: Any) -> Iterator[Callable[..., Any]]:
    """Open an address at a width and in a theme; the browser is put back afterwards."""

    def go_to(where: str, width: int = 1280, dark: bool = False) -> Any:
        browser.execute_cdp_cmd(
            "Emulation.setDeviceMetricsOverride",
            {"width": width, "height": 1400, "deviceScaleFactor": 1, "mobile": width < 500},
        )
        scheme = {"name": "prefers-color-scheme", "value": "dark" if dark else "light"}
        browser.execute_cdp_cmd("Emulation.setEmulatedMedia", {"features": [scheme]})
        browser.get_log("browser")
        browser.get(where)
        return browser

    yield go_to
    browser.execute_cdp_cmd("Emulation.clearDeviceMetricsOverride", {})
    browser.execute_cdp_cmd("Emulation.setEmulatedMedia", {"features": []})
    browser.get("about:blank")


@pytest.fixture
def window(address: str, visit: Callable[..., Any]) -> Callable[..., Any]:
    """Open a page of the site that is only read."""
    return lambda path, width=1280, dark=False: visit(address + path, width, dark)


@pytest.fixture
def own_window(writable: Any, visit: Callable[..., Any]) -> Iterator[Callable[..., Any]]:
    """Open a page of the site that the test changes."""
    with served(writable.app) as address:
        yield lambda path, width=1280: visit(address + path, width)


def test_browser_place_pages_fit_both_widths_without_faults(window: Callable[..., Any]) -> None:
    for path in PATHS:
        for width in (1280, 390):
            browser = window(path, width)
            assert browser.execute_script("return document.documentElement.scrollWidth") <= width, (path, width)
            log = [entry for entry in browser.get_log("browser") if entry["level"] in ("SEVERE", "WARNING")]
            assert log == [], (path, width)


@pytest.mark.parametrize("dark", [False, True], ids=["light", "dark"])
def test_browser_strip_draws_rocks_with_hatching_and_names(window: Callable[..., Any], dark: bool) -> None:
    """Granodiorite is orange with crosses, gabbronorite green with crosses; 52 and 80 of 220 m."""
    rows = pixels(window("/sites/DH-1#strip", dark=dark), ".strip-rocks > svg")
    orange, green = share(rows, "#E69F00"), share(rows, "#009E73")
    assert orange > 0.015
    assert 1.2 < green / orange < 1.9
    hatching = share(rows, "#17191B" if dark else "#1C1E20")
    assert hatching > 0.01


def test_browser_strip_points_stand_at_their_depths(window: Callable[..., Any]) -> None:
    """Core samples lie from 11 to 129 m of 220 m: dots in the upper part of the track, none below."""
    rows = pixels(window("/sites/DH-1?value=sr_y&value=none#strip"), ".strip-track > svg")
    garnet = near(rows, "#7B2436").any(axis=1).nonzero()[0]
    scale = (len(rows) - 16) / 220
    assert garnet[0] == pytest.approx(8 + 11.5 * scale, abs=8)
    assert garnet[-1] == pytest.approx(8 + 129 * scale, abs=8)


def test_browser_strip_fits_three_values_on_a_telephone(window: Callable[..., Any]) -> None:
    browser = window("/sites/DH-1?value=sr_y&value=mg_number&value=differentiation_index", 390)
    widths = [part.rect["width"] for part in browser.find_elements("css selector", ".strip-track")]
    assert len(widths) == 3 and min(widths) > 45
    names = browser.find_elements("css selector", ".rock-name.for-narrow tspan")
    rocks = browser.find_element("css selector", ".strip-rocks").rect
    assert names[0].is_displayed()
    assert all(name.rect["x"] + name.rect["width"] <= rocks["x"] + rocks["width"] + 1 for name in names)


def test_browser_strip_form_draws_the_chosen_value(window: Callable[..., Any]) -> None:
    browser = window("/sites/DH-1")
    browser.find_element("css selector", "#value-0 option[value='asi']").click()
    browser.find_element("css selector", "#target option[value='tin']").click()
    browser.find_element("css selector", ".strip-form button").click()
    until(browser, lambda: "value=asi" in browser.current_url)
    assert browser.find_element("css selector", ".strip-track .strip-head").text.startswith("ASI")


def test_browser_verdict_marks_beside_the_strip_lead_to_their_samples(
    own_window: Callable[..., Any], writable: Any
) -> None:
    writable.sql("UPDATE sample SET from_m = NULL, to_m = NULL WHERE code NOT IN ('PB-002', 'PB-050', 'PB-099')")
    browser = own_window("/sites/DH-1?target=porphyry_copper")
    marks = browser.find_elements("css selector", ".strip-marks a")
    code = marks[0].get_attribute("aria-label").split(",")[0]
    assert marks[0].get_attribute("href") is not None
    browser.find_element("css selector", ".strip-marks a svg").click()
    until(browser, lambda: f"/samples/{code}" in browser.current_url)


@pytest.mark.parametrize("width", [1280, 390])
def test_browser_range_bar_covers_its_share_of_the_scale(window: Callable[..., Any], width: int) -> None:
    """The bar of SiO2: its pixels lie where the printed least and greatest do on a scale from 40 to 80."""
    browser = window("/intrusions/Aster stock", width)
    row = browser.find_element("xpath", "//table[contains(@class, 'ranges')]//tr[th[starts-with(., 'SiO₂')]]")
    least, _, greatest = (float(cell.text) for cell in row.find_elements("css selector", "td.number")[:3])
    drawn = pixels(browser, ".ranges tbody tr .range-plot")
    columns = near(drawn[9:12], "#7B2436").any(axis=0).nonzero()[0]
    wide = len(drawn[0])
    assert columns[0] / wide == pytest.approx((least - 40) / 40, abs=0.03)
    assert columns[-1] / wide == pytest.approx((greatest - 40) / 40, abs=0.03)
    assert len(columns) > 0.9 * (columns[-1] - columns[0]) - 10


def test_browser_norm_column_is_drawn_in_its_colours(window: Callable[..., Any]) -> None:
    rows = pixels(window("/intrusions/Aster stock"), ".norm-column")
    assert share(rows, "#E69F00") > 0.08
    assert share(rows, "#56B4E9") > 0.08


def test_browser_link_to_a_method_unfolds_its_view(window: Callable[..., Any]) -> None:
    browser = window("/methods#differentiation_index", 390)
    row = browser.find_element("id", "differentiation_index")
    until(browser, lambda: row.is_displayed())
    assert browser.execute_script("return arguments[0].getBoundingClientRect().top", row) < 1400
    closed = window("/methods", 390)
    assert closed.execute_script("return document.documentElement.scrollHeight") < 2500


def test_browser_edit_is_saved_and_told(own_window: Callable[..., Any], writable: Any) -> None:
    browser = own_window("/edit/sample/PB-001", 390)
    field = browser.find_element("id", "density_kg_m3")
    field.send_keys("2655")
    unit = browser.find_element("css selector", "#density_kg_m3 + .unit").rect
    assert field.rect["x"] < unit["x"] < unit["x"] + unit["width"] <= field.rect["x"] + field.rect["width"]
    browser.find_element("css selector", ".form-end button").click()
    until(browser, lambda: browser.find_elements("css selector", ".notice"))
    assert "density kg m3 (blank) → 2655" in browser.find_element("css selector", ".notice").text
    assert writable.sql("SELECT density_kg_m3 FROM sample WHERE code = 'PB-001'") == [(2655.0,)]
