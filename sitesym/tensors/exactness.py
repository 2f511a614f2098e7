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
    """The non-zero coefficients of a form: ``values[which[t]]`` stands at written component ``rows[t]`` and
    independent component ``columns[t]`` of ``count``. The values are distinct.
    """

    rows: IntArray
    columns: IntArray
    which: IntArray
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
    denominator = int(np.lcm.reduce(numbers.denominators)) * int(
        np.lcm.reduce(np.abs(layout.units).astype(int))
    )
    vectors = np.zeros((2, notation.symmetry.dimension, terms.count))
    numerators = numbers.over(denominator)[:, terms.which] / layout.units[terms.rows]
    vectors[:, layout.component[terms.rows], terms.columns] = numerators
    return vectors


def _satisfies(generators: Images, signs: FloatArray, vectors: FloatArray) -> bool:
    """Whether sign D(g) v = v for all generators and columns, in integer arithmetic."""
    if 4.0 * generators.largest_row_sum * np.abs(vectors).max(initial=0.0) > _LARGEST_EXACT:
        return False
    a, (whole, root) = generators.parts[0], vectors
    moved: FloatArray = np.stack([a @ whole, a @ root])
    if len(generators.parts) == 2:
        b = generators.parts[1]
        moved += np.stack([3.0 * (b @ root), b @ whole])
    expected = vectors[:, None] * (signs[:, None, None] * generators.scale)
    return np.array_equal(moved, expected)


def _trace_vanishes(notation: TensorKind, vectors: FloatArray) -> bool:
    return not notation.traceless or not (TensorSpace.of(notation).trace_vector @ vectors).any()
