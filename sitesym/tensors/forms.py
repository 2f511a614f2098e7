"""Allowed forms: which components of a tensor are independent in a group and how the others follow from them.

Neumann's principle: a property tensor is unchanged by every operation of the crystal's point group, so it
lies in the invariant part of its tensor space. The invariant part is found from the generators alone; its
dimension must equal the mean of the character, which is computed separately. Source: F. E. Neumann,
Vorlesungen ueber die Theorie der Elastizitaet (1885); J. F. Nye, Physical Properties of Crystals (1957).
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from functools import lru_cache
from math import lcm
from types import MappingProxyType
from typing import TypeAlias

import numpy as np

from sitesym.arrays import BoolArray, FloatArray, IntArray, frozen
from sitesym.errors import SymmetryError
from sitesym.groups import PointGroup
from sitesym.tensors.action import Action
from sitesym.tensors.contraction import Contraction, contraction, to_matrix
from sitesym.tensors.elimination import row_reduced
from sitesym.tensors.indexsymmetry import IndexSymmetry
from sitesym.tensors.kinds import TensorKind
from sitesym.tensors.root3 import Numbers, Surd, doubled_exact, recognise
from sitesym.tensors.spaces import TensorSpace
from sitesym.tolerances import PIVOT

#: Exact where the axes are standard ones, a float otherwise.
Coefficient: TypeAlias = Surd | float

_LARGEST_EXACT = 2.0**50
#: Eigenvalues of the defect matrix are zero or of order one for a group of rotations.
_SMALLEST_EIGENVALUE = 1e-6


@dataclass(frozen=True, eq=False)
class AllowedForm:
    """The allowed form of one kind in one group, in the Cartesian axes of that group's matrices.

    ``components[key][independent]`` is the coefficient with which an independent component enters a
    component; keys are contracted indices; components that must vanish are absent. ``coefficients`` holds
    the same numbers as floats, one row a written component (order of ``contraction(kind).keys``), one
    column an independent component. ``exact``: every coefficient is an exact number and satisfies every
    generator exactly.
    """

    kind: TensorKind
    independent: tuple[str, ...]
    components: Mapping[str, Mapping[str, Coefficient]]
    coefficients: FloatArray
    exact: bool

    @property
    def independent_count(self) -> int:
        """Number of independent components."""
        return len(self.independent)

    def matrix(self, values: Mapping[str, float]) -> FloatArray:
        """Contracted array with the given independent values, shape ``contraction(kind).shape``."""
        return to_matrix(self.kind, self.full(values))

    def full(self, values: Mapping[str, float]) -> FloatArray:
        """Full tensor with the given independent values, shape (3,)*rank."""
        notation = contraction(self.kind)
        written = self.coefficients @ np.array([values[name] for name in self.independent]) / notation.factors
        component, sign = self.kind.written.full_indices
        return (written[component] * sign).reshape((3,) * self.kind.rank)


def allowed_form(kind: TensorKind, group: PointGroup) -> AllowedForm:
    """The allowed form of a kind in a group, in the axes of ``group.rotations_cart``.

    Use ``group.rotated(R)`` for other axes. Raises SymmetryError if the two routes to the number of
    independent components disagree (matrices that are not quite a group).
    """
    space = TensorSpace.of(kind)
    expected = space.invariant_count(group)
    form = _form(kind.notation, space.action(group)) if expected else _nothing(kind)
    if form.independent_count != expected:
        raise SymmetryError(
            f"two routes to the number of independent components of {kind.name} disagree",
            value=f"{form.independent_count} from the generators, {expected} from the characters",
            rule="both count the invariant part of one space",
            next_step="check that the operations are orthogonal and closed to 1e-8",
        )
    return AllowedForm(kind, form.independent, form.components, form.coefficients, form.exact)


def _nothing(kind: TensorKind) -> AllowedForm:
    """The form of a tensor that must vanish."""
    return AllowedForm(
        kind, (), MappingProxyType({}), frozen(np.zeros((len(contraction(kind).keys), 0))), exact=True
    )


@lru_cache(maxsize=8192)
def _form(notation: TensorKind, action: Action) -> AllowedForm:
    """The form of a bare notation under an action that leaves something of it."""
    names = contraction(notation)
    independent, coefficients = _chosen(names, _written_invariants(notation, action) * names.factors[:, None])
    values, inverse = np.unique(coefficients, return_inverse=True)
    inverse = inverse.reshape(coefficients.shape)
    exact = _exact_values(notation, values, inverse, action)
    numbers: Sequence[Coefficient] = values.tolist() if exact is None else exact
    clean = np.array([float(number) for number in numbers])[inverse]
    return AllowedForm(
        notation,
        independent,
        _components(names, independent, numbers, inverse),
        frozen(clean),
        exact is not None,
    )


def _chosen(names: Contraction, written: FloatArray) -> tuple[tuple[str, ...], FloatArray]:
    """Independent components in the preferred choice, and every written component as a combination of
    them.
    """
    preference = np.array(names.preference)
    present = preference[np.abs(written[preference]).max(axis=1) > PIVOT]
    if len(present) == written.shape[1]:
        rows, pivots = np.eye(len(present)), np.arange(len(present))
    else:
        rows, pivots = row_reduced(written[present].T)
    keys = [names.keys[component] for component in present[pivots]]
    order = sorted(range(len(keys)), key=keys.__getitem__)
    coefficients = np.zeros((len(names.keys), len(rows)))
    coefficients[present] = rows[order].T
    coefficients = np.round(coefficients, 11) + 0.0
    return tuple(keys[k] for k in order), coefficients


def _components(
    names: Contraction, independent: tuple[str, ...], numbers: Sequence[Coefficient], inverse: IntArray
) -> Mapping[str, Mapping[str, Coefficient]]:
    """Non-zero components by key, each with the coefficients of the independent ones."""
    nonzero = np.array([float(number) != 0.0 for number in numbers])[inverse]
    terms: dict[str, dict[str, Coefficient]] = {}
    for row, column in np.argwhere(nonzero).tolist():
        terms.setdefault(names.keys[row], {})[independent[column]] = numbers[inverse[row, column]]
    return MappingProxyType({key: MappingProxyType(terms[key]) for key in sorted(terms)})


def _written_invariants(notation: TensorKind, action: Action) -> FloatArray:
    """Invariant tensors as columns over the written components, shape (written, count)."""
    invariants = _invariants(TensorSpace.of(notation), action)
    if notation.written == notation.symmetry:
        return invariants
    component, sign = _places_of_written(notation)
    return invariants[component] * sign[:, None]


@lru_cache(maxsize=128)
def _places_of_written(notation: TensorKind) -> tuple[IntArray, IntArray]:
    """For each written component: the component of the index symmetry obeyed, and its sign."""
    component, sign = notation.symmetry.full_indices
    places = [int(np.ravel_multi_index(full, (3,) * notation.rank)) for full in notation.written.components]
    return component[places], sign[places]


@lru_cache(maxsize=8192)
def _invariants(space: TensorSpace, action: Action) -> FloatArray:
    """Columns spanning the components that every generator leaves unchanged, shape (N, count).

    In orthonormal components each generator is an orthogonal matrix D, and sum (1 - D)^T (1 - D) vanishes
    exactly on the invariant tensors; its other eigenvalues are of order one.
    """
    scale = np.sqrt(space.symmetry.multiplicities)
    size = len(scale)
    defect = np.zeros((size, size))
    for image, sign in zip(_images(space.symmetry, action), action.generators[1], strict=True):
        change = sign * _as_float(image, space.symmetry.rank) * (scale[:, None] / scale) - np.eye(size)
        defect += change.T @ change
    if space.traceless:
        trace = space.trace_vector / scale
        defect += np.outer(trace, trace)
    return frozen(_kernel(defect) / scale[:, None])


@lru_cache(maxsize=512)
def _images(symmetry: IndexSymmetry, action: Action) -> tuple[Numbers, ...]:
    """What each generator does to the components: exact in standard axes (times 2^rank), floats otherwise.

    Exact images are integers a, b of a + b sqrt(3), or a alone where no sqrt(3) occurs.
    """
    matrices, _ = action.generators
    doubled = doubled_exact(matrices)
    if doubled is None:
        return tuple(symmetry.represent(matrix[None]) for matrix in matrices)
    exact = [doubled[:, k] if doubled[1, k].any() else doubled[:1, k] for k in range(len(matrices))]
    return tuple(symmetry.represent(matrix) for matrix in exact)


def _is_exact(image: Numbers) -> bool:
    return image.dtype == np.int64


def _as_float(image: Numbers, rank: int) -> FloatArray:
    if not _is_exact(image):
        return np.asarray(image[0], dtype=np.float64)
    surd = 3.0**0.5 * image[1] if len(image) == 2 else 0.0
    value: FloatArray = (image[0] + surd) / 2.0**rank
    return value


def _kernel(defect: FloatArray) -> FloatArray:
    """Orthonormal columns spanning the kernel of a symmetric matrix.

    Components that mix form blocks, most of them small; blocks of one size are diagonalised in one call.
    """
    blocks = _blocks_that_mix(np.abs(defect) > PIVOT)
    columns = [np.zeros((len(defect), 0))]
    for length in sorted({len(block) for block in blocks}):
        places = np.array([block for block in blocks if len(block) == length])
        values, vectors = np.linalg.eigh(defect[places[:, :, None], places[:, None, :]])
        which, column = np.nonzero(values < _SMALLEST_EIGENVALUE)
        kernel = np.zeros((len(defect), len(which)))
        kernel[places[which].T, np.arange(len(which))] = vectors[which, :, column].T
        columns.append(kernel)
    return np.concatenate(columns, axis=1)


def _blocks_that_mix(linked: BoolArray) -> list[IntArray]:
    """Connected sets of indices of a symmetric relation."""
    size = len(linked)
    label = np.arange(size)
    related = linked | np.eye(size, dtype=np.bool_)
    while True:
        lowest = np.where(related, label, size).min(axis=1)
        if (lowest == label).all():
            return [np.flatnonzero(label == first) for first in np.unique(label)]
        label = lowest


def _exact_values(
    notation: TensorKind, values: FloatArray, inverse: IntArray, action: Action
) -> list[Surd] | None:
    """The exact number behind each distinct coefficient, or None unless all satisfy every generator
    exactly.
    """
    images = _images(notation.symmetry, action)
    numbers = recognise(values) if all(_is_exact(image) for image in images) else None
    if numbers is None:
        return None
    vectors = _integer_vectors(notation, numbers, inverse)
    scales = action.generators[1] * 2.0**notation.rank
    satisfied = all(_satisfies(image, scale, vectors) for image, scale in zip(images, scales, strict=True))
    return numbers if satisfied and _trace_vanishes(notation, vectors) else None


def _integer_vectors(notation: TensorKind, numbers: list[Surd], inverse: IntArray) -> FloatArray:
    """Invariant tensors over the components of the index symmetry, times a common denominator.

    Integers a, b of a + b sqrt(3), shape (2, N, k); ``inverse`` says which number stands at each coefficient.
    """
    factors = contraction(notation).factors
    denominator = lcm(*(n.rational.denominator * n.root.denominator for n in numbers)) * lcm(
        *set(factors.tolist())
    )
    table = np.array([[float(part * denominator) for part in (n.rational, n.root)] for n in numbers])
    component, sign = _places_of_written(notation)
    vectors = np.zeros((2, notation.symmetry.dimension, inverse.shape[1]))
    vectors[:, component] = np.moveaxis(table[inverse], 2, 0) * (sign / factors)[:, None]
    return vectors


def _satisfies(image: Numbers, scale: float, vectors: FloatArray) -> bool:
    """Whether D(g) v = scale v for all columns, in integer arithmetic (integers below 2^50 held in
    doubles).
    """
    action = image.astype(np.float64)
    whole, root = action[0] @ vectors[0], action[0] @ vectors[1]
    if len(action) == 2:
        whole, root = whole + 3.0 * (action[1] @ vectors[1]), root + action[1] @ vectors[0]
    same = bool((whole == scale * vectors[0]).all() and (root == scale * vectors[1]).all())
    bound = float(np.abs(action).sum(axis=2).max(initial=0.0) * np.abs(vectors).max(initial=0.0))
    return same and 4.0 * bound < _LARGEST_EXACT


def _trace_vanishes(notation: TensorKind, vectors: FloatArray) -> bool:
    return not notation.traceless or not np.any(
        np.einsum("n,snk->sk", TensorSpace.of(notation).trace_vector, vectors)
    )
