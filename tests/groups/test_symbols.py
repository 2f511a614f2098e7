"""Symbols of point groups: every spelling is understood, nonsense is refused with near matches."""

import numpy as np
import pytest

from sitesym.errors import UsageError
from sitesym.groups import PointGroup
from sitesym.groups.symbols import ORIENTED, SCHOENFLIES

#: Orders of the 32 classes (International Tables A, common practice).
ORDERS = {
    "1": 1, "-1": 2, "2": 2, "m": 2, "2/m": 4, "222": 4, "mm2": 4, "mmm": 8, "4": 4, "-4": 4, "4/m": 8,
    "422": 8, "4mm": 8, "-42m": 8, "4/mmm": 16, "3": 3, "-3": 6, "32": 6, "3m": 6, "-3m": 12, "6": 6,
    "-6": 6, "6/m": 12, "622": 12, "6mm": 12, "-6m2": 12, "6/mmm": 24, "23": 12, "m-3": 24, "432": 24,
    "-43m": 24, "m-3m": 48,
}  # fmt: skip


@pytest.mark.parametrize("symbol", SCHOENFLIES)
def test_every_class_is_built_with_its_order_and_recognised_again(symbol: str) -> None:
    group = PointGroup.from_symbol(symbol)
    assert (group.order, group.symbol, group.schoenflies) == (ORDERS[symbol], symbol, SCHOENFLIES[symbol])
    assert group.oriented == ORIENTED.get(symbol, (symbol,))[0]


@pytest.mark.parametrize("symbol", SCHOENFLIES)
def test_schoenflies_symbols_name_the_same_operations(symbol: str) -> None:
    for spelling in (SCHOENFLIES[symbol], SCHOENFLIES[symbol].lower()):
        group = PointGroup.from_symbol(spelling)
        assert np.array_equal(group.rotations_frac, PointGroup.from_symbol(symbol).rotations_frac)


@pytest.mark.parametrize(("symbol", "oriented"), [(s, o) for s, many in ORIENTED.items() for o in many])
def test_oriented_spellings_are_of_their_class_and_come_back(symbol: str, oriented: str) -> None:
    group = PointGroup.from_symbol(oriented)
    assert (group.symbol, group.oriented) == (symbol, oriented)


def test_oriented_spellings_of_a_class_are_different_sets_of_matrices() -> None:
    for spellings in ORIENTED.values():
        sets = {frozenset(m.tobytes() for m in PointGroup.from_symbol(s).rotations_frac) for s in spellings}
        assert len(sets) == len(spellings)


@pytest.mark.parametrize(
    ("text", "oriented"),
    [
        ("4̅3m", "-43m"), ("3̄m", "-3m1"), ("6̅m2", "-6m2"), ("m3̅m", "m-3m"), ("−42m", "-42m"),
        ("- 4 2 m", "-42m"),
        ("1 2 1", "121"), ("1 1 2/m", "112/m"), ("2/m 2/m 2/m", "mmm"), ("4/m 2/m 2/m", "4/mmm"),
        ("-3 2/m 1", "-3m1"), ("-3 1 2/m", "-31m"), ("6/m 2/m 2/m", "6/mmm"), ("2/m -3", "m-3"),
        ("4/m -3 2/m", "m-3m"), ("m3", "m-3"), ("m3m", "m-3m"), ("D_{3h}", "-6m2"), ("S_6", "-3"),
        ("S6", "-3"),
        ("C3i", "-3"), ("S2", "-1"), ("C1h", "1m1"), ("V", "222"), ("Vh", "mmm"), ("Vd", "-42m"),
        ("2", "121"), (r"$\bar{4}3m$", "-43m"), (r"\bar 3 m 1", "-3m1"), (r"m\overline{3}m", "m-3m"),
        ("$C_{2v}$", "mm2"),
    ],
)  # fmt: skip
def test_overbars_spaces_full_symbols_and_old_names_are_read(text: str, oriented: str) -> None:
    assert PointGroup.from_symbol(text).oriented == oriented


@pytest.mark.parametrize(
    ("text", "near"),
    [("-43n", "-43m"), ("6/mm", "6/mmm"), ("42m", "-42m"), ("D3g", "D3d"), ("3_2", None), ("2_1", None),
     ("P-42m", "-42m"), ("", None), ("7", None), ("Fm-3m", "m-3m"), ("5m", None), ("mmmm", "mmm")],
)  # fmt: skip
def test_nonsense_is_refused_with_near_matches(text: str, near: str | None) -> None:
    with pytest.raises(UsageError) as caught:
        PointGroup.from_symbol(text)
    assert caught.value.value == repr(text)
    assert near is None or f"{near}" in caught.value.next_step


def test_settings_differ_only_by_a_rotation_of_axes() -> None:
    # 30 degrees about z takes 3m1 to 31m; 45 degrees takes -42m to -4m2
    for first, second, degrees in (
        ("3m1", "31m", 30),
        ("321", "312", 30),
        ("-6m2", "-62m", 30),
        ("-42m", "-4m2", 45),
    ):
        c, s = np.cos(np.radians(degrees)), np.sin(np.radians(degrees))
        turned = PointGroup.from_symbol(first).rotated(np.array([[c, -s, 0], [s, c, 0], [0, 0, 1]]))
        other = PointGroup.from_symbol(second).rotations_cart
        assert all(np.abs(other - m).max(axis=(1, 2)).min() < 1e-12 for m in turned.rotations_cart), second
