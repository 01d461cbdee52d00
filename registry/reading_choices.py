"""How the command line has files read: a saved reading applied, proposed or kept, and what files do not state."""

from __future__ import annotations

import re
from collections.abc import Sequence
from pathlib import Path
from typing import Any

from registry import reading_recipes
from registry.batching import DIGESTION_NAMES, digestion_named
from registry.errors import Problem, UsageError
from registry.intake import ColumnChoice, Reading, ReadingOptions, Recipe
from registry.intake.corrections import NO_SUCH_COLUMN
from registry.intake.names import analyte_symbol
from registry.intake.recipes import ColumnCorrection
from registry.intake.units import CANONICAL_UNITS, canonical_unit
from registry.intake_choices import DECIMALS, SEPARATORS, THOUSANDS
from registry.store.engine import Registry


def reading_options(
    recipe: Recipe | None,
    unit: str | None = None,
    digestion: str | None = None,
    negative_means_below: bool = False,
    positive_dips: str | None = None,
    columns: Sequence[str] = (),
    decimal: str | None = None,
    thousands: str | None = None,
    separator: str | None = None,
    sheet: str | None = None,
) -> ReadingOptions:
    """The choices of a user as the intake takes them, signs by their names.

    UsageError for a unit, digestion or column that cannot be understood, and for one sign with two meanings.
    """
    if unit is not None and canonical_unit(unit) is None:
        raise UsageError(f"there is no unit '{unit}'; the units are {', '.join(CANONICAL_UNITS)}")
    if decimal is not None and decimal == thousands:
        raise UsageError(f"--decimal and --thousands cannot both be the {decimal}: one sign, one meaning")
    return ReadingOptions(
        recipe=recipe,
        sheet=sheet,
        unit=None if unit is None else canonical_unit(unit),
        digestion=None if digestion is None else digestion_named(digestion),
        negative_means_below=negative_means_below,
        positive_dips=positive_dips,
        columns=tuple(map(column_said, columns)),
        decimal=None if decimal is None else DECIMALS[decimal],
        thousands=None if thousands is None else THOUSANDS[thousands],
        separator=None if separator is None else SEPARATORS[separator],
    )


def column_said(text: str) -> ColumnCorrection:
    """A correction from ``HEADING=WHAT IT IS``; the last ``=`` parts the two.

    What it is: ``ignore``, ``sample code``, or any of an analyte, a unit and a digestion, in any order, and after the
    word ``method`` the method. UsageError with what can be said where something else is.
    """
    column, sign, said = (part.strip() for part in text.rpartition("="))
    if not sign or not column or not said:
        raise UsageError(
            f"--column '{text}' does not say what a column is; write HEADING=WHAT IT IS, as in 'Au=Au ppb fire assay', "
            "'#7=Zr ppm', 'Remarks=ignore' or 'Field No=sample code'"
        )
    folded = " ".join(said.casefold().replace("_", " ").split())
    if folded in ("ignore", "sample code"):
        return ColumnCorrection(column, ColumnChoice(ignore=True) if folded == "ignore" else None)
    stated = re.search(r"(?i)(?:^|\s)method(?:[:\s]+(?P<method>.*)|$)", said)
    method = stated and (stated["method"] or "").strip()
    if method == "":
        raise UsageError(f"--column '{text}': no method stands after the word method")
    words = said[: stated.start()] if stated else said
    found: dict[str, str] = {}
    rest = words.replace(",", " ").split()
    while rest:
        length, what, value = _understood(rest, text)
        if what in found:
            raise UsageError(f"--column '{text}' says two {_MANY[what]}, {found[what]} and {value}; a column has one")
        found[what], rest = value, rest[length:]
    choice = ColumnChoice(found.get("analyte"), found.get("unit"), method, found.get("digestion"))
    return ColumnCorrection(column, choice)


_MANY = {"analyte": "analytes", "unit": "units", "digestion": "digestions"}


def _understood(words: Sequence[str], text: str) -> tuple[int, str, str]:
    """How many of the first words say one thing, what it is, and its name in the register."""
    for length in range(min(4, len(words)), 0, -1):
        run = " ".join(words[:length])
        digestion = "_".join(run.casefold().replace("-", " ").replace("_", " ").split())
        if (unit := canonical_unit(run)) is not None:
            return length, "unit", unit
        if digestion in DIGESTION_NAMES:
            return length, "digestion", digestion
        if (analyte := analyte_symbol(run)) is not None:
            return length, "analyte", analyte
    raise UsageError(
        f"--column '{text}': '{words[0]}' is no analyte (such as SiO2, Fe2O3T, Zr), no unit "
        f"({', '.join(CANONICAL_UNITS)}) and no digestion ({', '.join(DIGESTION_NAMES)}) that the register knows; "
        "'ignore' and 'sample code' stand alone, and the name of a method stands after the word method"
    )


class Readings:
    """The readings of one import: read with a saved recipe, told of one that fits, or kept under a name.

    NotFound where ``recipe`` names none.
    """

    def __init__(self, registry: Registry, recipe: str | None = None, keep_as: str | None = None) -> None:
        self.registry, self.keep_as = registry, keep_as
        self.recipe = None if recipe is None else reading_recipes.find_recipe(registry, recipe)
        self._made: list[Recipe] = []
        self._taken: list[Reading] = []

    def take(self, _path: Path, reading: Reading) -> Any:
        """Called with each reading before it is stored; ``understood`` then says which saved one was or could be used.

        UsageError where one is to be kept and a second table of results comes.
        """
        if reading.kind != "results" or reading.recipe is None:
            return
        self._taken.append(reading)
        _excuse_columns_of_others(self._taken)
        self._made.append(reading.recipe)
        if self.keep_as is not None and len(self._made) > 1:
            raise UsageError("--save-recipe keeps the reading of one table of results; import the others by themselves")
        if self.recipe is not None:
            fits = self.recipe.fits(reading.recipe.shape)
            doubt = "" if fits else ", which was made for other headings: what it does not name is read as it stands"
            reading.understood.insert(0, f"read with the saved reading '{self.recipe.name}'{doubt}")
            return
        names = reading_recipes.proposed_names(self.registry, reading.recipe.shape)
        if names:
            listed = " or ".join(f"'{name}'" for name in names)
            said = f"a saved reading was made for exactly these headings: --recipe {listed} applies it"
            reading.understood.insert(0, said)
            if not reading.ok:
                reading.problems.insert(0, Problem(reading.file, said, severity="warning"))

    def save(self) -> list[str]:
        """Keep the reading where that was asked for; a sentence on it."""
        if self.keep_as is None:
            return []
        if not self._made:
            raise UsageError("--save-recipe: no table of results was read, so there is no reading to keep")
        replaced = reading_recipes.save_recipe(self.registry, self.keep_as, self._made[0])
        return [f"The reading '{self.keep_as}' {'was replaced' if replaced else 'is kept'}; --recipe applies it."]


def _excuse_columns_of_others(readings: Sequence[Reading]) -> None:
    """A column that one of several tables has is no fault of the others, which have it not."""
    missing = [
        {problem.found: problem for problem in reading.problems if problem.what == NO_SUCH_COLUMN}
        for reading in readings
    ]
    everywhere = set.intersection(*map(set, missing))
    for reading, faults in zip(readings, missing, strict=True):
        excused = [fault for name, fault in faults.items() if name not in everywhere]
        if excused:
            reading.problems = [problem for problem in reading.problems if problem not in excused]
            whole = [problem for problem in reading.problems if problem.row is None and problem.severity == "problem"]
            reading.whole_file_refused = bool(whole)
