"""What is known of a quantity: a point, an interval with open ends, or nothing.

``<L`` is [0, L) with its upper end open; ``>L`` is (L, inf); a value of a partial digestion is [v, inf), for the
residue was not measured; ``<L`` of a partial digestion says nothing. Ratios are divided end by end. Other derived
quantities are points as computed.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from registry.petrology.analytes import CHOSEN_INDEX, QUALIFIER_ABOVE, QUALIFIER_BELOW
from registry.petrology.conventions import Conventions
from registry.petrology.digestion import CARRIES, FOUR_ACID, MINIMUM, NONE, REFUSED, UNKNOWN, UNKNOWN_WITHOUT_SILICA

Floats = NDArray[np.float64]
Booleans = NDArray[np.bool_]
Workspace = Mapping[str, Any]

#: Above this Zr the zircon that four acids leave behind holds a telling share of U and Th (common practice).
ZIRCON_HOLDS_U_TH_ABOVE_ZR_PPM = 200.0


@dataclass(frozen=True)
class Interval:
    """Arrays of shape (n,); ``low`` NaN: nothing known. ``open_low``, ``open_high`` None: all ends closed."""

    low: Floats
    high: Floats
    open_low: Booleans | None = None
    open_high: Booleans | None = None

    @property
    def exact(self) -> bool:
        """Whether every sample is a point or missing."""
        return self.low is self.high

    @property
    def missing(self) -> Booleans:
        return np.isnan(self.low)

    @property
    def point(self) -> Floats:
        """The value where it is a point, else NaN."""
        return self.low if self.exact else np.where(self.low == self.high, self.low, np.nan)

    def straddles(self) -> Booleans:
        """Where it is neither a point nor missing."""
        if self.exact:
            return np.zeros(self.low.shape, dtype=bool)
        return ~self.missing & ~(self.low == self.high)

    def ends(self) -> tuple[Booleans, Booleans]:
        closed = np.zeros(self.low.shape, dtype=bool)
        return (closed if self.open_low is None else self.open_low), (
            closed if self.open_high is None else self.open_high
        )


def point(values: Any, n: int) -> Interval:
    """Points from an array of shape (n,) or a number; NaN is missing."""
    array = np.broadcast_to(np.asarray(values, dtype=np.float64), (n,))
    return Interval(array, array)


def interval_text(low: float, high: float, open_low: bool, open_high: bool) -> str:
    """``< 5``, ``> 16``, ``16 to inf``, ``1.2 to 4.3``; an empty text for a point."""
    if low == high:
        return ""
    if low <= 0.0 and np.isinf(high):
        return "not bounded"
    if low == 0.0 and open_high:
        return f"< {high:.4g}"
    if np.isinf(high) and open_low:
        return f"> {low:.4g}"
    return f"{low:.4g} to {high:.4g}"


class _Seen(dict[Any, int]):
    """The code of each text by its first appearance; what is no text has code 0."""

    def __init__(self) -> None:
        super().__init__({None: 0, "": 0})
        self.labels = [""]

    def __missing__(self, text: Any) -> int:
        if not isinstance(text, str):
            return 0
        self[text] = code = len(self.labels)
        self.labels.append(text)
        return code


@dataclass(frozen=True)
class Words:
    """A text quantity: ``codes`` of shape (n,) into ``labels``; label 0 is '' and means not known."""

    codes: NDArray[np.intp]
    labels: tuple[str, ...]

    @property
    def missing(self) -> Booleans:
        return self.codes == 0

    @classmethod
    def of(cls, texts: Any) -> Words:
        listed = texts.tolist() if isinstance(texts, np.ndarray) else list(texts)
        seen = _Seen()
        return cls(np.fromiter(map(seen.__getitem__, listed), dtype=np.intp, count=len(listed)), tuple(seen.labels))

    @classmethod
    def yes_no(cls, yes: Any, known: Any = True) -> Words:
        """'yes' and 'no' from booleans of one shape; not known where ``known`` is false."""
        return cls(np.where(known, np.where(yes, 1, 2), 0), ("", "yes", "no"))


Rule = Callable[["Known"], "Interval | Words"]


class Known:
    """What a workspace says of each quantity, each worked out once. ``n`` is the number of samples."""

    def __init__(
        self,
        workspace: Workspace,
        n: int,
        rules: Mapping[str, Rule],
        powers: Mapping[str, Any],
        grounds: Mapping[str, Callable[[Known], Words]],
    ) -> None:
        self.workspace = workspace
        self.grounds = grounds
        self.n = n
        self.rules = rules
        self.powers = powers
        self.conventions: Conventions = workspace.get("conventions") or Conventions()
        self._intervals: dict[str, Interval] = {}
        self._words: dict[str, Words] = {}

    def number(self, name: str) -> Interval:
        """The interval of a quantity; missing everywhere where the workspace does not hold it."""
        if name not in self._intervals:
            self._intervals[name] = self._work_out(name)
        return self._intervals[name]

    def words(self, name: str) -> Words:
        """The words of a text quantity."""
        if name not in self._words:
            rule = self.rules.get(name)
            if rule is not None:
                found = rule(self)
                assert isinstance(found, Words), f"{name} is a number, not a text"
                self._words[name] = found
            else:
                texts = self.workspace.get(name)
                self._words[name] = Words(np.zeros(self.n, dtype=np.intp), ("",)) if texts is None else Words.of(texts)
        return self._words[name]

    def why_unknown(self, name: str) -> Words:
        """Why a text quantity is not known, where more can be said than that it is missing."""
        ground = self.grounds.get(name)
        return ground(self) if ground else Words(np.zeros(self.n, dtype=np.intp), ("",))

    def raw(self, name: str) -> Floats:
        """The numbers of the workspace as they stand, NaN where it does not hold them."""
        return point(self.workspace.get(name, np.nan), self.n).low

    def texts(self, name: str) -> NDArray[np.object_]:
        """The texts of the workspace as they stand, None where it does not hold them."""
        found = self.workspace.get(name)
        return np.full(self.n, None, dtype=object) if found is None else np.asarray(found, dtype=object)

    def flag(self, name: str) -> Booleans:
        """A boolean of the workspace; false where it does not hold it."""
        return np.broadcast_to(np.asarray(self.workspace.get(name, False), dtype=bool), (self.n,))

    def inputs(self, name: str) -> tuple[str, ...]:
        """The columns that a quantity is made of, as far as their absence can be named; itself otherwise."""
        if name in self.powers:
            return tuple(self.powers[name][1])
        if name.endswith("_vf_wt"):
            return (base_of_volatile_free(name),)
        return RULE_INPUTS.get(name, (name,))

    def _work_out(self, name: str) -> Interval:
        rule = self.rules.get(name)
        if rule is not None:
            found = rule(self)
            assert isinstance(found, Interval), f"{name} is a text, not a number"
            return found
        if name in self.powers:
            return self._product(name)
        if name in CHOSEN_INDEX:
            return self._column(name)
        if name.endswith("_vf_wt"):
            return self._volatile_free(name)
        return point(self.workspace.get(name, np.nan), self.n)

    def _column(self, name: str) -> Interval:
        values = self.raw(name)
        qualifier = np.broadcast_to(np.asarray(self.workspace.get(f"qualifier:{name}", 0)), (self.n,))
        carried = self._carried(name, values)
        present = ~np.isnan(values)
        below, above = (qualifier == QUALIFIER_BELOW) & present, (qualifier == QUALIFIER_ABOVE) & present
        partial = (carried == MINIMUM) & present
        refused = (carried == REFUSED) & present
        if not (below.any() or above.any() or partial.any() or refused.any()):
            return Interval(values, values)
        limit = self._limits(name, values, below)
        nothing = refused | ~present | (below & partial) | (below & np.isnan(limit))
        low = np.where(nothing, np.nan, np.where(below, 0.0, values))
        high = np.where(nothing, np.nan, np.where(below, limit, np.where(above | partial, np.inf, values)))
        return Interval(low, high, above & ~nothing, (below | above | partial) & ~nothing)

    def _carried(self, name: str, values: Floats) -> NDArray[np.uint8]:
        codes = np.broadcast_to(np.asarray(self.workspace.get(f"digestion:{name}", UNKNOWN), dtype=np.uint8), (self.n,))
        codes = np.where(codes == NONE, np.uint8(UNKNOWN), codes)
        carried = CARRIES[codes, CHOSEN_INDEX[name]]
        if name in ("u_ppm", "th_ppm"):
            four_acid = (codes == FOUR_ACID) | (codes == UNKNOWN_WITHOUT_SILICA)
            zirconium = self.raw("zr_ppm") > ZIRCON_HOLDS_U_TH_ABOVE_ZR_PPM
            carried = np.where(four_acid & zirconium, np.uint8(MINIMUM), carried)
        return carried

    def _limits(self, name: str, values: Floats, below: Booleans) -> Floats:
        """Detection limits: ``reported:<column>`` where given, else the substitute undone."""
        if f"reported:{name}" in self.workspace:
            return self.raw(f"reported:{name}")
        substitute = self.conventions.censored_substitute
        return np.where(below, values / substitute if substitute > 0.0 else np.nan, np.nan)

    def _volatile_free(self, name: str) -> Interval:
        values = self.raw(name)
        base = base_of_volatile_free(name)
        if base not in CHOSEN_INDEX:
            return Interval(values, values)
        column = self.number(base)
        uncertain = column.straddles()
        if not uncertain.any():
            return Interval(values, values)
        raw = self.raw(base)
        scale = np.divide(values, raw, out=np.full(self.n, np.nan), where=uncertain & (raw > 0.0))
        open_low, open_high = column.ends()
        low = np.where(uncertain, column.low * scale, values)
        high = np.where(
            uncertain, np.where(np.isinf(column.high) & ~np.isnan(scale), np.inf, column.high * scale), values
        )
        return Interval(low, high, open_low & uncertain, open_high & uncertain)

    def _product(self, name: str) -> Interval:
        """A product of powers of columns, such as a ratio, end by end."""
        factor, exponents = self.powers[name]
        columns = {column: self.number(column) for column in exponents}
        if all(column.exact for column in columns.values()):
            if name in self.workspace:
                return point(self.workspace[name], self.n)
            return self._point_product(factor, exponents, columns)
        low, high = np.full(self.n, factor), np.full(self.n, factor)
        open_low, open_high = np.zeros(self.n, dtype=bool), np.zeros(self.n, dtype=bool)
        nothing = np.zeros(self.n, dtype=bool)
        with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
            for column, power in exponents.items():
                part = columns[column]
                first, last = (part.low, part.high) if power > 0 else (part.high, part.low)
                first_open, last_open = part.ends() if power > 0 else part.ends()[::-1]
                low, high = low * np.power(first, power), high * np.power(last, power)
                open_low, open_high = open_low | first_open, open_high | last_open
                nothing |= part.missing | ((part.high == 0.0) & (power < 0))
        nothing |= np.isnan(low)
        low, high = np.where(nothing, np.nan, low), np.where(nothing, np.nan, np.where(np.isnan(high), np.inf, high))
        return Interval(low, high, open_low & ~nothing, open_high & ~nothing)

    def _point_product(
        self, factor: float, exponents: Mapping[str, float], columns: Mapping[str, Interval]
    ) -> Interval:
        value = np.full(self.n, factor)
        for column, power in exponents.items():
            part = columns[column].low
            if power < 0:
                part = np.where(part > 0.0, part, np.nan)
            value = value * np.power(part, power)
        return Interval(value, value)


def base_of_volatile_free(name: str) -> str:
    """The analysed column behind a volatile-free one: ``sio2_vf_wt`` -> ``sio2_wt``; total iron as reported."""
    base = name.removesuffix("_vf_wt") + "_wt"
    return "fe2o3t_reported_wt" if base == "feot_wt" else base


#: The inputs of the rule quantities whose absence is worth naming.
RULE_INPUTS: dict[str, tuple[str, ...]] = {
    "heat_production_uw_m3": ("u_ppm", "th_ppm", "k2o_wt"),
    "heat_x_thickness_mw_m2": ("u_ppm", "th_ppm", "k2o_wt", "intrusion_shape", "half_width_m"),
    "theta_centre": ("age_ma", "intrusion_shape", "half_width_m"),
    "zircon_saturation_wh83_c": ("zr_ppm",),
    "zircon_model_applies": ("zr_ppm",),
}
