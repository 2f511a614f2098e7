"""Turns that map a group onto itself: how many there are, and about which axes any angle does."""

from __future__ import annotations

import numpy as np
import pytest

from sitesym.groups import PointGroup
from sitesym.groups.normaliser import directions_of_any_turn, equivalent_turns, normalises
from sitesym.groups.symbols import SCHOENFLIES, rotation_about

Z, X = np.array([0.0, 0.0, 1.0]), np.array([1.0, 0.0, 0.0])
CONTINUOUS = ("2", "m", "2/m", "3", "-3", "4", "-4", "4/m", "6", "-6", "6/m")
TRICLINIC = ("1", "-1")
FINITE = sorted(set(SCHOENFLIES) - set(CONTINUOUS) - set(TRICLINIC))
#: Rotations that leave a group as it is. Those with n twofold axes about one of order n: the rotations of a
#: prism of twice as many sides, 4n of them; 222 and the cubic classes: the 24 of the cube.
NORMALISER_ORDER = {
    "222": 24, "mmm": 24, "23": 24, "m-3": 24, "432": 24, "-43m": 24, "m-3m": 24, "mm2": 8, "-42m": 8,
    "422": 16, "4mm": 16, "4/mmm": 16, "32": 12, "3m": 12, "-3m": 12, "-6m2": 12, "622": 24, "6mm": 24,
    "6/mmm": 24,
}  # fmt: skip


def fine_rotations() -> list[np.ndarray]:
    """Those of the cube and of an upright prism with 48 sides, each once."""
    upright = [rotation_about(Z, np.pi * k / 24) for k in range(48)]
    prism = [*upright, *(turn @ rotation_about(X, np.pi) for turn in upright)]
    cube = list(PointGroup.from_symbol("432").rotations_cart)
    return prism + [c for c in cube if min(np.abs(c - p).max() for p in prism) > 1e-6]


@pytest.mark.parametrize("symbol", FINITE)
def test_the_turns_and_the_elements_make_up_the_whole_normaliser(symbol: str) -> None:
    group = PointGroup.from_symbol(symbol)
    proper = int((group.determinants > 0).sum())
    assert proper * (1 + len(equivalent_turns(group))) == NORMALISER_ORDER[symbol]
    by_trial = sum(normalises(group, rotation) for rotation in fine_rotations())
    assert by_trial == NORMALISER_ORDER[symbol]


@pytest.mark.parametrize(("symbol", "degrees"), [
    ("422", 45.0), ("4mm", 45.0), ("4/mmm", 45.0), ("622", 30.0), ("6mm", 30.0), ("6/mmm", 30.0)
])  # fmt: skip
def test_twofold_axes_or_mirrors_of_two_sorts_change_places(symbol: str, degrees: float) -> None:
    group = PointGroup.from_symbol(symbol)
    turn = rotation_about(Z, np.radians(degrees))
    cosets = [known @ group.rotations_cart for known in equivalent_turns(group)]
    assert any(np.abs(coset - turn).max(axis=(1, 2)).min() < 1e-6 for coset in cosets)
    assert not normalises(PointGroup.from_symbol("32"), rotation_about(Z, np.radians(45.0)))


@pytest.mark.parametrize("symbol", sorted(SCHOENFLIES))
def test_any_angle_does_about_the_axes_told_and_no_others(symbol: str) -> None:
    group = PointGroup.from_symbol(symbol).rotated(rotation_about(np.array([1.0, 2.0, 0.5]), 0.7))
    directions = directions_of_any_turn(group)
    expected = 3 if symbol in TRICLINIC else int(symbol in CONTINUOUS)
    assert len(directions) == expected
    for axis in directions:
        assert np.linalg.norm(axis) == pytest.approx(1.0)
        assert all(normalises(group, rotation_about(axis, angle)) for angle in (0.123, 1.0, 2.5))
    if expected < 3:
        assert not normalises(group, rotation_about(np.array([0.3, 0.5, 0.8]), 0.4))
