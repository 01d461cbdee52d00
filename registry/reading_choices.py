"""How the command line has files read: a saved reading applied, proposed or kept, and what files do not state."""

from __future__ import annotations

from pathlib import Path
from typing import Any

from registry import reading_recipes
from registry.batching import digestion_named
from registry.errors import Problem, UsageError
from registry.intake import Reading, ReadingOptions, Recipe
from registry.intake.units import CANONICAL_UNITS, canonical_unit
from registry.store.engine import Registry


def reading_options(
    recipe: Recipe | None,
    unit: str | None = None,
    digestion: str | None = None,
    negative_means_below: bool = False,
    positive_dips: str | None = None,
) -> ReadingOptions:
    """The choices of a user as the intake takes them; UsageError for a unit or digestion that is not known."""
    if unit is not None and canonical_unit(unit) is None:
        raise UsageError(f"there is no unit '{unit}'; the units are {', '.join(CANONICAL_UNITS)}")
    return ReadingOptions(
        recipe=recipe,
        unit=unit,
        digestion=None if digestion is None else digestion_named(digestion),
        negative_means_below=negative_means_below,
        positive_dips=positive_dips,
    )


class Readings:
    """The readings of one import: read with a saved recipe, told of one that fits, or kept under a name.

    NotFound where ``recipe`` names none.
    """

    def __init__(self, registry: Registry, recipe: str | None = None, keep_as: str | None = None) -> None:
        self.registry, self.keep_as = registry, keep_as
        self.recipe = None if recipe is None else reading_recipes.find_recipe(registry, recipe)
        self._made: list[Recipe] = []

    def take(self, _path: Path, reading: Reading) -> Any:
        """Called with each reading before it is stored; ``understood`` then says which saved one was or could be used.

        UsageError where one is to be kept and a second table of results comes.
        """
        if reading.kind != "results" or reading.recipe is None:
            return
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
        recipe = reading_recipes.combined(self._made[0], self.recipe)
        replaced = reading_recipes.save_recipe(self.registry, self.keep_as, recipe)
        return [f"The reading '{self.keep_as}' {'was replaced' if replaced else 'is kept'}; --recipe applies it."]
