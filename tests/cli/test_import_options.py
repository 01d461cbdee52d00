"""The options of ``plutonbook import`` that say how files are read; every file is invented."""

from __future__ import annotations

import json
import shutil
from collections.abc import Callable
from pathlib import Path

import pytest

from registry.cli import main
from registry.intake import ColumnChoice
from registry.intake.recipes import ColumnCorrection
from registry.reading_choices import column_said

Run = Callable[..., tuple[int, str, str]]
NEGATIVE = "Sample,SiO2 (%),Cu (ppm)\nA,66,-0.5\nB,65,30\n"


@pytest.fixture
def run(founded_registry_file: Path, tmp_path: Path, capsys: pytest.CaptureFixture) -> Run:
    registry = Path(shutil.copy(founded_registry_file, tmp_path / "registry.sqlite"))

    def called(command: str, *arguments: object) -> tuple[int, str, str]:
        with pytest.raises(SystemExit) as ended:
            main([command, *map(str, arguments), "--registry", str(registry)])
        captured = capsys.readouterr()
        return int(ended.value.code or 0), captured.out, captured.err

    return called


@pytest.fixture
def file(tmp_path: Path) -> Callable[[str, str], Path]:
    def written(name: str, text: str) -> Path:
        path = tmp_path / name
        path.write_text(text)
        return path

    return written


def test_negative_number_is_refused_and_the_option_named_that_reads_it_as_below(run: Run, file: Callable) -> None:
    path = file("C-1.csv", NEGATIVE)
    code, _, errors = run("import", path, "--create-samples")
    assert code == 1
    assert "use --negative-means-below" in errors
    code, printed, _ = run("import", path, "--create-samples", "--negative-means-below", "--dry-run")
    assert code == 0
    assert "4 results (1 censored)" in printed


def test_reading_is_kept_proposed_for_the_same_headings_and_applied(run: Run, file: Callable) -> None:
    first, second = file("C-1.csv", NEGATIVE.replace("-0.5", "0.5")), file("C-2.csv", NEGATIVE.replace("-0.5", "0.6"))
    code, printed, _ = run(
        "import", first, "--create-samples", "--digestion", "Four-acid", "--save-recipe", "our lab"
    )  # fmt: skip
    assert (code, printed.splitlines()[-1]) == (0, "The reading 'our lab' is kept; --recipe applies it.")
    assert "Cu in ppm, four acid" in printed

    _, printed, _ = run("import", second, "--dry-run")
    assert "a saved reading was made for exactly these headings: --recipe 'our lab' applies it" in printed
    assert "Cu in ppm, digestion not told" in printed

    _, printed, _ = run("import", second, "--dry-run", "--recipe", "our lab")
    assert "read with the saved reading 'our lab'" in printed
    assert "Cu in ppm, four acid" in printed


def test_saved_reading_is_proposed_where_the_file_is_refused(run: Run, file: Callable) -> None:
    run("import", file("C-1.csv", NEGATIVE), "--create-samples", "--negative-means-below", "--save-recipe", "our lab")
    code, _, errors = run("import", file("C-2.csv", NEGATIVE.replace("66", "166")), "--create-samples")
    assert code == 1
    assert "--recipe 'our lab' applies it" in errors


def test_saved_reading_of_other_headings_is_applied_and_said_to_be_of_others(run: Run, file: Callable) -> None:
    run("import", file("C-1.csv", NEGATIVE), "--create-samples", "--negative-means-below", "--save-recipe", "our lab")
    other = file("C-2.csv", "Sample,Zr (ppm)\nA,180\n")
    _, printed, _ = run("import", other, "--recipe", "our lab", "--dry-run")
    assert "which was made for other headings" in printed


