"""The whole path on the invented district: CSV files through the ordinary commands to the cells of the views.

The data are invented (seed_demo/README.txt). Expected cells are worked out here from the text of the CSV files with
atomic masses of the IUPAC/CIAAW abridged table (Prohaska et al. 2022) and the published formulas named beside them, and
with nothing of the product.
"""

from __future__ import annotations

import csv
import io
import math
import shutil
import sqlite3
import subprocess
import sys
from collections.abc import Callable, Iterator
from pathlib import Path

import openpyxl
import pytest
import sqlalchemy as sa

import seed_demo
from registry.cli import main

ROOT = Path(__file__).resolve().parents[2]
FE2O3_PER_FEO = 159.687 / (2 * 71.844)


def run(*arguments: str) -> str:
    done = subprocess.run([sys.executable, "-m", "registry.cli", *arguments], capture_output=True, text=True, cwd=ROOT)
    assert done.returncode == 0, done.stdout + done.stderr
    return done.stdout


@pytest.fixture(scope="module")
def imported(tmp_path_factory: pytest.TempPathFactory) -> tuple[Path, str]:
    """Made by ``create`` and ``import``, as a team makes its own; what the import said."""
    path = tmp_path_factory.mktemp("demo") / "district.sqlite"
    run("create", "--registry", str(path))
    return path, run("import", *map(str, seed_demo.files()), "--registry", str(path))


@pytest.fixture(scope="module")
def registry(imported: tuple[Path, str]) -> Path:
    return imported[0]


@pytest.fixture
def called(capsys: pytest.CaptureFixture) -> Callable[..., str]:
    """A command in this process; what it printed."""

    def call(*arguments: object) -> str:
        with pytest.raises(SystemExit) as ended:
            main([str(argument) for argument in arguments])
        said = capsys.readouterr()
        assert not ended.value.code, said.out + said.err
        return said.out

    return call


@pytest.fixture(scope="module")
def view(registry: Path) -> Iterator[sqlite3.Connection]:
    connection = sqlite3.connect(f"file:{registry}?mode=ro", uri=True)
    connection.row_factory = sqlite3.Row
    yield connection
    connection.close()


def certificate_row(name: str, sample: str) -> dict[str, float | str]:
    """One line of a certificate read by hand: numbers, or the text as it stands; headings cut to the analyte."""
    path = next(path for path in seed_demo.files() if path.stem == f"results_{name}")
    point = "."
    if path.suffix == ".xlsx":
        sheet = openpyxl.load_workbook(path)["Results"]
        rows = [["" if cell is None else str(cell) for cell in row] for row in sheet.iter_rows(values_only=True)]
        heading = rows[0]
    else:
        encoding, delimiter = {"K88": ("cp1252", ";"), "T506": ("utf-16", "\t")}.get(name, ("utf-8-sig", ","))
        rows = list(csv.reader(io.StringIO(path.read_bytes().decode(encoding)), delimiter=delimiter))
        heading = next(row for row in rows if sum(cell.startswith("SiO2") for cell in row) == 1)
        point = "," if name == "K88" else "."
    (line,) = [row for row in rows if row[0] == sample]
    found: dict[str, float | str] = {}
    for text, cell in zip(heading, line, strict=True):
        try:
            found[text.split(" ")[0]] = float(cell.replace(point, "."))
        except ValueError:
            found[text.split(" ")[0]] = cell
    return found


def row_of(view: sqlite3.Connection, sheet: str, sample: str) -> sqlite3.Row:
    rows = view.execute(f"SELECT * FROM {sheet} WHERE sample_code = ?", (sample,)).fetchall()
    assert len(rows) == 1
    return rows[0]


