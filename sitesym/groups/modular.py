"""Linear algebra over the integers modulo a prime: what the computation of characters needs, no more."""

from __future__ import annotations

import numpy as np

from sitesym.arrays import IntArray


def row_reduced(matrix: IntArray, prime: int) -> tuple[IntArray, list[int]]:
    """Reduced row echelon form modulo ``prime`` without its zero rows, and the pivot columns."""
    rows = np.array(matrix, dtype=np.int64) % prime
    pivots: list[int] = []
    for column in range(rows.shape[1]):
        rank = len(pivots)
        candidates = np.flatnonzero(rows[rank:, column])
        if not len(candidates):
            continue
        swap = rank + int(candidates[0])
        rows[[rank, swap]] = rows[[swap, rank]]
        rows[rank] = rows[rank] * pow(int(rows[rank, column]), -1, prime) % prime
        factors = rows[:, column].copy()
        factors[rank] = 0
        rows = (rows - factors[:, None] * rows[rank]) % prime
        pivots.append(column)
    return rows[: len(pivots)], pivots


def null_space(matrix: IntArray, prime: int) -> IntArray:
    """Columns spanning the vectors v with matrix @ v = 0 modulo ``prime``, shape (n, nullity)."""
    rows, pivots = row_reduced(matrix, prime)
    n = np.shape(matrix)[1]
    free = [column for column in range(n) if column not in pivots]
    basis = np.zeros((n, len(free)), dtype=np.int64)
    for k, column in enumerate(free):
        basis[column, k] = 1
        basis[pivots, k] = -rows[:, column] % prime
    return basis


def primitive_root_of_unity(order: int, prime: int) -> int:
    """An element of multiplicative order exactly ``order`` modulo ``prime``; order must divide prime - 1."""
    for candidate in range(1, prime):
        root = pow(candidate, (prime - 1) // order, prime)
        if all(pow(root, k, prime) != 1 for k in range(1, order)):
            return root
    raise ValueError(f"{order} does not divide {prime} - 1")


def prime_for(exponent: int, group_order: int) -> int:
    """The smallest prime p = 1 modulo the exponent with p > 2 sqrt(group order)."""
    candidate = exponent + 1
    while candidate**2 <= 4 * group_order or not _is_prime(candidate):
        candidate += exponent
    return candidate


def _is_prime(n: int) -> bool:
    return n > 1 and all(n % d for d in range(2, int(n**0.5) + 1))
