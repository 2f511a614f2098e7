"""Index symmetry of a tensor as a tree: vectors, products, symmetric and antisymmetric powers.

A node knows which components are independent of each other by index symmetry alone, where each full index
goes, how a matrix acts on those components, and the character of that action. It knows no group: a 3x3
matrix comes in.

Source of the notation: H. A. Jahn, Acta Cryst. 2 (1949) 30.
"""

from __future__ import annotations

from abc import ABC, abstractmethod
from dataclasses import dataclass
from functools import cached_property
from itertools import combinations, combinations_with_replacement, product

import numpy as np

from sitesym.arrays import FloatArray, IntArray
from sitesym.tensors.root3 import multiply

#: Order of the components of a symmetric pair: 11 22 33 23 13 12.
VOIGT_PAIRS = ((0, 0), (1, 1), (2, 2), (1, 2), (0, 2), (0, 1))


class IndexSymmetry(ABC):
    """A node of the tree. Indices run from 0 to 2 inside the program and from 1 to 3 in every name."""

    @property
    @abstractmethod
    def rank(self) -> int:
        """Number of indices."""

    @property
    @abstractmethod
    def components(self) -> tuple[tuple[int, ...], ...]:
        """One full index for each component, the canonical one."""

    @abstractmethod
    def located(self) -> tuple[IntArray, IntArray]:
        """For every full index, in C order: its component and its sign (0 where antisymmetry makes it
        vanish).
        """

    @abstractmethod
    def represent(self, matrices: FloatArray) -> FloatArray:
        """Action on the components of matrices (1 or 2, k, 3, 3): T'_c = sum_k D_ck T_k, (1 or 2, k, N, N).

        The leading axis is that of `sitesym.tensors.root3`.
        """

    @abstractmethod
    def character(self, traces: FloatArray, power: int = 1) -> FloatArray:
        """Trace of the action of g^power, from ``traces[k]`` = traces of the 3x3 matrices g^k (k,
        elements).
        """

    @property
    def dimension(self) -> int:
        """Number of components."""
        return len(self.components)

    @cached_property
    def full_indices(self) -> tuple[IntArray, IntArray]:
        """`located`, computed once."""
        return self.located()

    @cached_property
    def multiplicities(self) -> IntArray:
        """How many full indices share each component, shape (N,)."""
        component, sign = self.full_indices
        return np.bincount(component[sign != 0], minlength=self.dimension)


@dataclass(frozen=True)
class Vector(IndexSymmetry):
    """One index."""

    @property
    def rank(self) -> int:
        return 1

    @property
    def components(self) -> tuple[tuple[int, ...], ...]:
        return ((0,), (1,), (2,))

    def located(self) -> tuple[IntArray, IntArray]:
        return np.arange(3), np.ones(3, dtype=np.int64)

    def represent(self, matrices: FloatArray) -> FloatArray:
        return matrices

    def character(self, traces: FloatArray, power: int = 1) -> FloatArray:
        row: FloatArray = traces[power]
        return row


@dataclass(frozen=True)
class Product(IndexSymmetry):
    """Factors side by side, with no symmetry between them; no factor at all is a scalar."""

    factors: tuple[IndexSymmetry, ...]

    @property
    def rank(self) -> int:
        return sum(factor.rank for factor in self.factors)

    @cached_property
    def components(self) -> tuple[tuple[int, ...], ...]:
        parts = product(*(factor.components for factor in self.factors))
        return tuple(tuple(i for part in chosen for i in part) for chosen in parts)

    def located(self) -> tuple[IntArray, IntArray]:
        component, sign = np.zeros(1, dtype=np.int64), np.ones(1, dtype=np.int64)
        for factor in self.factors:
            own, own_sign = factor.full_indices
            component = (component[:, None] * factor.dimension + own).ravel()
            sign = (sign[:, None] * own_sign).ravel()
        return component, sign

    def represent(self, matrices: FloatArray) -> FloatArray:
        total = np.zeros((*matrices.shape[:2], 1, 1))
        total[0] = 1.0
        for factor in self.factors:
            own = factor.represent(matrices)
            outer = multiply(total[:, :, :, None, :, None], own[:, :, None, :, None, :])
            total = outer.reshape(
                *matrices.shape[:2], total.shape[2] * own.shape[2], total.shape[3] * own.shape[3]
            )
        return total

    def character(self, traces: FloatArray, power: int = 1) -> FloatArray:
        total: FloatArray = np.ones_like(traces[power])
        for factor in self.factors:
            total = total * factor.character(traces, power)
        return total


