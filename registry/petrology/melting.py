"""Where rock melts: peridotite dry and wet, granite with water; and what a partial melt carries.

Pressures in GPa, temperatures in C, water in wt%. Peridotite curves hold below the Moho only; a dry crustal solidus
is not given here.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike

from registry.petrology.melt_composition import Array, not_negative, positive

#: Melt fractions between which the wet solution is searched, and the halvings of that interval.
_HALVINGS = 50
#: Partition coefficient of water between peridotite and melt, and depression K X^gamma [katz2003].
KATZ_D_H2O, KATZ_K, KATZ_GAMMA = 0.01, 43.0, 0.75
KATZ_BETA1, KATZ_BETA2 = 1.5, 1.5
#: Modal clinopyroxene of the source.
KATZ_CPX_FRACTION = 0.15

#: Water-saturated granite: pressure (GPa), solidus, liquidus (C) [stern1973].
WET_GRANITE = ((0.2, 1.0, 2.5, 3.5), (680.0, 620.0, 655.0, 700.0), (715.0, 725.0, 800.0, 850.0))
#: Water-saturated haplogranite minimum: pressure (GPa), temperature (C) [tuttle1958], [johannes1996], from memory.
HAPLOGRANITE_MINIMUM = (
    (0.05, 0.1, 0.2, 0.3, 0.4, 0.5, 1.0),
    (770.0, 720.0, 685.0, 665.0, 655.0, 640.0, 620.0),
)


def peridotite_solidus_hirschmann_2000(pressure_gpa: ArrayLike) -> Array:
    """Dry peridotite solidus (C), 0-10 GPa: -5.104 P2 + 132.899 P + 1120.661. Source [hirschmann2000] abstract."""
    p = not_negative(pressure_gpa)
    return 1120.661 + p * (132.899 - 5.104 * p)


def peridotite_solidus_hirschmann_2009(pressure_gpa: ArrayLike) -> Array:
    """Dry peridotite solidus (C), revised: -5.140 P2 + 132.899 P + 1108.08. Source [hirschmann2009], from memory."""
    p = not_negative(pressure_gpa)
    return 1108.08 + p * (132.899 - 5.140 * p)


def peridotite_curves_katz(pressure_gpa: ArrayLike) -> dict[str, Array]:
    """Dry ``solidus_c``, ``lherzolite_liquidus_c`` and ``liquidus_c``; 35 C below Hirschmann 2000 at the solidus.

    Source [katz2003], from memory. Example: 1 GPa -> 1213.5, 1551.8, 1823.
    """
    p = not_negative(pressure_gpa)
    return {
        "solidus_c": 1085.7 + p * (132.9 - 5.1 * p),
        "lherzolite_liquidus_c": 1475.0 + p * (80.0 - 3.2 * p),
        "liquidus_c": 1780.0 + p * (45.0 - 2.0 * p),
    }


def melt_fraction_katz_dry(
    temperature_c: ArrayLike, pressure_gpa: ArrayLike, cpx_fraction: float = KATZ_CPX_FRACTION
) -> Array:
    """Melt fraction of dry peridotite, 0 below the solidus and 1 above the liquidus.

    Source [katz2003], from memory. Example: 1 GPa, 1300 C, clinopyroxene 0.15 -> 0.1293.
    """
    return _katz_fraction(np.asarray(temperature_c, dtype=np.float64), not_negative(pressure_gpa), cpx_fraction)


def melt_fraction_katz_wet(
    temperature_c: ArrayLike,
    pressure_gpa: ArrayLike,
    bulk_h2o_wt: ArrayLike,
    cpx_fraction: float = KATZ_CPX_FRACTION,
) -> Array:
    """Melt fraction of hydrous peridotite: all curves lowered by 43 X^0.75, X the water in the melt (wt%).

    X = bulk/(0.01 + 0.99 F), at most that of saturation; solved for F by halving, to 1e-15.
    Source [katz2003], from memory. Example: 1 GPa, 1200 C, 0.1 wt% -> 0.0530.
    """
    t, p, bulk = np.broadcast_arrays(
        np.asarray(temperature_c, dtype=np.float64), not_negative(pressure_gpa), not_negative(bulk_h2o_wt)
    )
    low, high = np.zeros(t.shape), np.ones(t.shape)
    for _ in range(_HALVINGS):
        middle = 0.5 * (low + high)
        too_small = _katz_fraction(t + katz_depression_c(middle, p, bulk), p, cpx_fraction) > middle
        low, high = np.where(too_small, middle, low), np.where(too_small, high, middle)
    dry_at_zero = _katz_fraction(t + katz_depression_c(np.zeros(t.shape), p, bulk), p, cpx_fraction)
    return np.where(np.isnan(dry_at_zero), np.nan, np.where(dry_at_zero <= 0.0, 0.0, 0.5 * (low + high)))


def katz_depression_c(melt_fraction: ArrayLike, pressure_gpa: ArrayLike, bulk_h2o_wt: ArrayLike) -> Array:
    """Lowering (C) of the peridotite curves by bulk water at a melt fraction. Source [katz2003], from memory."""
    f = not_negative(melt_fraction)
    in_melt = not_negative(bulk_h2o_wt) / (KATZ_D_H2O + f * (1.0 - KATZ_D_H2O))
    return KATZ_K * np.minimum(in_melt, katz_saturation_h2o_wt(pressure_gpa)) ** KATZ_GAMMA


def katz_saturation_h2o_wt(pressure_gpa: ArrayLike) -> Array:
    """Water (wt%) that a mantle melt can hold: 12.00 P^0.60 + 1.00 P. Source [katz2003], from memory."""
    p = not_negative(pressure_gpa)
    return 12.00 * p**0.60 + 1.00 * p


def peridotite_solidus_katz_saturated(pressure_gpa: ArrayLike) -> Array:
    """Water-saturated peridotite solidus (C). Source [katz2003], from memory. Example: 1 GPa -> 919."""
    solidus = peridotite_curves_katz(pressure_gpa)["solidus_c"]
    return solidus - KATZ_K * katz_saturation_h2o_wt(pressure_gpa) ** KATZ_GAMMA


def wet_granite_solidus(pressure_gpa: ArrayLike) -> Array:
    """Water-saturated solidus (C) of natural biotite granite, 0.2-3.5 GPa, linear between the printed points.

    NaN outside. New reversals say that granite may stay partly molten below this curve. Source [stern1973] abstract.
    """
    return _between(pressure_gpa, WET_GRANITE[0], WET_GRANITE[1])


def wet_granite_liquidus(pressure_gpa: ArrayLike) -> Array:
    """Water-saturated liquidus (C) of natural biotite granite, 0.2-3.5 GPa; NaN outside. Source [stern1973]."""
    return _between(pressure_gpa, WET_GRANITE[0], WET_GRANITE[2])


def haplogranite_minimum(pressure_gpa: ArrayLike) -> Array:
    """Water-saturated haplogranite minimum (C), 0.05-1 GPa; NaN outside.

    Linear in log P below 0.2 GPa, in P above. Source [tuttle1958], [johannes1996], from memory. The curve rises as
    pressure falls: decompression does not melt wet crust.
    """
    pressures, temperatures = HAPLOGRANITE_MINIMUM
    p = not_negative(pressure_gpa)
    in_log = _between(np.log(positive(p)), np.log(pressures), temperatures)
    return np.where(p < 0.2, in_log, _between(p, pressures, temperatures))


def batch_melt_enrichment(melt_fraction: ArrayLike, partition_coefficient: ArrayLike) -> Array:
    """Concentration in the melt over that in the source, modal batch melting: 1/(D + F (1 - D)).

    F 0-1, D >= 0. Source [shaw1970]. Example: D 0.01, F 0.1 -> 9.174.
    """
    return batch_melt_enrichment_nonmodal(melt_fraction, partition_coefficient, partition_coefficient)


def batch_melt_enrichment_nonmodal(melt_fraction: ArrayLike, d0: ArrayLike, p: ArrayLike) -> Array:
    """The same for non-modal melting, 1/(D0 + F (1 - P)), P by the proportions that melt. Source [shaw1970]."""
    f = not_negative(melt_fraction)
    f = np.where(f <= 1.0, f, np.nan)
    return 1.0 / positive(not_negative(d0) + f * (1.0 - not_negative(p)))


def batch_melt_fraction(enrichment: ArrayLike, partition_coefficient: ArrayLike) -> Array:
    """Melt fraction from the enrichment Cl/C0 of an element: (C0/Cl - D)/(1 - D); NaN outside 0-1. [shaw1970]"""
    d = not_negative(partition_coefficient)
    fraction = (1.0 / positive(enrichment) - d) / positive(1.0 - d)
    return np.where((fraction >= 0.0) & (fraction <= 1.0), fraction, np.nan)


def rayleigh_liquid_fraction(enrichment: ArrayLike, partition_coefficient: ArrayLike = 0.0) -> Array:
    """Liquid left by fractional crystallisation, from the enrichment Cl/C0 of an element with D below 1.

    F = (C0/Cl)^(1/(1 - D)); NaN above 1 (the element was lost). Source [rayleigh1896].
    Example: Cl/C0 5, D 0.1 -> 0.167.
    """
    exponent = 1.0 / positive(1.0 - not_negative(partition_coefficient))
    fraction = (1.0 / positive(enrichment)) ** exponent
    return np.where(fraction <= 1.0, fraction, np.nan)


def _between(values: ArrayLike, xs: ArrayLike, ys: ArrayLike) -> Array:
    """Linear interpolation, NaN outside the table and for NaN."""
    v = np.asarray(values, dtype=np.float64)
    return np.where(np.isnan(v), np.nan, np.interp(v, np.asarray(xs), np.asarray(ys), left=np.nan, right=np.nan))


def _katz_fraction(t: Array, p: Array, cpx_fraction: float) -> Array:
    curves = peridotite_curves_katz(p)
    solidus, lherzolite, liquidus = curves["solidus_c"], curves["lherzolite_liquidus_c"], curves["liquidus_c"]
    reduced = (t - solidus) / positive(lherzolite - solidus)
    with_cpx = np.where(reduced > 0.0, np.maximum(reduced, 0.0) ** KATZ_BETA1, 0.0)
    f_out = cpx_fraction / (0.50 + 0.08 * p)
    t_out = f_out ** (1.0 / KATZ_BETA1) * (lherzolite - solidus) + solidus
    further = np.maximum((t - t_out) / positive(liquidus - t_out), 0.0)
    without_cpx = np.minimum(f_out + (1.0 - f_out) * further**KATZ_BETA2, 1.0)
    fraction = np.where(with_cpx <= f_out, with_cpx, without_cpx)
    return np.where(np.isnan(t + p), np.nan, fraction)
