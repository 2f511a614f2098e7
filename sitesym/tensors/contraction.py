"""Contracted (Voigt) notation: names of components, factors, and the exact way between array and matrix.

A symmetric pair of indices becomes one index 1..6 in the order 11 22 33 23 13 12, except in a plain
second-rank tensor, which keeps its two digits. Every other index keeps its digit 1..3.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property, lru_cache

import numpy as np

from sitesym.arrays import FloatArray, IntArray
from sitesym.errors import TensorInputError
from sitesym.tensors.indexsymmetry import VOIGT_PAIRS, IndexSymmetry, Power, Product, Vector
from sitesym.tensors.kinds import TensorKind

_PAIR = Power(Vector(), 2, symmetric=True)
_VOIGT = {pair: number for number, pair in enumerate(VOIGT_PAIRS)}


@dataclass(frozen=True)
class Contraction:
    """How one kind is written. ``blocks`` are the lengths of the contracted axes (3 or 6)."""

    kind: TensorKind

    @cached_property
    def blocks(self) -> tuple[int, ...]:
        """Lengths of the contracted axes: (3, 6) for d, (6, 6) for c, (3, 3) for permittivity."""
        return tuple(_blocks(self.kind.written)) if self.kind.rank > 2 else (3,) * self.kind.rank

    @cached_property
    def shape(self) -> tuple[int, ...]:
        """Shape of the contracted array."""
        return self.blocks

    @cached_property
    def multi_indices(self) -> IntArray:
        """Contracted index (from 0) of each written component, shape (N, len(blocks))."""
        rows = [self.contracted(full) for full in self.kind.written.components]
        return np.array(rows, dtype=np.int64).reshape(len(rows), len(self.blocks))

    @cached_property
    def factors(self) -> IntArray:
        """Matrix element divided by tensor component, for each written component, shape (N,)."""
        return np.array([self.factor(tuple(row)) for row in self.multi_indices.tolist()])

    @property
    def commuting(self) -> bool:
        """Whether all contracted indices may change places (c12 stands for c21): only sorted names are
        written.
        """
        return self._all_alike(symmetric=True)

    @property
    def anticommuting(self) -> bool:
        """Whether an exchange of contracted indices reverses the sign (T21 is -T12): only sorted names are
        written.
        """
        return self._all_alike(symmetric=False)

    @cached_property
    def keys(self) -> tuple[str, ...]:
        """Name of each written component: '14', '112', '13'."""
        return tuple("".join(str(i + 1) for i in row) for row in self.multi_indices.tolist())

    @cached_property
    def preference(self) -> tuple[int, ...]:
        """Written components in the order in which they are chosen as independent ones.

        Longitudinal components (all full indices equal) first, those with several shear pairs last, then by
        single indices, then by pairs: the choice of the published tables.
        """
        return tuple(sorted(range(len(self.keys)), key=self._rank_of_choice))

    def contracted(self, full: tuple[int, ...]) -> tuple[int, ...]:
        """Contracted index of a full index, both from 0."""
        contracted: list[int] = []
        position = 0
        for block in self.blocks:
            if block == 6:
                pair = full[position : position + 2]
                contracted.append(_VOIGT[min(pair), max(pair)])
                position += 2
            else:
                contracted.append(full[position])
                position += 1
        return tuple(contracted)

    def factor(self, contracted: tuple[int, ...]) -> int:
        """Matrix element divided by tensor component at one contracted index (from 0)."""
        pairs = [index for index, block in zip(contracted, self.blocks, strict=True) if block == 6]
        return int(np.prod([f for index, f in zip(pairs, self.kind.pair_factors, strict=False) if index > 2]))

    def _all_alike(self, symmetric: bool) -> bool:
        symmetry = self.kind.written
        return isinstance(symmetry, Power) and symmetry.symmetric == symmetric and self.kind.rank > 1

    def _rank_of_choice(self, component: int) -> tuple[bool, int, list[int], list[int]]:
        full = self.kind.written.components[component]
        row = self.multi_indices[component].tolist()
        singles = [i for i, block in zip(row, self.blocks, strict=True) if block == 3]
        pairs = [i for i, block in zip(row, self.blocks, strict=True) if block == 6]
        shear = sum(pair > 2 for pair in pairs)
        return len(set(full)) > 1, max(shear - 1, 0), singles, pairs


@lru_cache(maxsize=128)
def contraction(kind: TensorKind) -> Contraction:
    """The contracted notation of a kind."""
    return Contraction(kind)


def to_matrix(kind: TensorKind, full: FloatArray) -> FloatArray:
    """Contracted array of a full tensor, shape (3,)*rank to ``contraction(kind).shape``, with the kind's
    factors.

    Takes the canonical component of each pair: check the index symmetry of measured data first. Raises
    TensorInputError for another shape.
    """
    positions, factors = _all_positions(kind)
    _expect_shape(full, (3,) * kind.rank, kind)
    components: FloatArray = np.asarray(full, dtype=np.float64).reshape(-1)[positions]
    return (components * factors).reshape(contraction(kind).shape)


def to_full(kind: TensorKind, matrix: FloatArray) -> FloatArray:
    """Full tensor, shape (3,)*rank, of a contracted array: the exact inverse of `to_matrix`.

    Raises TensorInputError for another shape than ``contraction(kind).shape``.
    """
    _expect_shape(matrix, contraction(kind).shape, kind)
    _, factors = _all_positions(kind)
    components: FloatArray = np.asarray(matrix, dtype=np.float64).reshape(-1) / factors
    return components[_places_in_matrix(kind)].reshape((3,) * kind.rank)


@lru_cache(maxsize=128)
def _places_in_matrix(kind: TensorKind) -> IntArray:
    """For every full index, in C order: the flat place of its component in the contracted array."""
    notation = contraction(kind)
    strides = [int(np.prod(notation.shape[axis + 1 :])) for axis in range(len(notation.shape))]
    rows = [notation.contracted(full) for full in np.ndindex(*(3,) * kind.rank)]
    return np.array([sum(i * stride for i, stride in zip(row, strides, strict=True)) for row in rows])


@lru_cache(maxsize=128)
def _all_positions(kind: TensorKind) -> tuple[IntArray, IntArray]:
    """For every element of the contracted array: the flat place of its full component, and its factor."""
    notation = contraction(kind)
    places, factors = [], []
    for row in np.ndindex(*notation.shape):
        digits = (
            VOIGT_PAIRS[index] if block == 6 else (index,)
            for index, block in zip(row, notation.blocks, strict=True)
        )
        places.append(flat_place([i for digit in digits for i in digit]))
        factors.append(notation.factor(row))
    return np.array(places), np.array(factors)


def flat_place(full: Sequence[int]) -> int:
    """Place of a full index in the flattened tensor, in C order."""
    place = 0
    for index in full:
        place = 3 * place + index
    return place


def _expect_shape(array: FloatArray, shape: tuple[int, ...], kind: TensorKind) -> None:
    if np.shape(array) != shape:
        raise TensorInputError(
            f"the array does not have the shape of {kind.name}",
            value=f"shape {np.shape(array)}",
            rule=f"shape {shape}",
            next_step="give the full tensor or the contracted matrix, and say which",
        )


def _blocks(symmetry: IndexSymmetry) -> list[int]:
    if symmetry == _PAIR:
        return [6]
    if isinstance(symmetry, Product):
        return [block for factor in symmetry.factors for block in _blocks(factor)]
    if isinstance(symmetry, Power):
        return _blocks(symmetry.base) * symmetry.count
    return [3]
