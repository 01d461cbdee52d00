"""The diagrams that a set of samples can be drawn in: axes, what they show of the axes, field lines with their sources.

Field lines come from ``registry.petrology.field_lines``, which makes them from the tables that classify.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

from registry.petrology.analytes import CHOSEN_INDEX, IRON_COLUMNS
from registry.petrology.catalogue import METHOD_OF_QUANTITY
from registry.petrology.digestion import CARRIES, DIGESTION_LETTERS, MINIMUM
from registry.petrology.field_lines import DIAGRAMS as FIELD_LINES
from registry.petrology.field_lines import Line
from registry.petrology.references import REFERENCES

Label = tuple[str, float, float]


@dataclass(frozen=True)
class Axis:
    """A quantity or a sum of them along one side. ``low`` and ``high`` None: fitted to the points, ``high`` at least
    up to ``reach``."""

    columns: tuple[str, ...]
    label: str
    unit: str
    low: float | None = None
    high: float | None = None
    is_log: bool = False
    reach: float | None = None

    @property
    def words(self) -> str:
        """``Na2O + K2O, wt% volatile-free``."""
        return f"{self.label}, {self.unit}" if self.unit else self.label


@dataclass(frozen=True)
class Layer:
    """Lines of one source, in the units of the axes (of a triangle: F and M, per cent)."""

    lines: tuple[Line, ...]
    labels: tuple[Label, ...]
    what: str
    source: str
    status: str
    is_dashed: bool = False


@dataclass(frozen=True)
class Diagram:
    """One diagram. A triangle has a third axis ``apex_a``; then ``x`` is F (top) and ``y`` is M (right)."""

    key: str
    title: str
    short: str
    group: str
    x: Axis
    y: Axis
    layers: tuple[Layer, ...] = ()
    note: str = ""
    apex_a: Axis | None = None

    @property
    def axes(self) -> tuple[Axis, ...]:
        return (self.x, self.y) if self.apex_a is None else (self.x, self.y, self.apex_a)

    @property
    def columns(self) -> tuple[str, ...]:
        """Every column the axes need, each once."""
        return tuple(dict.fromkeys(column for axis in self.axes for column in axis.columns))


@dataclass(frozen=True)
class Panels:
    """Several diagrams on one page: what the page calls them, and the diagrams in it."""

    key: str
    title: str
    short: str
    group: str
    members: tuple[str, ...]
    note: str = ""


def _layer(name: str, what: str, *, labelled: bool = True, dashed: bool = False) -> Layer:
    drawn = FIELD_LINES[name]
    labels = drawn.labels if labelled else ()
    return Layer(drawn.lines, labels, what, REFERENCES[drawn.source], drawn.status, dashed)


def _afm_layers() -> tuple[Layer, ...]:
    """The two divides of the triangle, each under its own source; the names stand by the first."""
    both = _layer("afm", "divide drawn full")
    second = replace(both, lines=both.lines[1:], labels=(), what="divide drawn dashed", is_dashed=True)
    second = replace(second, source=REFERENCES["kuno1968"])
    return replace(both, lines=both.lines[:1]), second


VOLATILE_FREE = "wt% volatile-free"
_SILICA = Axis(("sio2_vf_wt",), "SiO2", VOLATILE_FREE)
_ALKALIS = Axis(("na2o_vf_wt", "k2o_vf_wt"), "Na2O + K2O", VOLATILE_FREE, 0.0, 16.0)
_TAS_SILICA = replace(_SILICA, low=37.0, high=80.0)
_GRANITES = (
    "For granites with more than 5 % quartz. Granites after a collision lie in all fields, as the source itself says."
)
_SR_Y = Axis(("sr_y",), "Sr/Y", "", 0.0, reach=100.0)
_SR_Y_LIMITS = (
    Layer(
        (((0.0, 20.0), (18.0, 20.0), (18.0, 1000.0)),),
        (("adakite-like", 9.0, 92.0),),
        "box of adakite-like rocks: Sr/Y from 20, Y up to 18 ppm",
        REFERENCES["richards2007"] + " The same paper doubts what the box says of origin and ore.",
        "from memory",
    ),
    Layer(
        (((0.0, 35.0), (60.0, 35.0)),),
        (),
        "dashed: Sr/Y 35, above it the suites of copper porphyries",
        REFERENCES["loucks2014"],
        "ratio published, the limit from memory and provisional",
        True,
    ),
)
_SR_Y_NOTE = (
    "Sr/Y follows the thickness of the crust too, and alteration strips Sr: look at the suite, not at single points."
)


def _ppm(*columns: str, low: float, high: float) -> Axis:
    label = " + ".join(column.removesuffix("_ppm").capitalize() for column in columns)
    return Axis(columns, label, "ppm", low, high, True)


def _granite(key: str, short: str, x: Axis, y: Axis) -> Diagram:
    layer = _layer(key, "field lines")
    return Diagram(key, FIELD_LINES[key].title, short, "Granites", x, y, (layer,), _GRANITES)


def _tas(key: str, title: str, short: str) -> Diagram:
    divide = _layer("alkaline_divide", "dashed: alkaline above, subalkaline below", labelled=False, dashed=True)
    layers = (_layer(key, "fields"), divide)
    return Diagram(key, title, short, "Names and series", _TAS_SILICA, _ALKALIS, layers)


def _harker(column: str, label: str, unit: str) -> Diagram:
    key = f"harker_{column.partition('_')[0]}"
    return Diagram(
        key, f"{label} against silica", f"{label}", "Suites", _SILICA, Axis((column,), label, unit),
    )  # fmt: skip


_HARKER = tuple(
    _harker(f"{symbol.lower()}_vf_wt", label, VOLATILE_FREE)
    for symbol, label in (
        ("TiO2", "TiO2"), ("Al2O3", "Al2O3"), ("FeOt", "FeO total"), ("MgO", "MgO"), ("CaO", "CaO"), ("Na2O", "Na2O"),
        ("K2O", "K2O"), ("P2O5", "P2O5"),
    )
) + tuple(_harker(f"{symbol.lower()}_ppm", symbol, "ppm") for symbol in ("Rb", "Sr", "Ba", "Zr"))  # fmt: skip

_ALL = (
    _tas("tas_plutonic", "Total alkalis against silica, plutonic rocks", "TAS, plutonic"),
    _tas("tas_volcanic", "Total alkalis against silica, lavas", "TAS, lavas"),
    Diagram(
        "k2o_sio2", "Potash against silica", "K2O and SiO2", "Names and series", replace(_SILICA, low=45.0, high=80.0),
        Axis(("k2o_vf_wt",), "K2O", VOLATILE_FREE, 0.0, 7.0), (_layer("k2o_sio2", "lines between series"),),
        "The lines are drawn as far as the source draws them; beyond, the class carries them on straight.",
    ),
    Diagram(
        "afm", "Alkalis, total iron, magnesia", "AFM", "Names and series", Axis(("feot_wt",), "FeO total", "wt%"),
        Axis(("mgo_wt",), "MgO", "wt%"), _afm_layers(), apex_a=Axis(("na2o_wt", "k2o_wt"), "Na2O + K2O", "wt%"),
        note="Each corner stands for 100 per cent of the sum Na2O + K2O + FeO total + MgO.",
    ),
    Diagram(
        "alumina", "Alumina saturation", "A/CNK and A/NK", "Granites",
        Axis(("a_cnk",), "A/CNK", "molar", 0.4, 2.0), Axis(("a_nk",), "A/NK", "molar", 0.4, 3.0),
        (_layer("alumina", "fields"),), "No rock lies below the slanting line, where A/NK would be less than A/CNK.",
    ),
    Diagram(
        "ferroan", "Iron number against silica", "Iron number", "Granites", replace(_SILICA, low=48.0, high=80.0),
        Axis(("fe_number",), "FeO total/(FeO total + MgO)", "", 0.4, 1.0), (_layer("ferroan", "ferroan above"),),
    ),
    Diagram(
        "alkali_lime", "Alkali-lime index against silica", "Alkali-lime index", "Granites",
        replace(_SILICA, low=50.0, high=80.0), Axis(("mali",), "Na2O + K2O \N{MINUS SIGN} CaO", VOLATILE_FREE, -10, 12),
        (_layer("alkali_lime", "lines between classes"),),
    ),
    _granite("granite_rb_y_nb", "Rb and Y + Nb", _ppm("y_ppm", "nb_ppm", low=2, high=2000),
             _ppm("rb_ppm", low=1, high=2000)),
    _granite("granite_nb_y", "Nb and Y", _ppm("y_ppm", low=1, high=2000), _ppm("nb_ppm", low=1, high=2000)),
    _granite("granite_rb_yb_ta", "Rb and Yb + Ta", _ppm("yb_ppm", "ta_ppm", low=0.5, high=100),
             _ppm("rb_ppm", low=1, high=2000)),
    _granite("granite_ta_yb", "Ta and Yb", _ppm("yb_ppm", low=0.1, high=100), _ppm("ta_ppm", low=0.05, high=50)),
    Diagram(
        "sr_y", "Sr/Y against Y", "Sr/Y and Y", "Suites", Axis(("y_ppm",), "Y", "ppm", 0.0, 60.0),
        _SR_Y, _SR_Y_LIMITS, _SR_Y_NOTE,
    ),
    Diagram(
        "sr_y_sio2", "Sr/Y against silica", "Sr/Y and SiO2", "Suites", replace(_SILICA, low=45.0, high=80.0),
        _SR_Y,
        (replace(_SR_Y_LIMITS[1], lines=(((45.0, 35.0), (80.0, 35.0)),)),), _SR_Y_NOTE,
    ),
    *_HARKER,
)  # fmt: skip
DIAGRAMS: dict[str, Diagram] = {diagram.key: diagram for diagram in _ALL}
PANELS: dict[str, Panels] = {
    "harker": Panels(
        "harker", "Oxides and trace elements against silica", "All against SiO2", "Suites",
        tuple(diagram.key for diagram in _HARKER),
        "A suite that crystallised from one magma draws curves; scatter means mixing, alteration or several magmas.",
    )
}  # fmt: skip
#: Other names in an address.
ALIASES = {"tas": "tas_plutonic", "a_cnk": "alumina", "a_cnk_a_nk": "alumina"}
FIRST = "tas_plutonic"


def chosen_inputs(column: str) -> frozenset[str]:
    """The analysed columns whose censoring or digestion shows in ``column``: itself, its oxide, a method's inputs."""
    if column in CHOSEN_INDEX:
        return frozenset((column,))
    if column.endswith("_vf_wt"):
        return chosen_inputs(column.removesuffix("_vf_wt") + "_wt")
    if column in ("fe2o3t_wt", "feot_wt"):
        return frozenset(IRON_COLUMNS[:1])
    method = METHOD_OF_QUANTITY.get(column)
    if method is None:
        return frozenset()
    return frozenset().union(*(chosen_inputs(name) for name in method.inputs if not name.startswith("qualifier")))


_MINIMUM_LETTERS = {
    column: frozenset(
        DIGESTION_LETTERS[code] for code in range(len(DIGESTION_LETTERS)) if CARRIES[code, row] == MINIMUM
    )
    for column, row in CHOSEN_INDEX.items()
}


def doubts(inputs: frozenset[str], censored: str | None, digestions: str | None) -> tuple[list[str], list[str]]:
    """(inputs outside the limits of detection, as ``nb_ppm<``; inputs that a partial digestion gives as a minimum)."""
    outside = [mark for mark in (censored or "").split(",") if mark and mark.rstrip("<>") in inputs]
    letters = digestions or ""
    minima = [
        column
        for column in sorted(inputs, key=CHOSEN_INDEX.__getitem__)
        if len(letters) > CHOSEN_INDEX[column] and letters[CHOSEN_INDEX[column]] in _MINIMUM_LETTERS[column]
    ]
    return outside, minima
