"""Whether an analysis can be judged at all: needed majors, their digestions, the total and the loss on ignition.

``fit``; ``fit with remarks``; ``unfit`` (a screen failed, or a needed major was refused or came by a partial
digestion); ``unknown`` (a needed major was not reported, or the loss on ignition is open and the sum is low).
"""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from registry.petrology.analytes import CHOSEN_COLUMNS
from registry.petrology.catalogue.records import Method, Quantity, Warning
from registry.petrology.digestion import (
    AQUA_REGIA,
    DIGESTION_WORDS,
    DIGESTIONS,
    FOUR_ACID,
    FUSION,
    INAA,
    NONE,
    PEROXIDE_FUSION,
    TITRATION,
    UNKNOWN,
    UNKNOWN_WITHOUT_SILICA,
    XRF,
)

FITNESS_WORDS = ("fit", "fit with remarks", "unfit", "unknown")
_FIT, _REMARKS, _UNFIT, _UNKNOWN = range(4)

#: Majors without which no rock is judged, with the column whose digestion tells how they were brought in.
NEEDED_MAJORS = {
    "SiO2": ("sio2_wt", "sio2_wt"),
    "Al2O3": ("al2o3_wt", "al2o3_wt"),
    "total iron": ("fe2o3t_wt", "fe2o3t_reported_wt"),
    "MgO": ("mgo_wt", "mgo_wt"),
    "CaO": ("cao_wt", "cao_wt"),
    "Na2O": ("na2o_wt", "na2o_wt"),
    "K2O": ("k2o_wt", "k2o_wt"),
}
#: Digestions that give a whole-rock major: the fusions, XRF, activation and classical wet chemistry.
_WHOLE_ROCK = (FUSION, PEROXIDE_FUSION, XRF, INAA, TITRATION)

# State of one major: ok, by an unknown digestion, not reported, then one state a digestion that does not serve.
_OK, _UNKNOWN_DIGESTION, _NOT_REPORTED, _FIRST_BAD = 0, 1, 2, 3
_STATES = _FIRST_BAD + len(DIGESTIONS)
_STATE_OF_DIGESTION: NDArray[np.int64] = np.array(
    [
        _UNKNOWN_DIGESTION
        if code in (NONE, UNKNOWN, UNKNOWN_WITHOUT_SILICA)
        else _OK
        if code in _WHOLE_ROCK
        else _FIRST_BAD + code
        for code in range(len(DIGESTIONS))
    ]
)

#: Screens of the whole analysis, in the order of their bits: words and what they make of the analysis.
_SCREENS = (
    ("the total lies below the convention's lower limit", _UNFIT),
    ("the total lies above the convention's upper limit", _UNFIT),
    ("loss on ignition lies above the convention's limit", _UNFIT),
    ("loss on ignition was not reported and the oxides sum to less than the lower limit of the total", _UNKNOWN),
    ("the total lies outside the convention's window of a good analysis", _REMARKS),
    ("loss on ignition is high", _REMARKS),
    ("loss on ignition was not reported", _REMARKS),
)

_INPUTS = (
    *(column for column, _ in NEEDED_MAJORS.values()),
    *(f"digestion:{column}" for _, column in NEEDED_MAJORS.values()),
    "total_wt",
    "loi_wt",
    "mgo_vf_wt",
    "conventions",
)


def _state_of_major(values: Any, digestion: Any) -> NDArray[np.int64]:
    """State codes; ``values`` NaN with a digestion means that this digestion refused it."""
    missing = np.isnan(values)
    codes = np.asarray(digestion)
    codes = np.nan_to_num(codes).astype(np.int64) if codes.dtype.kind == "f" else codes
    state = np.broadcast_to(_STATE_OF_DIGESTION[codes], missing.shape)
    return np.where(missing, np.where(codes == NONE, _NOT_REPORTED, _FIRST_BAD + codes), state)


def _loi_counts(mgo_vf: Any, conventions: Any) -> Any:
    """Where the loss on ignition counts: not in serpentinised ultramafic rocks."""
    return ~(mgo_vf > conventions.loi_exempt_mgo_vf_wt)


def total_too_low(total: Any, loi: Any, conventions: Any) -> Any:
    """Below the failing limit with a loss on ignition reported."""
    return (total < conventions.total_fail_low_wt) & ~np.isnan(loi)


def total_too_high(total: Any, conventions: Any) -> Any:
    """Above the failing limit."""
    return total > conventions.total_fail_high_wt


