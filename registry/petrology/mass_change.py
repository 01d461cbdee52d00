"""What alteration added to a rock and took from it, against a fresh parent, by the components that did not move."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from registry.petrology.melt_composition import Array, positive

#: Components taken for immobile until they disagree (common practice, no source).
IMMOBILE_COLUMNS = ("al2o3_wt", "tio2_wt", "zr_ppm", "nb_ppm", "y_ppm", "hf_ppm", "th_ppm")
#: Components whose gain and loss is told: majors and volatiles in wt%, traces in ppm.
COMPONENT_COLUMNS = (
    "sio2_wt", "tio2_wt", "al2o3_wt", "fe2o3t_wt", "mno_wt", "mgo_wt", "cao_wt", "na2o_wt", "k2o_wt", "p2o5_wt",
    "loi_wt", "co2_wt", "s_wt", "li_ppm", "rb_ppm", "cs_ppm", "sr_ppm", "ba_ppm", "cu_ppm", "pb_ppm", "zn_ppm",
    "mo_ppm", "sn_ppm", "w_ppm", "as_ppm", "sb_ppm", "au_ppm", "zr_ppm", "nb_ppm", "y_ppm", "hf_ppm", "th_ppm",
    "u_ppm", "la_ppm",
)  # fmt: skip
#: Fewest components an isocon is drawn through.
FEWEST_IMMOBILE = 3
#: A component whose ratio lies further from the median than this (natural logarithm) moved, or the rocks never were
#: alike (common practice, no source).
LARGEST_DEPARTURE = 0.2
#: Nb/Y that parts subalkaline from alkaline rocks, whatever the alteration [winchester1977], from memory.
NB_Y_DIVIDE = 0.67
CAUSES = ("too_few_immobile_components", "immobile_components_disagree")


@dataclass(frozen=True)
class Isocon:
    """Isocons of n altered rocks against one fresh parent.

    ``slope`` (n,): altered over fresh concentration of what did not move, the mass before over the mass after; NaN
    where there is a ``cause`` (object array, a word of ``CAUSES`` or None). ``used`` and ``rejected`` are boolean
    (components, n); ``least`` and ``greatest`` (n,) the ratios of the components used.
    """

    components: tuple[str, ...]
    slope: Array
    least: Array
    greatest: Array
    used: NDArray[np.bool_]
    rejected: NDArray[np.bool_]
    cause: NDArray[np.object_]

    @property
    def mass_change_percent(self) -> Array:
        """Change of the whole mass in % of the original mass, 100 (1/slope - 1)."""
        return 100.0 * (1.0 / self.slope - 1.0)


def isocon(
    fresh: Mapping[str, float], altered: Mapping[str, ArrayLike], components: Sequence[str] = IMMOBILE_COLUMNS
) -> Isocon:
    """Slope of the line through the origin and the immobile components of altered (n,) against fresh concentrations.

    Concentrations as analysed, volatiles included, in the same unit in both rocks. The slope is the geometric mean of
    the ratios altered/fresh that lie within 0.2 (natural logarithm) of their median, of at least three components; a
    component further away is rejected. Where fewer than three, or no more than half of those known, agree, there is
    no isocon: they moved, or the rocks were never alike. Source [grant1986]; the choice of components common
    practice.
    """
    names = tuple(components)
    n = len(next(iter(altered.values()))) if altered else 0  # type: ignore[arg-type]
    missing = np.full(n, np.nan)
    ratios = np.array(
        [positive(altered.get(name, missing)) / positive(fresh.get(name, np.nan)) for name in names]
    ).reshape(len(names), n)
    logs = np.log(ratios)
    known = ~np.isnan(logs)
    count = known.sum(axis=0)
    middle = _median(logs)
    used = known & (np.abs(logs - middle) <= LARGEST_DEPARTURE)
    agreeing = used.sum(axis=0)
    enough = count >= FEWEST_IMMOBILE
    sound = enough & (agreeing >= FEWEST_IMMOBILE) & (2 * agreeing > count)
    kept = used & sound
    total = np.where(kept, logs, 0.0).sum(axis=0)
    slope = np.where(sound, np.exp(total / np.maximum(agreeing, 1)), np.nan)
    words = np.array([*CAUSES, None], dtype=object)
    return Isocon(
        names,
        slope,
        np.where(sound, np.where(kept, ratios, np.inf).min(axis=0, initial=np.inf), np.nan),
        np.where(sound, np.where(kept, ratios, -np.inf).max(axis=0, initial=-np.inf), np.nan),
        kept,
        known & ~used & sound,
        words[np.where(enough, np.where(sound, 2, 1), 0)],
    )


def component_changes(fresh: ArrayLike, altered: ArrayLike, slope: ArrayLike) -> dict[str, Array]:
    """Gain (+) or loss (-) of components: ``change`` in the components' unit, ``percent`` of what was there.

    ``fresh`` (m,), ``altered`` (m, n), ``slope`` (n,): altered / slope - fresh, mass per mass of original rock. The
    percentage is NaN where the fresh rock has none. Gresens' equation [gresens1967] in the form of [grant1986], from
    memory: C altered = (M fresh / M altered) (C fresh + change).
    Example: fresh 2, altered 3, slope 0.75 -> +2.0, 100 %.
    """
    before = np.asarray(fresh, dtype=np.float64)[:, None]
    change = np.asarray(altered, dtype=np.float64) / positive(slope) - before
    return {"change": change, "percent": 100.0 * change / positive(before)}


def immobile_alkalinity(nb_y: ArrayLike) -> NDArray[np.object_]:
    """``alkaline`` where Nb/Y is above 0.67, else ``subalkaline``; None where it is missing; shape (n,).

    It outlasts alteration, since neither element moves. Source [winchester1977], from memory.
    """
    ratio = np.atleast_1d(np.asarray(nb_y, dtype=np.float64))
    words = np.array(["subalkaline", "alkaline", None], dtype=object)
    return words[np.where(np.isnan(ratio), 2, np.where(ratio > NB_Y_DIVIDE, 1, 0))]


def _median(rows: Array) -> Array:
    """Median of each column over its known rows; NaN where none is known."""
    ordered = np.sort(rows, axis=0)
    last = np.maximum((~np.isnan(rows)).sum(axis=0) - 1, 0)
    at = np.arange(rows.shape[1])
    return 0.5 * (ordered[last // 2, at] + ordered[(last + 1) // 2, at])