def test_import_stores_every_sample_and_site(view: sqlite3.Connection) -> None:
    kinds = dict(view.execute("SELECT sample_kind, count(*) FROM sample_sheet GROUP BY sample_kind").fetchall())
    assert kinds == {
        "core": 548, "outcrop": 81, "float": 8, "reference_material": 31, "blank": 20, "duplicate": 19,
    }  # fmt: skip
    assert view.execute("SELECT count(*) FROM site").fetchone()[0] == 75
    assert view.execute("SELECT count(*) FROM intrusion_sheet").fetchone()[0] == 8
    batches = {row[0] for row in view.execute("SELECT batch FROM batch_sheet WHERE state = 'active'")}
    assert batches == {"results_A417", "results_K88", "results_T506", "B2231", "results_W77", "results_Z19"}


def test_import_leaves_nothing_stale(view: sqlite3.Connection) -> None:
    assert view.execute("SELECT count(*) FROM sample_sheet WHERE is_stale <> 0").fetchone()[0] == 0


def test_results_every_filled_cell_of_the_certificates_is_stored(view: sqlite3.Connection) -> None:
    filled = {}
    for name, heads, encoding, delimiter in (
        ("results_A417", 1, "utf-8", ","),
        ("results_K88", 3, "cp1252", ";"),
        ("results_T506", 2, "utf-16", "\t"),
        ("B2231", 6, "utf-8", ","),
    ):
        path = next(path for path in seed_demo.files() if path.stem.endswith(name))
        rows = list(csv.reader(io.StringIO(path.read_bytes().decode(encoding)), delimiter=delimiter))
        filled[name] = sum(cell != "" for row in rows[heads:] for cell in row[1:])
    sheet = openpyxl.load_workbook(next(path for path in seed_demo.files() if path.suffix == ".xlsx"))["Results"]
    filled["results_W77"] = sum(
        cell is not None for row in sheet.iter_rows(min_row=2, min_col=2, values_only=True) for cell in row
    )
    path = next(path for path in seed_demo.files() if path.stem == "results_Z19")
    filled["results_Z19"] = sum(row["Result"] != "" for row in csv.DictReader(io.StringIO(path.read_text("utf-8"))))
    assert dict(view.execute("SELECT batch, count(*) FROM result_sheet GROUP BY batch").fetchall()) == filled


def test_controls_get_no_verdict(view: sqlite3.Connection) -> None:
    judged = {row[0] for row in view.execute("SELECT DISTINCT sample_id FROM verdict_sheet")}
    rocks = {
        row[0]
        for row in view.execute("SELECT sample_id FROM sample_sheet WHERE sample_kind IN ('core', 'outcrop', 'float')")
    }
    assert judged == rocks


def test_composition_cells_of_the_first_layout_come_through(view: sqlite3.Connection) -> None:
    reported = certificate_row("A417", "KD001-103")
    cells = row_of(view, "composition_sheet", "KD001-103")
    for analyte in ("SiO2", "K2O", "LOI", "S"):
        assert cells[f"{analyte.lower()}_wt"] == reported[analyte]
    for analyte in ("Sr", "Y", "Zr", "Eu", "Cu"):
        assert cells[f"{analyte.lower()}_ppm"] == reported[analyte]
    assert cells["feo_titrated_wt"] == reported["FeO"]
    assert cells["fe2o3t_wt"] == reported["Fe2O3T"]
    assert cells["feot_wt"] == pytest.approx(reported["Fe2O3T"] / FE2O3_PER_FEO, rel=1e-5)
    below = [name for name, cell in reported.items() if isinstance(cell, str) and cell.startswith("<")]
    assert below
    assert sorted(cells["censored"].split(",")) == sorted(f"{name.lower()}_ppm<" for name in below)


def test_composition_cells_of_the_decimal_comma_layout_come_through(view: sqlite3.Connection) -> None:
    reported = certificate_row("K88", "OD001-310")
    cells = row_of(view, "composition_sheet", "OD001-310")
    assert cells["sio2_wt"] == reported["SiO2"]
    assert cells["mno_wt"] == pytest.approx(float(reported["MnO"]) / 1e4, rel=1e-12)
    assert cells["fe2o3t_wt"] == reported["Fe2O3tot"]
    assert (cells["th_ppm"], cells["u_ppm"]) == (reported["Th"], reported["U"])
    assert cells["feo_titrated_wt"] is None and cells["s_wt"] is None and cells["sn_ppm"] is None


