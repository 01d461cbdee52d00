"""From composition arrays to derived quantities to verdicts: a pure function of picklable chunks.

Everything the catalogue computes is evaluated here, for an import, a refresh or a single sample alike, so that there
is one path and one answer.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

import numpy as np

from registry.petrology.analytes import CHOSEN_COLUMNS, CHOSEN_INDEX, QUALIFIER_BELOW
from registry.petrology.catalogue import CAUSES, METHODS, QUANTITIES, WARNINGS, Method
from registry.petrology.conventions import Conventions
from registry.petrology.logged import logged_words
from registry.targets.engine import CONTROL_KINDS, Verdicts, best, judge_all

#: Samples computed at a time: keeps the temporaries in the processor's cache and the memory bounded.
CHUNK_SIZE = 16_384
#: Rises whenever a computed number can change; stamped on each derived row.
METHOD_VERSION = 2

TEXT_CONTEXT = ("sample_kind", "lithology", "texture", "alteration", "intrusion_shape", "site_kind")
FLAG_CONTEXT = ("has_intrusion", "body_mapped_or_cored")
NUMBER_CONTEXT = (
    "magnetic_susceptibility_si",
    "density_kg_m3",
    "half_width_m",
    "volume_km3",
    "depth_to_top_m",
    "emplacement_depth_m",
    "age_ma",
    "age_sigma_ma",
    "country_density_kg_m3",
    "heat_flow_mw_m2",
    "surface_temperature_c",
    "conductivity_w_m_k",
    "area_heat_production_uw_m3",
    "heat_production_depth_m",
)

_QUANTITY_POSITION = {quantity.name: position for position, quantity in enumerate(QUANTITIES)}
_DOT = ord(".")


@dataclass
class Chunk:
    """What is known of n samples before anything is computed (see DEVELOPERS.md, 'The composition and the chunk')."""

    sample_id: np.ndarray
    values: np.ndarray
    qualifiers: np.ndarray
    digestions: np.ndarray
    context: Mapping[str, np.ndarray] = field(default_factory=dict)

    def __len__(self) -> int:
        return len(self.sample_id)

    def part(self, start: int, stop: int) -> Chunk:
        """Samples start to stop as a chunk of their own (views, no copies)."""
        part = slice(start, stop)
        return Chunk(
            self.sample_id[part],
            self.values[:, part],
            self.qualifiers[:, part],
            self.digestions[:, part],
            {name: column[part] for name, column in self.context.items()},
        )


@dataclass
class Computed:
    """Derived columns by name, one cause letter a quantity and one 0/1 a warning (uint8 (n, ·)), verdicts by target."""

    derived: dict[str, np.ndarray]
    causes: np.ndarray
    warnings: np.ndarray
    verdicts: dict[str, Verdicts]
    best_target: np.ndarray
    best_verdict: np.ndarray


def compute(chunk: Chunk, definitions: Sequence[Any], conventions: Conventions) -> Computed:
    """Everything derived and judged for the samples of one chunk.

    ``definitions`` are the active ``registry.targets`` definitions. Control samples (reference materials, blanks,
    duplicates) get derived values but no verdict.
    """
    n = len(chunk)
    workspace = workspace_of(chunk, conventions)
    with np.errstate(all="ignore"):
        causes = _evaluate(workspace, n)
        warnings = _warn(workspace, n)
        verdicts = judge_all(definitions, workspace, n)
        best_target, best_verdict = best(verdicts, n)
    derived = {quantity.name: workspace[quantity.name] for quantity in QUANTITIES}
    return Computed(derived, causes, warnings, verdicts, best_target, best_verdict)


def compute_in_parts(
    chunk: Chunk, definitions: Sequence[Any], conventions: Conventions
) -> Iterator[tuple[Chunk, Computed]]:
    """``compute`` over parts of at most ``CHUNK_SIZE`` samples, in order."""
    for start in range(0, len(chunk), CHUNK_SIZE):
        part = chunk.part(start, start + CHUNK_SIZE)
        yield part, compute(part, definitions, conventions)


def workspace_of(chunk: Chunk, conventions: Conventions) -> dict[str, Any]:
    """The names that methods and targets read before anything is computed."""
    n = len(chunk)
    values = chunk.values
    below = chunk.qualifiers == QUALIFIER_BELOW
    if below.any():
        values = np.where(below, values * conventions.censored_substitute, values)
    workspace: dict[str, Any] = {"conventions": conventions, "any_censored": (chunk.qualifiers > 0).any(axis=0)}
    for column, position in CHOSEN_INDEX.items():
        workspace[column] = values[position]
        workspace[f"qualifier:{column}"] = chunk.qualifiers[position]
        workspace[f"digestion:{column}"] = chunk.digestions[position]
        workspace[f"reported:{column}"] = chunk.values[position]
    for name in NUMBER_CONTEXT:
        workspace[name] = chunk.context.get(name, np.full(n, np.nan))
    for name in TEXT_CONTEXT:
        workspace[name] = chunk.context.get(name, np.full(n, None, dtype=object))
    for name in FLAG_CONTEXT:
        workspace[name] = chunk.context.get(name, np.zeros(n, dtype=bool))
    workspace.update(logged_words(workspace["lithology"], workspace["texture"], workspace["alteration"]))
    workspace["is_plutonic"] = workspace["has_intrusion"] | workspace["logged_plutonic"]
    workspace["is_control"] = np.isin(workspace["sample_kind"].astype("U20"), CONTROL_KINDS)
    return workspace


def is_missing(column: np.ndarray) -> np.ndarray:
    """True where a numeric column is NaN or a text column None."""
    if column.dtype.kind == "f":
        return np.isnan(column)
    if column.dtype.kind == "O":
        return np.equal(column, None).astype(bool)  # type: ignore[call-overload]
    return np.zeros(column.shape, dtype=bool)


def _evaluate(workspace: dict[str, Any], n: int) -> np.ndarray:
    causes = np.full((n, len(QUANTITIES)), _DOT, dtype=np.uint8)
    absent = np.full(n, np.nan)
    for method in METHODS:
        if method.function is None:
            for output in method.outputs:
                workspace[output.name] = absent if output.unit != "text" else np.full(n, None, dtype=object)
                causes[:, _QUANTITY_POSITION[output.name]] = ord(CAUSES["not_yet_computed"][0])
            continue
        result = method.function(*(workspace.get(name, absent) for name in method.inputs))
        if len(method.outputs) == 1 and not isinstance(result, Mapping):
            result = {method.outputs[0].name: result}
        for output in method.outputs:
            workspace[output.name] = result[output.name]
        _explain(method, workspace, causes, n)
    return causes


def _explain(method: Method, workspace: dict[str, Any], causes: np.ndarray, n: int) -> None:
    """Give each missing output of a method the letter of its cause."""
    letters: np.ndarray | None = None
    for output in method.outputs:
        missing = is_missing(workspace[output.name])
        if not missing.any():
            continue
        if letters is None:
            letters = _letters(method, workspace, n)
        position = _QUANTITY_POSITION[output.name]
        causes[:, position] = np.where(missing, letters, _DOT)


def _letters(method: Method, workspace: dict[str, Any], n: int) -> np.ndarray:
    incomplete = np.zeros(n, dtype=bool)
    for name in method.inputs:
        if name in method.optional or name == "conventions" or ":" in name:
            continue
        column = workspace.get(name)
        incomplete |= True if column is None else is_missing(column)
    letters = np.where(incomplete, ord(CAUSES["missing_input"][0]), ord(CAUSES["not_applicable"][0]))
    for cause in reversed(method.causes):
        mask = cause.mask(*(workspace[name] for name in cause.inputs))
        letters = np.where(mask, ord(CAUSES[cause.code][0]), letters)
    return letters


def _warn(workspace: dict[str, Any], n: int) -> np.ndarray:
    marks = np.full((n, len(WARNINGS)), ord("0"), dtype=np.uint8)
    absent = np.full(n, np.nan)
    for position, warning in enumerate(WARNINGS):
        mask = warning.mask(*(workspace.get(name, absent) for name in warning.inputs))
        marks[:, position] += np.asarray(mask, dtype=bool)
    return marks


def empty_chunk(n: int) -> Chunk:
    """A chunk of n samples with nothing reported, to be filled."""
    shape = (len(CHOSEN_COLUMNS), n)
    return Chunk(
        np.zeros(n, dtype=np.int64),
        np.full(shape, np.nan),
        np.zeros(shape, dtype=np.uint8),
        np.zeros(shape, dtype=np.uint8),
        {},
    )
