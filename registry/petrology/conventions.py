"""The conventions: choices that change numbers. Defaults are those of the methods; users change them by setting."""

from __future__ import annotations

from dataclasses import asdict, dataclass, fields
from typing import Any


@dataclass(frozen=True)
class Conventions:
    """One set of choices. Field names are the names of the settings; units stand in the names."""

    iron_split: str = "le_maitre"  # le_maitre | middlemost | fixed_ratio | kress_carmichael
    iron_fixed_ratio: float = 0.15  # Fe2O3/FeO by weight, used by fixed_ratio
    iron_buffer: str = "QFM"
    iron_buffer_shift: float = 0.0  # log10 units
    norm_co2_as_calcite: bool = False
    norm_sulphur_as_pyrite: bool = False
    norm_halogens: bool = False
    censored_substitute: float = 0.5  # of the detection limit, where petrology needs a number
    h2o_ultrabasic_wt: float = 0.0
    h2o_basic_wt: float = 1.0
    h2o_intermediate_wt: float = 3.0
    h2o_acid_wt: float = 4.0
    pressure_gpa: float = 0.2
    water_depression: str = "almeev"  # almeev | medard_grove | falloon_danyushevsky
    wall_rock_viscosity_pa_s: float = 1e19
    diapir_radius_m: float = 1000.0  # where the intrusion's half-width is unknown
    dyke_width_m: float = 2.0
    country_density_kg_m3: float = 2700.0
    thermal_diffusivity_m2_s: float = 1e-6
    density_acid_kg_m3: float = 2650.0
    density_intermediate_kg_m3: float = 2750.0
    density_basic_kg_m3: float = 2900.0
    density_ultrabasic_kg_m3: float = 3200.0
    total_warn_low_wt: float = 98.5
    total_warn_high_wt: float = 101.5
    total_fail_low_wt: float = 97.0
    total_fail_high_wt: float = 102.0
    loi_warn_wt: float = 3.0
    loi_fail_wt: float = 6.0
    loi_exempt_mgo_vf_wt: float = 18.0
    sulphur_warn_wt: float = 0.5
    magnetite_series_si: float = 3e-3
    failed_control: str = "mark"  # hold | mark | ignore
    probability_draws: float = 200.0  # a whole number
    error_major_percent: float = 0.5  # relative standard deviations where no control of the batch tells them
    error_trace_percent: float = 5.0
    error_feo_percent: float = 2.0
    error_volatile_percent: float = 5.0

    def as_dict(self) -> dict[str, Any]:
        return asdict(self)

    @classmethod
    def from_dict(cls, values: dict[str, Any]) -> Conventions:
        known = {field.name for field in fields(cls)}
        unknown = sorted(set(values) - known)
        if unknown:
            raise ValueError(f"unknown conventions {unknown}; known are {sorted(known)}")
        return cls(**values)
