"""Point groups: finite groups of orthogonal 3x3 matrices, each element with a time-reversal flag."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property, lru_cache

import numpy as np

from sitesym.arrays import BoolArray, FloatArray, IntArray, frozen
from sitesym.errors import NotAGroupError, SymmetryError
from sitesym.groups.abstract import AbstractGroup
from sitesym.groups.elements import Element, classify
from sitesym.groups.symbols import (
    ORIENTED,
    SCHOENFLIES,
    Spelling,
    crystal_system,
    read_symbol,
)
from sitesym.tolerances import ORTHOGONAL, SAME_MATRIX


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
        return cls.from_fractional(_generated(spelling), spelling.lattice)

    @classmethod
    def from_fractional(
        cls, rotations: IntArray, lattice: FloatArray, time_reversal: BoolArray | None = None
    ) -> PointGroup:
        """A group of integer matrices (n, 3, 3) in the basis with rows ``lattice`` (any length unit).

        Raises NotAGroupError naming a missing product, and SymmetryError when the lattice does not have the
        symmetry (the Cartesian matrices are not orthogonal to 1e-8; idealise the cell first).
        """
        matrices = np.asarray(rotations, dtype=np.int64)
        flags = _flags(time_reversal, len(matrices))
        sequence = _identity_first(matrices.astype(np.float64), flags)
        matrices, flags = matrices[sequence], flags[sequence]
        abstract = _abstract_of_integers(matrices.tobytes(), flags.tobytes())
        to_cart = np.asarray(lattice, dtype=np.float64).T
        cart = to_cart @ matrices @ np.linalg.inv(to_cart)
        _check_orthogonal(cart)
        return cls(frozen(cart), frozen(matrices), frozen(to_cart.T), frozen(flags), abstract)

    @classmethod
    def from_cartesian(cls, rotations: FloatArray, time_reversal: BoolArray | None = None) -> PointGroup:
        """A group of orthogonal matrices (n, 3, 3). Raises NotAGroupError or SymmetryError."""
        cart = np.asarray(rotations, dtype=np.float64)
        _check_orthogonal(cart)
        flags = _flags(time_reversal, len(cart))
        sequence = _identity_first(cart, flags)
        cart, flags = cart[sequence], flags[sequence]
        return cls(
            frozen(cart), None, None, frozen(flags), AbstractGroup(frozen(_product_table(cart, flags)))
        )

    def rotated(self, rotation: FloatArray) -> PointGroup:
        """The same group in other Cartesian axes: v_new = R v_old, so C becomes R C R^T and lattice rows
        turn too.
        """
        matrix = np.asarray(rotation, dtype=np.float64)
        cart = matrix @ self.rotations_cart @ matrix.T
        lattice = None if self.lattice is None else frozen(self.lattice @ matrix.T)
        return PointGroup(frozen(cart), self.rotations_frac, lattice, self.time_reversal, self.abstract)

    def subgroup(self, indices: list[int]) -> PointGroup:
        """The subgroup made of the given elements, in the same axes. Raises NotAGroupError if they are
        none.
        """
        chosen = sorted(set(indices))
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
        """
        return _class_symbols().get(_signature(self.rotations_cart), f"order {self.order}")

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
        return _oriented_symbols().get(_matrix_set(self.rotations_frac), self.symbol)

    @cached_property
    def determinants(self) -> IntArray:
        """+1 for proper, -1 for improper elements, shape (n,)."""
        return np.rint(np.linalg.det(self.rotations_cart)).astype(np.int64)

    @property
    def has_inversion(self) -> bool:
        """Whether the inversion is an element."""
        return any(e.improper and e.order == 1 and not e.time_reversal for e in self.elements)

    @property
    def has_mirror(self) -> bool:
        """Whether a mirror is an element."""
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


def _flags(time_reversal: BoolArray | None, count: int) -> BoolArray:
    return (
        np.zeros(count, dtype=np.bool_)
        if time_reversal is None
        else np.asarray(time_reversal, dtype=np.bool_)
    )


def _identity_first(matrices: FloatArray, flags: BoolArray) -> list[int]:
    if matrices.ndim != 3 or matrices.shape[1:] != (3, 3) or len(matrices) == 0:
        raise NotAGroupError(
            "a point group needs matrices of shape (n, 3, 3)", value=f"shape {matrices.shape}"
        )
    distance = np.abs(matrices - np.eye(3)).max(axis=(1, 2)) + flags
    first = int(np.argmin(distance))
    if distance[first] > SAME_MATRIX:
        raise NotAGroupError(
            "the matrices do not contain the identity",
            value=f"{len(matrices)} matrices",
            rule="a group contains the product of any two of its elements, so also 1",
            next_step="add the missing operations",
        )
    return [first, *(i for i in range(len(matrices)) if i != first)]


