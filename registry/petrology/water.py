"""Water in the melt: the convention by silica class, and what water takes off a dry liquidus."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike

from registry.petrology.conventions import Conventions
from registry.petrology.melt_composition import Array, by_silica_class, not_negative

#: The names that the convention ``water_depression`` may take.
DEPRESSION_NAMES = ("almeev", "medard_grove", "falloon_danyushevsky")


def melt_water_by_convention(sio2_wt: ArrayLike, conventions: Conventions) -> Array:
    """Water in the melt (wt%) taken for an anhydrous SiO2 (wt%): a convention by silica class, not a measurement."""
    return by_silica_class(
        sio2_wt,
        conventions.h2o_ultrabasic_wt,
        conventions.h2o_basic_wt,
        conventions.h2o_intermediate_wt,
        conventions.h2o_acid_wt,
    )


def water_depression_almeev(h2o_wt: ArrayLike) -> Array:
    """Lowering (C) of the olivine liquidus by water in the melt (wt%).

    Calibration: ridge basalt at 200 MPa, H2O 0.25-4.2 wt%. Source [almeev2007]. Example: 1 wt% -> 39.7.
    """
    return 39.69 * not_negative(h2o_wt) ** 0.73


def water_depression_medard_grove(h2o_wt: ArrayLike) -> Array:
    """Lowering (C) of the olivine liquidus by water in the melt (wt%). Source [medard2008]; 1 wt% -> 37.5."""
    h = not_negative(h2o_wt)
    return h * (40.4 + h * (-2.97 + 0.0761 * h))


def water_depression_falloon_danyushevsky(h2o_wt: ArrayLike) -> Array:
    """Lowering (C) of the olivine liquidus by water in the melt (wt%). Source [falloon2000]; 1 wt% -> 74.4.

    Its slope at zero water is infinite: below 2 wt% it lies far above the other two.
    """
    return 74.403 * not_negative(h2o_wt) ** 0.352


def water_depression(h2o_wt: ArrayLike, model: str) -> Array:
    """Lowering (C) by the model that the convention names; ValueError for a name that is not one of three."""
    functions = {
        "almeev": water_depression_almeev,
        "medard_grove": water_depression_medard_grove,
        "falloon_danyushevsky": water_depression_falloon_danyushevsky,
    }
    if model not in functions:
        raise ValueError(f"water depression '{model}' is not known; choose one of {list(functions)}")
    return functions[model](h2o_wt)


def water_depressions(h2o_wt: ArrayLike) -> dict[str, Array]:
    """The three depressions (C) side by side, by model name."""
    return {name: water_depression(np.asarray(h2o_wt), name) for name in DEPRESSION_NAMES}
