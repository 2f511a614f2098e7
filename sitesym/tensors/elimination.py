"""Row reduction of small float matrices whose entries are of order one."""

from __future__ import annotations

import numpy as np

from sitesym.arrays import FloatArray, IntArray
from sitesym.tolerances import PIVOT


def row_reduced(matrix: FloatArray) -> tuple[FloatArray, IntArray]:
    """Reduced row echelon form without zero rows, shape (rank, n), and its pivot columns, leftmost first."""
    rows = np.array(matrix[np.abs(matrix).max(axis=1, initial=0.0) > PIVOT], dtype=np.float64)
    pivots: list[int] = []
    for column in range(rows.shape[1]):
        rank = len(pivots)
        if rank == len(rows):
            break
        strongest = rank + int(np.argmax(np.abs(rows[rank:, column])))
        if abs(rows[strongest, column]) < PIVOT:
            continue
        if strongest != rank:
            rows[[rank, strongest]] = rows[[strongest, rank]]
        rows[rank] /= rows[rank, column]
        factors = rows[:, column].copy()
        factors[rank] = 0.0
        touched = np.flatnonzero(factors)
        rows[touched] -= factors[touched, None] * rows[rank]
        pivots.append(column)
    return rows[: len(pivots)], np.array(pivots, dtype=np.int64)
