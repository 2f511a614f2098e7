"""Contracted arrays as vectors in an orthonormal metric, and how rotations act on them.

An entry M of a contracted array stands for tensor components T = M / factor that occur 2^s times, s being
its number of shear pairs. Its coordinate is sqrt(2^s) M / factor (Kelvin's weights), so that the length of
the coordinate vector is the length of the full tensor and rotations are orthogonal matrices. Both members of
a pair that index symmetry makes equal keep their own coordinate: c12 and c21 of measured data may differ.

Source: W. Thomson (Lord Kelvin), Phil. Trans. R. Soc. 146 (1856) 481; M. M. Mehrabadi, S. C. Cowin, Q. J.
Mech. Appl. Math. 43 (1990) 15.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property, lru_cache

import numpy as np

from sitesym.arrays import FloatArray, IntArray, frozen
from sitesym.tensors import TensorKind, TensorSpace, contraction
from sitesym.tensors.indexsymmetry import VOIGT_PAIRS

_PAIRS = np.array(VOIGT_PAIRS)
_PAIR_WEIGHTS = np.sqrt([1.0, 1.0, 1.0, 2.0, 2.0, 2.0])
_GENERATORS = np.array(
    [
        [[0.0, 0.0, 0.0], [0.0, 0.0, -1.0], [0.0, 1.0, 0.0]],
        [[0.0, 0.0, 1.0], [0.0, 0.0, 0.0], [-1.0, 0.0, 0.0]],
        [[0.0, -1.0, 0.0], [1.0, 0.0, 0.0], [0.0, 0.0, 0.0]],
    ]
)


@dataclass(frozen=True)
class ArraySpace:
    """All arrays of one kind, index symmetry obeyed or not. Coordinates have shape (n,), or (n, m) for m
    arrays.
    """

    kind: TensorKind

    @property
    def blocks(self) -> tuple[int, ...]:
        """Lengths of the axes of the contracted array."""
        return contraction(self.kind).blocks

    @property
    def size(self) -> int:
        """Number n of entries."""
        return int(np.prod(self.blocks))

    @cached_property
    def entries(self) -> tuple[tuple[int, ...], ...]:
        """Contracted index of every entry from 0, in C order."""
        return tuple(np.ndindex(*self.blocks))

    @cached_property
    def names(self) -> tuple[str, ...]:
        """Name of every entry: 14, 112."""
        return tuple("".join(str(i + 1) for i in entry) for entry in self.entries)

    @cached_property
    def shears(self) -> IntArray:
        """For every entry and contracted axis, 1 where the index is 4 to 6 of a pair, shape (n, axes)."""
        rows = np.array(self.entries).reshape(self.size, len(self.blocks))
        shears: IntArray = ((rows > 2) & (np.array(self.blocks) == 6)).astype(np.int64)
        return shears

    @cached_property
    def factors(self) -> FloatArray:
        """Entry divided by tensor component, shape (n,)."""
        pairs = np.flatnonzero(np.array(self.blocks) == 6)
        own = np.ones(len(self.blocks))
        own[pairs] = [*self.kind.pair_factors, *(1,) * len(pairs)][: len(pairs)]
        return frozen(np.prod(own**self.shears, axis=1))

    @cached_property
    def weights(self) -> FloatArray:
        """Coordinate divided by entry, shape (n,)."""
        return frozen(np.sqrt(2.0 ** self.shears.sum(axis=1)) / self.factors)

    @cached_property
    def full_places(self) -> IntArray:
        """Flat place in the full tensor of the canonical component of every entry, shape (n,)."""
        fulls = [
            tuple(i for index, block in zip(entry, self.blocks, strict=True)
                  for i in (VOIGT_PAIRS[index] if block == 6 else (index,)))
            for entry in self.entries
        ]  # fmt: skip
        return np.array([int(np.ravel_multi_index(full, (3,) * self.kind.rank)) for full in fulls])

    @cached_property
    def index_basis(self) -> FloatArray:
        """Orthonormal rows spanning the arrays that obey index symmetry, shape (N, n)."""
        basis = TensorSpace.of(self.kind).basis
        written = basis.reshape(len(basis), -1)[:, self.full_places]
        return frozen(written * (self.weights * self.factors))

    def coordinates(self, array: FloatArray) -> FloatArray:
        """Coordinates (n,) of a contracted array."""
        vector: FloatArray = np.asarray(array, dtype=np.float64).reshape(-1) * self.weights
        return vector

    def array(self, coordinates: FloatArray) -> FloatArray:
        """The contracted array of coordinates (n,)."""
        return (coordinates / self.weights).reshape(self.blocks)

    def rotated(self, rotations: FloatArray, coordinates: FloatArray) -> FloatArray:
        """Coordinates (n, m) after each of the proper rotations (r, 3, 3), shape (r, n, m)."""
        m = coordinates.shape[1]
        if m == 0:
            return np.zeros((len(rotations), self.size, 0))
        by_length = {3: rotations, 6: pair_rotations(rotations)}
        result = coordinates[None]
        # Each pass turns the leading axis and moves it behind the others.
        for block in self.blocks:
            leading = result.reshape(len(result), block, -1)
            turned = by_length[block] @ leading
            rest = turned.shape[2] // m
            result = turned.reshape(-1, block, rest, m).swapaxes(1, 2)
        return np.ascontiguousarray(result).reshape(-1, self.size, m)

    @cached_property
    def generators(self) -> FloatArray:
        """Derivatives of the action at the identity for turns about x, y, z, shape (3, n, n)."""
        return frozen(np.array([self._generator(matrix) for matrix in _GENERATORS]))

    def _generator(self, matrix: FloatArray) -> FloatArray:
        parts = {3: matrix, 6: _pair_generator(matrix)}
        total = np.zeros((self.size, self.size))
        for axis, block in enumerate(self.blocks):
            before, after = int(np.prod(self.blocks[:axis])), int(np.prod(self.blocks[axis + 1 :]))
            total += np.kron(np.kron(np.eye(before), parts[block]), np.eye(after))
        return total


@lru_cache(maxsize=128)
def array_space(kind: TensorKind) -> ArraySpace:
    """The arrays of a kind."""
    return ArraySpace(kind)


def pair_rotations(rotations: FloatArray) -> FloatArray:
    """What rotations (r, 3, 3) do to a symmetric pair of indices in Kelvin's weights, shape (r, 6, 6)."""
    weighted: FloatArray = _pairs(rotations, rotations) * (_PAIR_WEIGHTS[:, None] * _PAIR_WEIGHTS)
    return weighted


def _pair_generator(matrix: FloatArray) -> FloatArray:
    identity, one = np.eye(3)[None], matrix[None]
    both = _pairs(one, identity) + _pairs(identity, one)
    generator: FloatArray = both[0] * (_PAIR_WEIGHTS[:, None] * _PAIR_WEIGHTS)
    return generator


def _pairs(left: FloatArray, right: FloatArray) -> FloatArray:
    """(A_ik B_jl + A_il B_jk) / 2 for pairs ij and kl, shape (r, 6, 6)."""
    i, j = _PAIRS[:, 0], _PAIRS[:, 1]
    straight = left[:, i[:, None], i] * right[:, j[:, None], j]
    crossed = left[:, i[:, None], j] * right[:, j[:, None], i]
    result: FloatArray = (straight + crossed) / 2.0
    return result
