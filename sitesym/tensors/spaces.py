"""Tensor spaces: where index symmetry meets a group.

A `TensorSpace` is what index symmetry, parity and time parity leave of a tensor. A group acts on it; its
reduction is counted with characters and spanned with projection operators, for every irrep and not only the
invariant one.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property, lru_cache

import numpy as np

from sitesym.arrays import ComplexArray, FloatArray, frozen
from sitesym.groups import CharacterTable, PointGroup
from sitesym.tensors.action import Action, action_of
from sitesym.tensors.indexsymmetry import IndexSymmetry
from sitesym.tensors.kinds import TensorKind


@dataclass(frozen=True)
class TensorSpace:
    """All tensors of one index symmetry and parity (``traceless``: second rank with vanishing trace)."""

    symmetry: IndexSymmetry
    axial: bool = False
    time_odd: bool = False
    traceless: bool = False

    @classmethod
    def of(cls, kind: TensorKind) -> TensorSpace:
        """The space of a tensor kind."""
        return cls(kind.symmetry, kind.axial, kind.time_odd, kind.traceless)

    @property
    def dimension(self) -> int:
        """Number of components that index symmetry (and vanishing trace) leaves."""
        return self.symmetry.dimension - int(self.traceless)

    @cached_property
    def basis(self) -> FloatArray:
        """Orthonormal basis in the full tensor: shape (dimension, 3, ..., 3)."""
        component, sign = self.symmetry.full_indices
        rows = np.zeros((self.symmetry.dimension, len(component)))
        rows[component, np.arange(len(component))] = sign / np.sqrt(self.symmetry.multiplicities[component])
        if self.traceless:
            rows = _without(rows, self.trace_vector / np.sqrt(self.symmetry.multiplicities))
        return rows.reshape(self.dimension, *(3,) * self.symmetry.rank)

    @cached_property
    def trace_vector(self) -> FloatArray:
        """Coefficients of the components in the trace of a second-rank tensor, shape (N,)."""
        return np.array([float(full[0] == full[1]) for full in self.symmetry.components])

    def signs(self, group: PointGroup) -> FloatArray:
        """Factor each element adds by parity and time parity, shape (n,)."""
        signs = np.ones(group.order)
        if self.axial:
            signs = signs * group.determinants
        if self.time_odd:
            signs = signs * np.where(group.time_reversal, -1.0, 1.0)
        return signs

    def representation(self, group: PointGroup) -> FloatArray:
        """Orthogonal matrices of the group in `basis`, shape (n, dimension, dimension)."""
        scale = np.sqrt(self.symmetry.multiplicities)
        matrices: FloatArray = self.symmetry.represent(group.rotations_cart[None])[0]
        matrices = matrices * (scale[:, None] / scale[None, :]) * self.signs(group)[:, None, None]
        if self.traceless:
            kept = _without(np.eye(len(scale)), self.trace_vector / scale)
            matrices = kept @ matrices @ kept.T
        return matrices

    def character(self, group: PointGroup) -> FloatArray:
        """Trace of every element on this space, shape (n,), from traces of 3x3 matrices alone."""
        traces = np.trace(group.rotations_cart, axis1=1, axis2=2)
        rank = max(self.symmetry.rank, 1)
        powers = np.array([traces[group.abstract.powers(k)] for k in range(rank + 1)])
        character: FloatArray = (self.symmetry.character(powers) - int(self.traceless)) * self.signs(group)
        return character

    def action(self, group: PointGroup) -> Action:
        """How the group acts on this space: proper parts and signs."""
        return action_of(group, (self.symmetry.rank % 2 == 1) != self.axial, self.time_odd)

    def invariant_count(self, group: PointGroup) -> int:
        """How many independent numbers the group leaves: the mean of the character."""
        return _invariant_count(self, self.action(group))

    def multiplicities(self, table: CharacterTable) -> dict[str, int]:
        """How often each irrep occurs in this space, by label; the counting formula over characters."""
        own = self.character(table.group)
        return {
            irrep.label: round(float((own * table.element_characters(k).conj()).mean().real))
            for k, irrep in enumerate(table.irreps)
        }

    def adapted_basis(self, table: CharacterTable, index: int) -> ComplexArray:
        """Orthonormal symmetry-adapted tensors of one irrep, shape (copies, d, 3, ..., 3).

        Row i of a copy transforms like row i of the irrep's matrices:
        g T_j = sum_i D_ij(g) T_i. Built with the projection operators P_ij = (d/|G|) sum_g D_ij(g)* g.
        """
        irrep = table.irreps[index]
        representation = self.representation(table.group)
        weight = irrep.dimension / table.group.order
        operators = weight * np.einsum("gi,gab->iab", irrep.matrices[:, :, 0].conj(), representation)
        first = _orthonormal_range(operators[0])
        vectors: ComplexArray = np.einsum("iab,kb->kia", operators, first)
        tensors: ComplexArray = vectors @ self.basis.reshape(self.dimension, -1)
        return tensors.reshape(len(first), irrep.dimension, *(3,) * self.symmetry.rank)


@lru_cache(maxsize=8192)
def _invariant_count(space: TensorSpace, action: Action) -> int:
    return round(action.mean(_character_of_rotations(space.symmetry, action.angles) - int(space.traceless)))


@lru_cache(maxsize=1024)
def _character_of_rotations(symmetry: IndexSymmetry, angles: bytes) -> FloatArray:
    """Trace of proper rotations by the angles ``Action.angles`` on the components, shape (angles,)."""
    powers = np.arange(max(symmetry.rank, 1) + 1)
    return frozen(symmetry.character(1.0 + 2.0 * np.cos(np.outer(powers, np.frombuffer(angles)))))


def independent_count(kind: TensorKind, group: PointGroup) -> int:
    """Number of independent components of a kind in a group."""
    return TensorSpace.of(kind).invariant_count(group)


def _orthonormal_range(projector: ComplexArray) -> ComplexArray:
    """Orthonormal rows spanning the range of a Hermitian projector."""
    values, vectors = np.linalg.eigh(projector)
    return vectors[:, values > 0.5].T


def _without(rows: FloatArray, direction: FloatArray) -> FloatArray:
    """Orthonormal combinations of orthonormal rows that are perpendicular to one combination of them."""
    unit = direction / np.linalg.norm(direction)
    _, _, complement = np.linalg.svd(unit[None, :])
    remaining: FloatArray = complement[1:] @ rows
    return remaining