def _check_orthogonal(cart: FloatArray) -> None:
    worst = float(np.abs(cart @ np.swapaxes(cart, -1, -2) - np.eye(3)).max())
    if not worst <= ORTHOGONAL:
        raise SymmetryError(
            "an operation is not orthogonal in the given axes",
            value=f"largest entry of R R^T - 1: {worst:.2e}",
            rule=f"at most {ORTHOGONAL:.0e}",
            next_step="idealise the cell to the symmetry first, or give the lattice of the matrices",
        )


@lru_cache(maxsize=4096)
def _abstract_of_integers(matrices: bytes, flags: bytes) -> AbstractGroup:
    array = np.frombuffer(matrices, dtype=np.int64).reshape(-1, 3, 3)
    return AbstractGroup(
        frozen(_product_table(array.astype(np.float64), np.frombuffer(flags, dtype=np.bool_)))
    )


def _product_table(matrices: FloatArray, flags: BoolArray) -> IntArray:
    """Indices of all products; raises NotAGroupError for a product that is missing or an element that is
    doubled.
    """
    n = len(matrices)
    flat = np.concatenate([matrices.reshape(n, 9), flags[:, None].astype(np.float64)], axis=1)
    if len(np.unique(np.rint(flat / SAME_MATRIX), axis=0)) < n:
        raise NotAGroupError("an element is given twice", rule="each element of a group is listed once")
    products = np.einsum("gij,hjk->ghik", matrices, matrices).reshape(n * n, 9)
    product_flags = (flags[:, None] ^ flags[None, :]).reshape(n * n, 1).astype(np.float64)
    wanted = np.concatenate([products, product_flags], axis=1)
    distance = np.abs(wanted[:, None, :] - flat[None, :, :]).max(axis=2)
    nearest = np.argmin(distance, axis=1)
    missing = np.flatnonzero(distance[np.arange(n * n), nearest] > SAME_MATRIX)
    if len(missing):
        g, h = divmod(int(missing[0]), n)
        rows = "; ".join(
            " ".join(f"{v:.4g}" for v in row) for row in products[missing[0]].reshape(3, 3) + 0.0
        )
        raise NotAGroupError(
            "the matrices are not a group",
            value=f"{len(missing)} of {n * n} products are missing, the first is element {g} times element {h}"
            f" = ({rows})",
            rule="a group contains the product of any two of its elements",
            next_step="add the missing operations, or remove those that do not belong",
        )
    return nearest.reshape(n, n)


def _generated(spelling: Spelling) -> IntArray:
    """All products of the generators, integers (n, 3, 3): proper ones first, then by order of rotation."""
    found = {np.eye(3, dtype=np.int64).tobytes(): np.eye(3, dtype=np.int64)}
    frontier = list(found.values())
    while frontier:
        products = [generator @ element for element in frontier for generator in spelling.generators]
        frontier = []
        for product in products:
            if product.tobytes() not in found:
                found[product.tobytes()] = product
                frontier.append(product)
    return np.array(sorted(found.values(), key=_place))


def _place(matrix: IntArray) -> tuple[int, int, list[int]]:
    determinant = round(float(np.linalg.det(matrix)))
    return -determinant, -determinant * int(np.trace(matrix)), (-matrix).ravel().tolist()


def _signature(rotations_cart: FloatArray) -> tuple[tuple[int, int], ...]:
    """Trace and determinant of every element, sorted: it tells the 32 classes apart."""
    traces = np.rint(np.trace(rotations_cart, axis1=1, axis2=2) * 1e4).astype(int)
    determinants = np.rint(np.linalg.det(rotations_cart)).astype(int)
    return tuple(sorted(zip(traces.tolist(), determinants.tolist(), strict=True)))


def _matrix_set(rotations: IntArray) -> frozenset[bytes]:
    return frozenset(np.ascontiguousarray(matrix).tobytes() for matrix in rotations)


@lru_cache(maxsize=1)
def _class_symbols() -> dict[tuple[tuple[int, int], ...], str]:
    return {_signature(PointGroup.from_symbol(symbol).rotations_cart): symbol for symbol in SCHOENFLIES}


@lru_cache(maxsize=1)
def _oriented_symbols() -> dict[frozenset[bytes], str]:
    spellings = [s for symbol in SCHOENFLIES for s in ORIENTED.get(symbol, (symbol,))]
    return {_matrix_set(_generated(read_symbol(s))): s for s in spellings}