def test_composition_cells_of_tabs_and_utf_16_come_through(view: sqlite3.Connection) -> None:
    """Cr2O3 in per cent and precious metals in ppb become ppm."""
    reported = certificate_row("T506", "MD001-547")
    cells = row_of(view, "composition_sheet", "MD001-547")
    assert (cells["mgo_wt"], cells["s_wt"], cells["ni_ppm"]) == (reported["MgO"], reported["S"], reported["Ni"])
    assert cells["cr2o3_wt"] == reported["Cr2O3"]
    assert cells["pt_ppm"] == pytest.approx(float(reported["Pt"]) / 1e3, rel=1e-12)
    assert cells["sn_ppm"] is None and cells["feo_titrated_wt"] is None


def test_composition_cells_of_rows_in_odd_order_come_through(view: sqlite3.Connection) -> None:
    reported = certificate_row("B2231", "CD001-603")
    cells = row_of(view, "composition_sheet", "CD001-603")
    for analyte in ("Li", "Sn", "W", "Cs", "Rb"):
        assert cells[f"{analyte.lower()}_ppm"] == reported[analyte]
    assert (cells["f_wt"], cells["sio2_wt"]) == (reported["F"], reported["SiO2"])
    assert (cells["fe2o3t_wt"], cells["feo_titrated_wt"]) == (reported["Fe2O3"], reported["FeO"])
    methods = dict(
        view.execute("SELECT analyte, digestion FROM result_sheet WHERE sample_code = 'CD001-603'").fetchall()
    )
    assert (methods["Li"], methods["Sn"], methods["SiO2"]) == ("four_acid", "fusion", "xrf")


def test_composition_cells_of_the_workbook_come_through(view: sqlite3.Connection) -> None:
    reported = certificate_row("W77", "DD001-1003")
    cells = row_of(view, "composition_sheet", "DD001-1003")
    assert (cells["sio2_wt"], cells["loi_wt"]) == (reported["SiO2"], reported["LOI"])
    assert (cells["rb_ppm"], cells["li_ppm"]) == (reported["Rb"], reported["Li"])


def test_composition_cells_of_one_line_a_result_come_through(view: sqlite3.Connection) -> None:
    """Elements in per cent become oxides: Al2O3 = 1.8895 Al, MgO = 1.6583 Mg (IUPAC/CIAAW abridged masses)."""
    path = next(path for path in seed_demo.files() if path.stem == "results_Z19")
    reported = {
        row["Analyte"]: row["Result"]
        for row in csv.DictReader(io.StringIO(path.read_text("utf-8")))
        if row["Sample"] == "MD003-803"
    }
    results = {
        row[0]: row[1:]
        for row in view.execute(
            "SELECT analyte, value, unit, digestion FROM result_sheet WHERE sample_code = 'MD003-803'"
        )
    }
    assert results["Mg"] == (float(reported["Mg"]), "wt%", "four_acid")
    assert results["Ni"] == (float(reported["Ni"]), "ppm", "four_acid")
    cells = row_of(view, "composition_sheet", "MD003-803")
    assert cells["mgo_wt"] == pytest.approx(float(reported["Mg"]) * 40.304 / 24.305, rel=1e-5)
    assert cells["sio2_wt"] is None and cells["ni_ppm"] == float(reported["Ni"])


def test_total_sums_oxides_with_all_iron_ferric_and_loi(view: sqlite3.Connection) -> None:
    reported = certificate_row("A417", "Q005a")
    oxides = ("SiO2", "TiO2", "Al2O3", "Fe2O3T", "MnO", "MgO", "CaO", "Na2O", "K2O", "P2O5", "LOI")
    expected = sum(float(reported[name]) for name in oxides)
    assert row_of(view, "composition_sheet", "Q005a")["total_wt"] == pytest.approx(expected, abs=1e-9)


