"""How the written components of a notation stand to the components that its index symmetry leaves."""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from sitesym.arrays import FloatArray, IntArray
from sitesym.tensors.contraction import contraction, flat_place
from sitesym.tensors.kinds import TensorKind


@dataclass(frozen=True, eq=False)
class Layout:
    """W written components against N components of the index symmetry; both differ where a tensor is
    written in a coarser notation than it obeys.

    ``component`` (W,): the component that stands at each written one. ``signs`` (W,): with which sign.
    ``scales`` (W,): written value, without factors, over orthonormal component. ``named`` (N,): the written
    component that names each component. ``named_rank`` (N,): order of the names. ``elimination`` (N,):
    components in the order in which they are expressed by others, the one preferred as independent last.
    """

    component: IntArray
    signs: IntArray
    scales: FloatArray
    named: IntArray
    named_rank: IntArray
    elimination: IntArray


@lru_cache(maxsize=128)
def layout_of(notation: TensorKind) -> Layout:
    """The layout of a kind."""
    names = contraction(notation)
    everywhere, signs = notation.symmetry.full_indices
    places = [flat_place(full) for full in notation.written.components]
    component = everywhere[places]
    preferred = np.array(names.preference)
    _, first = np.unique(component[preferred], return_index=True)
    named = preferred[first]
    return Layout(
        component=component,
        signs=signs[places],
        scales=signs[places] / np.sqrt(notation.symmetry.multiplicities)[component],
        named=named,
        named_rank=np.argsort(np.argsort([names.keys[written] for written in named])),
        elimination=np.argsort(first)[::-1],
    )