def loi_too_high(loi: Any, mgo_vf: Any, conventions: Any) -> Any:
    """Loss on ignition above the failing limit in a rock that is not exempt."""
    return (loi > conventions.loi_fail_wt) & _loi_counts(mgo_vf, conventions)


def loi_high(loi: Any, mgo_vf: Any, conventions: Any) -> Any:
    """Loss on ignition above the warning limit but not the failing one."""
    above = (loi > conventions.loi_warn_wt) & _loi_counts(mgo_vf, conventions)
    return above & ~loi_too_high(loi, mgo_vf, conventions)


def loi_not_reported(total: Any, loi: Any) -> Any:
    """An analysis without loss on ignition."""
    return np.isnan(loi) & ~np.isnan(total)


def loi_is_open(total: Any, loi: Any, mgo_vf: Any, conventions: Any) -> Any:
    """Not reported while the oxides leave room for a failing loss on ignition."""
    low = loi_not_reported(total, loi) & (total < conventions.total_fail_low_wt)
    return low & _loi_counts(mgo_vf, conventions)


def _total_in_remark(total: Any, loi: Any, conventions: Any) -> Any:
    outside = (total < conventions.total_warn_low_wt) | (total > conventions.total_warn_high_wt)
    failing = total_too_low(total, loi, conventions) | total_too_high(total, conventions)
    return outside & ~failing


def fitness(*columns: Any) -> dict[str, Any]:
    """``fitness`` and ``fitness_cause``, object arrays (n,), from the columns of ``_INPUTS``.

    Seven majors (wt%), their digestion codes, total, loss on ignition, volatile-free MgO (wt%) and the conventions.
    The cause is None where the analysis is fit. Common practice, no source.
    """
    majors, digestions = columns[:7], columns[7:14]
    total, loi, mgo_vf, conventions = columns[14:]
    n = len(np.atleast_1d(majors[0]))
    total, loi, mgo_vf = (np.broadcast_to(np.asarray(v, dtype=np.float64), (n,)) for v in (total, loi, mgo_vf))
    combination = np.zeros(n, dtype=np.int64)
    for values, digestion in zip(majors, digestions, strict=True):
        combination = combination * _STATES + _state_of_major(np.broadcast_to(values, (n,)), digestion)
    screens = (
        total_too_low(total, loi, conventions),
        total_too_high(total, conventions),
        loi_too_high(loi, mgo_vf, conventions),
        loi_is_open(total, loi, mgo_vf, conventions),
        _total_in_remark(total, loi, conventions),
        loi_high(loi, mgo_vf, conventions),
        loi_not_reported(total, loi),
    )
    combinations, code = _distinct(combination)
    for failed in screens:
        code = code * 2 + failed
    words, causes = np.full((2, len(combinations) << len(screens)), None, dtype=object)
    for each in np.flatnonzero(np.bincount(code, minlength=len(words))).tolist():
        which, marks = divmod(each, 1 << len(screens))
        state, causes[each] = _judge((combinations[which] << len(screens)) + marks)
        words[each] = FITNESS_WORDS[state]
    return {"fitness": words[code], "fitness_cause": causes[code]}


def _distinct(values: NDArray[np.int64]) -> tuple[list[int], NDArray[np.int64]]:
    """Distinct values and where each stands among them; a batch has mostly one, which needs no sorting."""
    if values.size and (values == values[0]).all():
        return [int(values[0])], np.zeros(values.shape, dtype=np.int64)
    distinct, inverse = np.unique(values, return_inverse=True)
    return distinct.tolist(), inverse.astype(np.int64)


def _judge(key: int) -> tuple[int, str | None]:
    """State and cause of one combination of major states and screens, packed by ``fitness``."""
    marked: list[tuple[str, int]] = []
    for words, state in reversed(_SCREENS):
        if key & 1:
            marked.insert(0, (words, state))
        key >>= 1
    states: dict[str, int] = {}
    for name in reversed(NEEDED_MAJORS):
        key, states[name] = divmod(key, _STATES)
    remarks = [*_about_majors({name: states[name] for name in NEEDED_MAJORS}), *marked]
    if not remarks:
        return _FIT, None
    worst = max((state for _, state in remarks), key=(_FIT, _REMARKS, _UNKNOWN, _UNFIT).index)
    told = [words for words, state in remarks if state == worst or state != _REMARKS]
    return worst, "; ".join(told)


