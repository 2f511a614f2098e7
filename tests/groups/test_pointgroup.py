"""Point groups from matrices: what is a group, what is not, and what the elements are called."""

import numpy as np
import pytest

from sitesym.errors import AxesError, NotAGroupError, SymmetryError
from sitesym.groups import PointGroup, standard_rotation
from sitesym.groups.symbols import SCHOENFLIES, rotation_about

TURN_Z = np.array([[0, -1, 0], [1, 0, 0], [0, 0, 1]])
ONE = np.eye(3, dtype=int)


def test_a_missing_product_is_named() -> None:
    with pytest.raises(NotAGroupError) as caught:
        PointGroup.from_cartesian(np.array([ONE, TURN_Z], dtype=float))
    assert "element 1 times element 1 = (-1 0 0; 0 -1 0; 0 0 1)" in caught.value.value
    assert "product of any two" in caught.value.rule


def test_a_missing_product_of_time_reversals_is_named_with_its_time_reversal() -> None:
    matrices = np.array([np.eye(3), np.diag([1.0, -1, -1]), np.diag([-1.0, 1, -1]), np.diag([-1.0, -1, 1])])
    with pytest.raises(NotAGroupError) as caught:
        PointGroup.from_cartesian(matrices, np.array([False, True, False, False]))
    assert "element 1 times element 2 = (-1 0 0; 0 -1 0; 0 0 1) with time reversal" in caught.value.value


def test_a_doubled_element_is_named() -> None:
    matrices = np.array([ONE, -ONE, ONE])
    with pytest.raises(NotAGroupError, match="elements 0 and 2 are equal"):
        PointGroup.from_fractional(matrices, np.eye(3))


def test_an_element_doubled_up_to_rounding_is_found() -> None:
    matrices = np.array([ONE, -ONE, -ONE], dtype=float)
    matrices[2, 0, 1] += 4e-9
    with pytest.raises(NotAGroupError, match="given twice"):
        PointGroup.from_cartesian(matrices)


def test_a_set_without_the_identity_is_no_group() -> None:
    with pytest.raises(NotAGroupError, match="identity"):
        PointGroup.from_cartesian(np.array([-ONE], dtype=float))


@pytest.mark.parametrize("shape", [(0, 3, 3), (3, 3), (2, 2, 2)])
def test_arrays_of_another_shape_are_refused(shape: tuple[int, ...]) -> None:
    with pytest.raises(NotAGroupError, match="3x3"):
        PointGroup.from_fractional(np.zeros(shape, dtype=int), np.eye(3))


def test_an_operation_that_the_lattice_does_not_have_is_refused() -> None:
    with pytest.raises(SymmetryError, match="not orthogonal"):
        PointGroup.from_fractional(
            np.array([np.linalg.matrix_power(TURN_Z, k) for k in range(4)]), np.diag([1.0, 1.1, 2])
        )


@pytest.mark.parametrize("lattice", [np.zeros((3, 3)), np.full((3, 3), np.nan), np.ones((3, 3)), np.eye(2)])
def test_a_lattice_without_volume_is_refused(lattice: np.ndarray) -> None:
    with pytest.raises(SymmetryError, match="volume"):
        PointGroup.from_fractional(np.array([ONE]), lattice)


def test_fractions_in_a_lattice_basis_are_refused_and_not_cut_off() -> None:
    with pytest.raises(SymmetryError, match="integer"):
        PointGroup.from_fractional(np.array([ONE, 0.9 * -ONE]), np.eye(3))


@pytest.mark.parametrize("rows", ["abc", [[1, 2], [3]], [["a"] * 3] * 3])
def test_what_is_no_array_of_numbers_is_refused_with_its_value(rows: object) -> None:
    group = PointGroup.from_symbol("32")
    actions = (
        (SymmetryError, lambda: PointGroup.from_cartesian(rows)),
        (SymmetryError, lambda: PointGroup.from_fractional(rows, np.eye(3))),
        (SymmetryError, lambda: PointGroup.from_fractional(np.eye(3)[None], rows)),
        (AxesError, lambda: group.rotated(rows)),
        (AxesError, lambda: standard_rotation(group, rows)),
    )
    for error, action in actions:
        with pytest.raises(error) as caught:
            action()
        assert caught.value.value == repr(rows)


