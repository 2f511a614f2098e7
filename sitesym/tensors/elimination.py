"""The kernel of a small positive semidefinite matrix, written in a chosen set of its variables."""

from __future__ import annotations

import numpy as np

from sitesym.arrays import BoolArray, FloatArray, IntArray
from sitesym.tolerances import PIVOT

#: A variable is expressed by others at once only if its pivot is at least this large: in axes unrelated
#: to the crystal this keeps coefficients small. Matrices are of order one, pivots in standard axes larger.
_WELL_DETERMINED = 0.1

#: Rounding grows with the square of the coefficients. Beyond this (in standard axes they stay below 3) the
#: wished order costs so many digits that it is given up.
_LARGEST_COEFFICIENT = 20.0


def solved(gram: FloatArray, order: IntArray) -> tuple[IntArray, FloatArray]:
    """Solve ``gram @ x = 0`` for the variables in the given ``order``; those that nothing determines stay
    free.

    Returns the free variables, shape (k,), and coefficients (n, k) with x = coefficients @ x[free].
    Gauss-Jordan elimination on the diagonal: in a positive semidefinite matrix a pivot that vanishes means
    that its whole remaining row vanishes. A variable with a weak pivot is left for the end, where the
    strongest goes first; where the order asks for large coefficients, the strongest goes first from the
    beginning. So the rank is certain.
    """
    coupled = np.count_nonzero(np.abs(gram) > PIVOT, axis=1) > 1
    alone = np.flatnonzero(~coupled & (np.diagonal(gram) < PIVOT))
    together = order[coupled[order]]
    matrix = gram[together[:, None], together]
    left = _solve_in_order(matrix)
    if np.abs(matrix[~left][:, left]).max(initial=0.0) > _LARGEST_COEFFICIENT:
        matrix = gram[together[:, None], together]
        left[:] = True
    _solve_strongest_first(matrix, left)
    places = np.flatnonzero(left)
    free = np.concatenate([together[places], alone])
    coefficients = np.zeros((len(gram), len(free)))
    coefficients[together, : len(places)] = -matrix[:, places]
    coefficients[free] = np.eye(len(free))
    return free, coefficients


def _solve_in_order(matrix: FloatArray) -> BoolArray:
    """Solve for each variable that is well determined, in turn; which variables are left, shape (n,)."""
    left = np.ones(len(matrix), dtype=np.bool_)
    for k in range(len(matrix)):
        if matrix[k, k] > _WELL_DETERMINED:
            _eliminate(matrix, k)
            left[k] = False
    return left


def _solve_strongest_first(matrix: FloatArray, left: BoolArray) -> None:
    """Solve for those of the variables ``left`` that anything determines; they are taken out of ``left``."""
    while len(strengths := np.where(left, matrix.diagonal(), 0.0)) and strengths.max() > PIVOT:
        k = int(strengths.argmax())
        _eliminate(matrix, k)
        left[k] = False


def _eliminate(matrix: FloatArray, k: int) -> None:
    """Solve row k for variable k and put it into all other rows."""
    row = matrix[k] / matrix[k, k]
    matrix -= matrix[:, k, None] * row
    matrix[k] = row