def _about_majors(states: dict[str, int]) -> list[tuple[str, int]]:
    told: list[tuple[str, int]] = []
    by_state: dict[int, list[str]] = {}
    for name, state in states.items():
        by_state.setdefault(state, []).append(name)
    for state, names in sorted(by_state.items(), reverse=True):
        listed = ", ".join(names)
        if state >= _FIRST_BAD:
            told.append((_about_digestion(state - _FIRST_BAD, names, listed), _UNFIT))
        elif state == _NOT_REPORTED:
            told.append((f"not reported: {listed}", _UNKNOWN))
        elif state == _UNKNOWN_DIGESTION:
            told.append((f"by an unknown digestion: {listed}", _REMARKS))
    return told


def _about_digestion(code: int, names: list[str], listed: str) -> str:
    words = DIGESTION_WORDS[code]
    if code == AQUA_REGIA:
        opening = "no whole-rock silica" if "SiO2" in names else f"no whole-rock {listed}"
        return f"{opening}: aqua regia carries no lithophile element"
    if code == FOUR_ACID and "SiO2" in names:
        others = [name for name in names if name != "SiO2"]
        rest = f"; {', '.join(others)} by it are no whole-rock majors" if others else ""
        return f"no whole-rock silica: four-acid digestion drives SiO2 off{rest}"
    return f"{listed} by {words}: fusion or XRF is needed"


#: What is weighed or added up, not digested.
_WEIGHED = ("total_reported_wt", "loi_wt", "h2o_plus_wt", "h2o_minus_wt")


def _unknown_digestion(*digestions: Any) -> Any:
    mask: Any = False
    for codes in digestions:
        mask = mask | (codes >= UNKNOWN)  # the two kinds of unknown are the last codes
    return mask


def _sulphidic(sulphur: Any, conventions: Any) -> Any:
    return sulphur > conventions.sulphur_warn_wt


METHODS = (
    Method(
        key="fitness",
        label="fitness of the analysis",
        function=fitness,
        inputs=_INPUTS,
        optional=_INPUTS,
        outputs=(
            Quantity("fitness", "class_sheet", "fitness", "text", "whether the analysis can be judged"),
            Quantity("fitness_cause", "class_sheet", "fitness cause", "text", "why it is not simply fit"),
        ),
        source="analytical_practice",
        equation="seven majors by fusion or XRF; total and loss on ignition inside the conventions' limits",
        status="common practice",
        note="Loss on ignition is exempt above the conventions' MgO (serpentine). An unknown digestion never fails.",
    ),
)

WARNINGS = (
    Warning(
        "total_fails_fitness", "fitness", "total_wt",
        "the total {value} wt% lies outside the limits beyond which an analysis is not judged",
        lambda total, loi, conventions: total_too_low(total, loi, conventions) | total_too_high(total, conventions),
        ("total_wt", "loi_wt", "conventions"),
    ),
    Warning(
        "loi_high", "fitness", "loi_wt",
        "loss on ignition {value} wt% is high: mobile elements and redox may be altered",
        loi_high, ("loi_wt", "mgo_vf_wt", "conventions"),
    ),
    Warning(
        "loi_fails_fitness", "fitness", "loi_wt",
        "loss on ignition {value} wt% lies above the limit beyond which an analysis is not judged",
        loi_too_high, ("loi_wt", "mgo_vf_wt", "conventions"),
    ),
    Warning(
        "loi_not_reported", "fitness", None,
        "loss on ignition was not reported and counts as zero; alteration cannot be seen",
        loi_not_reported, ("total_wt", "loi_wt"),
    ),
    Warning(
        "sulphide_ties_iron", "mg_number_total_iron", "s_wt",
        "S {value} wt%: sulphide ties iron, so that the Mg-number is too low for the melt",
        _sulphidic, ("s_wt", "conventions"),
    ),
    Warning(
        "sulphide_lifts_cu_zr", "cu_zr", "s_wt",
        "S {value} wt%: Cu/Zr shows ore, not melt",
        _sulphidic, ("s_wt", "conventions"),
    ),
    Warning(
        "digestion_unknown", "fitness", None,
        "the digestion of at least one column is not known; name it in the import",
        _unknown_digestion, tuple(f"digestion:{column}" for column in CHOSEN_COLUMNS if column not in _WEIGHED),
    ),
)  # fmt: skip
