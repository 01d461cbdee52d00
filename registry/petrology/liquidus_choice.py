"""One liquidus temperature chosen from the models: liquid or not, which route, and how far the models spread.

Routes by anhydrous SiO2: basic (below 52 wt%) the median of the olivine models in their range; acid (above 63) the
haplogranite polynomial at the water of the convention; between them a blend in proportion. Water and pressure are
conventions, so the choice is one too; the models stand beside it.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from registry.petrology.liquidus_models import liquidus_makhluf
from registry.petrology.melt_composition import SILICA_CLASS_LIMITS_WT, Array, equilibrium_forsterite
from registry.petrology.water import water_depression

#: Olivine-based models; those that were made for dry liquids take the water depression.
DRY_MODELS = ("helz_thornber", "putirka13", "beattie", "sugawara")
HYDROUS_MODELS = ("putirka14", "putirka15", "putirka22")
OLIVINE_MODELS = (*DRY_MODELS, *HYDROUS_MODELS)
#: Ranges in which an olivine model may be chosen (anhydrous wt%).
OLIVINE_SIO2_HIGH_WT = 63.0
OLIVINE_MGO_LOW_WT = 3.0
HELZ_THORNBER_MGO_WT = (5.0, 11.0)
#: Mol% forsterite above which no natural liquid is in equilibrium: the rock is a cumulate or mantle.
HIGHEST_LIQUID_FORSTERITE = 93.0
#: Water (wt%) whose haplogranite liquidus is the upper end of the acid route.
ACID_HIGH_H2O_WT = 3.0

MODEL_WORDS = ("olivine_median", "blend", "makhluf")
LIQUIDUS_CAUSES = ("not_a_liquid", "no_model_in_range", "missing_input")


def is_not_a_liquid(mgo_wt: ArrayLike, feot_wt: ArrayLike, logged_cumulate: ArrayLike) -> NDArray[np.bool_]:
    """Whether a rock cannot have been a liquid as it stands.

    True where olivine in equilibrium (KD 0.30, total iron as Fe2+) would hold more than 93 mol% forsterite, or where
    the log names a cumulate. Source: KD [roeder1970]; the limit is common practice.
    """
    forsterite = equilibrium_forsterite(mgo_wt, feot_wt)
    return (forsterite > HIGHEST_LIQUID_FORSTERITE) | np.asarray(logged_cumulate, dtype=bool)


def olivine_models_in_range(sio2_wt: ArrayLike, mgo_wt: ArrayLike) -> dict[str, NDArray[np.bool_]]:
    """Which olivine models may be chosen: SiO2 up to 63 and MgO from 3 wt%, Helz-Thornber MgO 5-11 (anhydrous)."""
    mgo = np.asarray(mgo_wt, dtype=np.float64)
    common = (np.asarray(sio2_wt, dtype=np.float64) <= OLIVINE_SIO2_HIGH_WT) & (mgo >= OLIVINE_MGO_LOW_WT)
    low, high = HELZ_THORNBER_MGO_WT
    narrow = common & (mgo >= low) & (mgo <= high)
    return {model: narrow if model == "helz_thornber" else common for model in OLIVINE_MODELS}


def median_low_high(values: Array) -> tuple[Array, Array, Array]:
    """Median, least and greatest of the numbers present in each column of ``values`` (models, n); NaN where none is."""
    missing = np.isnan(values)
    ordered = np.where(missing, np.inf, values)  # what is missing goes last
    count, n = ordered.shape
    lesser = np.empty(n)
    for turn in range(count):  # neighbours change places until all stand in order: whole rows at a time
        for upper in range(turn % 2, count - 1, 2):
            np.minimum(ordered[upper], ordered[upper + 1], out=lesser)
            np.maximum(ordered[upper], ordered[upper + 1], out=ordered[upper + 1])
            ordered[upper] = lesser
    last = np.maximum(count - 1 - np.add.reduce(missing, axis=0, dtype=np.intp), 0)
    columns, flat = np.arange(n), ordered.ravel()

    def of_row(which: NDArray[np.intp]) -> Array:
        return np.take(flat, which * n + columns)

    found = ordered[0] < np.inf
    median = 0.5 * (of_row(last >> 1) + of_row((last + 1) >> 1))
    return (
        np.where(found, median, np.nan),
        np.where(found, ordered[0], np.nan),
        np.where(found, of_row(last), np.nan),
    )


def choose_liquidus(
    sio2_wt: ArrayLike,
    h2o_wt: ArrayLike,
    olivine_models_c: Mapping[str, ArrayLike],
    makhluf_c: ArrayLike,
    zircon_c: ArrayLike,
    zircon_is_usable: ArrayLike,
    not_a_liquid: ArrayLike,
    mgo_wt: ArrayLike,
    depression_model: str = "almeev",
) -> dict[str, Any]:
    """The liquidus temperature chosen for each rock, with its route and its spread.

    Arrays of shape (n,): anhydrous oxides in wt%, water in the melt in wt%, model temperatures in C as published
    (``olivine_models_c`` by the names of ``OLIVINE_MODELS``; the dry ones are lowered here by ``depression_model``),
    zircon saturation (Watson and Harrison), whether that is usable, and ``is_not_a_liquid``.

    Returns ``liquidus_c``, ``liquidus_model`` (one of ``MODEL_WORDS``, None without a temperature),
    ``liquidus_low_c`` and ``liquidus_high_c``. Basic: the range of the models in range. Acid: low is the usable
    zircon temperature, else NaN; high the haplogranite at 3 wt% water. Between: the least and greatest of both
    routes. ValueError for a model that is missing.
    """
    sio2, mgo, water = (np.atleast_1d(np.asarray(v, dtype=np.float64)) for v in (sio2_wt, mgo_wt, h2o_wt))
    missing_models = [model for model in OLIVINE_MODELS if model not in olivine_models_c]
    if missing_models:
        raise ValueError(f"choose_liquidus: no temperatures for {missing_models}; it needs {list(OLIVINE_MODELS)}")
    basic, basic_low, basic_high = _basic_route(sio2, mgo, water, olivine_models_c, depression_model)
    acid = np.broadcast_to(np.asarray(makhluf_c, dtype=np.float64), sio2.shape)
    acid_low = np.where(np.asarray(zircon_is_usable, dtype=bool), zircon_c, np.nan)
    acid_high = np.broadcast_to(liquidus_makhluf(ACID_HIGH_H2O_WT), sio2.shape)

    _, middle, high = SILICA_CLASS_LIMITS_WT
    is_basic, is_acid = sio2 < middle, sio2 > high
    weight = (sio2 - middle) / (high - middle)
    blend = (1.0 - weight) * basic + weight * acid
    blend_low = np.fmin(np.minimum(basic_low, np.minimum(acid, acid_high)), acid_low)
    blend_high = np.maximum(basic_high, np.maximum(acid, acid_high))

    def route(of_basic: Array, of_blend: Array, of_acid: Array) -> Array:
        return np.where(is_basic, of_basic, np.where(is_acid, of_acid, of_blend))

    is_liquid = ~np.asarray(not_a_liquid, dtype=bool) & ~np.isnan(mgo)
    temperature = np.where(is_liquid, route(basic, blend, acid), np.nan)
    found = ~np.isnan(temperature)
    words = np.array([*MODEL_WORDS, None], dtype=object)
    model = np.where(is_basic, 0, np.where(is_acid, 2, 1))
    return {
        "liquidus_c": temperature,
        "liquidus_model": words[np.where(found, model, 3)],
        "liquidus_low_c": np.where(found, route(basic_low, blend_low, acid_low), np.nan),
        "liquidus_high_c": np.where(found, route(basic_high, blend_high, acid_high), np.nan),
    }


def liquidus_cause(
    liquidus_c: ArrayLike, not_a_liquid: ArrayLike, sio2_wt: ArrayLike, mgo_wt: ArrayLike
) -> NDArray[np.object_]:
    """Why there is no liquidus temperature, object array (n,): ``not_a_liquid``, ``no_model_in_range`` (SiO2 up to
    63 with MgO below 3 wt%, anhydrous), ``missing_input``; None where there is one."""
    found = ~np.isnan(np.atleast_1d(np.asarray(liquidus_c, dtype=np.float64)))
    outside = has_no_model_in_range(sio2_wt, mgo_wt)
    words = np.array([*LIQUIDUS_CAUSES, None], dtype=object)
    cause = np.where(np.asarray(not_a_liquid, dtype=bool), 0, np.where(outside, 1, 2))
    return words[np.where(found, 3, cause)]


def has_no_model_in_range(sio2_wt: ArrayLike, mgo_wt: ArrayLike) -> NDArray[np.bool_]:
    """True where an anhydrous analysis of up to 63 wt% SiO2 has less than 3 wt% MgO: no olivine model applies."""
    sio2, mgo = np.asarray(sio2_wt, dtype=np.float64), np.asarray(mgo_wt, dtype=np.float64)
    return (sio2 <= OLIVINE_SIO2_HIGH_WT) & (mgo < OLIVINE_MGO_LOW_WT)


def _basic_route(
    sio2: Array, mgo: Array, water: Array, olivine_models_c: Mapping[str, ArrayLike], depression_model: str
) -> tuple[Array, Array, Array]:
    lowered = water_depression(water, depression_model)
    in_range = olivine_models_in_range(sio2, mgo)
    stack = np.empty((len(OLIVINE_MODELS), *sio2.shape))
    for position, model in enumerate(OLIVINE_MODELS):
        temperature = np.asarray(olivine_models_c[model], dtype=np.float64)
        if model in DRY_MODELS:
            temperature = temperature - lowered
        stack[position] = np.where(in_range[model], temperature, np.nan)
    return median_low_high(stack)
