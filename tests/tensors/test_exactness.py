"""Coefficients count as exact, and a form as found, only when that has been verified."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from sitesym.errors import SymmetryError
from sitesym.groups import PointGroup
from sitesym.groups.symbols import rotation_about
from sitesym.tensors import TensorSpace, allowed_form, contraction, kind
from sitesym.tensors.exactness import Terms, exact_values

STRESS = kind("piezoelectric-stress")
FIELD_GRADIENT = kind("electric-field-gradient")


def terms_of(name: str, symbol: str) -> tuple[Terms, list[str]]:
    """The coefficients of a form without factors, and the key of the component of each."""
    tensor_kind = kind(name)
    form = allowed_form(tensor_kind, PointGroup.from_symbol(symbol))
    rows, columns = np.nonzero(form.coefficients)
    keys = [contraction(tensor_kind).keys[row] for row in rows]
    return Terms(rows, columns, form.coefficients[rows, columns], form.independent_count), keys


@pytest.mark.parametrize(
    ("key", "wrong"), [("26", 1.0), ("26", -2.0), ("12", 1.0), ("25", -0.5), ("14", 3.0**0.5)]
)
def test_numbers_that_break_a_generator_are_not_exact(key: str, wrong: float) -> None:
    terms, keys = terms_of("piezoelectric-stress", "32")
    action = TensorSpace.of(STRESS).action(PointGroup.from_symbol("32"))
    found = exact_values(STRESS.notation, terms, action)
    assert found is not None
    assert [float(number) for number in found] == terms.values.tolist()
    values = terms.values.copy()
    values[keys.index(key)] = wrong
    assert exact_values(STRESS.notation, replace(terms, values=values), action) is None


def test_numbers_that_are_no_simple_ones_are_not_exact() -> None:
    terms, _ = terms_of("piezoelectric-stress", "32")
    action = TensorSpace.of(STRESS).action(PointGroup.from_symbol("32"))
    assert exact_values(STRESS.notation, replace(terms, values=terms.values * 0.98765), action) is None


def test_a_traceless_tensor_with_a_trace_is_not_exact() -> None:
    terms, keys = terms_of("electric-field-gradient", "4mm")
    action = TensorSpace.of(FIELD_GRADIENT).action(PointGroup.from_symbol("4mm"))
    assert exact_values(FIELD_GRADIENT.notation, terms, action) is not None
    values = terms.values.copy()
    values[keys.index("33")] = 1.0
    assert exact_values(FIELD_GRADIENT.notation, replace(terms, values=values), action) is None


def test_operations_that_are_no_group_are_noticed_by_two_counts_that_differ() -> None:
    group = PointGroup.from_symbol("2")
    bent = np.array([np.eye(3), rotation_about(np.array([0.0, 1.0, 0.0]), np.pi / 2)])
    with pytest.raises(SymmetryError, match="two routes") as caught:
        allowed_form(kind("pyroelectric"), replace(group, rotations_cart=bent))
    assert caught.value.value == "1 from the generators, 2 from the characters"
