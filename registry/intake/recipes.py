"""Reading recipes: what was understood of a file, saved so that the same shape is read the same way again."""

from __future__ import annotations

import json
from dataclasses import asdict, dataclass, field, fields
from pathlib import Path
from typing import Any

from registry.errors import PlutonbookError


class RecipeFault(PlutonbookError):
    """A saved recipe cannot be read."""


@dataclass(frozen=True)
class ColumnChoice:
    """What one column is. A field left None keeps what the intake understands by itself."""

    analyte: str | None = None
    unit: str | None = None
    method: str | None = None
    digestion: str | None = None
    ignore: bool = False


@dataclass(frozen=True)
class ColumnCorrection:
    """What one column is. ``column``: its heading, or ``#7`` for the seventh; ``choice`` None: the sample codes."""

    column: str
    choice: ColumnChoice | None


@dataclass(frozen=True)
class Recipe:
    """How a results file of one shape is read.

    ``shape`` is the tuple of the file's column headings; ``columns`` maps a heading (of a column without one ``#``
    and its number) to the choice for it; ``sample_header`` names the column of the sample codes. ``decimal`` and
    ``thousands`` are signs (``thousands`` empty: none is allowed); ``unit`` and ``digestion`` are those of columns
    that state none.
    """

    name: str = ""
    shape: tuple[str, ...] = ()
    columns: dict[str, ColumnChoice] = field(default_factory=dict)
    sample_header: str | None = None
    separator: str | None = None
    decimal: str | None = None
    unit: str | None = None
    digestion: str | None = None
    thousands: str | None = None
    negative_means_below: bool = False

    def fits(self, shape: tuple[str, ...]) -> bool:
        """Whether a file with these headings has the shape that this recipe was made for."""
        return bool(self.shape) and self.shape == shape

    def to_json(self) -> str:
        return json.dumps(asdict(self), ensure_ascii=False, indent=1, sort_keys=True)

    @classmethod
    def from_json(cls, text: str) -> Recipe:
        """Read a saved recipe; raises RecipeFault with a sentence when it is not one."""
        try:
            found: Any = json.loads(text)
            choices = {str(heading): ColumnChoice(**choice) for heading, choice in found.pop("columns", {}).items()}
            found["shape"] = tuple(found.get("shape", ()))
            recipe = cls(columns=choices, **found)
        except (ValueError, TypeError, AttributeError) as fault:
            known = ", ".join(item.name for item in fields(cls))
            raise RecipeFault(
                f"this is not a reading recipe ({fault}); a recipe is a JSON object with {known}"
            ) from fault
        return recipe

    def save(self, path: Path) -> None:
        path.write_text(self.to_json() + "\n", encoding="utf-8")

    @classmethod
    def load(cls, path: Path) -> Recipe:
        return cls.from_json(path.read_text(encoding="utf-8"))
