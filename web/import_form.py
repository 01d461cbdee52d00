"""The import form: from what a person sent to the choices of a draft, and from a draft to what the page shows."""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import replace
from typing import Any

from werkzeug.datastructures import MultiDict

from registry.batching import WEIGHED
from registry.import_drafts import Draft, DraftFile
from registry.intake_choices import (
    KIND_NAMES,
    THOUSANDS,
    ColumnWish,
    corrected_recipe,
    ignored_columns,
    of_whole_file,
    recipe_from,
    recipe_of_table,
    recipe_text,
    unread_columns,
)

SEPARATORS = {"": "as understood", ",": "comma", ";": "semicolon", "\t": "tab", "|": "vertical bar"}
DECIMALS = {"": "as understood", ".": "point", ",": "comma"}
THOUSANDS_WORDS = {"": "as understood", **{name: name for name in THOUSANDS}, "none": "none; it is a fault"}
DIPS = {"": "negative, as is usual", "down": "positive downwards (they are turned)", "up": "positive upwards"}
#: What the command line calls a thing, and where it stands on this page.
_PAGE_WORDS = (
    (re.compile(r"use --add-to (.+?)(?=, else|$)"), r"choose “a further part of” \1 below"),
    (re.compile(r"use --supersede"), "choose “it corrects an earlier certificate” below"),
    (re.compile(r"use --create-samples( to add it with the kind 'unknown')?"), "tick “Add unknown samples” below"),
    (re.compile(r"use --negative-means-below"), "tick “Negative numbers mean below” under “How it was understood”"),
    (re.compile(r"use --positive-dips down or up"), "choose under “Dips”"),
    (re.compile(r"name it with --column"), "choose it under “Sample codes are in”"),
    (re.compile(r"(with --digestion or )?with --column"), "in the columns below"),
    (re.compile(r"see --column"), "see the columns below"),
    (re.compile(r"with --decimal"), "under “Decimal sign”"),
    (re.compile(r"correct the recipe"), "correct it in the columns below"),
    (re.compile(r"name the kind when importing the file"), "choose under “What it holds”"),
    (re.compile(r"name the one to read"), "choose it under “Sheet or part”"),
    (re.compile(r"--add-to names"), "this is to be added to"),
    (re.compile(r"name the batch that this file corrects with --batch"), "choose the one that it corrects below"),
    (re.compile(r"--supersede: "), "nothing to correct: "),
    (re.compile(r"without --supersede"), "as a certificate of its own"),
    (re.compile(r"with --batch|--batch"), "under “Batch code” below"),
    (re.compile(r"'plutonbook batches' lists the batches"), "see under Batches"),
    (re.compile(r"use 'plutonbook restore-batch (.+?)' to let it count again"), r"restore batch \1 on its page"),
)


def page_words(text: str | None) -> str:
    """A sentence of the import with the options of the command line said as the fields of the page."""
    text = text or ""
    for pattern, words in _PAGE_WORDS:
        text = pattern.sub(words, text)
    return text[:1].upper() + text[1:]


def take_options(draft: Draft, form: Mapping[str, str]) -> bool:
    """Put the options of the form into the draft; True if any is another than before."""
    place = form.get("place", "new")
    options = {
        "batch": form.get("batch", "").strip() or None,
        "lab": form.get("lab", "").strip() or None,
        "code_prefix": form.get("code_prefix", "").strip(),
        "create_samples": "create_samples" in form,
        "keep_going": "keep_going" in form,
        "supersede": place == "supersede",
        "corrects": (form.get("corrects") or None) if place == "supersede" else None,
        "add_to": (form.get("add_to") or None) if place == "add" else None,
    }
    changed = any((draft.options.get(name) or None) != (value or None) for name, value in options.items())
    draft.options = options
    return changed


def table_key(number: int, table: int) -> str:
    """What the fields of one table of one file end in."""
    return str(number) if table == 0 else f"{number}.{table}"