def test_volatile_free_silica_closes_the_split_analysis(view: sqlite3.Connection) -> None:
    """Eleven majors with titrated FeO, and Cr2O3, NiO, ZrO2 from ppm, closed to 100."""
    reported = {name: cell for name, cell in certificate_row("A417", "KD001-103").items() if isinstance(cell, float)}
    ferric = reported["Fe2O3T"] - FE2O3_PER_FEO * reported["FeO"]
    majors = sum(
        reported[name] for name in ("SiO2", "TiO2", "Al2O3", "FeO", "MnO", "MgO", "CaO", "Na2O", "K2O", "P2O5")
    )
    minor = 1e-4 * (
        reported["Cr"] * 151.989 / (2 * 51.996) + reported["Ni"] * 74.692 / 58.693 + reported["Zr"] * 123.222 / 91.224
    )
    cells = row_of(view, "volatile_free_sheet", "KD001-103")
    closed = majors + ferric + minor
    assert cells["sio2_vf_wt"] == pytest.approx(100.0 * reported["SiO2"] / closed, rel=1e-5)
    assert cells["fe2o3_vf_wt"] == pytest.approx(100.0 * ferric / closed, rel=1e-4)


def test_indices_follow_from_the_reported_cells(view: sqlite3.Connection) -> None:
    """Ratios by definition; Eu/Eu* = EuN / sqrt(SmN GdN) with CI chondrite of McDonough & Sun 1995."""
    reported = {name: cell for name, cell in certificate_row("A417", "KD001-103").items() if isinstance(cell, float)}
    cells = row_of(view, "index_sheet", "KD001-103")
    assert cells["sr_y"] == pytest.approx(reported["Sr"] / reported["Y"], rel=1e-9)
    assert cells["la_yb"] == pytest.approx(reported["La"] / reported["Yb"], rel=1e-9)
    potassium_ppm = 1e4 * reported["K2O"] * 2 * 39.098 / 94.195
    assert cells["k_rb"] == pytest.approx(potassium_ppm / reported["Rb"], rel=1e-5)
    europium = reported["Eu"] / 0.0563 / math.sqrt(reported["Sm"] / 0.148 * reported["Gd"] / 0.199)
    assert cells["eu_anomaly"] == pytest.approx(europium, rel=1e-6)
    magnesium, iron = reported["MgO"] / 40.304, reported["Fe2O3T"] / FE2O3_PER_FEO / 71.844
    assert cells["mg_number_total_iron"] == pytest.approx(100.0 * magnesium / (magnesium + iron), rel=1e-5)


def test_heat_production_follows_from_cells_and_measured_density(view: sqlite3.Connection) -> None:
    """A = 1e-5 rho (9.52 U + 2.56 Th + 3.48 K), Rybach 1988 (coefficients from memory)."""
    reported = {name: cell for name, cell in certificate_row("K88", "OD001-310").items() if isinstance(cell, float)}
    samples = next(path for path in seed_demo.files() if path.name == "samples.csv")
    rows = csv.DictReader(io.StringIO(samples.read_text(encoding="utf-8")))
    (sample,) = [row for row in rows if row["sample_code"] == "OD001-310"]
    potassium_wt = reported["K2O"] * 2 * 39.098 / 94.195
    expected = (
        1e-5 * float(sample["density_kg_m3"]) * (9.52 * reported["U"] + 2.56 * reported["Th"] + 3.48 * potassium_wt)
    )
    assert row_of(view, "melt_sheet", "OD001-310")["heat_production_uw_m3"] == pytest.approx(expected, rel=1e-4)


def test_altered_core_is_not_judged_by_its_lost_magnetite(view: sqlite3.Connection) -> None:
    series = dict(
        view.execute(
            "SELECT s.sample_code, c.redox_series FROM sample_sheet AS s JOIN class_sheet AS c USING (sample_id)"
            " WHERE s.site_code = 'KD001' AND s.from_m BETWEEN 118 AND 175 AND s.sample_kind = 'core'"
        ).fetchall()
    )
    assert len(series) >= 5
    assert "ilmenite" not in series.values()


