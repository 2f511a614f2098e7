"""Laws of irreps, checked on the matrices themselves and not through the checks that the table carries.

For all 32 classes, their oriented spellings, and seeded random rotations of each.
"""

import json
from pathlib import Path

import numpy as np
import pytest

from sitesym.groups import CharacterTable, PointGroup, character_table
from sitesym.groups.rootsum import integer
from sitesym.groups.symbols import ORIENTED, SCHOENFLIES, rotation_about

SPELLINGS = [spelling for symbol in SCHOENFLIES for spelling in ORIENTED.get(symbol, (symbol,))]
REFERENCE = json.loads((Path(__file__).parents[1] / "reference" / "counts.json").read_text(encoding="utf-8"))


def tables(spelling: str) -> list[CharacterTable]:
    """The table in the lattice axes and in axes turned at random."""
    group = PointGroup.from_symbol(spelling)
    rng = np.random.default_rng(sum(map(ord, spelling)))
    turn = rotation_about(rng.standard_normal(3), rng.uniform(0.0, 2.0 * np.pi))
    return [character_table(group), character_table(group.rotated(turn))]


@pytest.mark.parametrize("spelling", SPELLINGS)
def test_matrices_of_irreps_multiply_like_the_operations(spelling: str) -> None:
    for table in tables(spelling):
        products = np.einsum("gij,hjk->ghik", table.group.rotations_cart, table.group.rotations_cart)
        same = np.abs(products[:, :, None] - table.group.rotations_cart).max(axis=(3, 4)) < 1e-6
        index = same.argmax(axis=2)  # of the product, from the operations and not from the stored table
        for irrep in table.irreps:
            deviation = np.einsum("gij,hjk->ghik", irrep.matrices, irrep.matrices) - irrep.matrices[index]
            assert np.abs(deviation).max() < 1e-12, irrep.label


@pytest.mark.parametrize("spelling", SPELLINGS)
def test_all_matrix_elements_obey_the_great_orthogonality_theorem(spelling: str) -> None:
    for table in tables(spelling):
        for a, first in enumerate(table.irreps):
            for b, second in enumerate(table.irreps):
                sums = np.einsum("gij,gkl->ijkl", first.matrices, second.matrices.conj())
                one, two = np.eye(first.dimension), np.eye(second.dimension)
                expected = np.zeros_like(sums)
                if a == b:
                    expected = table.group.order / first.dimension * np.einsum("ik,jl->ijkl", one, two)
                assert np.abs(sums - expected).max() < 1e-11, (first.label, second.label)


@pytest.mark.parametrize("spelling", SPELLINGS)
def test_matrices_are_unitary_and_real_where_the_irrep_is_real(spelling: str) -> None:
    for table in tables(spelling):
        for irrep in table.irreps:
            unitary = irrep.matrices @ irrep.matrices.conj().transpose(0, 2, 1)
            assert np.abs(unitary - np.eye(irrep.dimension)).max() < 1e-12
            assert (np.abs(irrep.matrices.imag).max() < 1e-12) == (irrep.reality == "real")


@pytest.mark.parametrize("symbol", SCHOENFLIES)
def test_exact_characters_are_orthogonal_in_rows_and_in_columns(symbol: str) -> None:
    table = character_table(PointGroup.from_symbol(symbol))
    classes = table.group.classes
    n = table.irreps[0].characters[0].n
    for a, first in enumerate(table.irreps):
        for b, second in enumerate(table.irreps):
            total = integer(0, n)
            for members, left, right in zip(classes, first.characters, second.characters, strict=True):
                total = total + (left * right.conjugate()).times(len(members))
            assert total.as_integer() == (table.group.order if a == b else 0)
    for c, members in enumerate(classes):
        for d in range(len(classes)):
            total = integer(0, n)
            for irrep in table.irreps:
                total = total + irrep.characters[c] * irrep.characters[d].conjugate()
            assert total.as_integer() == (table.group.order // len(members) if c == d else 0)


@pytest.mark.parametrize("symbol", SCHOENFLIES)
def test_characters_are_traces_constant_on_classes(symbol: str) -> None:
    table = character_table(PointGroup.from_symbol(symbol))
    for k, irrep in enumerate(table.irreps):
        traces = np.trace(irrep.matrices, axis1=1, axis2=2)
        assert np.abs(traces - table.element_characters(k)).max() < 1e-12
        for members in table.group.classes:
            assert np.ptp(traces[list(members)].real) < 1e-12


@pytest.mark.parametrize("symbol", SCHOENFLIES)
def test_numbers_of_irreps_equal_the_reference(symbol: str) -> None:
    expected = REFERENCE["irreps"]
    table = character_table(PointGroup.from_symbol(symbol))
    assert len(table.irreps) == expected["classes (=complex irreps) per group"][symbol]
    assert len(table.joined) == expected["physically irreducible (complex pairs joined)"][symbol]
    assert sum(irrep.dimension**2 for irrep in table.irreps) == table.group.order


def test_there_are_175_irreps_in_all() -> None:
    total = sum(len(character_table(PointGroup.from_symbol(symbol)).irreps) for symbol in SCHOENFLIES)
    assert total == REFERENCE["irreps"]["total complex"] == 175


@pytest.mark.parametrize("symbol", SCHOENFLIES)
def test_reality_follows_from_the_matrices(symbol: str) -> None:
    # complex where the characters are; no point group of single-valued irreps has a quaternionic one
    for irrep in character_table(PointGroup.from_symbol(symbol)).irreps:
        complex_characters = bool(np.abs(irrep.characters_numeric.imag).max() > 1e-9)
        assert irrep.reality == ("complex" if complex_characters else "real")


@pytest.mark.parametrize("symbol", SCHOENFLIES)
def test_joined_irreps_are_real_and_cover_every_irrep_once(symbol: str) -> None:
    table = character_table(PointGroup.from_symbol(symbol))
    assert sorted(m for joined in table.joined for m in joined.members) == list(range(len(table.irreps)))
    for joined in table.joined:
        total = sum(table.irreps[m].characters_numeric for m in joined.members)
        assert np.abs(total.imag).max() < 1e-12
        assert total[0].real == joined.dimension
