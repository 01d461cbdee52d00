"""The map as a browser draws it: places by their pixels, widths, themes, reading a sample, a drawn box, the scale bar.

The registry is invented (conftest), its positions as in ``test_map``.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Iterator
from pathlib import Path
from typing import Any

import pytest
from selenium.webdriver.common.action_chains import ActionChains

from tests.web.placed_registry import placed
from tests.web.serving import near, pixels, served, share, sound, until
from web import create_app

pytestmark = [pytest.mark.browser, pytest.mark.slow]  # the everyday run looks at pages in test_browser.py
PATHS = (
    "/map", "/map?number=sr_y&table=1", "/map?by=porphyry_copper", "/map?site=DH-1", "/map?kind=outcrop",
    "/map?text=zzz", "/map?by=nothing",
)  # fmt: skip
#: Okabe and Ito's blue and orange: the first two groups.
COLOURS = {"0": "#0072B2", "1": "#E69F00"}
PART = "grid=32633&x_from=500000&x_to=500060&y_from=6099980&y_to=6100020"
CLOSER_PART = "grid=32633&x_from=500010&x_to=500030&y_from=6099993&y_to=6100007"


@pytest.fixture(scope="module")
def address(writable_file: Path, tmp_path_factory: pytest.TempPathFactory) -> Iterator[str]:
    path = placed(writable_file, tmp_path_factory.mktemp("drawn") / "placed.sqlite")
    app = create_app(str(path))
    with served(app) as address:
        yield address
    app.extensions["registry"].close()


def drawn_samples(browser: Any) -> list[dict[str, Any]]:
    return browser.execute_script(
        "return [...document.querySelectorAll('#plot .points a:not([class])')].map(a => {"
        "const u = a.querySelector('use'); return {address: a.getAttribute('href'),"
        "symbol: u.getAttribute('href').slice(3), x: parseFloat(u.getAttribute('x')),"
        "y: parseFloat(u.getAttribute('y'))}; })"
    )


@pytest.mark.parametrize("width", [1280, 390])
@pytest.mark.parametrize("path", PATHS)
def test_browser_map_fits_its_width_without_faults(
    window: Callable[..., Any], address: str, path: str, width: int
) -> None:
    # at "=nothing" the answer 400 itself is told
    sound(window(address + path, width), width, refused=path.endswith("=nothing"))


@pytest.mark.parametrize("width", [1280, 390])
@pytest.mark.parametrize("path", ["/map", "/map?site=DH-1", f"/map?{PART}"])
def test_browser_map_has_one_scale_for_both_axes_at_every_width(
    window: Callable[..., Any], address: str, path: str, width: int
) -> None:
    browser = window(address + path, width)
    plot = browser.find_element("id", "plot")
    west, east, south, north = (
        float(end) for side in ("x", "y") for end in plot.get_attribute(f"data-{side}").split()
    )  # fmt: skip
    frame = browser.execute_script("const r = arguments[0].getBoundingClientRect(); return [r.width, r.height]", plot)
    assert (east - west) / frame[0] == pytest.approx((north - south) / frame[1], rel=0.005)


@pytest.mark.parametrize(("width", "dark"), [(1280, False), (1280, True), (390, False), (390, True)])
def test_browser_samples_are_drawn_at_their_places_in_their_colours(
    window: Callable[..., Any], address: str, width: int, dark: bool
) -> None:
    """The middle of a symbol has the colour of its intrusion, where no other symbol lies over it."""
    browser = window(f"{address}/map?by=intrusion&{PART if width > 500 else CLOSER_PART}", width, dark)
    rows = pixels(browser, "#plot")
    high, wide = len(rows), len(rows[0])
    found = drawn_samples(browser)
    assert len(found) > 20
    seen = set()
    for number, point in enumerate(found):
        x, y = point["x"] / 100 * wide, point["y"] / 100 * high
        covered = any(abs(later["x"] / 100 * wide - x) < 7 for later in found[number + 1 :])
        if not covered and 8 < x < wide - 8:
            assert y == pytest.approx(high / 2, abs=1.0)  # the hole heads due east through the middle
            assert near(rows[round(y), round(x)], COLOURS[point["symbol"]], by=8), point
            seen.add(point["symbol"])
    assert seen == {"0", "1"}


@pytest.mark.parametrize(("dark", "ink"), [(False, "#1C1E20"), (True, "#E9E6DF")])
def test_browser_hole_is_drawn_in_plan_from_its_collar_to_its_end(
    window: Callable[..., Any], address: str, dark: bool, ink: str
) -> None:
    """220 m at -60 reach 110 m east of the collar (trigonometry); beyond it there is ground."""
    browser = window(f"{address}/map?site=DH-1&by=intrusion", 1280, dark)
    plot = browser.find_element("id", "plot")
    west, east = map(float, plot.get_attribute("data-x").split())
    rows = pixels(browser, "#plot")
    wide, middle = len(rows[0]), len(rows) // 2

    def column(easting: float) -> int:
        return round((easting - west) / (east - west) * wide)

    end = rows[middle - 3 : middle + 4, column(500085) : column(500108)]
    beyond = rows[middle - 3 : middle + 4, column(500114) : column(500119)]
    assert near(end, ink, by=60).any(axis=0).mean() > 0.9
    assert not near(beyond, ink, by=60).any()


def test_browser_scale_bar_is_as_long_as_it_says(window: Callable[..., Any], address: str) -> None:
    browser = window(f"{address}/map?site=DH-1")
    plot = browser.find_element("id", "plot")
    west, east = map(float, plot.get_attribute("data-x").split())
    bar = browser.find_element("css selector", ".bar-full").rect["width"]
    said = browser.find_element("css selector", ".map-foot").get_attribute("aria-label")
    length = re.search(r"Scale bar of (\d+)\xa0m", said)
    assert length is not None
    assert bar / plot.rect["width"] * (east - west) == pytest.approx(float(length[1]), rel=0.03)


def test_browser_pointing_at_a_sample_reads_it_and_a_click_leads_to_it(
    window: Callable[..., Any], address: str
) -> None:
    browser = window(f"{address}/map?text=PB-001")
    plot = browser.find_element("id", "plot")
    point = drawn_samples(browser)[0]
    across = (point["x"] / 100 - 0.5) * plot.rect["width"] + 5
    down = (point["y"] / 100 - 0.5) * plot.rect["height"] + 5
    ActionChains(browser).move_to_element_with_offset(plot, across, down).perform()
    until(browser, lambda: "PB-001" in browser.find_element("id", "readout").text)
    assert "500\u202f001 E, 6\u202f100\u202f000 N; OC-7" in browser.find_element("id", "readout").text
    ActionChains(browser).click().perform()
    until(browser, lambda: "/samples/PB-001" in browser.current_url)


def test_browser_drawn_box_becomes_the_part_that_is_shown(window: Callable[..., Any], address: str) -> None:
    browser = window(f"{address}/map?site=DH-1")
    plot = browser.find_element("id", "plot")
    before = [float(end) for side in "xy" for end in plot.get_attribute(f"data-{side}").split()]
    wide, high = plot.rect["width"], plot.rect["height"]
    chain = ActionChains(browser).move_to_element_with_offset(plot, round(-0.2 * wide), round(-0.3 * high))
    chain.click_and_hold().move_by_offset(round(0.2 * wide), round(0.2 * high)).move_by_offset(
        round(0.1 * wide), round(0.1 * high)
    ).release().perform()
    until(browser, lambda: "x_from=" in browser.current_url)
    assert "grid=32633" in browser.current_url and "site=DH-1" in browser.current_url
    west, east, _, north = (
        float(end) for side in "xy" for end in browser.find_element("id", "plot").get_attribute(f"data-{side}").split()
    )  # fmt: skip
    width = before[1] - before[0]
    assert west == pytest.approx(before[0] + 0.3 * width, abs=0.01 * width)
    assert east == pytest.approx(before[0] + 0.6 * width, abs=0.01 * width)
    assert north == pytest.approx(before[3] - 0.2 * (before[3] - before[2]), abs=0.01 * width)
    browser.find_element("link text", "all of it").click()
    until(browser, lambda: "x_from=" not in browser.current_url)


def test_browser_map_stands_without_our_script(window: Callable[..., Any], browser: Any, address: str) -> None:
    browser.execute_cdp_cmd("Emulation.setScriptExecutionDisabled", {"value": True})
    try:
        window(f"{address}/map?by=intrusion&{PART}")
        rows = pixels(browser, "#plot")
        assert share(rows, COLOURS["0"]) > 0.0005
        assert share(rows, COLOURS["1"]) > 0.0005
        assert not browser.find_element("id", "box-hint").is_displayed()
    finally:
        browser.execute_cdp_cmd("Emulation.setScriptExecutionDisabled", {"value": False})
