"""Labels of irreps and the functions that belong to them, against the tables in common use.

Expected values: R. S. Mulliken, J. Chem. Phys. 23 (1955) 1997 with the choices stated in the conventions of
the package; single entries are common practice, no source.
"""

import numpy as np
import pytest

from sitesym.errors import AxesError, SymmetryError
from sitesym.groups import (
    CharacterTable,
    PointGroup,
    character_table,
    functions_of_irreps,
    functions_of_joined,
)
from sitesym.groups.symbols import SCHOENFLIES, rotation_about

#: Physically irreducible representations of the 32 classes, common practice.
LABELS = {
    "1": "A", "-1": "Ag Au", "2": "A B", "m": "A' A''", "2/m": "Ag Bg Au Bu",
    "222": "A B1 B2 B3", "mm2": "A1 A2 B1 B2", "mmm": "Ag B1g B2g B3g Au B1u B2u B3u",
    "4": "A B E", "-4": "A B E", "4/m": "Ag Bg Eg Au Bu Eu", "422": "A1 A2 B1 B2 E", "4mm": "A1 A2 B1 B2 E",
    "-42m": "A1 A2 B1 B2 E", "4/mmm": "A1g A2g B1g B2g Eg A1u A2u B1u B2u Eu",
    "3": "A E", "-3": "Ag Eg Au Eu", "32": "A1 A2 E", "3m": "A1 A2 E", "-3m": "A1g A2g Eg A1u A2u Eu",
    "6": "A B E1 E2", "-6": "A' E' A'' E''", "6/m": "Ag Bg E1g E2g Au Bu E1u E2u", "622": "A1 A2 B1 B2 E1 E2",
    "6mm": "A1 A2 B1 B2 E1 E2", "-6m2": "A1' A2' E' A1'' A2'' E''",
    "6/mmm": "A1g A2g B1g B2g E1g E2g A1u A2u B1u B2u E1u E2u",
    "23": "A E T", "m-3": "Ag Eg Tg Au Eu Tu", "432": "A1 A2 E T1 T2", "-43m": "A1 A2 E T1 T2",
    "m-3m": "A1g A2g Eg T1g T2g A1u A2u Eu T1u T2u",
}  # fmt: skip

#: Symbol, function, the irrep it belongs to.
MEMBERS = [
    ("mm2", "x", "B1"), ("mm2", "y", "B2"), ("mm2", "z", "A1"), ("mm2", "Rz", "A2"), ("mm2", "xy", "A2"),
    ("222", "z", "B1"), ("222", "y", "B2"), ("222", "x", "B3"), ("mmm", "z", "B1u"), ("mmm", "xz", "B2g"),
    ("mmm", "Rx", "B3g"), ("2", "y", "A"), ("m", "y", "A''"), ("2/m", "xy", "Bg"), ("2/m", "y", "Au"),
    ("4mm", "x2-y2", "B1"), ("422", "x2-y2", "B1"), ("422", "xy", "B2"), ("4/mmm", "x2-y2", "B1g"),
    ("4/mmm", "xy", "B2g"), ("4/mmm", "z", "A2u"), ("-42m", "x2-y2", "B1"), ("-42m", "z", "B2"),
    ("-42m", "xy", "B2"), ("-6m2", "z", "A2''"), ("-6m2", "x", "E'"), ("-6m2", "Rx", "E''"),
    ("-6", "z", "A''"),
    ("3m", "z", "A1"), ("3m", "Rz", "A2"), ("32", "z", "A2"), ("-3m", "z", "A2u"), ("6mm", "x", "E1"),
    ("6mm", "xy", "E2"), ("622", "yz", "E1"), ("6/mmm", "z", "A2u"), ("4", "xy", "B"), ("-4", "z", "B"),
    ("-43m", "x", "T2"), ("-43m", "Rx", "T1"), ("-43m", "xy", "T2"), ("432", "x", "T1"), ("432", "xy", "T2"),
    ("m-3m", "x", "T1u"), ("m-3m", "xy", "T2g"), ("m-3m", "Rz", "T1g"), ("m-3m", "x2-y2", "Eg"),
    ("23", "z", "T"),
    ("m-3", "yz", "Tg"),
]  # fmt: skip


def character(table: CharacterTable, label: str, name: str) -> complex:
    """Character of one irrep for the element with a name."""
    index = next(k for k, irrep in enumerate(table.irreps) if irrep.label == label)
    return table.element_characters(index)[table.group.names.index(name)]


@pytest.mark.parametrize("symbol", SCHOENFLIES)
def test_every_class_has_the_labels_in_common_use(symbol: str) -> None:
    table = character_table(PointGroup.from_symbol(symbol))
    assert [joined.label for joined in table.joined] == LABELS[symbol].split()


