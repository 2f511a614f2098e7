"""Mistakes in single entries that would explain a violation: sign, exchange, power of ten, one wrong value.

The tensor stays in its axes; each mistake moves the residual by a multiple of one or two columns of a fixed
matrix, so that all mistakes are tried at once. An entry is a single number of the array, or a number with all
the places index symmetry gives it.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace
from functools import lru_cache
from itertools import combinations

import numpy as np

from sitesym.arrays import BoolArray, FloatArray, IntArray, frozen
from sitesym.audit.arrayspace import ArraySpace, array_space
from sitesym.audit.result import Slip
from sitesym.audit.search import Candidate, Field, chance
from sitesym.tensors import TensorKind

_EXPONENTS = (-3, -2, -1, 1, 2, 3)
#: Where there are more entries than this, exchanges of two of them are not tried.
_MOST_FOR_SWAPS = 100
#: How many values a single wrong entry may have, told apart by the noise: the price of a fitted number.
_VALUES_OF_AN_ENTRY = 10


@dataclass(frozen=True, eq=False)
class Repair:
    """A slip that was put right: residual left, how many such slips there are, score as in the search."""

    slip: Slip
    residual: float
    choices: int
    score: float


@dataclass(frozen=True, eq=False)
class _Cells:
    """Sets of entries that hold one number: rows of 0 and 1 (m, n), the first entry of each (m,), names."""

    members: FloatArray
    first: IntArray
    names: tuple[str, ...]


def repairs(field: Field, candidate: Candidate) -> list[Repair]:
    """Slips that would bring a reading within tolerance, the best first."""
    space = field.spaces.space
    cells = _cells(space.kind)
    to_standard = field.frames.standard_from_file @ candidate.orientation.rotation.T
    coordinates = candidate.variant.coordinates
    columns = np.eye(space.size)
    moved = space.rotated(to_standard[None], np.column_stack([columns, coordinates]))[0]
    forbidden = field.spaces.forbidden_part(moved)
    trial = _Trial(cells, forbidden[:, :-1] * space.weights, forbidden[:, -1], coordinates / space.weights)
    tolerance = float(field.tolerances[field.variants.index(candidate.variant)])
    found = [
        _scored(field, candidate, slip, left, choices, free)
        for slip, left, choices, free in _fitting(trial, tolerance)
    ]
    return sorted(found, key=lambda repair: repair.score)


@dataclass(frozen=True, eq=False)
class _Trial:
    """``columns`` (n, n): change of the forbidden part per unit of each entry; ``rest`` (n,): that part."""

    cells: _Cells
    columns: FloatArray
    rest: FloatArray
    entries: FloatArray


def _fitting(trial: _Trial, tolerance: float) -> Iterator[tuple[Slip, float, int, int]]:
    """Slips within tolerance: the slip, the residual left, how many of its sort, numbers fitted."""
    cells, names = trial.cells, trial.cells.names
    columns = trial.columns @ cells.members.T
    weighted = trial.columns @ (cells.members * trial.entries).T
    values = trial.entries[cells.first]
    present = np.abs(weighted).max(axis=0) > 0.0
    count = len(names)

    left = _lengths(trial.rest[:, None] - 2.0 * weighted)
    for k in _within(left, tolerance, present):
        yield Slip("sign", (names[k],), (-values[k],)), float(left[k]), count, 0

    # Where zero would do as well, a power of ten explains nothing.
    needed = present & (_lengths(trial.rest[:, None] - weighted) > tolerance)
    for exponent in _EXPONENTS:
        left = _lengths(trial.rest[:, None] + (10.0**-exponent - 1.0) * weighted)
        for k in _within(left, tolerance, needed):
            expected = (values[k] * 10.0**-exponent,)
            yield (
                Slip("power-of-ten", (names[k],), expected, exponent),
                float(left[k]),
                count * len(_EXPONENTS),
                0,
            )

    squares = (columns**2).sum(axis=0)
    best = np.divide(columns.T @ trial.rest, squares, out=np.zeros(count), where=squares > 1e-12)
    left = _lengths(trial.rest[:, None] - columns * best)
    for k in _within(left, tolerance, squares > 1e-12):
        yield (
            Slip("entry", (names[k],), (values[k] - best[k],)),
            float(left[k]),
            count * _VALUES_OF_AN_ENTRY,
            1,
        )

    if count <= _MOST_FOR_SWAPS:
        yield from _swaps(trial, columns, values, tolerance)


def _swaps(
    trial: _Trial, columns: FloatArray, values: FloatArray, tolerance: float
) -> Iterator[tuple[Slip, float, int, int]]:
    """Two entries of the same number of places exchanged."""
    sizes = trial.cells.members.sum(axis=1)
    first, second = _pairs(len(values))
    usable = (sizes[first] == sizes[second]) & (values[first] != values[second])
    usable &= (trial.cells.members[first] * trial.cells.members[second]).sum(axis=1) == 0
    first, second = first[usable], second[usable]
    change = (values[second] - values[first]) * (columns[:, first] - columns[:, second])
    left = _lengths(trial.rest[:, None] + change)
    names = trial.cells.names
    for k in np.flatnonzero(left <= tolerance):
        a, b = int(first[k]), int(second[k])
        slip = Slip("swap", (names[a], names[b]), (float(values[b]), float(values[a])))
        yield slip, float(left[k]), len(left), 0


def _scored(field: Field, candidate: Candidate, slip: Slip, left: float, choices: int, fitted: int) -> Repair:
    number = field.variants.index(candidate.variant)
    length = float(np.linalg.norm(candidate.variant.coordinates))
    floor = field.floor(number)
    total = choices * candidate.orientation.choices * candidate.variant.choices
    likelihood = chance(
        np.array(left / length), field.typical, floor, max(field.spaces.constraints - fitted, 0)
    )
    plain = tuple(float(value) + 0.0 for value in slip.expected)
    return Repair(replace(slip, expected=plain), left, total, float(np.log(total) + likelihood))


def _lengths(vectors: FloatArray) -> FloatArray:
    lengths: FloatArray = np.sqrt((vectors**2).sum(axis=0))
    return lengths


def _within(left: FloatArray, tolerance: float, usable: BoolArray) -> list[int]:
    places: list[int] = np.flatnonzero((left <= tolerance) & usable).tolist()
    return places


@lru_cache(maxsize=64)
def _pairs(count: int) -> tuple[IntArray, IntArray]:
    pairs = np.array(list(combinations(range(count), 2)), dtype=np.int64).reshape(-1, 2)
    return pairs[:, 0], pairs[:, 1]


@lru_cache(maxsize=64)
def _cells(kind: TensorKind) -> _Cells:
    """Every entry alone, then every component that stands in several entries."""
    space = array_space(kind)
    component = _component_of_entry(space)
    several = [np.flatnonzero(component == c) for c in np.unique(component)]
    groups = [np.array([i]) for i in range(space.size)] + [g for g in several if len(g) > 1]
    members = np.zeros((len(groups), space.size))
    for row, group in enumerate(groups):
        members[row, group] = 1.0
    names = tuple(" and ".join(space.names[i] for i in group) for group in groups)
    return _Cells(frozen(members), np.array([int(g[0]) for g in groups]), names)


def _component_of_entry(space: ArraySpace) -> IntArray:
    component, _ = space.kind.written.full_indices
    return component[space.full_places]