@pytest.mark.parametrize("wishes", [np.zeros((3, 3)), np.eye(3)[:2], np.full((3, 3), np.nan)])
def test_wishes_that_are_no_directions_are_refused(wishes: np.ndarray) -> None:
    with pytest.raises(AxesError, match="not three directions"):
        standard_rotation(PointGroup.from_symbol("1"), wishes)


@pytest.mark.parametrize("index", [-1, 6])
def test_a_subgroup_is_made_of_elements_that_exist(index: int) -> None:
    with pytest.raises(SymmetryError, match="from 0 to 5"):
        PointGroup.from_symbol("32").subgroup([0, index])


def test_not_a_number_is_refused() -> None:
    with pytest.raises(SymmetryError):
        PointGroup.from_cartesian(np.full((1, 3, 3), np.nan))


def test_flags_must_be_as_many_as_matrices() -> None:
    with pytest.raises(SymmetryError, match="flags"):
        PointGroup.from_cartesian(np.array([ONE, -ONE], dtype=float), np.array([False]))


@pytest.mark.parametrize(
    "rotation", [np.diag([1.0, 1.0, -1.0]), np.ones((3, 3)), np.eye(2), np.full((3, 3), np.nan)]
)
def test_axes_that_are_not_right_handed_and_orthonormal_are_refused(rotation: np.ndarray) -> None:
    with pytest.raises(AxesError):
        PointGroup.from_symbol("32").rotated(rotation)


@pytest.mark.parametrize("symbol", SCHOENFLIES)
def test_product_table_inverses_classes_and_generators_agree_with_the_matrices(symbol: str) -> None:
    group = PointGroup.from_symbol(symbol)
    matrices = group.rotations_frac
    for g in range(group.order):
        assert np.array_equal(matrices[g] @ matrices[group.inverses[g]], ONE)
        for h in range(group.order):
            assert np.array_equal(matrices[g] @ matrices[h], matrices[group.product_table[g, h]])
    for members in group.classes:
        conjugates = {(m @ matrices[members[0]] @ np.linalg.inv(m)).round().tobytes() for m in matrices}
        assert len(conjugates) == len(members)
    generated = [0]
    for element in generated:
        products = (int(group.product_table[element, g]) for g in group.generators)
        generated.extend(p for p in dict.fromkeys(products) if p not in generated)
    assert sorted(generated) == list(range(group.order))


def test_the_order_of_input_does_not_matter_but_for_the_identity_first() -> None:
    matrices = PointGroup.from_symbol("-43m").rotations_cart[::-1]
    group = PointGroup.from_cartesian(matrices)
    assert np.allclose(group.rotations_cart[0], np.eye(3))
    assert (group.symbol, group.order) == ("-43m", 24)


def test_elements_have_names_in_lattice_directions() -> None:
    expected = {"1", "3+ [001]", "3- [001]", "m [001]", "-6+ [001]", "-6- [001]"}
    assert set(PointGroup.from_symbol("-6").names) == expected
    assert set(PointGroup.from_symbol("3m1").names) == {
        "1",
        "3+ [001]",
        "3- [001]",
        "m [100]",
        "m [010]",
        "m [110]",
    }
    assert "-4+ [100]" in PointGroup.from_symbol("-43m").names
    assert "3- [1-1-1]" in PointGroup.from_symbol("23").names


def test_names_follow_the_lattice_and_not_the_cartesian_axes() -> None:
    group = PointGroup.from_symbol("321")
    turned = group.rotated(np.array([[0.0, 1, 0], [0, 0, 1], [1, 0, 0]]))
    assert turned.names == group.names
    assert not np.allclose(turned.rotations_cart, group.rotations_cart)