@dataclass(frozen=True)
class Power(IndexSymmetry):
    """The symmetric (or antisymmetric) part of ``count`` equal factors."""

    base: IndexSymmetry
    count: int
    symmetric: bool

    @property
    def rank(self) -> int:
        return self.base.rank * self.count

    @cached_property
    def choices(self) -> tuple[tuple[int, ...], ...]:
        """Which components of the factors make up each component; a symmetric pair of vectors in Voigt
        order.
        """
        if self.symmetric and self.base == Vector() and self.count == 2:
            return VOIGT_PAIRS
        choose = combinations_with_replacement if self.symmetric else combinations
        return tuple(choose(range(self.base.dimension), self.count))

    @cached_property
    def components(self) -> tuple[tuple[int, ...], ...]:
        return tuple(tuple(i for k in choice for i in self.base.components[k]) for choice in self.choices)

    @cached_property
    def ordered(self) -> tuple[IntArray, IntArray]:
        """For every ordered choice of factor components: the component it belongs to and its sign."""
        position = {tuple(sorted(choice)): k for k, choice in enumerate(self.choices)}
        all_choices = list(product(range(self.base.dimension), repeat=self.count))
        component = np.array([position.get(tuple(sorted(choice)), 0) for choice in all_choices])
        if self.symmetric:
            return component, np.ones(len(all_choices), dtype=np.int64)
        return component, np.array([_permutation_sign(choice) for choice in all_choices])

    def located(self) -> tuple[IntArray, IntArray]:
        own, own_sign = self.base.full_indices
        choice, sign = np.zeros(1, dtype=np.int64), np.ones(1, dtype=np.int64)
        for _ in range(self.count):
            choice = (choice[:, None] * self.base.dimension + own).ravel()
            sign = (sign[:, None] * own_sign).ravel()
        component, order_sign = self.ordered
        return component[choice], sign * order_sign[choice]

    @cached_property
    def _column_sums(self) -> tuple[IntArray, IntArray, IntArray]:
        """Ordered choices sorted by component, their signs, and where each component begins."""
        component, sign = self.ordered
        kept = np.flatnonzero(sign)
        kept = kept[np.argsort(component[kept], kind="stable")]
        starts = np.searchsorted(component[kept], np.arange(len(self.choices)))
        return kept, sign[kept], starts

    def represent(self, matrices: FloatArray) -> FloatArray:
        own = self.base.represent(matrices)
        rows = np.array(self.choices)
        total = own[:, :, rows[:, 0], :]
        for factor in range(1, self.count):
            outer = multiply(total[..., None], own[:, :, rows[:, factor], None, :])
            total = outer.reshape(*outer.shape[:3], outer.shape[3] * outer.shape[4])
        kept, sign, starts = self._column_sums
        signed = total[..., kept] if self.symmetric else total[..., kept] * sign
        summed: FloatArray = np.add.reduceat(signed, starts, axis=3)
        return summed

    def character(self, traces: FloatArray, power: int = 1) -> FloatArray:
        """Newton's identities: n h_n = sum_i (+-1)^(i-1) p_i h_(n-i), with p_i the trace of the i-th
        power.
        """
        sign = 1.0 if self.symmetric else -1.0
        sums = [self.base.character(traces, power * i) for i in range(1, self.count + 1)]
        complete: list[FloatArray] = [np.ones_like(traces[power])]
        for n in range(1, self.count + 1):
            terms = (sign ** (i - 1) * sums[i - 1] * complete[n - i] for i in range(1, n + 1))
            complete.append(sum(terms, np.zeros_like(complete[0])) / n)
        return complete[-1]


def _permutation_sign(choice: tuple[int, ...]) -> int:
    """Sign of the permutation that sorts distinct entries; 0 when two are equal."""
    sign = 1
    for i, a in enumerate(choice):
        for b in choice[i + 1 :]:
            sign *= 0 if a == b else -1 if a > b else 1
    return sign
