"""The conventions as records: what each choice means, its unit, and what may be chosen."""

from __future__ import annotations

from dataclasses import fields

from registry.petrology.catalogue.records import Convention
from registry.petrology.conventions import Conventions
from registry.petrology.redox import FROST_BUFFERS

_DEFAULTS = {field.name: field.default for field in fields(Conventions)}


def _choice(name: str, meaning: str, *choices: str) -> Convention:
    return Convention(name, str(_DEFAULTS[name]), "text", meaning, choices)


def _number(name: str, unit: str, low: float, high: float, meaning: str) -> Convention:
    return Convention(name, float(_DEFAULTS[name]), unit, meaning, (), low, high)  # type: ignore[arg-type]


def _switch(name: str, meaning: str) -> Convention:
    return Convention(name, bool(_DEFAULTS[name]), "1", meaning)


#: (heading, the conventions under it), in the order of a page. The ranges are what a form takes: a choice, no source.
CONVENTION_GROUPS: tuple[tuple[str, tuple[Convention, ...]], ...] = (
    (
        "Iron",
        (
            _choice(
                "iron_split",
                "How total iron is parted into Fe2O3 and FeO where FeO was not titrated: by the rock (Le Maitre 1976), "
                "by the field of the alkali-silica diagram (Middlemost 1989), by one ratio for all, or from an oxygen "
                "buffer (Kress and Carmichael 1991).",
                "le_maitre", "middlemost", "fixed_ratio", "kress_carmichael",
            ),
            _number("iron_fixed_ratio", "1", 0.0, 5.0, "Fe2O3/FeO by weight, used by the one ratio for all."),
            _choice("iron_buffer", "The oxygen buffer that the last way of parting iron uses.", *FROST_BUFFERS),
            _number("iron_buffer_shift", "log10", -6.0, 6.0, "How far above (+) or below (-) that buffer."),
        ),
    ),
    (
        "Norm",
        (
            _switch("norm_co2_as_calcite", "CO2 makes calcite in the norm; else it is left out."),
            _switch("norm_sulphur_as_pyrite", "Sulphur makes pyrite in the norm; else it is left out."),
            _switch("norm_halogens", "Fluorine and chlorine make fluorite and halite in the norm; else left out."),
        ),
    ),
    (
        "Values below a limit",
        (
            _number(
                "censored_substitute", "1", 0.0, 1.0,
                "Share of the detection limit that stands for a value below it, where petrology needs a number; "
                "verdicts work with the whole interval.",
            ),
        ),
    ),
    (
        "Melt and ascent",
        (
            _number("h2o_ultrabasic_wt", "wt%", 0.0, 12.0, "Water of an ultrabasic melt (below 45 wt% SiO2)."),
            _number("h2o_basic_wt", "wt%", 0.0, 12.0, "Water of a basic melt (45 to 52 wt% SiO2)."),
            _number("h2o_intermediate_wt", "wt%", 0.0, 12.0, "Water of an intermediate melt (52 to 63 wt% SiO2)."),
            _number("h2o_acid_wt", "wt%", 0.0, 12.0, "Water of an acid melt (above 63 wt% SiO2)."),
            _number("pressure_gpa", "GPa", 0.0001, 2.0, "Pressure of the melt where no depth is known."),
            _choice(
                "water_depression",
                "How far water lowers the liquidus: Almeev et al. 2007, Medard and Grove 2008, or Falloon and "
                "Danyushevsky 2000.",
                "almeev", "medard_grove", "falloon_danyushevsky",
            ),
            _number("wall_rock_viscosity_pa_s", "Pa s", 1e15, 1e24, "Viscosity of the wall rock round a diapir."),
            _number("diapir_radius_m", "m", 10.0, 1e5, "Radius of a diapir where the intrusion has no half-width."),
            _number("dyke_width_m", "m", 0.01, 100.0, "Width of a dyke that feeds the intrusion."),
            _number("country_density_kg_m3", "kg/m3", 2000.0, 3500.0, "Density of country rock where none is given."),
        ),
    ),
    (
        "Heat",
        (
            _number("thermal_diffusivity_m2_s", "m2/s", 1e-7, 5e-6, "Thermal diffusivity of intrusion and wall rock."),
            _number("density_acid_kg_m3", "kg/m3", 2000.0, 3500.0, "Density of an acid rock that was not weighed."),
            _number(
                "density_intermediate_kg_m3", "kg/m3", 2000.0, 3500.0,
                "Density of an intermediate rock that was not weighed.",
            ),
            _number("density_basic_kg_m3", "kg/m3", 2000.0, 3800.0, "Density of a basic rock that was not weighed."),
            _number(
                "density_ultrabasic_kg_m3", "kg/m3", 2000.0, 3800.0,
                "Density of an ultrabasic rock that was not weighed.",
            ),
        ),
    ),
    (
        "Fitness of an analysis",
        (
            _number("total_warn_low_wt", "wt%", 80.0, 100.0, "A total below it is remarked on."),
            _number("total_warn_high_wt", "wt%", 100.0, 115.0, "A total above it is remarked on."),
            _number("total_fail_low_wt", "wt%", 80.0, 100.0, "A total below it makes the analysis unfit."),
            _number("total_fail_high_wt", "wt%", 100.0, 115.0, "A total above it makes the analysis unfit."),
            _number(
                "loi_warn_wt", "wt%", 0.0, 30.0,
                "A loss on ignition above it is remarked on, and iron is then no evidence of redox: verdicts can turn.",
            ),
            _number("loi_fail_wt", "wt%", 0.0, 50.0, "A loss on ignition above it makes the analysis unfit."),
            _number(
                "loi_exempt_mgo_vf_wt", "wt%", 0.0, 60.0,
                "Rocks with more volatile-free MgO may lose any amount: serpentine holds water.",
            ),
            _number("sulphur_warn_wt", "wt%", 0.0, 30.0, "Sulphur above it is remarked on: iron sits in sulphide."),
        ),
    ),
    (
        "Redox and controls",
        (
            _number(
                "magnetite_series_si", "SI", 1e-5, 0.1,
                "Magnetic susceptibility from which a granite belongs to the magnetite series.",
            ),
            _choice(
                "failed_control",
                "What becomes of an analyte that fails its controls in a batch: its values are left out, are used and "
                "marked, or are used without a word.",
                "hold", "mark", "ignore",
            ),
        ),
    ),
    (
        "Analytical error",
        (
            _number(
                "probability_draws", "1", 20.0, 10_000.0,
                "Analyses drawn of each sample to see how often a verdict survives analytical error; the whole part "
                "counts.",
            ),
            _number(
                "error_major_percent", "%", 0.0, 30.0,
                "Relative standard deviation of a major oxide where no control of its batch tells it (common "
                "practice, no source; provisional).",
            ),
            _number(
                "error_trace_percent", "%", 0.0, 30.0,
                "The same of a trace element (common practice, no source; provisional).",
            ),
            _number(
                "error_feo_percent", "%", 0.0, 30.0,
                "The same of titrated FeO (common practice, no source; provisional).",
            ),
            _number(
                "error_volatile_percent", "%", 0.0, 30.0,
                "The same of the loss on ignition, water, CO2, sulphur and the halogens (common practice, no source; "
                "provisional).",
            ),
        ),
    ),
)  # fmt: skip
CONVENTIONS = {record.name: record for _, group in CONVENTION_GROUPS for record in group}
