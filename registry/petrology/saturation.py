"""Temperatures at which a melt of the rock's composition holds just the zirconium of the rock: zircon saturation.

The rock is taken for a liquid without inherited zircon; inherited zircon raises the temperature, an unsaturated
melt makes it a minimum. Zr in ppm, results in degrees Celsius, arrays broadcast, NaN stays in its row.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from registry.petrology.analytes import CHOSEN_INDEX
from registry.petrology.constants import ZERO_CELSIUS_K, ZR_IN_ZIRCON_PPM, molar_mass
from registry.petrology.digestion import CARRIES, TOTAL
from registry.petrology.melt_composition import Array, cation_fractions, exponential, positive

#: Where the parameter M of [watson1983] was calibrated, its upper end as extended.
ZIRCON_M_LOW, ZIRCON_M_HIGH = 0.9, 1.9
ZIRCON_SIO2_LOW_WT = 63.0
#: Calibrated temperatures of the two models, C.
ZIRCON_WH83_LOW_C, ZIRCON_WH83_HIGH_C = 750.0, 1020.0


def zircon_m(
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
    """The melt parameter M = (Na + K + 2 Ca)/(Al Si), cation fractions of the anhydrous melt, pure number.

    Oxides in wt%, all iron as FeO. Source [watson1983]. Example: Le Maitre's average granite -> 1.4358.
    """
    c = cation_fractions({
        "sio2_wt": sio2_wt, "tio2_wt": tio2_wt, "al2o3_wt": al2o3_wt, "feot_wt": feot_wt, "mno_wt": mno_wt,
        "mgo_wt": mgo_wt, "cao_wt": cao_wt, "na2o_wt": na2o_wt, "k2o_wt": k2o_wt, "p2o5_wt": p2o5_wt,
    })  # fmt: skip
    return (c["na2o_wt"] + c["k2o_wt"] + 2.0 * c["cao_wt"]) / positive(c["al2o3_wt"] * c["sio2_wt"])


def zircon_saturation_watson_harrison(
    zr_ppm: ArrayLike, m: ArrayLike, zr_in_zircon_ppm: float = ZR_IN_ZIRCON_PPM
) -> Array:
    """Zircon saturation temperature (C) from Zr (ppm) and the melt parameter M.

    ln D = -3.80 - 0.85 (M - 1) + 12900/T. Calibration: 750-1020 C, M 0.9-1.7 (used to 1.9), not peralkaline.
    Source [watson1983]. Example: Le Maitre's average granite, Zr 150 -> 777.6.
    """
    log_d = np.log(zr_in_zircon_ppm / positive(zr_ppm))
    return 12900.0 / positive(2.95 + 0.85 * np.asarray(m) + log_d) - ZERO_CELSIUS_K


def zircon_saturation_boehnke(zr_ppm: ArrayLike, m: ArrayLike, zr_in_zircon_ppm: float = ZR_IN_ZIRCON_PPM) -> Array:
    """Zircon saturation temperature (C) from Zr (ppm) and M, the recalibration: some 50 C below the first.

    ln D = 10108/T - 1.16 (M - 1) - 1.48. Source [boehnke2013]. Example: average granite, Zr 150 -> 728.4.
    """
    log_d = np.log(zr_in_zircon_ppm / positive(zr_ppm))
    return 10108.0 / positive(log_d + 1.16 * (np.asarray(m) - 1.0) + 1.48) - ZERO_CELSIUS_K


def zircon_saturation_shao(zr_ppm: ArrayLike, m: ArrayLike) -> Array:
    """Zircon saturation temperature (C): ln Zr = 14.297(308) + 0.964(66) M - 11113(374)/T.

    Calibration: 750-1400 C, not peralkaline. Source [shao2020] abstract. Example: average granite, Zr 150 -> 768.3.
    """
    return 11113.0 / positive(14.297 + 0.964 * np.asarray(m) - np.log(positive(zr_ppm))) - ZERO_CELSIUS_K


def zircon_g(
    sio2_wt: ArrayLike,
    al2o3_wt: ArrayLike,
    feot_wt: ArrayLike,
    mgo_wt: ArrayLike,
    cao_wt: ArrayLike,
    na2o_wt: ArrayLike,
    k2o_wt: ArrayLike,
) -> Array:
    """Melt parameter G = (3 Al2O3 + SiO2)/(Na2O + K2O + CaO + MgO + FeO), molar. Source [shao2020] abstract."""
    acid = 3.0 * np.asarray(al2o3_wt) / molar_mass("Al2O3") + np.asarray(sio2_wt) / molar_mass("SiO2")
    base = (
        np.asarray(na2o_wt) / molar_mass("Na2O")
        + np.asarray(k2o_wt) / molar_mass("K2O")
        + np.asarray(cao_wt) / molar_mass("CaO")
        + np.asarray(mgo_wt) / molar_mass("MgO")
        + np.asarray(feot_wt) / molar_mass("FeO")
    )
    return acid / positive(base)


def zircon_saturation_shao_alkaline(zr_ppm: ArrayLike, g: ArrayLike) -> Array:
    """Zircon saturation temperature (C) of alkaline melts: ln Zr = 18.99 - 1.069 ln G - 12288/T [shao2020]."""
    return 12288.0 / positive(18.99 - 1.069 * np.log(positive(g)) - np.log(positive(zr_ppm))) - ZERO_CELSIUS_K


def zr_at_saturation_watson_harrison(temperature_c: ArrayLike, m: ArrayLike) -> Array:
    """Zr (ppm) that a melt of parameter M holds at zircon saturation [watson1983]; 800 C, M 1.4358 -> 193.9."""
    t = positive(np.asarray(temperature_c) + ZERO_CELSIUS_K)
    return ZR_IN_ZIRCON_PPM / exponential(12900.0 / t - 2.95 - 0.85 * np.asarray(m))


def zr_at_saturation_boehnke(temperature_c: ArrayLike, m: ArrayLike) -> Array:
    """Zr (ppm) that a melt of parameter M holds at zircon saturation [boehnke2013]; 800 C, M 1.4358 -> 294.2."""
    t = positive(np.asarray(temperature_c) + ZERO_CELSIUS_K)
    return ZR_IN_ZIRCON_PPM / exponential(10108.0 / t - 1.16 * (np.asarray(m) - 1.0) - 1.48)


def zr_at_saturation_shao(temperature_c: ArrayLike, m: ArrayLike) -> Array:
    """Zr (ppm) that a melt of parameter M holds at zircon saturation [shao2020]; 800 C, M 1.4358 -> 205.5."""
    t = positive(np.asarray(temperature_c) + ZERO_CELSIUS_K)
    return exponential(14.297 + 0.964 * np.asarray(m) - 11113.0 / t)


def saturation_hfse(zr_ppm: ArrayLike, hf_ppm: ArrayLike) -> Array:
    """Temperature (C) of a granitic melt from Zr and Hf (ppm): T = -15993/(ln Zr + ln Hf - 21.668).

    Calibration: M < 2, SiO2 > 63 wt%. Source [hfse2022] abstract. Example: Zr 150, Hf 4.2 -> 777.
    """
    return 15993.0 / positive(21.668 - np.log(positive(zr_ppm)) - np.log(positive(hf_ppm))) - ZERO_CELSIUS_K


def saturation_hfse_alkaline(
    hf_ppm: ArrayLike, y_ppm: ArrayLike, ce_ppm: ArrayLike, zr_ppm: ArrayLike, tio2_wt: ArrayLike
) -> Array:
    """Temperature (C) of an alkaline melt: T = -20914/(ln(Hf + Y + Ce) + ln(Zr/TiO2) - 31.153), ppm.

    The unit of TiO2 is not printed in the abstract; wt% is taken because ppm would give 435 C for a granite that
    the other models put near 760 C. Source [hfse2022] abstract; provisional, so no derived column uses it.
    """
    elements = np.log(positive(np.add(np.add(hf_ppm, y_ppm), ce_ppm)))
    ratio = np.log(positive(zr_ppm) / positive(tio2_wt))
    return 20914.0 / positive(31.153 - elements - ratio) - ZERO_CELSIUS_K


def zircon_zr_is_total(digestion_codes: ArrayLike) -> NDArray[np.bool_]:
    """Whether Zr came wholly into the measurement, from digestion codes (n,) of ``digestion.DIGESTIONS``."""
    return CARRIES[np.asarray(digestion_codes), CHOSEN_INDEX["zr_ppm"]] == TOTAL


def zircon_saturation_is_usable(
    m: ArrayLike, sio2_wt: ArrayLike, a_nk: ArrayLike, zr_is_total: ArrayLike
) -> NDArray[np.bool_]:
    """Whether a zircon saturation temperature may enter a choice, a spread, an argument or a criterion.

    True where M lies in 0.9-1.9, anhydrous SiO2 >= 63 wt%, molar A/NK >= 1 and Zr is from a total digestion;
    anything unknown is False.
    """
    m, sio2, a_nk = (np.asarray(values, dtype=np.float64) for values in (m, sio2_wt, a_nk))
    in_range = (m >= ZIRCON_M_LOW) & (m <= ZIRCON_M_HIGH) & (sio2 >= ZIRCON_SIO2_LOW_WT) & (a_nk >= 1.0)
    return in_range & np.asarray(zr_is_total, dtype=bool)