def test_core_without_traces_names_what_is_missing(view: sqlite3.Connection) -> None:
    missing = {
        row[0]
        for row in view.execute(
            "SELECT missing FROM reason_sheet WHERE sample_code = 'KD001-121' AND target = 'porphyry_copper'"
            " AND outcome = 'unknown'"
        )
    }
    assert any(text and "y_ppm" in text for text in missing)


def test_demo_command_builds_the_same_views_and_reuses_them(registry: Path, tmp_path: Path) -> None:
    path = tmp_path / "demo.sqlite"
    run("demo", "--no-serve", "--registry", str(path))
    sheets = {}
    for place in (registry, path):
        connection = sqlite3.connect(place)
        sheets[place] = [
            connection.execute(f"SELECT * FROM {sheet} ORDER BY sample_code").fetchall()
            for sheet in ("composition_sheet", "index_sheet", "norm_sheet")
        ]
        connection.close()
    assert sheets[registry] == sheets[path]
    before = path.read_bytes()
    assert "again" in run("demo", "--no-serve", "--registry", str(path))
    assert path.read_bytes() == before


def test_demo_registry_passes_the_check(registry: Path, called: Callable[..., str]) -> None:
    called("check", "--registry", registry)


@pytest.mark.postgresql
def test_postgresql_holds_the_same_cells_and_verdicts(view: sqlite3.Connection, postgresql_demo: str) -> None:
    queries = (
        "SELECT sample_code, sr_y, k_rb, eu_anomaly, a_cnk FROM index_sheet ORDER BY sample_code",
        "SELECT sample_code, q_wt, ab_wt, an_wt, norm_total_wt FROM norm_sheet ORDER BY sample_code",
        "SELECT sample_code, target, verdict, score_min, score_max FROM verdict_sheet ORDER BY sample_code, target",
    )
    engine = sa.create_engine(postgresql_demo)
    with engine.connect() as connection:
        for query in queries:
            expected = sorted(tuple(row) for row in view.execute(query))
            found = sorted(tuple(row) for row in connection.exec_driver_sql(query))
            assert found == expected
    engine.dispose()


def test_check_passes_while_samples_wait_for_their_certificate(
    founded_registry_file: Path, tmp_path: Path, called: Callable[..., str]
) -> None:
    """Samples are entered when they are bagged; the results of half of them come weeks later."""
    path = shutil.copy(founded_registry_file, tmp_path / "waiting.sqlite")
    said = called("import", *seed_demo.files()[:7], "--registry", path)
    assert "nothing was computed or judged" in said
    called("check", "--registry", path)
    said = called("import", seed_demo.files()[7], "--registry", path)
    assert "Computed and judged 139 samples" in said
    called("check", "--registry", path)
    said = called("import", *seed_demo.files()[:7], "--registry", path)
    assert "nothing was computed or judged" in said


def test_import_counts_a_sample_of_two_certificates_once(imported: tuple[Path, str]) -> None:
    assert "Computed and judged 707 samples" in imported[1]


def test_upgrade_of_a_damaged_registry_says_so_and_leaves_it(demo_file: Path, tmp_path: Path) -> None:
    """INSERT OR REPLACE in another program gives a sample a new id and leaves its results without one."""
    path = Path(shutil.copy(demo_file, tmp_path / "damaged.sqlite"))
    client = sqlite3.connect(path)
    client.execute("INSERT OR REPLACE INTO sample (code, kind) VALUES ('KD001-103', 'core')")
    client.commit()
    client.close()
    done = subprocess.run(
        [sys.executable, "-m", "registry.cli", "upgrade", "--registry", str(path)],
        capture_output=True,
        text=True,
        cwd=ROOT,
    )
    assert done.returncode == 1
    assert "rows point at rows that are not there" in done.stderr and "INSERT OR REPLACE" in done.stderr
    assert "Traceback" not in done.stderr
    assert [each.name for each in tmp_path.iterdir() if "before" in each.name] == []
