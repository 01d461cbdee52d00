"""Numbers as a person reads them: digits as reported, three significant for derived ones, one column on its points."""

from __future__ import annotations

from collections.abc import Sequence

from flask import Flask

FIGURE_SPACE, POINT_SPACE = "\N{FIGURE SPACE}", "\N{PUNCTUATION SPACE}"
MINUS, TIMES = "\N{MINUS SIGN}", "\N{MULTIPLICATION SIGN}"
_SUPERSCRIPTS = str.maketrans("0123456789-", "⁰¹²³⁴⁵⁶⁷⁸⁹⁻")


def reported(value: float | None) -> str:
    """A stored number with the digits it came with; empty for None."""
    if value is None:
        return ""
    if isinstance(value, int):
        return str(value).replace("-", MINUS)
    if value != 0 and not 1e-5 <= abs(value) < 1e15:
        return _scientific(value)
    spelled = f"{value:.10f}".rstrip("0").rstrip(".") if abs(value) < 1e5 else f"{value:.15g}"
    return ("0" if spelled == "-0" else spelled).replace("-", MINUS)


def _scientific(value: float) -> str:
    mantissa, _, exponent = f"{value:.2e}".partition("e")
    return f"{mantissa} \N{MULTIPLICATION SIGN} 10{str(int(exponent)).translate(_SUPERSCRIPTS)}".replace("-", MINUS)


def derived(value: float | None, unit: str = "1") -> str:
    """A computed number: temperatures whole, mass per cent to two decimals, all else to three significant digits."""
    if value is None:
        return ""
    if value == 0:
        return "0"
    if unit in ("°C", "C", "degC", "K"):
        return f"{value:.0f}".replace("-", MINUS)
    if unit in ("wt%", "%", "cat%"):
        return (f"{value:.2f}" if abs(value) >= 0.005 else "0.00").replace("-", MINUS)
    if not 1e-3 <= abs(value) < 1e7:
        return _scientific(value)
    decimals = max(0, 2 - int(f"{value:.2e}".partition("e")[2]))
    return f"{value:.{decimals}f}".replace("-", MINUS)


def aligned(cells: Sequence[str]) -> list[str]:
    """Cells padded on the right with digit-wide spaces, so that right-aligned they stand on the decimal point."""
    ends = [len(cell) - cell.index(".") if "." in cell and TIMES not in cell else 0 for cell in cells]
    widest = max(ends, default=0)
    padded = []
    for cell, end in zip(cells, ends, strict=True):
        missing = widest - end
        point = POINT_SPACE if end == 0 and widest and TIMES not in cell else ""
        padded.append(cell + point + FIGURE_SPACE * max(0, missing - len(point)) if cell else cell)
    return padded


def counted(number: int, one: str, many: str | None = None) -> str:
    """A number with its noun: ``1 sample``, ``412 samples``, thousands set apart by a thin space."""
    return f"{grouped(number)} {one if number == 1 else many or one + 's'}"


def grouped(number: int) -> str:
    """A whole number with its thousands set apart."""
    return f"{number:,}".replace(",", "\N{NARROW NO-BREAK SPACE}")


def register(app: Flask) -> None:
    """Make the spellings known to the templates."""
    app.jinja_env.filters.update(reported=reported, derived=derived, grouped=grouped)
    app.jinja_env.globals.update(counted=counted)
