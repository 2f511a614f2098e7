"""Allowed forms: which components of a tensor are independent in a group and how the others follow from them.

Neumann's principle: a property tensor is unchanged by every operation of the crystal's point group, so it
lies in the invariant part of its tensor space. The invariant part is found from the generators alone; its
dimension must equal the mean of the character, which is computed separately. Source: F. E. Neumann,
Vorlesungen ueber die Theorie der Elastizitaet (1885); J. F. Nye, Physical Properties of Crystals (1957).
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from fractions import Fraction
from functools import lru_cache
from types import MappingProxyType
from typing import TypeAlias

import numpy as np

from sitesym.arrays import FloatArray, frozen
from sitesym.errors import SymmetryError, TensorInputError
from sitesym.groups import PointGroup
from sitesym.tensors.action import Action
from sitesym.tensors.contraction import contraction, to_matrix
from sitesym.tensors.elimination import solved
from sitesym.tensors.exactness import Terms, exact_values
from sitesym.tensors.generators import defect
from sitesym.tensors.kinds import TensorKind
from sitesym.tensors.layout import layout_of
from sitesym.tensors.root3 import Surd
from sitesym.tensors.spaces import TensorSpace
from sitesym.tolerances import PIVOT

#: Exact where the axes are standard ones, a float otherwise.
Coefficient: TypeAlias = Surd | float

#: Decimals of a float coefficient.
_DIGITS = 11
_NO_COMPONENTS: Mapping[str, Mapping[str, Coefficient]] = MappingProxyType({})


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
        """Contracted array of the given values, shape ``contraction(kind).shape``. Raises as `full` does."""
        return to_matrix(self.kind, self.full(values))

    def full(self, values: Mapping[str, float]) -> FloatArray:
        """Full tensor with the given independent values, shape (3,)*rank.

        Raises TensorInputError unless there is one value for each independent component and no other.
        """
        self._require_values(values)
        notation = contraction(self.kind)
        given = np.array([values[name] for name in self.independent], dtype=np.float64)
        written: FloatArray = self.coefficients @ given / notation.factors
        component, sign = self.kind.written.full_indices
        return (written[component] * sign).reshape((3,) * self.kind.rank)

    def _require_values(self, values: Mapping[str, float]) -> None:
        missing = [name for name in self.independent if name not in values]
        others = [name for name in values if name not in self.independent]
        if missing or others:
            parts = (("missing", missing), ("not independent", others))
            raise TensorInputError(
                f"these are not the values of the independent components of {self.kind.name}",
                value="; ".join(f"{word}: {', '.join(names)}" for word, names in parts if names),
                rule=f"one value for each of {', '.join(self.independent) or 'no component'}",
                next_step="give the independent values; the form adds the others",
            )


def allowed_form(kind: TensorKind, group: PointGroup) -> AllowedForm:
    """The allowed form of a kind in a group, in the axes of ``group.rotations_cart``.

    Use ``group.rotated(R)`` for other axes. Raises SymmetryError if the two routes to the number of
    independent components disagree (matrices that are not quite a group).
    """
    space = TensorSpace.of(kind)
    expected = space.invariant_count(group)
    if not expected:
        return AllowedForm(
            kind, (), _NO_COMPONENTS, _no_coefficients(len(contraction(kind).keys)), exact=True
        )
    form = _with_factors(kind.notation, space.action(group))
    if form.independent_count != expected:
        raise SymmetryError(
            f"two routes to the number of independent components of {kind.name} disagree",
            value=f"{form.independent_count} from the generators, {expected} from the characters",
            rule="both count the invariant part of one space",
            next_step="check that the operations are orthogonal and closed to 1e-8",
        )
    return AllowedForm(kind, form.independent, form.components, form.coefficients, form.exact)


@lru_cache(maxsize=64)
def _no_coefficients(count: int) -> FloatArray:
    return frozen(np.zeros((count, 0)))


@lru_cache(maxsize=1024)
def _with_factors(notation: TensorKind, action: Action) -> AllowedForm:
    """The form of a bare notation: that of tensor components, times the factors of the contracted ones."""
    form = _form(notation.without_factors, action)
    if not notation.pair_factors:
        return form
    names = contraction(notation)
    factor_of = dict(zip(names.keys, names.factors.tolist(), strict=True))
    factors = np.array([factor_of[name] for name in form.independent])
    components = {
        key: MappingProxyType({name: _times(v, factor_of[key], factor_of[name]) for name, v in terms.items()})
        for key, terms in form.components.items()
    }
    coefficients = form.coefficients * (names.factors[:, None] / factors)
    return AllowedForm(
        notation, form.independent, MappingProxyType(components), frozen(coefficients), form.exact
    )


def _times(value: Coefficient, factor: int, divisor: int) -> Coefficient:
    if factor == divisor:
        return value
    return value.times(Fraction(factor, divisor)) if isinstance(value, Surd) else value * factor / divisor


@lru_cache(maxsize=1024)
def _form(notation: TensorKind, action: Action) -> AllowedForm:
    """The form of a notation without factors under an action that leaves something of it."""
    independent, written = _relations(notation, action)
    rows, columns = np.nonzero(np.abs(written) > PIVOT)
    terms = Terms(rows, columns, written[rows, columns], len(independent))
    exact = exact_values(notation, terms, action)
    numbers: Sequence[Coefficient] = np.round(terms.values, _DIGITS).tolist() if exact is None else exact
    coefficients = np.zeros_like(written)
    coefficients[rows, columns] = [float(number) for number in numbers]
    keys = contraction(notation).keys
    components: dict[str, dict[str, Coefficient]] = {}
    for row, column, number in zip(rows.tolist(), columns.tolist(), numbers, strict=True):
        components.setdefault(keys[row], {})[independent[column]] = number
    ordered = MappingProxyType({key: MappingProxyType(components[key]) for key in sorted(components)})
    return AllowedForm(notation, independent, ordered, frozen(coefficients), exact is not None)


def _relations(notation: TensorKind, action: Action) -> tuple[tuple[str, ...], FloatArray]:
    """Independent components in the preferred choice, and every written one as a combination of them."""
    layout, keys = layout_of(notation), contraction(notation).keys
    free, coefficients = solved(defect(TensorSpace.of(notation), action), layout.elimination)
    sequence = np.argsort(layout.named_rank[free])
    naming = layout.named[free[sequence]]
    written = coefficients[layout.component[:, None], sequence]
    return tuple(keys[k] for k in naming), written * (layout.scales[:, None] / layout.scales[naming])
