"""From the control results of a column to the state of its analyte in the batch, with the reasons in words."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from registry.petrology.analytes import QUALIFIER_SIGNS
from registry.quality.assessment import BLANK, REFERENCE, Controls, Outcome
from registry.quality.duplicates import too_many
from registry.quality.states import FAILED, FAILS, PASSED, PASSES, REMARKS, WARNED
from registry.quality.trends import bias, least_squares

#: A bias or drift is named where it exceeds so many of its standard errors and so many per cent (a drift: over the
#: lines it was seen on), and rests on so many results. Common practice, no source.
ERRORS_TO_NAME, PERCENT_TO_NAME = 4.0, 5.0
RESULTS_FOR_BIAS, RESULTS_FOR_DRIFT = 5, 10
#: Factors between %, ppm and ppb, and how near to one (in decades) a result must lie to be called a slip of unit.
UNIT_FACTORS, NEAR_A_FACTOR = (1_000, 10_000, 10_000_000), 0.2


@dataclass(frozen=True)
class AnalyteState:
    """One analyte of one batch: state code, remarks, counts of judged controls, bias and drift in per cent.

    Bias is the mean of 100 (found - expected)/expected over the reference materials, drift its slope per 100 lines;
    NaN where there are too few. ``precision_s0`` (in the column's unit) and ``precision_k`` are Thompson and
    Howarth's, NaN below 50 pairs.
    """

    state: int
    remarks: str
    references: int
    blanks: int
    pairs: int
    bias_percent: float
    bias_error_percent: float
    drift_percent: float
    drift_error_percent: float
    precision_s0: float
    precision_k: float


def state_of_analyte(controls: Controls, outcome: Outcome) -> AnalyteState | None:
    """The state of a column; None where none of its control results could be judged.

    A failed reference material or blank fails it, and so do duplicates of which more exceed the 90th percentile line
    than chance explains (1 %); a warning is a remark.
    """
    judged = outcome.states > 0
    if not judged.any():
        return None
    kinds = controls.kinds
    remarks: list[str] = []
    fails = False
    for rows, words in (((kinds == REFERENCE), "reference material"), ((kinds == BLANK), "blank")):
        for state, verb in ((FAILED, "failed"), (WARNED, "warned")):
            marked = np.flatnonzero(rows & (outcome.states == state))
            fails |= state == FAILED and len(marked) > 0
            remarks += [_about(controls, outcome, row, words, verb) for row in marked.tolist()[:3]]
            if len(marked) > 3:
                remarks.append(f"{len(marked) - 3} more {words} results {verb}")
    remarks += _own_content(controls, outcome)
    pairs = ~((kinds == REFERENCE) | (kinds == BLANK)) & judged
    if too_many(outcome.pairs_above_ninetieth, outcome.pairs_judged, 0.10):
        fails = True
        remarks.append(
            f"{outcome.pairs_above_ninetieth} of {outcome.pairs_judged} pairs exceed the line that nine in ten keep "
            "at the precision asked for"
        )
    beyond = np.flatnonzero(pairs & (outcome.states == WARNED))
    remarks += [_about(controls, outcome, row, "duplicate", "warned") for row in beyond.tolist()[:3]]
    if len(beyond) > 3:
        remarks.append(f"{len(beyond) - 3} more pairs of duplicates warned")
    measured = (kinds == REFERENCE) & ~np.isnan(outcome.z) & (outcome.signs == 0)
    difference = 100.0 * (outcome.found[measured] - outcome.expected[measured]) / outcome.expected[measured]
    mean, drift = bias(difference), least_squares(controls.line_no[measured] / 100.0, difference)
    if mean.n >= RESULTS_FOR_BIAS and abs(mean.mean) > max(PERCENT_TO_NAME, ERRORS_TO_NAME * mean.error):
        remarks.append(
            f"bias {_two_digits(mean.mean, '+')} % (standard error {_two_digits(mean.error)}) over {mean.n} reference "
            "materials"
        )
    span = float(np.ptp(controls.line_no[measured])) / 100.0 if measured.any() else 0.0
    seen = drift.n >= RESULTS_FOR_DRIFT and abs(drift.slope) > ERRORS_TO_NAME * drift.slope_error
    if seen and abs(drift.slope) * span > PERCENT_TO_NAME:
        remarks.append(
            f"drift {_two_digits(drift.slope, '+')} % a hundred lines (standard error {_two_digits(drift.slope_error)})"
        )
    fit = outcome.precision
    return AnalyteState(
        FAILS if fails else REMARKS if remarks else PASSES,
        "; ".join(remarks),
        int(((kinds == REFERENCE) & judged).sum()),
        int(((kinds == BLANK) & judged).sum()),
        outcome.pairs_judged,
        mean.mean,
        mean.error,
        drift.slope,
        drift.slope_error,
        float("nan") if fit is None else fit.s_0,
        float("nan") if fit is None else fit.k,
    )


def joined(own: AnalyteState | None, others: Sequence[tuple[str, AnalyteState]]) -> AnalyteState | None:
    """The state of a column with what other parts of the certificate say of it, each with its code: the worst of all.

    Counts are added up, and the bias and its error are those of all the results; drift and precision are those of the
    own controls, else of the first other part that has them.
    """
    known = [state for state in (own, *(state for _, state in others)) if state is not None]
    if not known:
        return None
    remarks = [] if own is None or not own.remarks else [own.remarks]
    remarks += [f"in {code}: {state.remarks}" for code, state in others if state.remarks]
    drifting = next((state for state in known if not np.isnan(state.drift_percent)), known[0])
    fitted = next((state for state in known if not np.isnan(state.precision_s0)), known[0])
    bias_percent, bias_error_percent = _bias_of_all(known)
    return AnalyteState(
        max(state.state for state in known),
        "; ".join(remarks),
        sum(state.references for state in known),
        sum(state.blanks for state in known),
        sum(state.pairs for state in known),
        bias_percent,
        bias_error_percent,
        drifting.drift_percent,
        drifting.drift_error_percent,
        fitted.precision_s0,
        fitted.precision_k,
    )


def _bias_of_all(states: Sequence[AnalyteState]) -> tuple[float, float]:
    """Mean and standard error over the results of several parts: their spread is that within the parts (pooled)."""
    biased = [state for state in states if state.references and not np.isnan(state.bias_percent)]
    if len(biased) < 2:
        only = biased[0] if biased else states[0]
        return only.bias_percent, only.bias_error_percent
    n, mean, error = np.array([(one.references, one.bias_percent, one.bias_error_percent) for one in biased]).T
    several = ~np.isnan(error)
    variance = (n**2 * error**2)[several].sum() / n[several].sum() if several.any() else np.nan
    return float((n * mean).sum() / n.sum()), float(np.sqrt(variance / n.sum()))


def _own_content(controls: Controls, outcome: Outcome) -> list[str]:
    """A hint where three blanks or more, all above their limit, agree: that is what they are made of, not what came in.

    Agreement within a factor of 1.5, common practice, no source; the state stays as it is.
    """
    blank = (controls.kinds == BLANK) & (outcome.states > 0) & (outcome.expected == 0.0)
    found = outcome.found[blank]
    if len(found) < 3 or not (outcome.states[blank] > PASSED).all() or found.max() > 1.5 * found.min():
        return []
    held = f"{found.min():.4g} to {found.max():.4g} {outcome.column.unit}"
    return [
        f"all {len(found)} blanks hold {held}: if that is their own content, register the values of their "
        "material and name it in the sample list"
    ]


def _about(controls: Controls, outcome: Outcome, row: int, words: str, verb: str) -> str:
    named = controls.materials[row]
    z = outcome.z[row]
    score = f", z {z:+.2f}" if not np.isnan(z) else ""
    expected = f" for {_four_digits(outcome.expected[row])}" if not np.isnan(outcome.expected[row]) else ""
    found = QUALIFIER_SIGNS[outcome.signs[row]] + _four_digits(outcome.found[row])
    return (
        f"{words} {named + ' ' if named else ''}{verb} on line {controls.line_no[row]}: found "
        f"{found}{expected} {outcome.column.unit}{score} ({outcome.rules[row]}){_slip(outcome, row)}"
    )


def _slip(outcome: Outcome, row: int) -> str:
    """A hint where found and expected differ by about a factor that two units differ by."""
    found, expected = float(outcome.found[row]), float(outcome.expected[row])
    if not (found > 0.0 and expected > 0.0):
        return ""
    decades = abs(float(np.log10(found / expected)))
    near = next((factor for factor in UNIT_FACTORS if abs(decades - np.log10(factor)) < NEAR_A_FACTOR), None)
    return "" if near is None else f", off by a factor of about {near:,}: is the unit right?"


def _four_digits(number: float) -> str:
    """Four significant digits, and whole numbers from a thousand up: 0.01234, 10,000."""
    return f"{number:,.0f}" if number >= 1000.0 else f"{number:.4g}"


def _two_digits(number: float, sign: str = "") -> str:
    """Two significant digits, and whole numbers from ten up: -1.8, 0.0013, -100."""
    return f"{number:{sign},.0f}" if abs(number) >= 10.0 else f"{number:{sign}.2g}"