@pytest.mark.parametrize(
    ("options", "code", "words"),
    [
        (["--recipe", "nothing"], 1, "there is no saved reading 'nothing'"),
        (["--digestion", "vinegar"], 2, "there is no digestion 'vinegar'; the digestions are fusion"),
        (["--unit", "stones"], 2, "there is no unit 'stones'"),
        (["--save-recipe", "x", "--dry-run"], 2, "--save-recipe and --dry-run exclude each other"),
    ],
)
def test_choice_that_cannot_be_used_ends_with_a_sentence(
    run: Run, file: Callable, options: list[str], code: int, words: str
) -> None:
    found, _, errors = run("import", file("C-1.csv", NEGATIVE), *options)
    assert found == code
    assert words in errors


def test_positive_dips_are_turned_on_the_users_word(run: Run, file: Callable) -> None:
    run("import", file("sites.csv", "site_code,site_kind,longitude,latitude,depth_m\nH1,drill_hole,16,49,200\n"))
    surveys = file("surveys.csv", "site_code,depth_m,azimuth_deg,dip_deg\nH1,0,90,60\n")
    code, _, errors = run("import", surveys)
    assert code == 1
    assert "--positive-dips" in errors
    code, printed, _ = run("import", surveys, "--positive-dips", "down")
    assert code == 0
    assert "their signs are turned" in printed


def test_problems_stand_before_the_remarks_which_are_called_so(run: Run, file: Callable) -> None:
    _, _, errors = run("import", file("C-1.csv", NEGATIVE.replace("30", "bdl")), "--create-samples")
    lines = errors.splitlines()
    assert "Cu is negative" in lines[0]
    assert all(line.startswith("remark: ") for line in lines[1:-1])
    assert lines[-1].startswith("plutonbook: 1 problem, ")
    assert lines[-1].endswith("nothing was written.")


def test_report_as_json_says_what_was_understood_of_every_column(run: Run, file: Callable) -> None:
    _, printed, _ = run("import", file("C-1.csv", NEGATIVE.replace("-", "<")), "--create-samples", "--json")
    report = json.loads(printed)
    assert [column["use"] for column in report["files"][0]["columns"]] == ["sio2_wt", "cu_ppm"]
    assert any("column 'Cu (ppm)' is Cu in ppm" in sentence for sentence in report["files"][0]["understood"])


def test_remarks_of_the_registry_are_printed_with_those_of_the_file(run: Run, file: Callable) -> None:
    run("import", file("areas.csv", "area,epsg\nNorth Block,32719\n"))
    text = "site_code,site_kind,area,longitude,latitude\nP-1,outcrop,North Block,-23.95,-69.49\n"
    code, printed, _ = run("import", file("sites.csv", text), "--dry-run")
    assert code == 0
    assert "remark: sites.csv, row 2, column 'longitude': the site lies where the coordinate system" in printed
    assert "whether longitude and latitude are exchanged" in printed


UNKNOWN = 'Bag,Lab no,SiO2 (%),Zirconia,a=b,Cu (ppm)\nA,1,66,0.02,5,"1,234"\nB,2,65,0.03,6,-3\n'


def test_columns_and_signs_are_corrected_kept_and_applied_to_the_same_shape(run: Run, file: Callable) -> None:
    said = ["--column", "Zirconia=ZrO2 wt% fusion method bead 7", "--column", "a=b=Zn ppm four-acid"]
    said += ["--column", "#6=aqua regia", "--column", "bag = sample code", "--decimal", "point", "--thousands", "comma"]
    code, printed, errors = run(
        "import", file("C-1.csv", UNKNOWN), "--create-samples", "--negative-means-below", *said, "--save-recipe", "x"
    )  # fmt: skip
    assert code == 0, errors
    assert "ZrO2 in wt%, bead 7 (fusion)" in printed
    assert "Zn in ppm, four acid" in printed and "Cu in ppm, aqua regia" in printed
    second = file("C-2.csv", UNKNOWN.replace("66", "67"))
    _, printed, errors = run("import", second, "--dry-run")
    assert "--recipe 'x' applies it" in errors
    code, printed, errors = run("import", second, "--dry-run", "--recipe", "x", "--verbose")
    assert code == 0, errors
    assert "column 'Zirconia' is ZrO2 in wt%, method bead 7, fusion" in printed
    assert "column 'a=b' is Zn in ppm, four acid" in printed
    assert "negative numbers mean below the limit" in printed and "decimal sign: point, as was said" in printed
    assert "sample codes come from column 'Bag'" in printed
    assert "mark of thousands" not in printed
    _, printed, _ = run("import", second, "--dry-run", "--recipe", "x", "--column", "Zirconia=ignore")
    assert "ZrO2" not in printed and "Zn in ppm" in printed


