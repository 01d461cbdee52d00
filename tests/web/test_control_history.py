"""The page of controls over time; all data are invented."""

from __future__ import annotations

import re
from pathlib import Path
from typing import Any

import numpy as np

from registry.importing import ImportOptions, import_files
from registry.store.schema import open_registry
from tests.web.import_site import Site
from web import control_charts, control_history

CERTIFICATES = """reference_material,analyte,value,unit,uncertainty,uncertainty_type,status,source
XM-1,Zr,100,ppm,4,SD,certified,invented
"""


def bring(site: Site, folder: Path) -> None:
    """Three yearly certificates: the material reads 4 ppm more each year; 60 lab repeats apart by 2 % of one half."""
    listed = "sample_code,sample_kind,reference_material\n"
    texts = {}
    for year in range(3):
        codes = [f"C{year}-{number}" for number in range(4)]
        listed += "".join(f"{code},reference_material,XM-1\n" for code in codes)
        lines = [f"{code},{106 + 4 * year + (-1) ** number}" for number, code in enumerate(codes)]
        for number in range(20):
            listed += f"R{year}-{number},core,\n"
            lines += [f"R{year}-{number},{100 + number}", f"R{year}-{number},{(100 + number) * 1.02:.2f}"]
        head = f"Certificate: Y-{year}\nLaboratory: North Lab\nDate reported: {2024 + year}-01-01\n"
        head += "Sample,Zr fusion (ppm)\n"
        texts[f"{year}.csv"] = head + "\n".join(lines) + "\n"
    files = {"certificates.csv": CERTIFICATES, "controls.csv": listed, **texts}
    for name, text in files.items():
        (folder / name).write_text(text)
    registry = open_registry(site.path)
    import_files(registry, [folder / name for name in files], ImportOptions())
    registry.close()


def cells(page: str, part: str) -> list[str]:
    """The cells of the one row of a table below a heading."""
    body = page[page.index(f'id="{part}"') :]
    row = re.search(r"<tbody>(.*?)</tbody>", body, re.DOTALL)
    assert row is not None
    return [re.sub(r"<[^>]+>", "", cell).strip() for cell in re.findall(r"<t[dh][^>]*>.*?</t[dh]>", row[1])]


def test_controls_over_time_shows_bias_drift_and_precision(site: Site, tmp_path: Path) -> None:
    """Recomputed with numpy: bias 10 % with error std/sqrt(12), 4 % a year; half difference 1/1.01 %."""
    bring(site, tmp_path)
    page = site.client.get("/controls?analyte=Zr").text
    difference = np.repeat([6.0, 10.0, 14.0], 4) + np.tile([1.0, -1.0], 6)
    years = np.repeat(np.array([0.0, 366.0, 731.0]) / 365.25, 4)
    fit, covariance = np.polyfit(years, difference, 1, cov=True)
    slope, error = fit[0], np.sqrt(covariance[0, 0])
    shown = cells(page, "materials")
    assert shown[:7] == ["Zr ppm", "XM-1", "fusion", "North Lab", "12", "2024-01-01", "2026-01-01"]
    assert shown[7:] == ["+10.00", f"{difference.std(ddof=1) / np.sqrt(12):.2f}", f"+{slope:.2f}", f"{error:.2f}",
                         "bias and drift"]  # fmt: skip
    pairs = cells(page, "pairs")
    assert pairs[:6] == ["Zr ppm", "laboratory repeats", "fusion", "North Lab", "60", "0.99"]
    # every group of eleven has pairs 2 % apart: k is 0.02/0.9539 about, the precision 4.2 %
    assert abs(float(pairs[8]) - 200.0 * 0.02 / 0.9539 / 1.01) < 0.2
    assert page.count('class="control-figure"') == 1 and page.count('class="control failed"') == 4
    assert "2026-01-01, Y-2, line 5: found 115, expected 100, deviation +3.75" in page
    assert 'href="/controls"' in site.client.get("/batches").text
    everything = site.client.get("/controls").text
    assert "control-figure" not in everything and 'href="/controls?analyte=Zr"' in everything


def test_controls_over_time_without_controls_says_so(site: Site) -> None:
    assert "No control of a certificate in use could be judged yet" in site.client.get("/controls").text


def test_batch_of_rocks_shows_what_the_controls_of_another_part_say(site: Site, tmp_path: Path) -> None:
    files = {
        "certificates.csv": CERTIFICATES,
        "listed.csv": "sample_code,sample_kind,reference_material\nR9,core,\nC9,reference_material,XM-1\n",
        "K9.csv": "Sample,Zr fusion (ppm)\nR9,120\n",
    }
    for name, text in files.items():
        (tmp_path / name).write_text(text)
    (tmp_path / "checks.csv").write_text("Sample,Zr fusion (ppm)\nC9,150\n")
    registry = open_registry(site.path)
    import_files(registry, [tmp_path / name for name in files], ImportOptions())
    import_files(registry, [tmp_path / "checks.csv"], ImportOptions(add_to="K9"))
    registry.close()
    page = site.client.get("/batches/K9").text
    assert "Its controls fail for Zr." in page and "No control stands in this file" in page
    assert "<li>Zr <strong>fails</strong>: in K9/2: reference material XM-1 failed on line 2: found 150" in page
    own = site.client.get("/batches/K9/2").text
    assert "By the controls of other parts" not in own and "Its controls fail for Zr." in own


def test_blank_is_drawn_at_two_where_it_is_warned_and_at_three_where_it_fails() -> None:
    """Detection limit 1, content 14 with a deviation of 0.5: warned above 14 + 1.5 + 5, failed above 14 + 1.5 + 10."""
    blank = {"kind": "blank", "z": None, "expected": 14.0, "limit_high": 25.5}
    drawn = [control_charts.deviation({**blank, "found": found}, 1.0) for found in (14.0, 20.5, 23.0, 25.5, 10.0)]
    assert [round(value or 0.0, 3) for value in drawn] == [0.0, 2.0, 2.5, 3.0, -1.231]


def test_chart_thins_what_lies_within_two_deviations() -> None:
    points: list[dict[str, Any]] = [
        {"day": "2026-01-01", "batch": "B", "line_no": number, "found": 1.0, "expected": 1.0,
         "z": 2.5 if number % 100 == 0 else 0.1}
        for number in range(3000)
    ]  # fmt: skip
    drawn = control_history.chart({"points": points})
    assert len(drawn["points"]) <= control_history.MOST_POINTS + 30
    assert sum(point["state"] == "warned" for point in drawn["points"]) == 30
    assert drawn["left_out"] == 3000 - len(drawn["points"])
