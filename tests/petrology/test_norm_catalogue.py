"""The records of iron, closure and norm as the pipeline calls them. The analyses are invented unless named."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from registry.petrology.catalogue import METHOD_BY_KEY
from registry.petrology.catalogue import closure as closure_records
from registry.petrology.catalogue import iron as iron_records
from registry.petrology.catalogue import norm as norm_records
from registry.petrology.catalogue.records import Method, Warning
from registry.petrology.conventions import Conventions
from registry.petrology.norm import NORM_COLUMNS, cipw_norm
from registry.petrology.norm_cation import CATION_COLUMNS, cation_norm

#: Average basalt of Le Maitre 1976 (J. Petrology 17, 589), from memory.
BASALT = {
    "sio2_wt": 49.20, "tio2_wt": 1.84, "al2o3_wt": 15.74, "fe2o3_ferric_wt": 3.79, "feo_titrated_wt": 7.13,
    "mno_wt": 0.20, "mgo_wt": 6.73, "cao_wt": 9.47, "na2o_wt": 2.91, "k2o_wt": 1.10, "p2o5_wt": 0.35, "co2_wt": 0.11,
}  # fmt: skip
#: Changes that leave total iron only.
UNSPLIT = {"fe2o3t_reported_wt": 11.7, "fe2o3_ferric_wt": np.nan, "feo_titrated_wt": np.nan}
FLAGS = {"is_plutonic", "logged_extrusive"}
WARNINGS = {w.code: w for w in (*iron_records.WARNINGS, *closure_records.WARNINGS, *norm_records.WARNINGS)}


def _workspace(conventions: Conventions | None = None, **columns: Any) -> dict[str, Any]:
    """Run total, iron, closure and both norms over the columns, as the pipeline does."""
    rows = max(np.size(value) for value in columns.values())
    space: dict[str, Any] = {"conventions": conventions or Conventions()}
    space |= {name: np.broadcast_to(np.asarray(value), rows) for name, value in columns.items()}
    for key in ("iron", "total", "closure", "norm", "cation_norm"):
        method = METHOD_BY_KEY[key]
        result = method.function(*_arguments(method, space, rows))
        space |= result if isinstance(result, dict) else {method.outputs[0].name: result}
    return space


def _arguments(record: Method | Warning, space: dict[str, Any], rows: int) -> list[Any]:
    def of(name: str) -> Any:
        return space.get(name, np.zeros(rows, bool) if name in FLAGS else np.full(rows, np.nan))

    return [of(name) for name in record.inputs]


def _raised(code: str, space: dict[str, Any]) -> list[bool]:
    warning = WARNINGS[code]
    rows = len(space["feot_wt"])
    return list(warning.mask(*_arguments(warning, space, rows)))


def _cause(space: dict[str, Any], key: str) -> str | None:
    for cause in METHOD_BY_KEY[key].causes:
        if cause.mask(*(space.get(name, np.full(1, np.nan)) for name in cause.inputs))[0]:
            return cause.code
    return None


@pytest.mark.parametrize("key", ["iron", "total", "closure", "norm", "cation_norm"])
def test_record_outputs_are_what_the_function_gives(key: str) -> None:
    space = _workspace(**BASALT)
    method = METHOD_BY_KEY[key]
    result = method.function(*_arguments(method, space, 1))

    names = [quantity.name for quantity in method.outputs]
    assert isinstance(result, np.ndarray) or set(result) == set(names)
    assert set(method.optional) <= set(method.inputs)
    for quantity in method.outputs:
        value = space[quantity.name][0]
        assert isinstance(value, str) if quantity.unit == "text" else quantity.low <= value <= quantity.high


def test_stored_norm_is_that_of_the_closed_analysis_without_volatiles() -> None:
    space = _workspace(**BASALT)
    names = {name.removesuffix("_vf_wt") + "_wt": space[name][0] for name in space if name.endswith("_vf_wt")}

    expected = cipw_norm(names)
    for column in NORM_COLUMNS:
        assert space[column][0] == expected[column]
    for column, value in cation_norm(names).items():
        assert space[column][0] == value
    assert space["norm_total_wt"][0] == pytest.approx(100.0, abs=1e-9)
    assert space["cc_wt"][0] == 0.0
    assert space["norm_basis"][0] == "volatile-free analysis closed to 100"


def test_stored_norm_takes_carbon_dioxide_by_convention_in_proportion() -> None:
    """Calcite of the norm without closing is 0.25 (average basalt, recomputed); the closing factor is 100/98.46."""
    space = _workspace(Conventions(norm_co2_as_calcite=True), **BASALT)

    assert space["cc_wt"][0] == pytest.approx(0.250 * 100.0 / 98.46, abs=1e-3)
    assert space["norm_basis"][0] == "volatile-free analysis closed to 100, with CO2 as calcite"


def test_stored_norm_unreported_carbon_dioxide_counts_as_zero_under_the_convention() -> None:
    space = _workspace(Conventions(norm_co2_as_calcite=True), **BASALT | {"co2_wt": np.nan})

    assert space["cc_wt"][0] == 0.0
    assert space["norm_total_wt"][0] == pytest.approx(100.0, abs=1e-9)


def test_stored_norm_names_sulphur_and_halogens() -> None:
    conventions = Conventions(norm_sulphur_as_pyrite=True, norm_halogens=True)
    space = _workspace(conventions, **BASALT, s_wt=0.1, f_wt=0.05, cl_wt=0.02)

    assert space["norm_basis"][0] == "volatile-free analysis closed to 100, with S as pyrite, with F and Cl"
    assert min(space["pr_wt"][0], space["hl_wt"][0]) > 0.0
    assert _raised("oxygen_set_free", space) == [True]


def test_stored_norm_missing_major_stays_in_its_row() -> None:
    space = _workspace(**BASALT | {"mgo_wt": np.array([6.73, np.nan, 6.73])})

    for column in (*NORM_COLUMNS, *CATION_COLUMNS):
        assert np.isnan(space[column][1])
        assert space[column][0] == space[column][2]
    assert list(space["norm_basis"]) == [space["norm_basis"][0], None, space["norm_basis"][0]]


def test_warnings_of_a_whole_analysis_are_none() -> None:
    space = _workspace(**BASALT)

    assert [code for code in WARNINGS if _raised(code, space) != [False]] == []


@pytest.mark.parametrize(
    ("code", "changes"),
    [
        ("tio2_counted_as_zero", {"tio2_wt": np.nan}),
        ("mno_counted_as_zero", {"mno_wt": np.nan}),
        ("p2o5_counted_as_zero", {"p2o5_wt": np.nan}),
        ("total_outside_limits", {"sio2_wt": 46.0}),
        ("total_outside_limits", {"sio2_wt": 53.0}),
        ("feo_exceeds_total_iron", {"fe2o3t_reported_wt": 7.0, "fe2o3_ferric_wt": np.nan}),
        ("total_iron_disagrees", {"fe2o3t_reported_wt": 12.5}),
        ("iron_split_assumed_volcanic", UNSPLIT),
        ("p2o5_exceeds_cao", {"cao_wt": 0.2, "p2o5_wt": 2.0}),
        ("cr2o3_exceeds_feo", {"feo_titrated_wt": 0.0, "fe2o3_ferric_wt": 11.7, "cr_ppm": 3000.0}),
        ("silica_deficit", {"sio2_wt": 10.0}),
    ],
)
def test_warning_is_raised_in_its_row_only(code: str, changes: dict[str, float]) -> None:
    columns = {name: np.array([value, value]) for name, value in BASALT.items()}
    for name, value in changes.items():
        columns[name] = np.array([BASALT.get(name, np.nan), value])

    assert _raised(code, _workspace(**columns)) == [False, True]


def test_warning_volcanic_assumption_is_silent_where_the_log_or_the_body_says_so() -> None:
    columns = BASALT | UNSPLIT
    flags = {"is_plutonic": np.array([False, True, False]), "logged_extrusive": np.array([False, False, True])}

    assert _raised("iron_split_assumed_volcanic", _workspace(**columns, **flags)) == [True, False, False]


@pytest.mark.parametrize(
    ("code", "changes"),
    [
        ("no_total_iron", {"fe2o3_ferric_wt": np.nan, "feo_titrated_wt": np.nan}),
        ("iron_measurements_exclude", {"fe2o3t_reported_wt": 7.0}),
        (
            "no_silica_or_alkalis",
            UNSPLIT | {"k2o_wt": np.nan},
        ),
        (
            "iron_split_outside_range",
            UNSPLIT | {"k2o_wt": 40.0},
        ),
    ],
)
def test_iron_without_split_tells_the_cause(code: str, changes: dict[str, float]) -> None:
    space = _workspace(**BASALT | changes)

    assert np.isnan(space["feo_wt"][0])
    assert _cause(space, "iron") == code


def test_closure_without_split_tells_the_cause() -> None:
    space = _workspace(**BASALT | {"fe2o3t_reported_wt": 7.0})

    assert np.isnan(space["sio2_vf_wt"][0])
    assert _cause(space, "closure") == "iron_not_split"
    assert _cause(space, "norm") == "no_closed_analysis"
