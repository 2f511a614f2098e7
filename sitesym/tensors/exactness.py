"""Exact coefficients: the numbers behind the floats of an allowed form, and the proof that they satisfy every
generator.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from sitesym.arrays import FloatArray, IntArray
from sitesym.tensors.action import Action
from sitesym.tensors.generators import Images, images
from sitesym.tensors.kinds import TensorKind
from sitesym.tensors.layout import layout_of
from sitesym.tensors.root3 import Recognised, Surd, recognise
from sitesym.tensors.spaces import TensorSpace

#: Doubles hold integers below 2^53 exactly.
_LARGEST_EXACT = 2.0**50


@dataclass(frozen=True, eq=False)
class Terms:
    """The non-zero coefficients of a form without factors: ``values[t]`` stands at written component
    ``rows[t]`` and independent component ``columns[t]`` of ``count``.
    """

    rows: IntArray
    columns: IntArray
    values: FloatArray
    count: int


def exact_values(notation: TensorKind, terms: Terms, action: Action) -> list[Surd] | None:
    """The exact number behind each of ``terms.values``, or None unless all satisfy every generator."""
    generators = images(notation.symmetry, action.generator_matrices)
    numbers = recognise(terms.values) if generators.exact else None
    if numbers is None:
        return None
    vectors = _integer_vectors(notation, numbers, terms)
    satisfied = _satisfies(generators, action.generators[1], vectors)
    return numbers.surds() if satisfied and _trace_vanishes(notation, vectors) else None


def _integer_vectors(notation: TensorKind, numbers: Recognised, terms: Terms) -> FloatArray:
    """Invariant tensors over the components of the index symmetry, times a common denominator.

    Integers a, b of a + b sqrt(3), shape (2, N, count).
    """
    layout = layout_of(notation)
    vectors = np.zeros((2, notation.symmetry.dimension, terms.count))
    places = layout.component[terms.rows]
    vectors[:, places, terms.columns] = numbers.over_common_denominator() * layout.signs[terms.rows]
    return vectors


def _satisfies(generators: Images, signs: FloatArray, vectors: FloatArray) -> bool:
    """Whether sign D(g) v = v for all generators and columns, in integer arithmetic."""
    if 4.0 * generators.largest_row_sum * np.abs(vectors).max(initial=0.0) > _LARGEST_EXACT:
        return False
    scales = signs[:, None, None] * generators.scale
    whole, root = vectors
    parts = generators.parts
    if len(parts) == 1:
        return all(
            np.array_equal(parts[0] @ v, scales * v) for v in ((whole, root) if root.any() else (whole,))
        )
    moved_whole = parts[0] @ whole + 3.0 * (parts[1] @ root)
    moved_root = parts[0] @ root + parts[1] @ whole
    return np.array_equal(moved_whole, scales * whole) and np.array_equal(moved_root, scales * root)


def _trace_vanishes(notation: TensorKind, vectors: FloatArray) -> bool:
    return not notation.traceless or not (TensorSpace.of(notation).trace_vector @ vectors).any()
