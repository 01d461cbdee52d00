"""What a certificate promises of a laboratory: the deviation by which a result may differ from the certified value.

Where a certificate states a standard deviation of results, that is the deviation. Where it states how well the value
itself is known (a confidence interval) or nothing, the deviation that fits the purpose stands for the laboratory's
share: Horwitz' function as the proficiency trials of geochemical laboratories use it.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike

from registry.petrology.analytes import WT_PERCENT_PER_UNIT
from registry.petrology.quotients import Floats

#: Factor of Horwitz' function: 0.01 for pure, 0.02 for applied geochemistry (Thompson, Potts & Webb 1996, Geostandards
#: Newsletter 20, 295-325, the GeoPT trials; from memory).
APPLIED_GEOCHEMISTRY, PURE_GEOCHEMISTRY = 0.02, 0.01
#: Half width of a 95 % interval of a normal distribution, in standard deviations.
NORMAL_95 = 1.959964

STANDARD_DEVIATION, TWO_DEVIATIONS = "deviation", "two deviations"
INTERVAL, EXPANDED, NOTHING = "interval", "expanded", "nothing"
_KINDS = {
    **dict.fromkeys(("", "sd", "1sd", "1s", "s", "sigma", "1sigma", "stddev", "standarddeviation", "std"),
                    STANDARD_DEVIATION),
    **dict.fromkeys(("2sd", "2s", "2sigma"), TWO_DEVIATIONS),
    **dict.fromkeys(("95%cl", "95%ci", "95cl", "95ci", "ci", "cl", "confidenceinterval", "95%confidence",
                     "95%confidenceinterval"), INTERVAL),
    **dict.fromkeys(("u", "k=2", "u(k=2)", "expanded", "expandeduncertainty"), EXPANDED),
    "range": NOTHING,
}  # fmt: skip


def kind_of_uncertainty(text: str | None) -> str:
    """What the stated uncertainty is; not stated counts as a standard deviation, an unknown word as nothing."""
    return _KINDS.get("".join((text or "").casefold().split()), NOTHING)


def horwitz_deviation(value: ArrayLike, unit: str, factor: float = APPLIED_GEOCHEMISTRY) -> Floats:
    """Standard deviation that fits the purpose, in ``unit``: H = k c^0.8495, c the mass fraction; NaN for c <= 0.

    Horwitz 1982, Anal. Chem. 54, 67A-76A (k = 0.02 between laboratories), at c = 1e-6: 16 %.
    """
    amount = np.asarray(value, dtype=np.float64)
    to_fraction = WT_PERCENT_PER_UNIT[unit] / 100.0
    with np.errstate(invalid="ignore"):
        spread = factor * np.power(np.where(amount > 0.0, amount * to_fraction, np.nan), 0.8495)
    return spread / to_fraction


def standard_uncertainty(uncertainty: float, uncertainty_type: str | None) -> float:
    """One standard deviation: as it is stated, the half of 2SD and of U (k = 2), a half width of 95 % over 1.96."""
    kind = kind_of_uncertainty(uncertainty_type)
    return uncertainty / {TWO_DEVIATIONS: 2.0, EXPANDED: 2.0, INTERVAL: NORMAL_95}.get(kind, 1.0)


def allowed_deviation(
    value: float, unit: str, uncertainty: float | None, uncertainty_type: str | None
) -> tuple[float, str]:
    """Standard deviation for z-scores, in ``unit``, and in words where it comes from.

    A stated deviation is used as it is. A confidence interval (half width 1.96 u) and an expanded uncertainty (U = 2 u,
    ISO/IEC Guide 98-3:2008, 6.2) give sqrt(u^2 + H^2), the z'-score of ISO 13528:2022, 9.5; without either H stands
    alone, and so it does where the certificate states 0.
    """
    fit = float(horwitz_deviation(value, unit))
    kind = kind_of_uncertainty(uncertainty_type)
    if uncertainty is None or not uncertainty > 0.0 or kind == NOTHING:
        return fit, "deviation fit for applied geochemistry (Horwitz function, k 0.02)"
    own = standard_uncertainty(uncertainty, uncertainty_type)
    if kind in (STANDARD_DEVIATION, TWO_DEVIATIONS):
        return own, "standard deviation of the certificate"
    words = "expanded uncertainty" if kind == EXPANDED else "confidence interval"
    return float(np.hypot(own, fit)), (
        f"{words} of the certificate with the deviation fit for applied geochemistry (ISO 13528 z')"
    )
