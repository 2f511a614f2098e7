"""Point groups: finite groups of orthogonal 3x3 matrices, each element with a time-reversal flag."""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import cached_property

import numpy as np

from sitesym.arrays import BoolArray, FloatArray, IntArray, frozen
from sitesym.errors import SymmetryError
from sitesym.groups.abstract import AbstractGroup
from sitesym.groups.closure import abstract_group, identity_first
from sitesym.groups.elements import Element, classify
from sitesym.groups.inputs import (
    integer_matrices,
    lattice_rows,
    number_array,
    proper_rotation,
    require_orthogonal,
    time_reversal_flags,
)
from sitesym.groups.recognition import class_symbol, oriented_symbol
from sitesym.groups.symbols import SCHOENFLIES, crystal_system, generated, read_symbol
from sitesym.tolerances import SAME_MATRIX


@dataclass(frozen=True, eq=False)
class PointGroup:
    """A finite group of orthogonal matrices, element 0 the identity.

    rotations_cart: (n, 3, 3) orthogonal, columns are images of the Cartesian axes; active, r' = R r.
    rotations_frac: (n, 3, 3) integers acting on columns of fractional coordinates, or None without a
    lattice basis. lattice: (3, 3) rows a, b, c of that basis in the same Cartesian axes, or None.
    time_reversal: (n,) flags, all false in an ordinary point group.

    Build one with `from_symbol`, `from_fractional` or `from_cartesian`; these check that the matrices are a
    group.
    """

    rotations_cart: FloatArray
    rotations_frac: IntArray | None
    lattice: FloatArray | None
    time_reversal: BoolArray
    abstract: AbstractGroup

    @classmethod
    def from_symbol(cls, symbol: str) -> PointGroup:
        """The group a Hermann-Mauguin or Schoenflies symbol names, in its conventional lattice axes (a ||
        x, c || z).

        Oriented spellings differ (31m is not 3m1); a bare monoclinic symbol has the unique axis along b.
        Raises UsageError for an unknown symbol.
        """
        spelling = read_symbol(symbol)
        return cls.from_fractional(generated(spelling.generators), spelling.lattice)

    @classmethod
    def from_fractional(
        cls, rotations: IntArray, lattice: FloatArray, time_reversal: BoolArray | None = None
    ) -> PointGroup:
        """A group of integer matrices (n, 3, 3) in the basis with rows ``lattice`` (any length unit).

        Raises NotAGroupError naming a missing product, and SymmetryError for matrices that are not integer
        or a lattice that does not have the symmetry (the Cartesian matrices are not orthogonal to 1e-8;
        idealise the cell first).
        """
        given = integer_matrices(rotations)
        flags = time_reversal_flags(time_reversal, len(given))
        sequence = identity_first(given.astype(np.float64), flags)
        matrices, flags = given[sequence], flags[sequence]
        abstract = abstract_group(matrices.astype(np.float64), flags)
        rows = lattice_rows(lattice)
        cart: FloatArray = rows.T @ matrices @ np.linalg.inv(rows.T)
        require_orthogonal(cart)
        return cls(frozen(cart), frozen(matrices), frozen(rows), frozen(flags), abstract)

    @classmethod
    def from_cartesian(cls, rotations: FloatArray, time_reversal: BoolArray | None = None) -> PointGroup:
        """A group of orthogonal matrices (n, 3, 3). Raises NotAGroupError or SymmetryError."""
        given = number_array(rotations)
        flags = time_reversal_flags(time_reversal, len(given))
        sequence = identity_first(given, flags)
        cart, flags = given[sequence], flags[sequence]
        require_orthogonal(cart)
        return cls(frozen(cart), None, None, frozen(flags), abstract_group(cart, flags))

    def in_lattice(self, lattice: FloatArray) -> PointGroup:
        """The same integer matrices in the basis with other rows ``lattice``.

        Raises SymmetryError for a group without a lattice basis or a lattice without the symmetry.
        """
        if self.rotations_frac is None:
            raise SymmetryError("the group has no lattice basis", repr(self))
        rows = lattice_rows(lattice)
        cart: FloatArray = rows.T @ self.rotations_frac @ np.linalg.inv(rows.T)
        require_orthogonal(cart)
        return replace(self, rotations_cart=frozen(cart), lattice=frozen(rows))

    def rotated(self, rotation: FloatArray) -> PointGroup:
        """The same group in other Cartesian axes: v_new = R v_old, so C becomes R C R^T and lattice rows
        turn too. Raises AxesError if R is not a proper rotation.
        """
        matrix = proper_rotation(rotation)
        cart: FloatArray = matrix @ self.rotations_cart @ matrix.T
        lattice = None if self.lattice is None else frozen(self.lattice @ matrix.T)
        return PointGroup(frozen(cart), self.rotations_frac, lattice, self.time_reversal, self.abstract)

    def subgroup(self, indices: list[int]) -> PointGroup:
        """The subgroup made of the elements with these indices, in the same axes.

        Raises NotAGroupError if they are no group, SymmetryError for an index that is none.
        """
        chosen = sorted(set(indices))
        if chosen and not 0 <= chosen[0] <= chosen[-1] < self.order:
            raise SymmetryError(
                "an element of the subgroup does not exist",
                value=f"indices {chosen[0]} to {chosen[-1]}",
                rule=f"indices of elements run from 0 to {self.order - 1}",
            )
        flags = self.time_reversal[chosen]
        if self.rotations_frac is not None and self.lattice is not None:
            return PointGroup.from_fractional(self.rotations_frac[chosen], self.lattice, flags)
        return PointGroup.from_cartesian(self.rotations_cart[chosen], flags)

    @property
    def order(self) -> int:
        """Number of elements."""
        return len(self.rotations_cart)

    @property
    def product_table(self) -> IntArray:
        """Index of the product g h (h acts first), shape (n, n)."""
        return self.abstract.table

    @property
    def inverses(self) -> IntArray:
        """Index of the inverse of each element, shape (n,)."""
        return self.abstract.inverses

    @property
    def classes(self) -> tuple[tuple[int, ...], ...]:
        """Classes of conjugate elements, as element indices."""
        return self.abstract.classes

    @property
    def generators(self) -> tuple[int, ...]:
        """Indices of a small generating set (empty for the group 1)."""
        return self.abstract.generators

    @cached_property
    def elements(self) -> tuple[Element, ...]:
        """Kind of each element: order, axis, improper, name."""
        pairs = zip(self.rotations_cart, self.time_reversal, strict=True)
        return tuple(classify(rotation, self.lattice, bool(flag)) for rotation, flag in pairs)

    @cached_property
    def names(self) -> tuple[str, ...]:
        """Name of each element in trade notation."""
        return tuple(element.name for element in self.elements)

    @cached_property
    def symbol(self) -> str:
        """Short Hermann-Mauguin symbol of the class of the rotation parts (3m for 31m); 'order n' if not
        one of the 32.

        Time reversal is left out of it: 4'/m', 4/m' and the grey 4/m1' all have the symbol 4/m.
        """
        parts = self.rotations_cart[~self.time_reversal] if self._is_grey else self.rotations_cart
        return class_symbol(parts) or f"order {self.order}"

    @cached_property
    def schoenflies(self) -> str:
        """Schoenflies symbol of the class; empty when it is not one of the 32."""
        return SCHOENFLIES.get(self.symbol, "")

    @cached_property
    def system(self) -> str:
        """Crystal system of the class; 'non-crystallographic' when it is not one of the 32."""
        return crystal_system(self.symbol) if self.symbol in SCHOENFLIES else "non-crystallographic"

    @cached_property
    def oriented(self) -> str:
        """Hermann-Mauguin symbol that tells the orientation in the lattice basis (31m, 112/m); else
        `symbol`.
        """
        if self.rotations_frac is None:
            return self.symbol
        return oriented_symbol(self.rotations_frac) or self.symbol

    @cached_property
    def determinants(self) -> IntArray:
        """+1 for proper, -1 for improper elements, shape (n,)."""
        signs: IntArray = np.rint(np.linalg.det(self.rotations_cart)).astype(np.int64)
        return signs

    @property
    def _is_grey(self) -> bool:
        """Whether time reversal by itself is an element, so that every rotation part occurs twice."""
        return bool(self.time_reversal.any()) and any(
            not e.improper and e.order == 1 and e.time_reversal for e in self.elements
        )

    @property
    def has_inversion(self) -> bool:
        """Whether the inversion is an element, with or without time reversal."""
        distance = np.abs(self.rotations_cart + np.eye(3)).max(axis=(1, 2))
        return bool(distance.min() < SAME_MATRIX)

    @property
    def has_mirror(self) -> bool:
        """Whether a mirror is an element, with or without time reversal."""
        return any(e.improper and e.order == 2 for e in self.elements)

    @property
    def is_chiral(self) -> bool:
        """Whether all elements are proper: the group does not turn a left hand into a right one."""
        return bool((self.determinants > 0).all())

    @cached_property
    def polar_directions(self) -> FloatArray:
        """Orthonormal rows spanning the polar vectors that no element changes, shape (k, 3), k = 0 to 3."""
        mean = self.rotations_cart.mean(axis=0)
        values, vectors = np.linalg.eigh((mean + mean.T) / 2)
        return frozen(vectors[:, values > 0.5].T)

    @property
    def is_polar(self) -> bool:
        """Whether a polar vector is left unchanged."""
        return len(self.polar_directions) > 0

    def __repr__(self) -> str:
        return f"PointGroup({self.oriented!r}, order={self.order})"
