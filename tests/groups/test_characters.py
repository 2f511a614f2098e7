"""Exact characters: algebra of roots of unity, and tables that can be written down by hand."""

import numpy as np
import pytest

from sitesym.groups import PointGroup, character_table
from sitesym.groups.characters import class_matrices
from sitesym.groups.modular import null_space, prime_for, primitive_root_of_unity
from sitesym.groups.rootsum import RootSum, cyclotomic_polynomial, integer
from sitesym.groups.symbols import SCHOENFLIES


def test_cyclotomic_polynomials_are_those_of_the_textbooks() -> None:
    assert cyclotomic_polynomial(1) == (-1, 1)
    assert cyclotomic_polynomial(6) == (1, -1, 1)
    assert cyclotomic_polynomial(12) == (1, 0, -1, 0, 1)


def test_equal_sums_of_roots_are_equal_whatever_roots_they_are_written_in() -> None:
    minus_one = RootSum((0, 1, 1))  # exp(2 pi i/3) + exp(-2 pi i/3)
    assert minus_one.equals(integer(-1, 3))
    assert minus_one.as_integer() == -1
    assert not RootSum((0, 1, 0)).equals(RootSum((0, 0, 1)))
    assert RootSum((0, 1, 0)).as_integer() is None


def test_products_and_conjugates_agree_with_complex_numbers() -> None:
    rng = np.random.default_rng(5)
    for n in (3, 4, 6, 12):
        a, b = (RootSum(tuple(int(v) for v in rng.integers(-3, 4, n))) for _ in range(2))
        assert complex(a * b) == pytest.approx(complex(a) * complex(b), abs=1e-12)
        assert complex(a + b) == pytest.approx(complex(a) + complex(b), abs=1e-12)
        assert complex(a.conjugate()) == pytest.approx(complex(a).conjugate(), abs=1e-12)


@pytest.mark.parametrize(
    ("value", "text"),
    [
        (RootSum((0, 1, 0, 0)), "i"), (RootSum((0, 0, 0, 1)), "-i"), (RootSum((0, 0, 1, 0)), "-1"),
        (RootSum((0, 1, 0)), "exp(2*pi*i/3)"), (RootSum((0, 0, 1)), "exp(-2*pi*i/3)"),
        (RootSum((0, 1, 0, 0, 0, 0)), "exp(pi*i/3)"), (RootSum((1, 0, 0, 1)), "1 - i"), (integer(0, 4), "0"),
    ],
)  # fmt: skip
def test_exact_values_are_written_for_a_reader(value: RootSum, text: str) -> None:
    assert str(value) == text


def test_the_table_of_3m_is_the_one_in_every_textbook() -> None:
    table = character_table(PointGroup.from_symbol("3m"))
    by_size = np.argsort([len(members) for members in table.group.classes])  # 1, two rotations, three mirrors
    rows = {i.label: [i.characters[c].as_integer() for c in by_size] for i in table.irreps}
    assert rows == {"A1": [1, 1, 1], "A2": [1, 1, -1], "E": [2, -1, 0]}


def test_the_table_of_43m_is_the_one_in_every_textbook() -> None:
    table = character_table(PointGroup.from_symbol("-43m"))
    named = [table.group.elements[members[0]].symbol for members in table.group.classes]
    order = [named.index(symbol) for symbol in ("1", "3", "2", "-4", "m")]
    rows = {i.label: [i.characters[c].as_integer() for c in order] for i in table.irreps}
    assert rows == {
        "A1": [1, 1, 1, 1, 1],
        "A2": [1, 1, 1, -1, -1],
        "E": [2, -1, 2, 0, 0],
        "T1": [3, 0, -1, 1, -1],
        "T2": [3, 0, -1, -1, 1],
    }


@pytest.mark.parametrize("symbol", SCHOENFLIES)
def test_characters_of_cyclic_and_of_all_groups_solve_the_class_algebra(symbol: str) -> None:
    # omega_j omega_r = sum_s a[j, r, s] omega_s with omega = |C| chi / chi(1) (Burnside 1911, chapter XV)
    group = PointGroup.from_symbol(symbol)
    constants = class_matrices(group.abstract)
    sizes = np.array([len(members) for members in group.classes])
    for irrep in character_table(group).irreps:
        omega = sizes * irrep.characters_numeric / irrep.dimension
        assert np.abs(np.einsum("jrs,s->jr", constants, omega) - np.outer(omega, omega)).max() < 1e-9


def test_the_prime_and_its_root_of_unity_have_what_the_method_needs() -> None:
    for exponent, order in ((12, 48), (6, 24), (1, 1), (2, 8)):
        prime = prime_for(exponent, order)
        assert (prime - 1) % exponent == 0
        assert prime**2 > 4 * order
        root = primitive_root_of_unity(exponent, prime)
        assert [k for k in range(1, exponent + 1) if pow(root, k, prime) == 1] == [exponent]


def test_null_spaces_modulo_a_prime_are_complete() -> None:
    rng = np.random.default_rng(2)
    left, right = rng.integers(0, 13, (5, 2)), rng.integers(0, 13, (2, 5))
    kernel = null_space(left @ right, 13)
    assert kernel.shape == (5, 3)
    assert not (left @ right @ kernel % 13).any()
