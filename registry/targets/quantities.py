"""Quantities that only the targets ask for, and those known better than as a point: rules on what is known."""

from __future__ import annotations

import numpy as np

from registry.petrology.constants import ZERO_CELSIUS_K, oxide_from_element
from registry.petrology.heat import effective_half_width_m, heat_x_thickness_mw_m2, rock_density_kg_m3
from registry.petrology.intrusion_heat import theta_centre_interval
from registry.petrology.normalising import CHONDRITE_MCDONOUGH
from registry.petrology.redox_series import is_loi_too_high, is_magnetite_destroyed, is_redox_conflict
from registry.petrology.saturation import ZIRCON_M_HIGH, ZIRCON_M_LOW, ZIRCON_SIO2_LOW_WT, zircon_m
from registry.petrology.trace import RATIOS
from registry.targets.intervals import Booleans, Floats, Interval, Known, Rule, Words, point
from registry.targets.redox_words import CONFLICT, LOI_TOO_HIGH, MAGNETITE_DESTROYED

#: Contributions to heat production, uW/m3 per kg/m3: U and Th in ppm, K2O in wt% [rybach1988].
HEAT_PER_U_PPM, HEAT_PER_TH_PPM, HEAT_PER_K2O_WT = 9.52e-5, 2.56e-5, 3.48e-5 / oxide_from_element("K2O")
#: Th/U of common igneous rocks lies above this below a differentiation index of 70; it bounds an unknown U.
#: Common practice, no source. In leucogranites Th/U falls below 1, so there is no bound there.
LEAST_TH_U, TH_U_HOLDS_BELOW_INDEX = 1.0, 70.0


def _porphyritic_intrusion(known: Known) -> Words:
    """Porphyritic and not extrusive; not known where lithology and texture are both blank."""
    extrusive = known.flag("logged_extrusive")
    blank = known.flag("logged_blank") & ~extrusive if "logged_blank" in known.workspace else _no_words(known)
    return Words.yes_no(known.flag("logged_porphyritic") & ~extrusive, ~blank)


def _no_words(known: Known) -> Booleans:
    any_word = np.zeros(known.n, dtype=bool)
    for name in ("logged_porphyritic", "logged_extrusive", "logged_plutonic", "logged_cumulate"):
        any_word |= known.flag(name)
    return ~any_word


def _intrusive_body(known: Known) -> Words:
    """An intrusion is recorded, or the log has a plutonic or cumulate word; a lava word says no."""
    yes = known.flag("has_intrusion") | known.flag("logged_plutonic") | known.flag("logged_cumulate")
    extrusive = known.flag("logged_extrusive") & ~known.flag("has_intrusion") & ~known.flag("logged_cumulate")
    return Words.yes_no(yes & ~extrusive, yes | extrusive)


def _intrusion_recorded(known: Known) -> Words:
    """'yes' where the sample is tied to an intrusion; otherwise not known."""
    recorded = known.flag("has_intrusion")
    return Words.yes_no(recorded, recorded)


def _arrived(known: Known) -> Words:
    """Mapped or cored, else by the outcome of the ascent: stalled or not."""
    outcome = known.words("ascent_outcome")
    stalled_label = np.array(["stall" in label for label in outcome.labels])
    stalled = stalled_label[outcome.codes]
    mapped = known.flag("body_mapped_or_cored")
    return Words.yes_no(mapped | ~stalled, mapped | ~outcome.missing)


def _altered(known: Known) -> Words:
    """Logged phyllic, argillic, sericitic or greisen, or LOI above the warning limit; not known without LOI."""
    loi = known.raw("loi_wt")
    yes = known.flag("logged_destroyed_magnetite") | (loi > known.conventions.loi_warn_wt)
    return Words.yes_no(yes, yes | ~np.isnan(loi))


def _melt_parameter(known: Known) -> Floats:
    columns = ["sio2", "tio2", "al2o3", "feot", "mno", "mgo", "cao", "na2o", "k2o", "p2o5"]
    minor = {"tio2", "mno", "p2o5"}
    values = [known.raw(f"{name}_vf_wt") for name in columns]
    return zircon_m(*(np.nan_to_num(v) if c in minor else v for c, v in zip(columns, values, strict=True)))


