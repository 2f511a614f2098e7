"""The kernel of a small positive semidefinite matrix, written in a chosen set of its variables."""

from __future__ import annotations

import numpy as np

from sitesym.arrays import FloatArray, IntArray
from sitesym.tolerances import PIVOT

#: A variable is expressed by others at once only if its pivot is at least this large: in axes unrelated
#: to the crystal this keeps coefficients small. Matrices are of order one, pivots in standard axes larger.
_WELL_DETERMINED = 0.1


def solved(gram: FloatArray, order: IntArray) -> tuple[IntArray, FloatArray]:
    """Solve ``gram @ x = 0`` for the variables in the given ``order``; those that nothing determines stay
    free.

    Returns the free variables, shape (k,), and coefficients (n, k) with x = coefficients @ x[free].
    Gauss-Jordan elimination on the diagonal: in a positive semidefinite matrix a pivot that vanishes means
    that its whole remaining row vanishes. A variable with a weak pivot is left for the end, where the
    strongest goes first; so the rank is certain.
    """
    coupled = np.count_nonzero(np.abs(gram) > PIVOT, axis=1) > 1
    alone = np.flatnonzero(~coupled & (np.diagonal(gram) < PIVOT))
    together = order[coupled[order]]
    matrix = gram[together[:, None], together]
    left = np.ones(len(matrix), dtype=np.bool_)
    for k in range(len(matrix)):
        if matrix[k, k] > _WELL_DETERMINED:
            _eliminate(matrix, k)
            left[k] = False
    while len(strengths := np.where(left, matrix.diagonal(), 0.0)) and strengths.max() > PIVOT:
        k = int(strengths.argmax())
        _eliminate(matrix, k)
        left[k] = False
    places = np.flatnonzero(left)
    free = np.concatenate([together[places], alone])
    coefficients = np.zeros((len(gram), len(free)))
    coefficients[together, : len(places)] = -matrix[:, places]
    coefficients[free] = np.eye(len(free))
    return free, coefficients


def _eliminate(matrix: FloatArray, k: int) -> None:
    """Solve row k for variable k and put it into all other rows."""
    row = matrix[k] / matrix[k, k]
    matrix -= matrix[:, k, None] * row
    matrix[k] = row
