"""From an array as given to the contracted array in the order 11 22 33 23 13 12, and back.

Every layout and order is a rearrangement, and for full arrays an average over the components that one
contracted entry stands for; so values, uncertainties and steps of rounding go the same way.
"""

from __future__ import annotations

from functools import lru_cache

import numpy as np

from sitesym.arrays import FloatArray, IntArray
from sitesym.audit.arrayspace import ArraySpace, array_space
from sitesym.audit.measurement import Layout
from sitesym.audit.orders import SHEAR_ORDERS, STANDARD_ORDER, Order
from sitesym.tensors import TensorKind, contraction


def contracted(kind: TensorKind, values: FloatArray, layout: Layout, order: Order) -> FloatArray:
    """The contracted array in standard order, without touching factors of a matrix.

    Full arrays get the factors of the kind.
    """
    space = array_space(kind)
    match layout:
        case "matrix":
            array = values
        case "transposed":
            array = values.T
        case "by-columns":
            array = values.reshape(space.blocks[::-1]).T
        case "full":
            return _contracted_full(space, values)
        case "full-last-first":
            return _contracted_full(space, np.moveaxis(values, _leading(space), _trailing(space)))
    places = [order.index(pair) for pair in STANDARD_ORDER]
    for axis, block in enumerate(space.blocks):
        if block == 6:
            array = np.take(array, places, axis=axis)
    return array


def other_layouts(kind: TensorKind, stated: Layout) -> tuple[Layout, ...]:
    """Layouts in which an array of this shape could also have been written and would read differently."""
    space = array_space(kind)
    if stated.startswith("full"):
        choices: tuple[Layout, ...] = ("full", "full-last-first") if len(space.blocks) > 1 else ()
    elif len(space.blocks) != 2 or contraction(kind).commuting:
        choices = ()
    elif space.blocks[0] == space.blocks[1]:
        choices = ("matrix", "transposed")
    else:
        choices = ("matrix", "by-columns") if stated != "transposed" else ()
    return tuple(layout for layout in choices if layout != stated)


def orders_of(kind: TensorKind, stated: Layout) -> tuple[Order, ...]:
    """Orders in which the contracted index could have been written; one where there is no such index."""
    has_pairs = 6 in array_space(kind).blocks
    written = not stated.startswith("full")
    return SHEAR_ORDERS if has_pairs and written else (STANDARD_ORDER,)


@lru_cache(maxsize=128)
def contracted_of_full(kind: TensorKind) -> IntArray:
    """Flat place in the contracted array of every component of the full tensor, shape (3**rank,)."""
    notation = contraction(kind)
    rows = np.array([notation.contracted(full) for full in np.ndindex(*(3,) * kind.rank)])
    places: IntArray = np.ravel_multi_index(tuple(rows.T), notation.shape)
    return places


def _contracted_full(space: ArraySpace, values: FloatArray) -> FloatArray:
    places = contracted_of_full(space.kind)
    sums = np.bincount(places, weights=values.reshape(-1), minlength=space.size)
    means = sums / np.bincount(places, minlength=space.size)
    array: FloatArray = (means * space.factors).reshape(space.blocks)
    return array


def _leading(space: ArraySpace) -> list[int]:
    """Positions, in the array as given, of the indices that belong last."""
    return list(range(2 if space.blocks[-1] == 6 else 1))


def _trailing(space: ArraySpace) -> list[int]:
    rank = space.kind.rank
    return list(range(rank - len(_leading(space)), rank))


def full_names(kind: TensorKind) -> tuple[str, ...]:
    """Names of the components of the full tensor, in C order."""
    return tuple("".join(str(i + 1) for i in full) for full in np.ndindex(*(3,) * kind.rank))