def take_choices(file: DraftFile, number: int, form: MultiDict[str, str]) -> bool:
    """Put what the form says of one file into it; True if anything is another than shown."""
    if f"file-{number}" not in form:
        return False
    before = (file.kind, file.recipe, file.sheet, file.negative_means_below, file.positive_dips, file.unit)
    if f"kind-{number}" in form:
        kind = form.get(f"kind-{number}")
        kind = kind if kind in KIND_NAMES else None
        if len(file.looked) != 1 or kind != file.looked[0]["kind"]:
            file.kind = kind
    sheet = form.get(f"sheet-{number}") or None
    if sheet != file.sheet:
        file.sheet, file.recipe, file.recipe_name = sheet, None, None
    file.negative_means_below = f"negative-{number}" in form
    file.positive_dips = form.get(f"dips-{number}") or None
    file.unit = form.get(f"unit-{number}") or None
    if sheet == before[2]:
        _take_recipe(file, number, form)
    return before != (
        file.kind, file.recipe, file.sheet, file.negative_means_below, file.positive_dips, file.unit,
    )  # fmt: skip


def _take_recipe(file: DraftFile, number: int, form: MultiDict[str, str]) -> None:
    wishes, given_up, changed = [], [], False
    for table in range(len(file.looked)):
        key = table_key(number, table)
        said = {column["header"]: column for column in shown_columns(file, table)}
        unread = {column["header"]: column for column in spare_columns(file, table)}
        for wish in _wishes(key, form):
            column = said.get(wish.header) or unread.get(wish.header)
            if wish.header in unread and not wish.analyte:
                continue  # it stays what it is, no result
            if column is not None and column["analyte"] and not wish.analyte and not wish.ignore:
                given_up.append(wish.header)  # what was said of it counts no more
                continue
            if column is not None and (wish.header in unread or wish.method != column["method"]):
                wish = _digestion_of_method(wish)
            wishes.append(wish)
            changed |= column is None or (wish.analyte, wish.unit, wish.method, wish.digestion, wish.ignore) != (
                column["analyte"], column["unit"], column["method"], column["digestion"], column["ignore"],
            )  # fmt: skip
    recipe = current_recipe(file)
    shown = {
        "sample_header": code_column(file), "separator": recipe.separator or "", "decimal": recipe.decimal or "",
        "thousands": thousands_name(recipe),
    }  # fmt: skip
    offered = {"separator": SEPARATORS, "decimal": DECIMALS, "thousands": THOUSANDS_WORDS}
    wanted = {name: form.get(f"{name}-{number}", shown[name]) for name in shown}
    wanted |= {name: shown[name] for name, signs in offered.items() if wanted[name] not in signs}
    if changed or given_up or wanted != shown:
        if len(file.looked) > 1 and wanted["sample_header"] == shown["sample_header"]:
            wanted["sample_header"] = ""  # each table has a column of its own
        file.recipe = recipe_text(corrected_recipe(recipe, wishes, given_up, **wanted))


def _digestion_of_method(wish: ColumnWish) -> ColumnWish:
    """A column whose method was stated anew: its digestion, if it is not known, is read from the method."""
    return replace(wish, digestion="") if wish.digestion == "unknown" else wish


def thousands_name(recipe: Any) -> str:
    """What the sign of thousands of a recipe is called, empty where none is said."""
    return next((name for name, sign in THOUSANDS.items() if sign == recipe.thousands), "")


def _wishes(key: str, form: MultiDict[str, str]) -> Iterator[ColumnWish]:
    """What the form says of the columns of one table."""
    fill = form.get(f"fill-{key}", "")
    fields = ("header", "analyte", "unit_of", "method", "digestion", "which")
    rows = zip(*(form.getlist(f"{field}-{key}") for field in fields), strict=False)
    for header, analyte, unit, method, digestion, which in rows:
        if digestion == "unknown" and fill and analyte.strip() not in WEIGHED:
            digestion = fill
        yield ColumnWish(header, analyte.strip(), unit, method.strip(), digestion, f"ignore-{key}-{which}" in form)


