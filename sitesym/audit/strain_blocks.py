"""The stiffness as an operator on strain, split by the irreps of the point group: closed-form conditions.

A strain is a symmetric tensor [V2]; a stiffness that obeys the group maps each irrep's strains onto
themselves, with one Hermitian block for each irrep, as large as the irrep is often contained in [V2]. The
energy is positive for every strain exactly when every block is positive definite, that is when its leading
principal minors are positive (J. J. Sylvester 1852). M. Born, Proc. Camb. Phil. Soc. 36 (1940) 160.

The entries are linear in the independent stiffnesses of the standard orientation; nothing is typed in.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from fractions import Fraction
from functools import lru_cache

import numpy as np

from sitesym.arrays import ComplexArray, FloatArray
from sitesym.audit.linear_forms import LinearForm, primitive
from sitesym.groups import CharacterTable, PointGroup, character_table
from sitesym.tensors import AllowedForm, TensorSpace, allowed_form, contraction, kind
from sitesym.tensors.jahn import read_jahn
from sitesym.tolerances import PIVOT, RECOGNISED

_STRAIN = TensorSpace(read_jahn("[V2]").symmetry)
_LARGEST_DENOMINATOR = 64
_KEY_DIGITS = 6


@dataclass(frozen=True)
class StrainCondition:
    """One principal minor that must be positive.

    Minors of order one and two are written out over the linear forms ``diagonal`` and ``off`` (real and
    imaginary part of the off-diagonal element): A > 0, and A D - weight (B_re^2 + ...) > 0. Larger ones are
    determinants of the matrix ``rows``.
    """

    text: str
    diagonal: tuple[LinearForm, ...] = ()
    off: tuple[tuple[Fraction, LinearForm], ...] = ()
    rows: tuple[tuple[LinearForm, ...], ...] = ()

    def value(self, values: Mapping[str, float]) -> float:
        """The minor for given independent stiffnesses, in their unit to the power of its order."""
        if self.rows:
            return float(np.linalg.det([[entry.value(values) for entry in row] for row in self.rows]))
        product = float(np.prod([form.value(values) for form in self.diagonal]))
        return product - sum(float(weight) * form.value(values) ** 2 for weight, form in self.off)


@dataclass(frozen=True, eq=False)
class StrainBlock:
    """One irrep: its label (complex pairs joined), its dimension, and orthonormal Kelvin strains.

    ``strains`` (m, 6) complex: one strain of each copy, transforming like the first basis vector of the
    irrep. ``conditions``: m of them, together necessary and sufficient.
    """

    label: str
    dimension: int
    strains: ComplexArray
    conditions: tuple[StrainCondition, ...]

    def matrix(self, stiffness_kelvin: FloatArray) -> ComplexArray:
        """The block of a Kelvin stiffness (6, 6), shape (m, m)."""
        block: ComplexArray = self.strains.conj() @ stiffness_kelvin @ self.strains.T
        return block


def strain_blocks(group: PointGroup) -> tuple[StrainBlock, ...]:
    """The blocks of a group that stands in its standard orientation, in the order of its character table."""
    return _blocks_of(_SameOperations((np.round(group.rotations_cart, _KEY_DIGITS) + 0.0).tobytes(), group))


@dataclass(frozen=True)
class _SameOperations:
    """A group as a key: equal operations are equal keys, whatever object holds them."""

    key: bytes
    group: PointGroup = field(compare=False)


@lru_cache(maxsize=256)
def _blocks_of(operations: _SameOperations) -> tuple[StrainBlock, ...]:
    group = operations.group
    table = character_table(group, np.eye(3))
    form = allowed_form(kind("elastic-stiffness"), group)
    derivatives = _derivatives(form)
    blocks = []
    for joined in table.joined:
        strains = _first_partners(table, joined.members[0])
        if len(strains):
            conditions = _conditions(form.independent, strains, derivatives)
            orthonormal = _kelvin_orthonormal(strains)
            blocks.append(StrainBlock(joined.label, joined.dimension, orthonormal, conditions))
    return tuple(blocks)


def _derivatives(form: AllowedForm) -> FloatArray:
    """d c_IJ / d (independent component), shape (independent, 6, 6)."""
    written = contraction(form.kind).multi_indices
    result = np.zeros((form.independent_count, 6, 6))
    result[:, written[:, 0], written[:, 1]] = form.coefficients.T
    result[:, written[:, 1], written[:, 0]] = form.coefficients.T
    return result


def _first_partners(table: CharacterTable, index: int) -> ComplexArray:
    """Strains (engineering, order 11 22 33 23 13 12) that transform like the first basis vector: (m, 6)
    echelon rows.
    """
    tensors = _STRAIN.adapted_basis(table, index)[:, 0]
    rows = np.stack(
        [
            tensors[:, 0, 0],
            tensors[:, 1, 1],
            tensors[:, 2, 2],
            2.0 * tensors[:, 1, 2],
            2.0 * tensors[:, 0, 2],
            2.0 * tensors[:, 0, 1],
        ],
        axis=1,
    )
    return _echelon(rows)


def _echelon(rows: ComplexArray) -> ComplexArray:
    """Reduced row echelon form of independent rows: a basis of their span with simple entries."""
    reduced = np.array(rows, dtype=np.complex128)
    rank = 0
    for column in range(reduced.shape[1]):
        if rank == len(reduced):
            break
        strongest = rank + int(np.argmax(np.abs(reduced[rank:, column])))
        if abs(reduced[strongest, column]) < PIVOT:
            continue
        reduced[[rank, strongest]] = reduced[[strongest, rank]]
        reduced[rank] /= reduced[rank, column]
        others = np.arange(len(reduced)) != rank
        reduced[others] -= np.outer(reduced[others, column], reduced[rank])
        rank += 1
    return reduced


def _kelvin_orthonormal(strains: ComplexArray) -> ComplexArray:
    """The same span in Kelvin components (shear times sqrt 2 of the tensor component), orthonormal rows."""
    kelvin = strains / np.array([1.0, 1.0, 1.0, *[2.0**0.5] * 3])
    orthonormal, _ = np.linalg.qr(kelvin.T)
    rows: ComplexArray = orthonormal.T
    return rows


def _conditions(
    names: tuple[str, ...], strains: ComplexArray, derivatives: FloatArray
) -> tuple[StrainCondition, ...]:
    """The leading principal minors of the block over the given strains, as texts and forms."""
    entries = np.einsum("aI,kIJ,bJ->abk", strains.conj(), derivatives, strains)
    size = len(strains)
    conditions = [_of_order_one(names, entries[0, 0].real)]
    if size > 1:
        conditions.append(_of_order_two(names, entries))
    conditions.extend(_determinant(names, entries[:order, :order].real) for order in range(3, size + 1))
    return tuple(conditions)


def _of_order_one(names: tuple[str, ...], coefficients: FloatArray) -> StrainCondition:
    _, form = primitive(names, coefficients)
    return StrainCondition(f"{form.text('c')} > 0", (form,))


def _of_order_two(names: tuple[str, ...], entries: ComplexArray) -> StrainCondition:
    """A D - weights B^2 > 0; both diagonal factors are positive, so dividing by them keeps the sign."""
    first_scale, first = primitive(names, entries[0, 0].real)
    second_scale, second = primitive(names, entries[1, 1].real)
    off = []
    for part in (entries[0, 1].real, entries[0, 1].imag):
        scale, form = primitive(names, part)
        if form.terms:
            off.append((_weight(scale**2 / (first_scale * second_scale)), form))
    left = " ".join(form.text("c") if form.is_single else f"({form.text('c')})" for form in (first, second))
    right = "".join(_square_text(weight, form) for weight, form in off)
    return StrainCondition(f"{left}{right} > 0", (first, second), tuple(off))


def _square_text(weight: Fraction, form: LinearForm) -> str:
    factor = "" if weight == 1 else f"{weight} "
    base = form.text("c") if form.is_single else f"({form.text('c')})"
    return f" - {factor}{base}^2"


def _weight(number: float) -> Fraction:
    simple = Fraction(number).limit_denominator(_LARGEST_DENOMINATOR)
    return simple if abs(float(simple) - number) < RECOGNISED else Fraction(f"{number:.12g}")


def _determinant(names: tuple[str, ...], entries: FloatArray) -> StrainCondition:
    """A minor of order three or more as a determinant; each row and column keeps its own scale."""
    rows = tuple(tuple(_exact(names, entry) for entry in row) for row in entries)
    inner = "; ".join(", ".join(form.text("c") for form in row) for row in rows)
    return StrainCondition(f"det [{inner}] > 0", rows=rows)


def _exact(names: tuple[str, ...], coefficients: FloatArray) -> LinearForm:
    terms = [(name, _weight(float(value))) for name, value in zip(names, coefficients, strict=True)]
    return LinearForm(tuple((name, value) for name, value in terms if value))
