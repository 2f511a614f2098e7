"""The checks that every character table passes before anyone sees it."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from sitesym.arrays import ComplexArray
from sitesym.errors import SymmetryError
from sitesym.groups.abstract import AbstractGroup
from sitesym.groups.rootsum import RootSum, integer
from sitesym.tolerances import REPRESENTATION


@dataclass(frozen=True)
class Checks:
    """What was verified. Exact statements are booleans (true, or no table is made), others the largest
    deviation.
    """

    irreps_equal_classes: bool
    sum_of_squared_dimensions: int
    group_order: int
    characters_have_length_order: bool
    characters_orthogonal: bool
    unitary_deviation: float
    homomorphism_deviation: float
    great_orthogonality_deviation: float
    trace_deviation: float


def verified(group: AbstractGroup, irreps: list[tuple[tuple[RootSum, ...], ComplexArray]]) -> Checks:
    """Check characters exactly and matrices numerically. Raises SymmetryError naming the check that fails.

    The great orthogonality theorem is checked over all matrix elements of all irreps:
    sum_g D^a_ij(g) D^b_kl(g)* = (|G|/d) delta_ab delta_ik delta_jl.
    """
    characters = [row for row, _ in irreps]
    matrices = [array for _, array in irreps]
    checks = Checks(
        irreps_equal_classes=len(irreps) == len(group.classes),
        sum_of_squared_dimensions=sum(array.shape[1] ** 2 for array in matrices),
        group_order=group.order,
        characters_have_length_order=all(_inner(group, row, row) == group.order for row in characters),
        characters_orthogonal=all(
            _inner(group, a, b) == 0 for i, a in enumerate(characters) for b in characters[:i]
        ),
        unitary_deviation=max(_unitary_deviation(array) for array in matrices),
        homomorphism_deviation=max(_homomorphism_deviation(group, array) for array in matrices),
        great_orthogonality_deviation=_great_orthogonality_deviation(matrices),
        trace_deviation=max(_trace_deviation(group, row, array) for row, array in irreps),
    )
    _require(checks)
    return checks


def _require(checks: Checks) -> None:
    statements = {
        "as many irreps as classes": checks.irreps_equal_classes,
        "sum of squared dimensions = order": checks.sum_of_squared_dimensions == checks.group_order,
        "squared length of each character = order": checks.characters_have_length_order,
        "different characters orthogonal": checks.characters_orthogonal,
        "D(g) unitary": checks.unitary_deviation < REPRESENTATION,
        "D(g) D(h) = D(gh)": checks.homomorphism_deviation < REPRESENTATION,
        "great orthogonality theorem": checks.great_orthogonality_deviation < REPRESENTATION,
        "character = trace, constant on classes": checks.trace_deviation < REPRESENTATION,
    }
    failed = [statement for statement, holds in statements.items() if not holds]
    if failed:
        raise SymmetryError(
            "the character table does not verify",
            value="; ".join(failed),
            rule=f"exact for characters, to {REPRESENTATION:.0e} for matrices",
            next_step="report the group with its matrices: this is a fault of the program",
        )


def _inner(group: AbstractGroup, a: tuple[RootSum, ...], b: tuple[RootSum, ...]) -> int | None:
    """Exact sum over the group of a(g) b(g)*; None if it is not even an integer."""
    total = integer(0, a[0].n)
    for members, left, right in zip(group.classes, a, b, strict=True):
        total = total + (left * right.conjugate()).times(len(members))
    return total.as_integer()


def _unitary_deviation(array: ComplexArray) -> float:
    products = array @ np.swapaxes(array.conj(), 1, 2)
    return float(np.abs(products - np.eye(array.shape[1])).max())


def _homomorphism_deviation(group: AbstractGroup, array: ComplexArray) -> float:
    products = np.einsum("gij,hjk->ghik", array, array)
    return float(np.abs(products - array[group.table]).max())


def _great_orthogonality_deviation(matrices: list[ComplexArray]) -> float:
    """Rows sqrt(d/|G|) D_ij(g) of all irreps together must be orthonormal."""
    rows = [np.sqrt(array.shape[1] / len(array)) * array.reshape(len(array), -1).T for array in matrices]
    stacked = np.concatenate(rows)
    return float(np.abs(stacked @ stacked.conj().T - np.eye(len(stacked))).max())


def _trace_deviation(group: AbstractGroup, row: tuple[RootSum, ...], array: ComplexArray) -> float:
    expected = np.array([complex(value) for value in row])[group.class_of]
    return float(np.abs(np.trace(array, axis1=1, axis2=2) - expected).max())
