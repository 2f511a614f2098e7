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
from sitesym.audit.arrayspace import array_space
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
    own, expected = _kept(kind, moved, tolerance), _expected(kind, group)
    description = _described(_larger(own))
    return TensorSymmetry(
        description.symbol,
        description.system,
        description.names,
        expected_symbol(kind, group),
        _relation(own, expected),
    )


def expected_symbol(kind: TensorKind, group: PointGroup) -> str:
    """Symbol of the group that a tensor of this kind is expected to show in a class."""
    return _described(_larger(_expected(kind, group))).symbol


def expected_order(kind: TensorKind, group: PointGroup) -> int:
    """Order of that group."""
    return len(_larger(_expected(kind, group)).elements)


def kept_operations(kind: TensorKind, moved: FloatArray, tolerance: float) -> Kept:
    """The larger of the groups of operations, cubic or hexagonal, within a tolerance."""
    return _larger(_kept(kind, moved, tolerance))


def _kept(kind: TensorKind, moved: FloatArray, tolerance: float) -> tuple[Kept, ...]:
    """The operations of each holohedry within a tolerance."""
    return tuple(
        Kept(symbol, _largest_group(symbol, _images(kind, symbol, moved), moved, tolerance))
        for symbol in _HOLOHEDRIES
    )


def _larger(groups: tuple[Kept, ...]) -> Kept:
    return max(groups, key=lambda kept: len(kept.elements))


def _images(kind: TensorKind, symbol: str, moved: FloatArray) -> FloatArray:
    """The tensor after each operation of a holohedry, shape (order, n)."""
    group = standard_groups()[symbol]
    proper = group.rotations_cart * group.determinants[:, None, None]
    turned = array_space(kind).rotated(proper, moved[:, None])[:, :, 0]
    images: FloatArray = turned * element_signs(kind, group)[:, None]
    return images


def _largest_group(symbol: str, images: FloatArray, moved: FloatArray, tolerance: float) -> frozenset[int]:
    """Operations added in order of what they change, while the mean over the group stays within tolerance."""
    group = standard_groups()[symbol]
    changes = np.linalg.norm(images - moved, axis=1)
    # The mean over a group that holds an operation is at least half as far as its image.
    near = {int(place) for place in np.flatnonzero(changes <= 2.0 * tolerance)}
    kept: set[int] = {0}
    for element in np.argsort(np.round(changes, 12), kind="stable").tolist():
        if element in near and element not in kept:
            wider = group.abstract.closure([*kept, element])
            if wider <= near and np.linalg.norm(images[sorted(wider)].mean(axis=0) - moved) <= tolerance:
                kept = wider
    return frozenset(kept)


@lru_cache(maxsize=512)
def _expected(kind: TensorKind, group: PointGroup) -> tuple[Kept, ...]:
    """What a tensor without special values shows in a crystal class, for each holohedry."""
    spaces = subspaces(kind, group)
    # Incommensurate numbers: no accidental equality, the same in every run.
    numbers = np.sqrt(np.arange(2.0, 2.0 + spaces.independent)) % 1.0 + 0.5
    moved = spaces.allowed.T @ numbers
    return _kept(kind, moved, _EXACT * len(moved))


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
    own: tuple[Kept, ...], expected: tuple[Kept, ...]
) -> Literal["same", "higher", "lower", "other"]:
    """How the operations kept compare with those expected, over both holohedries."""
    pairs = [(mine.elements, theirs.elements) for mine, theirs in zip(own, expected, strict=True)]
    misses = any(theirs - mine for mine, theirs in pairs)
    adds = any(mine - theirs for mine, theirs in pairs)
    if misses:
        return "other" if adds else "lower"
    return "higher" if adds else "same"
