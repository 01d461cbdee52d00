"""Liquidus temperatures of a melt from its composition: one function a published model, results in degrees Celsius.

Every model takes the whole rock as a liquid: an aphyric, fresh lava or glass. Oxides are wt% of the anhydrous
analysis, all iron as FeO, never normalised here; arrays broadcast and NaN stays in its row. Coefficients are as
published, from memory where the catalogue says so.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike

from registry.petrology.constants import ZERO_CELSIUS_K, molar_mass
from registry.petrology.melt_composition import Array, cation_fractions, mg_fraction, positive

PA_PER_GPA = 1e9
#: The gas constant as printed with the olivine model, J/mol/K [beattie1993].
GAS_CONSTANT_BEATTIE = 8.3144


def liquidus_helz_thornber(mgo_wt: ArrayLike) -> Array:
    """Temperature (C) of basaltic glass from its MgO (wt%), +- 10 C.

    Calibration: Kilauea glass with olivine, augite and plagioclase, 1 bar, MgO about 5-11 wt%.
    Source [helz1987]. Example: MgO 7.00 -> 1154.7.
    """
    return 20.1 * np.asarray(mgo_wt, dtype=np.float64) + 1014.0


def liquidus_montierth(mgo_wt: ArrayLike) -> Array:
    """Temperature (C) of basaltic glass from its MgO (wt%), Mauna Loa. Source [montierth1995]."""
    return 23.0 * np.asarray(mgo_wt, dtype=np.float64) + 1012.0


def liquidus_putirka13(mgo_wt: ArrayLike) -> Array:
    """Olivine-saturation temperature (C) from MgO (wt%) alone, standard error 71 C. Source [putirka2008] eq. 13."""
    return 26.3 * np.asarray(mgo_wt, dtype=np.float64) + 994.4


def liquidus_putirka14(
    mgo_wt: ArrayLike, feot_wt: ArrayLike, na2o_wt: ArrayLike, k2o_wt: ArrayLike, h2o_wt: ArrayLike = 0.0
) -> Array:
    """Olivine-saturation temperature (C) of a dry or hydrous liquid, standard error about 50 C.

    Oxides wt% anhydrous, ``h2o_wt`` in the melt. Source [putirka2008] eq. 14.
    """
    alkalis = np.add(na2o_wt, k2o_wt)
    return (
        754.0
        + 190.6 * mg_fraction(mgo_wt, feot_wt)
        + 25.52 * np.asarray(mgo_wt)
        + 9.585 * np.asarray(feot_wt)
        + 14.87 * alkalis
        - 9.176 * np.asarray(h2o_wt)
    )


def liquidus_putirka15(
    mgo_wt: ArrayLike,
    feot_wt: ArrayLike,
    na2o_wt: ArrayLike,
    k2o_wt: ArrayLike,
    h2o_wt: ArrayLike = 0.0,
    pressure_gpa: ArrayLike = 1e-4,
) -> Array:
    """Olivine-saturation temperature (C) with pressure and water, standard error 46-60 C.

    Oxides wt% anhydrous, ``h2o_wt`` in the melt, pressure in GPa (1 bar = 1e-4). Source [putirka2008] eq. 15.
    """
    alkalis = np.add(na2o_wt, k2o_wt)
    return (
        815.3
        + 265.5 * mg_fraction(mgo_wt, feot_wt)
        + 15.37 * np.asarray(mgo_wt)
        + 8.61 * np.asarray(feot_wt)
        + 6.646 * alkalis
        + 39.16 * np.asarray(pressure_gpa)
        - 12.83 * np.asarray(h2o_wt)
    )


def liquidus_putirka16(x_sio2: ArrayLike, x_al2o3: ArrayLike, x_mgo: ArrayLike, pressure_gpa: ArrayLike) -> Array:
    """EXPERIMENTAL: temperature (C) of liquids with olivine, plagioclase and augite; standard error 19-26 C.

    ``x_*`` are fractions of the anhydrous liquid. Whether the printed equation means oxide mole fractions or
    cation fractions is not confirmed (30 C apart on ridge basalt), so no derived column uses this function.
    Source [putirka2008] eq. 16, from memory.
    """
    silica, alumina = np.asarray(x_sio2, dtype=np.float64), np.asarray(x_al2o3, dtype=np.float64)
    return (
        -583.0
        + 3141.0 * silica
        + 15779.0 * alumina
        + 1338.6 * np.asarray(x_mgo)
        - 31440.0 * silica * alumina
        + 77.67 * np.asarray(pressure_gpa)
    )


def olivine_liquid_terms(
    sio2_wt: ArrayLike,
    tio2_wt: ArrayLike,
    al2o3_wt: ArrayLike,
    feot_wt: ArrayLike,
    mno_wt: ArrayLike,
    mgo_wt: ArrayLike,
    cao_wt: ArrayLike,
    na2o_wt: ArrayLike,
    k2o_wt: ArrayLike,
    p2o5_wt: ArrayLike,
) -> dict[str, Array]:
    """Terms of the olivine-liquid models from cation fractions C of the anhydrous liquid, all iron as Fe2+.

    Returns arrays: ``d_mg`` the partition coefficient of Mg predicted from the liquid [beattie1993],
    ``c_nm`` = Mg + Fe + Ca + Mn, ``c_sio2``, and ``nf`` = 3.5 ln(1 - Al) + 7 ln(1 - Ti).
    """
    c = cation_fractions({
        "sio2_wt": sio2_wt, "tio2_wt": tio2_wt, "al2o3_wt": al2o3_wt, "feot_wt": feot_wt, "mno_wt": mno_wt,
        "mgo_wt": mgo_wt, "cao_wt": cao_wt, "na2o_wt": na2o_wt, "k2o_wt": k2o_wt, "p2o5_wt": p2o5_wt,
    })  # fmt: skip
    mg, fe, mn = c["mgo_wt"], c["feot_wt"], c["mno_wt"]
    return {
        "d_mg": (0.666 + 0.049 * mn - 0.027 * fe) / positive(mg + 0.259 * mn + 0.299 * fe),
        "c_nm": mg + fe + c["cao_wt"] + mn,
        "c_sio2": c["sio2_wt"],
        "nf": 3.5 * np.log(positive(1.0 - c["al2o3_wt"])) + 7.0 * np.log(positive(1.0 - c["tio2_wt"])),
    }


def liquidus_putirka22(
    d_mg: ArrayLike,
    c_nm: ArrayLike,
    c_sio2: ArrayLike,
    nf: ArrayLike,
    h2o_wt: ArrayLike = 0.0,
    pressure_gpa: ArrayLike = 1e-4,
) -> Array:
    """Olivine-liquid temperature (C), standard error 43 C (29 C for the hydrous subset).

    The first four arguments come from ``olivine_liquid_terms``; ``h2o_wt`` in the melt, pressure in GPa.
    Source [putirka2008] eq. 22, with the partition coefficient of [beattie1993] where no olivine was analysed.
    """
    p = np.asarray(pressure_gpa, dtype=np.float64)
    numerator = 15294.6 + 1318.8 * p + 2.4834 * p * p
    denominator = (
        8.048
        + 2.8352 * np.log(positive(d_mg))
        + 2.097 * np.log(1.5 * positive(c_nm))
        + 2.575 * np.log(3.0 * positive(c_sio2))
        - 1.41 * np.asarray(nf)
        + 0.222 * np.asarray(h2o_wt)
        + 0.5 * p
    )
    return numerator / positive(denominator)


def liquidus_beattie(
    d_mg: ArrayLike, c_nm: ArrayLike, c_sio2: ArrayLike, nf: ArrayLike, pressure_gpa: ArrayLike = 1e-4
) -> Array:
    """Olivine-saturation temperature (C) of a DRY liquid, +- 10 C at low pressure.

    Arguments as in ``liquidus_putirka22``. It overestimates for hydrous liquids and at high pressure.
    Source [beattie1993].
    """
    p_pa = np.asarray(pressure_gpa, dtype=np.float64) * PA_PER_GPA
    numerator = (113.1e3 + (p_pa - 1e5) * 4.11e-6) / GAS_CONSTANT_BEATTIE
    denominator = (
        52.05 / GAS_CONSTANT_BEATTIE
        + 2.0 * np.log(positive(d_mg))
        + 2.0 * np.log(1.5 * positive(c_nm))
        + 2.0 * np.log(3.0 * positive(c_sio2))
        - np.asarray(nf)
    )
    return numerator / positive(denominator) - ZERO_CELSIUS_K


def liquidus_sugawara(
    sio2_wt: ArrayLike,
    tio2_wt: ArrayLike,
    al2o3_wt: ArrayLike,
    feot_wt: ArrayLike,
    mno_wt: ArrayLike,
    mgo_wt: ArrayLike,
    cao_wt: ArrayLike,
    na2o_wt: ArrayLike,
    k2o_wt: ArrayLike,
    p2o5_wt: ArrayLike,
) -> Array:
    """Olivine-liquid temperature (C) of a DRY liquid at low pressure, standard error about 30 C.

    Uses mol% of oxides, all iron as FeO. The published pressure term is left out: its coefficient is not
    confirmed (0.0043 K/bar from memory, 9 C at 0.2 GPa). Source [sugawara2000].
    """
    silica = np.asarray(sio2_wt) * (1.0 / molar_mass("SiO2"))
    iron = np.asarray(feot_wt) * (1.0 / molar_mass("FeO"))
    magnesia = np.asarray(mgo_wt) * (1.0 / molar_mass("MgO"))
    lime = np.asarray(cao_wt) * (1.0 / molar_mass("CaO"))
    rest = (
        np.asarray(tio2_wt) * (1.0 / molar_mass("TiO2"))
        + np.asarray(al2o3_wt) * (1.0 / molar_mass("Al2O3"))
        + np.asarray(mno_wt) * (1.0 / molar_mass("MnO"))
        + np.asarray(na2o_wt) * (1.0 / molar_mass("Na2O"))
        + np.asarray(k2o_wt) * (1.0 / molar_mass("K2O"))
        + np.asarray(p2o5_wt) * (1.0 / molar_mass("P2O5"))
    )
    total = positive(silica + iron + magnesia + lime + rest)
    mol_percent_terms = -1.440 * silica - 0.500 * iron + 12.32 * magnesia - 3.899 * lime
    return 1446.0 + 100.0 * mol_percent_terms / total - ZERO_CELSIUS_K


def liquidus_makhluf(h2o_wt: ArrayLike) -> Array:
    """Liquidus temperature (C) of haplogranite at 1 GPa from the water in the melt (wt%).

    Calibration: H2O 3-12 wt%, 10 kbar, synthetic haplogranite; a stand-in for acid melts, provisional.
    Source [makhluf2017]. Example: 3 wt% -> 949, 8 wt% -> 736.
    """
    w = np.asarray(h2o_wt, dtype=np.float64)
    return 1171.0 + w * (-88.183 + w * (5.0242 - 0.0995 * w))


def liquidus_duan(sio2_wt: ArrayLike) -> Array:
    """Magma temperature (C) of granitoids from SiO2 (wt%), shown beside the acid route. Source [duan2022]."""
    return 1723.0 - 14.16 * np.asarray(sio2_wt, dtype=np.float64)