def _zircon_model_applies(known: Known) -> Words:
    """Whether the rock lies inside the zircon model: M 0.9-1.9, SiO2 >= 63 %, A/NK >= 1."""
    m, sio2, a_nk = _melt_parameter(known), known.raw("sio2_vf_wt"), known.raw("a_nk")
    inside = (m >= ZIRCON_M_LOW) & (m <= ZIRCON_M_HIGH) & (sio2 >= ZIRCON_SIO2_LOW_WT) & (a_nk >= 1.0)
    outside = (m < ZIRCON_M_LOW) | (m > ZIRCON_M_HIGH) | (sio2 < ZIRCON_SIO2_LOW_WT) | (a_nk < 1.0)
    return Words.yes_no(inside, inside | outside)


def _zircon_temperature(known: Known) -> Interval:
    """The zircon saturation temperature; an interval where Zr is one (it rises with Zr).

    From 12900/T = 2.95 + 0.85 M + ln(D): another Zr changes 12900/T by ln(Zr/Zr') [watson1983].
    """
    temperature = known.raw("zircon_saturation_wh83_c")
    zr = known.number("zr_ppm")
    if zr.exact:
        return Interval(temperature, temperature)
    kelvin, zr_used = temperature + ZERO_CELSIUS_K, known.raw("zr_ppm")

    def at(zirconium: Floats) -> Floats:
        with np.errstate(divide="ignore", invalid="ignore"):
            inverse = 12900.0 / kelvin + np.log(zr_used / zirconium)
            celsius = np.where(inverse > 0.0, 12900.0 / inverse, np.inf) - ZERO_CELSIUS_K
        return np.where(np.isnan(temperature) | np.isnan(zirconium), np.nan, celsius)

    straddles = zr.straddles()
    open_low, open_high = zr.ends()
    low = np.where(straddles, at(zr.low), np.where(zr.missing, np.nan, temperature))
    high = np.where(straddles, at(zr.high), np.where(zr.missing, np.nan, temperature))
    return Interval(low, high, open_low & straddles, open_high & straddles)


def _uranium(known: Known) -> Interval:
    """U as analysed; where it is missing between 0 and what Th/U >= 1 allows (below an index of 70), else open."""
    uranium, thorium = known.number("u_ppm"), known.number("th_ppm")
    missing = uranium.missing & ~thorium.missing
    if not missing.any():
        return uranium
    bounded = known.raw("differentiation_index") < TH_U_HOLDS_BELOW_INDEX
    open_low, open_high = uranium.ends()
    return Interval(
        np.where(missing, 0.0, uranium.low),
        np.where(missing, np.where(bounded, thorium.high / LEAST_TH_U, np.inf), uranium.high),
        open_low & ~missing,
        open_high | missing,
    )


def _heat_production(known: Known) -> Interval:
    """uW/m3, end by end, from U, Th and K2O [rybach1988]; an unknown U is bounded by Th (see ``_uranium``)."""
    parts = [(_uranium(known), HEAT_PER_U_PPM), (known.number("th_ppm"), HEAT_PER_TH_PPM)]
    parts.append((known.number("k2o_wt"), HEAT_PER_K2O_WT))
    if all(part.exact for part, _ in parts):
        return point(known.workspace.get("heat_production_uw_m3", np.nan), known.n)
    density = rock_density_kg_m3(known.raw("density_kg_m3"), known.raw("sio2_vf_wt"), known.conventions)
    low = density * sum(part.low * factor for part, factor in parts)
    high = density * sum(part.high * factor for part, factor in parts)
    all_points = np.logical_and.reduce([~part.missing & ~part.straddles() for part, _ in parts])
    computed = known.raw("heat_production_uw_m3")
    use = all_points & ~np.isnan(computed)
    nothing = np.isnan(low)
    open_low = np.logical_or.reduce([part.ends()[0] for part, _ in parts]) & ~use & ~nothing
    open_high = np.logical_or.reduce([part.ends()[1] for part, _ in parts]) & ~use & ~nothing
    return Interval(np.where(use, computed, low), np.where(use, computed, high), open_low, open_high)


