"""Which symmetry the tensor itself has, among the operations of the cube and the hexagonal prism.

Every operation that leaves the tensor unchanged within noise is collected; the largest group among them is
compared with the group that a tensor of this kind is expected to show in this crystal (a stiffness shows
more than the crystal has: the inversion, and 6/mmm for class 6).
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from typing import Literal

import numpy as np

from sitesym.arrays import FloatArray
from sitesym.audit.frames import standard_groups
from sitesym.audit.neumann import Subspaces, element_signs, subspaces
from sitesym.audit.result import TensorSymmetry
from sitesym.groups import PointGroup
from sitesym.tensors import TensorKind

_HOLOHEDRIES = ("m-3m", "6/mmm")
_EXACT = 1e-9


@dataclass(frozen=True, eq=False)
class Kept:
    """Operations of one holohedry that a tensor keeps: the holohedry and element indices forming a group."""

    holohedry: str
    elements: frozenset[int]


def tensor_symmetry(spaces: Subspaces, moved: FloatArray, tolerance: float) -> TensorSymmetry:
    """The largest group that leaves a tensor unchanged within a tolerance of its length.

    ``moved`` (n,): coordinates in the standard orientation of the crystal's group.
    """
    kind, group = spaces.space.kind, spaces.group
    own = kept_operations(kind, moved, tolerance)
    expected = _expected(kind, group)[own.holohedry]
    # Of the two holohedries the one that is expected to show more decides between equals.
    description = _described(own)
    return TensorSymmetry(
        description.symbol,
        description.system,
        description.names,
        _described(expected).symbol,
        _relation(own.elements, expected.elements),
    )


def kept_operations(kind: TensorKind, moved: FloatArray, tolerance: float) -> Kept:
    """The larger of the groups of operations, cubic or hexagonal, within a tolerance."""
    found = []
    for symbol in _HOLOHEDRIES:
        deviations = _deviations(kind, symbol, moved)
        found.append(Kept(symbol, _largest_group(symbol, deviations, tolerance)))
    return max(found, key=lambda kept: len(kept.elements))


def _deviations(kind: TensorKind, symbol: str, moved: FloatArray) -> FloatArray:
    """Half the change that each operation of a holohedry makes, shape (order,)."""
    group = standard_groups()[symbol]
    space = subspaces(kind, group).space
    proper = group.rotations_cart * group.determinants[:, None, None]
    images = space.rotated(proper, moved[:, None])[:, :, 0] * element_signs(kind, group)[:, None]
    halves: FloatArray = np.linalg.norm(images - moved, axis=1) / 2.0
    return halves


def _largest_group(symbol: str, deviations: FloatArray, tolerance: float) -> frozenset[int]:
    """Operations added in order of their deviation while all their products stay within tolerance."""
    group = standard_groups()[symbol]
    near = {int(k) for k in np.flatnonzero(deviations <= tolerance)}
    kept: set[int] = {0}
    for element in np.argsort(deviations, kind="stable").tolist():
        if element in near and element not in kept:
            wider = group.abstract.closure([*kept, element])
            if wider <= near:
                kept = wider
    return frozenset(kept)


@lru_cache(maxsize=512)
def _expected(kind: TensorKind, group: PointGroup) -> dict[str, Kept]:
    """What a tensor without special values shows in a crystal class, for each holohedry."""
    spaces = subspaces(kind, group)
    # Incommensurate numbers: no accidental equality, the same in every run.
    numbers = np.sqrt(np.arange(2.0, 2.0 + spaces.independent)) % 1.0 + 0.5
    moved = spaces.allowed.T @ numbers
    return {
        symbol: Kept(symbol, _largest_group(symbol, _deviations(kind, symbol, moved), _EXACT * len(moved)))
        for symbol in _HOLOHEDRIES
    }


@dataclass(frozen=True)
class _Description:
    symbol: str
    system: str
    names: tuple[str, ...]


def _described(kept: Kept) -> _Description:
    return _description(kept.holohedry, tuple(sorted(kept.elements)))


@lru_cache(maxsize=1024)
def _description(holohedry: str, elements: tuple[int, ...]) -> _Description:
    group = standard_groups()[holohedry].subgroup(list(elements))
    return _Description(group.symbol, group.system, group.names)


def _relation(
    own: frozenset[int], expected: frozenset[int]
) -> Literal["same", "higher", "lower", "other"]:
    if own == expected:
        return "same"
    if own > expected:
        return "higher"
    return "lower" if own < expected else "other"
