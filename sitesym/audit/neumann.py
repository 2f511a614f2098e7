"""Neumann's principle as two subspaces: what a group allows of the arrays of one kind, and the rest.

In the orthonormal metric the nearest allowed tensor is the projection onto the allowed subspace, and the
residual is the length of what is left. Source: F. E. Neumann, Vorlesungen ueber die Theorie der Elastizitaet
(1885); J. F. Nye, Physical Properties of Crystals (1957).
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from sitesym.arrays import FloatArray, frozen
from sitesym.audit.arrayspace import ArraySpace, array_space
from sitesym.groups import PointGroup
from sitesym.groups.normaliser import equivalent_turns
from sitesym.tensors import TensorKind, TensorSpace
from sitesym.tolerances import SAME_MATRIX


@dataclass(frozen=True, eq=False)
class Subspaces:
    """Arrays of one kind under one group, in the Cartesian axes of that group.

    ``allowed`` (k, n): orthonormal rows spanning what the group allows. ``constraints``: how many independent
    numbers of the index-symmetric tensor must vanish.
    """

    space: ArraySpace
    group: PointGroup
    allowed: FloatArray
    constraints: int

    @property
    def independent(self) -> int:
        """Number of independent components."""
        return len(self.allowed)

    def forbidden_part(self, coordinates: FloatArray) -> FloatArray:
        """What is left of coordinates (n,) or (..., n, m) without their allowed part."""
        rest: FloatArray = coordinates - self.allowed.T @ (self.allowed @ coordinates)
        return rest


@lru_cache(maxsize=512)
def subspaces(kind: TensorKind, group: PointGroup) -> Subspaces:
    """The allowed arrays of a kind in a group, by averaging over its elements."""
    space = array_space(kind)
    basis = space.index_basis
    mean = np.zeros((len(basis), len(basis)))
    signs = element_signs(kind, group)
    proper = group.rotations_cart * group.determinants[:, None, None]
    for rotation, sign in zip(proper, signs, strict=True):
        mean += sign * (basis @ space.rotated(rotation[None], basis.T)[0]) / group.order
    values, vectors = np.linalg.eigh((mean + mean.T) / 2.0)
    allowed = vectors[:, values > 0.5].T @ basis
    return Subspaces(space, group, frozen(allowed), len(basis) - len(allowed))


def element_signs(kind: TensorKind, group: PointGroup) -> FloatArray:
    """Sign by which each element acts beyond its proper part, shape (order,)."""
    inversion = group.determinants.astype(np.float64) ** kind.rank
    signs: FloatArray = inversion * TensorSpace.of(kind).signs(group)
    return signs


def inversion_sign(kind: TensorKind) -> int:
    """Sign a tensor of this kind takes when the hand of the axes changes: -1 for piezoelectricity."""
    return -1 if (kind.rank + int(kind.axial)) % 2 else 1


def acting_group(kind: TensorKind, group: PointGroup) -> PointGroup:
    """The group as tensors of a kind see it: the proper parts alone where the inversion changes nothing.

    A stiffness does not tell -42m from 422, so that turns by 45 degrees are equivalent for it in both.
    """
    return _proper_parts(group) if inversion_sign(kind) > 0 else group


@lru_cache(maxsize=128)
def _proper_parts(group: PointGroup) -> PointGroup:
    proper = group.rotations_cart * group.determinants[:, None, None]
    distance = np.abs(proper[:, None] - proper[None]).max(axis=(2, 3))
    first = np.argmax(distance < SAME_MATRIX, axis=1) == np.arange(len(proper))
    return group if first.all() and group.is_chiral else PointGroup.from_cartesian(proper[first])


@lru_cache(maxsize=512)
def equivalent_actions(kind: TensorKind, group: PointGroup) -> FloatArray:
    """What equivalent choices of axes do to the allowed coefficients, the identity first, shape (m, k, k).

    ``group`` in the standard orientation. The turns of `equivalent_turns`, each also with the opposite
    hand.
    """
    spaces = subspaces(kind, group)
    turns = np.array([np.eye(3), *equivalent_turns(acting_group(kind, group))])
    moved = spaces.space.rotated(turns, spaces.allowed.T)
    actions = spaces.allowed @ moved
    return frozen(actions if inversion_sign(kind) > 0 else np.concatenate([actions, -actions]))


@lru_cache(maxsize=512)
def equivalent_rotations(kind: TensorKind, group: PointGroup) -> FloatArray:
    """Products of a turn of `equivalent_turns` (or none) and a proper part of an element, (m, 3, 3)."""
    proper = group.rotations_cart * group.determinants[:, None, None]
    turns = np.array([np.eye(3), *equivalent_turns(acting_group(kind, group))])
    return frozen((turns[:, None] @ proper[None]).reshape(-1, 3, 3))
