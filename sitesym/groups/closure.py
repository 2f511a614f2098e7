"""From matrices to a product table: the checks that a set of operations is a group.

A finite set of invertible matrices that contains 1, every product and nothing twice is a group.
"""

from __future__ import annotations

from functools import lru_cache

import numpy as np

from sitesym.arrays import BoolArray, FloatArray, IntArray, frozen
from sitesym.errors import NotAGroupError
from sitesym.groups.abstract import AbstractGroup
from sitesym.tolerances import SAME_MATRIX


def identity_first(matrices: FloatArray, flags: BoolArray) -> list[int]:
    """The sequence that puts the identity first and leaves the rest as it is. Raises NotAGroupError."""
    if matrices.ndim != 3 or matrices.shape[1:] != (3, 3) or len(matrices) == 0:
        raise NotAGroupError(
            "the operations are not a list of 3x3 matrices",
            value=f"an array of shape {matrices.shape}",
            rule="shape (n, 3, 3) with n at least 1",
        )
    distance = np.abs(matrices - np.eye(3)).max(axis=(1, 2)) + flags
    first = int(np.argmin(distance))
    if not distance[first] <= SAME_MATRIX:
        raise NotAGroupError(
            "the matrices do not contain the identity",
            value=f"{len(matrices)} matrices",
            rule="a group contains the product of any two of its elements, so also 1",
            next_step="add the missing operations",
        )
    return [first, *(i for i in range(len(matrices)) if i != first)]


def abstract_group(matrices: FloatArray, flags: BoolArray) -> AbstractGroup:
    """The product table of a group of matrices (n, 3, 3) with time-reversal flags (n,).

    Sets that multiply alike share one object, and with it everything computed from it. Raises
    NotAGroupError naming a product that is missing or an element that is doubled.
    """
    return _checked(np.asarray(matrices, dtype=np.float64).tobytes(), flags.tobytes())


@lru_cache(maxsize=1024)
def _checked(matrix_bytes: bytes, flag_bytes: bytes) -> AbstractGroup:
    matrices = np.frombuffer(matrix_bytes).reshape(-1, 3, 3)
    flags = np.frombuffer(flag_bytes, dtype=np.bool_)
    flat = np.concatenate([matrices.reshape(-1, 9), flags[:, None].astype(np.float64)], axis=1)
    _require_distinct(flat)
    return _shared(_product_table(matrices, flags, flat).tobytes())


@lru_cache(maxsize=512)
def _shared(table: bytes) -> AbstractGroup:
    entries = np.frombuffer(table, dtype=np.int64)
    order = round(len(entries) ** 0.5)
    return AbstractGroup(frozen(entries.reshape(order, order)))


def _require_distinct(flat: FloatArray) -> None:
    same = np.abs(flat[:, None, :] - flat[None, :, :]).max(axis=2) <= SAME_MATRIX
    pairs = np.argwhere(np.triu(same, k=1))
    if len(pairs):
        first, second = pairs[0].tolist()
        raise NotAGroupError(
            "an element is given twice",
            value=f"elements {first} and {second} are equal: {_text(flat[first, :9])}",
            rule="each element of a group is listed once",
            next_step="leave out one of them",
        )


def _product_table(matrices: FloatArray, flags: BoolArray, flat: FloatArray) -> IntArray:
    """Indices (n, n) of the products of element g (row) with every element h (column), which acts first."""
    order = len(flat)
    products = (matrices[:, None] @ matrices[None]).reshape(-1, 9)
    product_flags = (flags[:, None] ^ flags[None]).reshape(-1, 1).astype(np.float64)
    wanted = np.concatenate([products, product_flags], axis=1)
    # Of |w - f|^2 only the part that tells the elements apart.
    nearest: IntArray = np.argmax(wanted @ flat.T - 0.5 * (flat**2).sum(axis=1), axis=1)
    missing = np.flatnonzero(np.abs(wanted - flat[nearest]).max(axis=1) > SAME_MATRIX)
    if len(missing):
        g, h = divmod(int(missing[0]), order)
        prime = " with time reversal" if product_flags[missing[0], 0] else ""
        raise NotAGroupError(
            "the matrices are not a group",
            value=f"element {g} times element {h} = {_text(products[missing[0]])}{prime} is missing",
            rule="a group contains the product of any two of its elements",
            next_step="add the missing operations, or remove those that do not belong",
        )
    return nearest.reshape(order, order)


def _text(row: FloatArray) -> str:
    """A matrix in one line, rows apart."""
    return "(" + "; ".join(" ".join(f"{v:.4g}" for v in r) for r in row.reshape(3, 3) + 0.0) + ")"
