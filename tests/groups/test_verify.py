"""A character table that is wrong in any one way is refused, and the check that fails is named."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import pytest

from sitesym.arrays import ComplexArray
from sitesym.errors import SymmetryError
from sitesym.groups import PointGroup, character_table
from sitesym.groups.rootsum import RootSum
from sitesym.groups.verify import verified

Rows = list[tuple[tuple[RootSum, ...], ComplexArray]]


def rows_of(symbol: str) -> tuple[PointGroup, Rows]:
    table = character_table(PointGroup.from_symbol(symbol))
    return table.group, [(irrep.characters, np.array(irrep.matrices)) for irrep in table.irreps]


def without_the_last(rows: Rows) -> Rows:
    return rows[:-1]


def twice_the_first(rows: Rows) -> Rows:
    return [rows[0], rows[0], *rows[2:]]


def stretched(rows: Rows) -> Rows:
    return [*rows[:-1], (rows[-1][0], 1.001 * rows[-1][1])]


def transposed(rows: Rows) -> Rows:
    return [*rows[:-1], (rows[-1][0], rows[-1][1].transpose(0, 2, 1))]


def matrices_of_another(rows: Rows) -> Rows:
    return [(rows[0][0], rows[1][1]), (rows[1][0], rows[0][1]), *rows[2:]]


@pytest.mark.parametrize(
    ("change", "statement"),
    [
        (without_the_last, "as many irreps as classes; sum of squared dimensions = order"),
        (twice_the_first, "different characters orthogonal; great orthogonality theorem"),
        (stretched, "D(g) unitary"),
        (transposed, "D(g) D(h) = D(gh)"),
        (matrices_of_another, "character = trace, constant on classes"),
    ],
)
def test_a_wrong_table_is_refused(change: Callable[[Rows], Rows], statement: str) -> None:
    group, rows = rows_of("32")
    assert verified(group.abstract, rows).group_order == 6
    with pytest.raises(SymmetryError) as caught:
        verified(group.abstract, change(rows))
    assert statement in caught.value.value
