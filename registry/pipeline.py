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
from registry.petrology.quotients import is_absent
from registry.targets.engine import CONTROL_KINDS, Verdicts, best, judge_all, verdict_codes

#: Samples computed at a time: keeps the temporaries in the processor's cache and the memory bounded.
CHUNK_SIZE = 16_384
#: Rises whenever a computed number can change; stamped on each derived row.
METHOD_VERSION = 4

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
#: Just under the largest block that the C library's allocator counts towards its limits.
_LARGEST_COUNTED_BYTES = 31 * 2**20


def _keep_memory_between_chunks() -> None:
    """Let the C library keep the memory of one chunk for the next, instead of giving it back and asking anew.

    Giving back one large block raises the limits of Linux's allocator; without it each chunk takes some 5,000 page
    faults, a quarter of its time (measured). Elsewhere it does nothing.
    """
    np.empty(_LARGEST_COUNTED_BYTES, dtype=np.uint8)


_keep_memory_between_chunks()


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


def judged_only(chunk: Chunk, definitions: Sequence[Any], conventions: Conventions) -> dict[str, np.ndarray]:
    """The verdict codes that ``compute`` gives, uint8 (n,) by target code, and nothing else of it.

    For many drawn analyses of few samples: causes, remarks and reasons of a draw are not asked for.
    """
    workspace = workspace_of(chunk, conventions)
    with np.errstate(all="ignore"):
        _evaluate(workspace, len(chunk))
        return verdict_codes(definitions, workspace, len(chunk))


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
    workspace["is_control"] = _is_control(workspace["sample_kind"])
    return workspace


def _is_control(sample_kind: np.ndarray) -> np.ndarray:
    kinds, inverse = np.zeros(len(sample_kind), dtype=bool), np.flatnonzero(~is_absent(sample_kind))
    kinds[inverse] = [kind in CONTROL_KINDS for kind in sample_kind[inverse].tolist()]
    return kinds


def is_missing(column: np.ndarray) -> np.ndarray:
    """True where a numeric column is NaN or a text column None."""
    if column.dtype.kind == "f":
        return np.isnan(column)
    if column.dtype.kind == "O":
        return is_absent(column)
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
    """Give each missing output of a method the letter of its cause; what is infinite goes missing here."""
    missing, infinite = {}, np.zeros(n, dtype=bool)
    for output in method.outputs:
        column = workspace[output.name]
        is_number = column.dtype.kind == "f"
        absent = ~np.isfinite(column) if is_number else is_missing(column)
        if not absent.any():
            continue
        missing[output.name] = absent
        if is_number and (beyond := np.isinf(column)).any():
            workspace[output.name] = np.where(beyond, np.nan, column)
            infinite |= beyond
    if not missing:
        return
    rows = np.flatnonzero(np.logical_or.reduce(list(missing.values())))
    letters = np.full(n, _DOT, dtype=np.uint8)
    letters[rows] = _letters(method, workspace, rows, n)
    letters[infinite] = ord(CAUSES["beyond_numbers"][0])
    for name, mask in missing.items():
        causes[:, _QUANTITY_POSITION[name]] = letters if len(missing) == 1 else np.where(mask, letters, _DOT)


def _letters(method: Method, workspace: dict[str, Any], rows: np.ndarray, n: int) -> np.ndarray:
    """Letters of the causes for the rows named: the first cause that holds, else an input that is missing."""

    def of(name: str) -> Any:
        column = workspace[name]
        return column if len(rows) == n or not isinstance(column, np.ndarray) else column[rows]

    letters = np.full(len(rows), ord(CAUSES["not_applicable"][0]), dtype=np.uint8)
    open_ = np.ones(len(rows), dtype=bool)
    for cause in method.causes:
        holds = open_ & cause.mask(*(of(name) for name in cause.inputs))
        letters[holds] = ord(CAUSES[cause.code][0])
        open_ &= ~holds
        if not open_.any():
            return letters
    for name in method.inputs:
        if name not in method.optional and name != "conventions" and ":" not in name:
            letters[open_ & (is_missing(of(name)) if name in workspace else True)] = ord(CAUSES["missing_input"][0])
    return letters


def _warn(workspace: dict[str, Any], n: int) -> np.ndarray:
    marks = np.full((n, len(WARNINGS)), ord("0"), dtype=np.uint8)
    absent = np.full(n, np.nan)
    for position, warning in enumerate(WARNINGS):
        mask = np.asarray(warning.mask(*(workspace.get(name, absent) for name in warning.inputs)), dtype=bool)
        if mask.any():
            marks[:, position] += mask
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