def test_without_a_lattice_directions_are_cartesian() -> None:
    c, s = np.cos(0.3), np.sin(0.3)
    turn = np.array([[c, -s, 0], [s, c, 0], [0, 0, 1]])
    group = PointGroup.from_cartesian(PointGroup.from_symbol("4mm").rotated(turn).rotations_cart)
    assert "4+ [001]" in group.names
    assert f"m ({c:.4f} {s:.4f} 0.0000)" in group.names


def test_positive_rotations_turn_counterclockwise_about_their_axis() -> None:
    for symbol in ("4", "3", "6", "432", "23"):
        group = PointGroup.from_symbol(symbol)
        for element, rotation in zip(group.elements, group.rotations_cart, strict=True):
            if element.order > 2:
                across = np.cross(element.axis, [0.3, 0.5, 0.7])
                assert element.sense * (np.cross(across, rotation @ across) @ element.axis) > 0


@pytest.mark.parametrize(("order", "steps"), [(5, [1, 2]), (8, [1, 3]), (12, [1, 5])])
def test_turns_of_one_order_by_different_angles_have_different_names(order: int, steps: list[int]) -> None:
    turns = [rotation_about(np.array([0.0, 0.0, 1.0]), 2 * np.pi * k / order) for k in range(order)]
    names = PointGroup.from_cartesian(np.array(turns)).names
    assert len(set(names)) == order
    for k in steps:
        symbol = f"{order}" if k == 1 else f"{order}^{k}"
        assert (names[k], names[order - k]) == (f"{symbol}+ [001]", f"{symbol}- [001]")


def test_a_prime_marks_time_reversal() -> None:
    group = PointGroup.from_cartesian(np.array([np.eye(3), np.diag([1.0, -1, -1])]), np.array([False, True]))
    assert group.names == ("1", "2' [100]")


def test_a_grey_group_has_the_symbol_of_its_rotation_parts() -> None:
    plain = PointGroup.from_symbol("-42m").rotations_cart
    flags = np.repeat([False, True], 8)
    assert PointGroup.from_cartesian(np.concatenate([plain, plain]), flags).symbol == "-42m"


def test_inversion_mirror_polar_and_chiral_are_told_apart() -> None:
    with_inversion = {s for s in SCHOENFLIES if PointGroup.from_symbol(s).has_inversion}
    assert len(with_inversion) == 11
    no_mirror = {s for s in SCHOENFLIES if not PointGroup.from_symbol(s).has_mirror}
    assert no_mirror == {"1", "-1", "2", "222", "4", "-4", "422", "3", "-3", "32", "6", "622", "23", "432"}
    assert PointGroup.from_symbol("mm2").polar_directions == pytest.approx(np.array([[0, 0, 1]]))
    assert len(PointGroup.from_symbol("m").polar_directions) == 2
    assert len(PointGroup.from_symbol("1").polar_directions) == 3


def test_groups_that_multiply_alike_share_their_abstract_group() -> None:
    first = PointGroup.from_symbol("32")
    turned = PointGroup.from_cartesian(
        first.rotated(np.array([[0.0, 1, 0], [0, 0, 1], [1, 0, 0]])).rotations_cart
    )
    assert turned.abstract is first.abstract


def test_arrays_of_a_group_cannot_be_written() -> None:
    group = PointGroup.from_symbol("4")
    with pytest.raises(ValueError, match="read-only"):
        group.rotations_cart[0, 0, 0] = 2.0


def test_a_subgroup_keeps_axes_and_refuses_what_is_none() -> None:
    group = PointGroup.from_symbol("4mm")
    rotations = [i for i, e in enumerate(group.elements) if not e.improper]
    assert group.subgroup(rotations).symbol == "4"
    with pytest.raises(NotAGroupError):
        group.subgroup(rotations[:-1])