def test_column_that_the_file_does_not_have_lists_those_it_has(run: Run, file: Callable) -> None:
    code, _, errors = run("import", file("C-1.csv", UNKNOWN), "--create-samples", "--column", "Zirkonia=ZrO2 wt%")
    assert code == 1
    assert "the file has no such column; found 'Zirkonia', expected one of 'Zirconia', 'Bag', 'Lab no'" in errors


def test_column_of_one_of_several_files_is_no_fault_of_the_others(run: Run, file: Callable) -> None:
    first, second = file("C-1.csv", "Sample,Cu (ppm)\nA,5\n"), file("C-2.csv", "Sample,Zn (ppm)\nA,5\n")
    said = ["--create-samples", "--column", "Zn (ppm)=xrf", "--column", "Cu (ppm)=fusion"]
    code, printed, errors = run("import", first, second, *said, "--keep-going")
    assert code == 0, errors
    assert "Cu in ppm, fusion" in printed and "Zn in ppm, xrf" in printed
    code, _, errors = run("import", first, second, *said, "--column", "Pb=ppm")
    assert code == 1 and errors.count("found 'Pb'") == 2 and "found 'Zn" not in errors


@pytest.mark.parametrize(
    ("said", "words"),
    [
        ("Zirconia", "does not say what a column is; write HEADING=WHAT IT IS"),
        ("=Zr", "does not say what a column is"),
        ("Zr=", "does not say what a column is"),
        ("x=Zr9 ppm", "'Zr9' is no analyte (such as SiO2, Fe2O3T, Zr), no unit (wt%, ppm, ppb, ppt, oz/t) and no"),
        ("x=Zr stones", "'stones' is no analyte"),
        ("x=Zr ppm ICP", "'ICP' is no analyte"),
        ("x=Zr Hf", "says two analytes, Zr and Hf"),
        ("x=ppm %", "says two units, ppm and wt%"),
        ("x=Zr method", "no method stands after the word method"),
    ],
)
def test_column_said_in_words_that_are_not_understood_ends_with_what_can_be_said(
    run: Run, file: Callable, said: str, words: str
) -> None:
    code, _, errors = run("import", file("C-1.csv", UNKNOWN), "--column", said)
    assert code == 2
    assert words in errors


def test_sign_with_two_meanings_is_refused(run: Run, file: Callable) -> None:
    code, _, errors = run("import", file("C-1.csv", UNKNOWN), "--decimal", "comma", "--thousands", "comma")
    assert code == 2 and "cannot both be the comma" in errors


@pytest.mark.parametrize(
    ("said", "choice"),
    [
        ("Au=Au, ppb, fire-assay", ColumnChoice("Au", "ppb", None, "fire_assay")),
        ("Au=total S wt %", ColumnChoice("S", "wt%")),
        ("Au=Fe2O3 total", ColumnChoice("Fe2O3T")),
        ("Au=method a, b: XRF", ColumnChoice(method="a, b: XRF")),
        ("Au=ppm Method: portable", ColumnChoice(unit="ppm", method="portable")),
        ("Au=Unknown", ColumnChoice(digestion="unknown")),
        ("Au=IGNORE", ColumnChoice(ignore=True)),
        ("Au=sample_code", None),
    ],
)
def test_column_said_in_words_is_understood(said: str, choice: ColumnChoice | None) -> None:
    assert column_said(said) == ColumnCorrection("Au", choice)