def current_recipe(file: DraftFile, table: int | None = None) -> Any:
    """The recipe that a file, or one of its tables, was last read with, completed by what was understood."""
    if table is not None:
        recipe = recipe_of_table(file.looked[table], file.recipe)
    else:
        recipe = recipe_from([looked["recipe"] for looked in file.looked if looked["recipe"]], file.recipe)
    return of_whole_file(recipe, file.unit, file.negative_means_below)


def code_column(file: DraftFile) -> str:
    return next((looked["sample_header"] for looked in file.looked if looked["sample_header"]), "")


def shown_columns(file: DraftFile, table: int) -> list[dict[str, Any]]:
    """The columns of a table of results as the page lists them: those read, then those left out."""
    looked = file.looked[table]
    return list(looked["columns"]) + ignored_columns(file.recipe, looked)


def spare_columns(file: DraftFile, table: int) -> list[dict[str, Any]]:
    """The other columns of a table of results: a person can make results of them."""
    return unread_columns(file.looked[table], shown_columns(file, table))


def heading_words(header: str) -> str:
    """What a column is called on the page: its heading, or its number where it has none."""
    return f"column {header[1:]}, without heading" if re.fullmatch(r"#\d+", header) else header or "without heading"


def grouped_problems(problems: Sequence[Mapping[str, Any]]) -> list[dict[str, Any]]:
    """Equal faults together: what, what was expected and what to do once, and each place with what was found there."""
    groups: dict[tuple[Any, ...], dict[str, Any]] = {}
    for problem in problems:
        key = (problem["severity"], problem["what"], problem["expected"], problem["remedy"])
        group = groups.setdefault(
            key,
            {
                "severity": problem["severity"],
                "what": page_words(problem["what"]),
                "expected": problem["expected"],
                "remedy": page_words(problem["remedy"]),
                "places": [],
            },
        )
        place = {name: problem[name] for name in ("row", "column", "found")}
        if any(value is not None for value in place.values()):
            group["places"].append(place)
    return list(groups.values())


def problems_of(draft: Draft, file: DraftFile, severity: str) -> list[dict[str, Any]]:
    """The faults of one file, those found on reading it and those found on storing it, grouped."""
    looked = [problem for table in file.looked for problem in table["problems"]]
    stored = [problem for problem in draft.problems if _is_of(problem["file"], file.name)]
    every = looked + [problem for problem in stored if problem not in looked]
    return grouped_problems([problem for problem in every if problem["severity"] == severity])


def precedence_words(report: Mapping[str, Any]) -> list[str]:
    """Which results go before which, in sentences: of several columns of the file, and against earlier batches."""
    told = []
    for one in report.get("alternatives", ()):
        taken = ", ".join(
            f"“{header}” in {number:,} {'line' if number == 1 else 'lines'}" for header, number in one["taken"].items()
        )
        told.append(f"Several columns for {one['column']}: taken from {taken}.")
    groups: dict[tuple[bool, str, str], list[str]] = {}
    for one in report.get("precedence", ()):
        named = f"{one['column']} ({one['samples']:,} {'sample' if one['samples'] == 1 else 'samples'})"
        groups.setdefault((one["replaced"], one["earlier"], one["later"]), []).append(named)
    for (replaced, earlier, later), names in groups.items():
        said = f"{later} replaces {earlier}" if replaced else f"{earlier} stays before {later}"
        more = f" and {len(names) - 12} more" if len(names) > 12 else ""
        told.append(f"{said[:1].upper()}{said[1:]}: {', '.join(names[:12])}{more}.")
    return told


def other_problems(draft: Draft) -> list[dict[str, Any]]:
    """Faults that name none of the files."""
    return grouped_problems(
        [p for p in draft.problems if not any(_is_of(p["file"], file.name) for file in draft.files)]
    )


def _is_of(named: str, file: str) -> bool:
    return named == file or named.startswith(f"{file} [")
