"""Where the chemistry of a sample contradicts what the geologist logged: a remark, never a change."""

from __future__ import annotations

from typing import Any

from registry.petrology.catalogue.records import Method, Warning
from registry.petrology.logged_silica import disagrees_with_log

METHODS: tuple[Method, ...] = ()


def _disagrees(silica: Any, loi: Any, lithology: Any, alteration: Any, is_control: Any, conventions: Any) -> Any:
    return disagrees_with_log(silica, loi, lithology, alteration, conventions.loi_warn_wt) & ~is_control


WARNINGS = (
    Warning(
        "chemistry_disagrees_with_lithology",
        "tas_plutonic",
        "sio2_vf_wt",
        "SiO2 {value} wt% (volatile-free) lies more than 3 wt% outside the total alkali-silica fields of the logged "
        "rock name: a swapped sample, a wrong log or a strong alteration; look at the core again",
        _disagrees,
        ("sio2_vf_wt", "loi_wt", "lithology", "alteration", "is_control", "conventions"),
    ),
)
