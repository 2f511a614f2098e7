"""The kernel of a small positive semidefinite matrix, written in a chosen set of its variables."""

from __future__ import annotations

import numpy as np

from sitesym.arrays import FloatArray, IntArray
from sitesym.tolerances import PIVOT


def solved(gram: FloatArray, order: IntArray) -> tuple[IntArray, FloatArray]:
    """Solve ``gram @ x = 0`` for the variables in the given ``order``; those that nothing determines stay
    free.

    Returns the free variables, shape (k,), and coefficients (n, k) with x = coefficients @ x[free].
    Gauss-Jordan elimination without exchanges: in a positive semidefinite matrix a pivot that vanishes
    means that its whole remaining row vanishes, so that the variable is free.
    """
    coupled = np.count_nonzero(np.abs(gram) > PIVOT, axis=1) > 1
    alone = np.flatnonzero(~coupled & (np.diagonal(gram) < PIVOT))
    together = order[coupled[order]]
    matrix = gram[together[:, None], together]
    places: list[int] = []
    for k, pivot_row in enumerate(matrix):
        if pivot_row[k] < PIVOT:
            places.append(k)
            continue
        row = pivot_row[k:] / pivot_row[k]
        matrix[:, k:] -= matrix[:, k, None] * row
        matrix[k, k:] = row
    free = np.concatenate([together[places], alone])
    coefficients = np.zeros((len(gram), len(free)))
    coefficients[together, : len(places)] = -matrix[:, places]
    coefficients[free] = np.eye(len(free))
    return free, coefficients
