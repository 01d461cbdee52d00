"""Viscosity of a silicate melt, as log10 of Pa s, and what suspended crystals do to it."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
from numpy.typing import ArrayLike

from registry.petrology.constants import ZERO_CELSIUS_K, molar_mass
from registry.petrology.melt_composition import MELT_OXIDES, Array, not_negative, positive, wet_wt

#: log10 viscosity (Pa s) at infinite temperature, the same for every melt [giordano2008].
GRD_A = -4.55
LOG10_PA_S_PER_POISE = -1.0
#: Crystal fraction at which a suspension locks; 0.60 is 1/1.67 [marsh1981], 0.741 the original of [roscoe1952].
CRYSTAL_FRACTION_LOCKED = 0.60


def melt_viscosity_giordano_terms(
    oxides: Mapping[str, ArrayLike], h2o_wt: ArrayLike = 0.0, f_wt: ArrayLike = 0.0
) -> dict[str, Array]:
    """B and C (K) of log10 viscosity = -4.55 + B/(T - C), from oxides in wt%, all iron as FeO.

    ``oxides`` holds the columns of ``MELT_OXIDES``; a missing one counts as absent. The anhydrous oxides are scaled
    to 100 - H2O (wt% of the melt); ``f_wt`` is wt% F of the melt. The
    model works in mol%, with fluorine as F2O-1. Source [giordano2008].
    """
    wet = wet_wt(oxides, h2o_wt)
    moles = {column: wt * (1.0 / molar_mass(MELT_OXIDES[column])) for column, wt in wet.items()}
    moles["h2o_wt"] = not_negative(h2o_wt) * (1.0 / molar_mass("H2O"))
    moles["f_wt"] = not_negative(f_wt) * (1.0 / molar_mass("F2"))  # moles of F2O-1
    total: Array | float = 0.0
    for amount in moles.values():
        total = total + amount
    scale = 100.0 / positive(total)
    x = {column: amount * scale for column, amount in moles.items()}
    zero = np.zeros(())
    si, ti, al, p = (x.get(name, zero) for name in ("sio2_wt", "tio2_wt", "al2o3_wt", "p2o5_wt"))
    femn = x.get("feot_wt", zero) + x.get("mno_wt", zero)
    mg, ca, na = (x.get(name, zero) for name in ("mgo_wt", "cao_wt", "na2o_wt"))
    h2o, volatile = x["h2o_wt"], x["h2o_wt"] + x["f_wt"]
    siti, ta, fm, nk = si + ti, ti + al, femn + mg, na + x.get("k2o_wt", zero)
    b = (
        159.6 * siti
        - 173.3 * al
        + 72.1 * (femn + p)
        + 75.7 * mg
        - 39.0 * ca
        - 84.1 * (na + volatile)
        + 141.5 * (volatile + np.log1p(h2o))
        - 2.43 * siti * fm
        - 0.91 * (siti + al + p) * (nk + h2o)
        + 17.6 * al * nk
    )
    c = (
        2.75 * si
        + 15.7 * ta
        + 8.3 * fm
        + 10.2 * ca
        - 12.3 * nk
        - 99.5 * np.log1p(volatile)
        + 0.30 * (al + fm + ca - p) * (nk + volatile)
    )
    return {"b_k": b, "c_k": c}


def melt_viscosity_giordano(
    oxides: Mapping[str, ArrayLike], temperature_c: ArrayLike, h2o_wt: ArrayLike = 0.0, f_wt: ArrayLike = 0.0
) -> Array:
    """log10 of the viscosity (Pa s) of a crystal-free melt; NaN at or below the temperature C where it diverges.

    Calibration: 1774 measurements, 535-1705 C, 1 bar, dry to hydrous; root mean square error 0.40.
    Source [giordano2008] eq. 1 and table 1. Example: Le Maitre's average basalt, dry, 1200 C -> 1.868.
    """
    terms = melt_viscosity_giordano_terms(oxides, h2o_wt, f_wt)
    temperature_k = np.asarray(temperature_c, dtype=np.float64) + ZERO_CELSIUS_K
    return GRD_A + terms["b_k"] / positive(temperature_k - terms["c_k"])


def glass_transition_giordano(oxides: Mapping[str, ArrayLike], h2o_wt: ArrayLike = 0.0, f_wt: ArrayLike = 0.0) -> Array:
    """Temperature (K) at which the melt's viscosity is 1e12 Pa s. Source [giordano2008]."""
    terms = melt_viscosity_giordano_terms(oxides, h2o_wt, f_wt)
    return terms["c_k"] + terms["b_k"] / (12.0 - GRD_A)


def melt_viscosity_shaw(oxides: Mapping[str, ArrayLike], temperature_c: ArrayLike, h2o_wt: ArrayLike = 0.0) -> Array:
    """log10 of the viscosity (Pa s) of a crystal-free melt, older and simpler model.

    ln (poise) = s 1e4/T - 1.50 s - 6.40, s = X(SiO2) sum(X_i s_i)/(1 - X(SiO2)) in mole fractions with Al as AlO2;
    all iron as FeO, P2O5 kept while the oxides are scaled to 100 - H2O, then left out. Source [shaw1972].
    Example: average basalt, dry, 1200 C -> 1.508.
    """
    wet = wet_wt(oxides, h2o_wt)
    x = {
        column: wt * ((2.0 if column == "al2o3_wt" else 1.0) / molar_mass(MELT_OXIDES[column]))
        for column, wt in wet.items()
        if column != "p2o5_wt"
    }
    slopes = {
        "k2o_wt": 2.8, "na2o_wt": 2.8, "mgo_wt": 3.4, "feot_wt": 3.4, "mno_wt": 3.4, "cao_wt": 4.5, "tio2_wt": 4.5,
        "al2o3_wt": 6.7,
    }  # fmt: skip
    water = not_negative(h2o_wt) * (1.0 / molar_mass("H2O"))
    weighted, rest = 2.0 * water, water
    for column, amount in x.items():
        if column != "sio2_wt":
            weighted = weighted + slopes[column] * amount
            rest = rest + amount
    silica = x["sio2_wt"]
    total = positive(silica + rest)
    s = silica * weighted / (total * positive(rest))
    temperature_k = positive(np.asarray(temperature_c, dtype=np.float64) + ZERO_CELSIUS_K)
    return (s * (1e4 / temperature_k - 1.50) - 6.40) / np.log(10.0) + LOG10_PA_S_PER_POISE


def crystal_factor_einstein_roscoe(
    crystal_fraction: ArrayLike, locked_fraction: float = CRYSTAL_FRACTION_LOCKED
) -> Array:
    """How many times crystals raise the viscosity: (1 - phi/phi_m)^-2.5, by volume fraction phi.

    NaN outside 0 <= phi < phi_m; not to be used above 0.4-0.5. Source [roscoe1952] form, phi_m 0.60 [marsh1981].
    Example: phi 0.3 -> 5.657.
    """
    phi = not_negative(crystal_fraction)
    return positive(1.0 - phi / locked_fraction) ** -2.5


def crystal_factor_maron_pierce(crystal_fraction: ArrayLike, locked_fraction: ArrayLike) -> Array:
    """How many times crystals raise the viscosity: (1 - phi/phi_m)^-2, phi_m by aspect ratio. Source [mueller2011]."""
    phi = not_negative(crystal_fraction)
    return positive(1.0 - phi / positive(locked_fraction)) ** -2.0