@pytest.mark.parametrize(("symbol", "function", "label"), MEMBERS)
def test_functions_belong_to_their_irrep(symbol: str, function: str, label: str) -> None:
    table = character_table(PointGroup.from_symbol(symbol))
    names = functions_of_joined(table)
    assert [j.label for j, row in zip(table.joined, names, strict=True) if function in row] == [label]


def test_b1_of_mm2_is_even_under_the_mirror_perpendicular_to_y() -> None:
    table = character_table(PointGroup.from_symbol("mm2"))
    assert character(table, "B1", "m [010]") == 1
    assert character(table, "B1", "m [100]") == -1


def test_b1_of_42m_is_even_under_the_twofold_axes_and_b2_under_the_mirrors() -> None:
    table = character_table(PointGroup.from_symbol("-42m"))
    assert character(table, "B1", "2 [100]") == 1
    assert character(table, "B1", "m [110]") == -1
    assert character(table, "B2", "m [110]") == 1


def test_b1_of_hexagonal_groups_follows_the_operation_along_x() -> None:
    assert character(character_table(PointGroup.from_symbol("622")), "B1", "2 [100]") == 1
    assert character(character_table(PointGroup.from_symbol("6mm")), "B1", "m [100]") == 1
    assert character(character_table(PointGroup.from_symbol("6/mmm")), "B1g", "2 [100]") == 1


@pytest.mark.parametrize("symbol", ["3", "4", "6", "-4", "-6", "23", "-3", "6/m"])
def test_the_first_of_a_complex_pair_takes_the_positive_phase(symbol: str) -> None:
    table = character_table(PointGroup.from_symbol(symbol))
    names = {"-4": "-4+ [001]", "4": "4+ [001]", "6": "6+ [001]", "6/m": "6+ [001]", "23": "3+ [111]"}
    for irrep in table.irreps:
        if irrep.label[0] in "12":
            value = character(table, irrep.label, names.get(symbol, "3+ [001]"))
            assert (value.imag > 0) == (irrep.label[0] == "1"), irrep.label
            assert irrep.reality == "complex"


@pytest.mark.parametrize("symbol", SCHOENFLIES)
def test_labels_and_characters_do_not_depend_on_the_axes_of_the_input(symbol: str) -> None:
    group = PointGroup.from_symbol(symbol)
    plain = character_table(group)
    rng = np.random.default_rng(11)
    for _ in range(3):
        turn = rotation_about(rng.standard_normal(3), rng.uniform(0, 2 * np.pi))
        turned = character_table(group.rotated(turn))
        assert [i.label for i in turned.irreps] == [i.label for i in plain.irreps]
        dimensions = sorted((i.label, i.dimension, i.reality) for i in turned.irreps)
        assert dimensions == sorted((i.label, i.dimension, i.reality) for i in plain.irreps)
        assert functions_of_joined(turned) == functions_of_joined(plain)


def test_complex_irreps_list_the_complex_combinations() -> None:
    table = character_table(PointGroup.from_symbol("4"))
    by_label = dict(zip([i.label for i in table.irreps], functions_of_irreps(table), strict=True))
    # the combination that the positive rotation by 90 degrees multiplies by exp(i pi/2)
    quarter = np.array([[0, -1], [1, 0]])
    assert quarter @ np.array([1, -1j]) == pytest.approx(1j * np.array([1, -1j]))
    assert "x-iy" in by_label["1E"]
    assert "x+iy" in by_label["2E"]


def test_groups_outside_the_32_classes_have_numbered_irreps() -> None:
    fivefold = [rotation_about(np.array([0.0, 0, 1]), 2 * np.pi * k / 5) for k in range(5)]
    twofold = np.diag([1.0, -1.0, -1.0])
    table = character_table(PointGroup.from_cartesian(np.array(fivefold + [r @ twofold for r in fivefold])))
    assert [(i.label, i.dimension) for i in table.irreps] == [("Γ1", 1), ("Γ2", 1), ("Γ3", 2), ("Γ4", 2)]
    golden = {round(i.characters_numeric[1].real, 6) for i in table.irreps if i.dimension == 2}
    assert golden == {0.618034, -1.618034}  # 2 cos 72, 2 cos 144 degrees


def test_a_group_with_time_reversal_has_no_ordinary_table() -> None:
    group = PointGroup.from_cartesian(np.array([np.eye(3), np.diag([1.0, -1, -1])]), np.array([False, True]))
    with pytest.raises(SymmetryError, match="antiunitary"):
        character_table(group)


def test_a_rotation_that_does_not_lead_to_the_standard_orientation_is_refused() -> None:
    with pytest.raises(SymmetryError, match="standard orientation"):
        character_table(PointGroup.from_symbol("mmm"), rotation_about(np.array([0.0, 0, 1]), 0.4))
    with pytest.raises(AxesError):
        character_table(PointGroup.from_symbol("mmm"), np.diag([1.0, 1.0, -1.0]))