def _heat_times_thickness(known: Known) -> Interval:
    """mW/m2: A x 2a of a slab, A x 4a/3 of a sphere (its mean thickness); not defined for an upright cylinder."""
    production, shape = known.number("heat_production_uw_m3"), known.texts("intrusion_shape")
    half_width = effective_half_width_m(shape, known.raw("half_width_m"), known.raw("volume_km3"))
    low = heat_x_thickness_mw_m2(production.low, shape, half_width)
    if production.exact:
        return Interval(low, low)
    high = heat_x_thickness_mw_m2(production.high, shape, half_width)
    open_low, open_high = production.ends()
    return Interval(low, high, open_low & ~np.isnan(low), open_high & ~np.isnan(low))


_THETA_NAMES = ("theta_centre", "theta_centre_low", "theta_centre_high")


def _theta_centre(known: Known) -> Interval:
    """The heat left at the centre over age +- 2 sigma; a point where only the age itself was used."""
    centre, low, high = (known.raw(name) for name in _THETA_NAMES)
    if "theta_centre" not in known.workspace:
        computed = theta_centre_interval(
            known.texts("intrusion_shape"),
            effective_half_width_m(known.texts("intrusion_shape"), known.raw("half_width_m"), known.raw("volume_km3")),
            known.raw("depth_to_top_m"),
            known.raw("age_ma"),
            known.raw("age_sigma_ma"),
            known.conventions.thermal_diffusivity_m2_s,
        )
        centre, low, high = (computed[name] for name in _THETA_NAMES)
    low, high = np.where(np.isnan(low), centre, low), np.where(np.isnan(high), centre, high)
    nothing = np.isnan(low) | np.isnan(high)
    return Interval(np.where(nothing, np.nan, low), np.where(nothing, np.nan, high))


RULES: dict[str, Rule] = {
    "porphyritic_intrusion": _porphyritic_intrusion,
    "intrusive_body": _intrusive_body,
    "intrusion_recorded": _intrusion_recorded,
    "arrived": _arrived,
    "altered": _altered,
    "zircon_model_applies": _zircon_model_applies,
    "zircon_saturation_wh83_c": _zircon_temperature,
    "heat_production_uw_m3": _heat_production,
    "heat_x_thickness_mw_m2": _heat_times_thickness,
    "theta_centre": _theta_centre,
}
TEXT_RULES = (
    "porphyritic_intrusion", "intrusive_body", "intrusion_recorded", "arrived", "altered", "zircon_model_applies",
)  # fmt: skip

#: Ratios that only the targets ask for: quantity -> (numerator column, denominator column, factor).
_OWN_RATIOS = {"th_u": ("th_ppm", "u_ppm", 1.0), "th_nb": ("th_ppm", "nb_ppm", 1.0)}
#: quantity -> (factor, {column: power}).
POWERS: dict[str, tuple[float, dict[str, float]]] = {
    name: (factor, {numerator: 1.0, denominator: -1.0})
    for name, (numerator, denominator, factor) in (RATIOS | _OWN_RATIOS).items()
}
#: EuN/sqrt(SmN GdN), CI chondrite [mcdonough1995].
POWERS["eu_anomaly"] = (
    (CHONDRITE_MCDONOUGH["Sm"] * CHONDRITE_MCDONOUGH["Gd"]) ** 0.5 / CHONDRITE_MCDONOUGH["Eu"],
    {"eu_ppm": 1.0, "sm_ppm": -0.5, "gd_ppm": -0.5},
)


def _why_no_redox(known: Known) -> Words:
    """Two witnesses that disagree, or alteration that silences them."""
    inputs = (
        known.raw("delta_ox"),
        known.raw("magnetic_susceptibility_si"),
        known.raw("loi_wt"),
        known.flag("logged_destroyed_magnetite"),
        known.conventions,
    )
    conflict, destroyed = is_redox_conflict(*inputs), is_magnetite_destroyed(*inputs)
    altered = is_loi_too_high(*inputs)
    codes = np.select([conflict, destroyed, altered], [1, 2, 3], 0)
    return Words(codes, ("", CONFLICT, MAGNETITE_DESTROYED, LOI_TOO_HIGH))


GROUNDS = {"redox_series": _why_no_redox}


def known_of(workspace: object, n: int) -> Known:
    """What a workspace says of every quantity the targets read."""
    return Known(workspace, n, RULES, POWERS, GROUNDS)  # type: ignore[arg-type]
