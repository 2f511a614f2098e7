"""Other choices of axes that leave the operations of a group looking the same.

A rotation N with N G N^-1 = G turns the axes into others that no operation tells apart from the first:
symmetry cannot say which of them a set of measured signs refers to. Such rotations form the normaliser of
the group.
"""

from __future__ import annotations

from functools import lru_cache

import numpy as np

from sitesym.arrays import FloatArray, frozen
from sitesym.groups.orientation import standard_rotation
from sitesym.groups.pointgroup import PointGroup
from sitesym.groups.symbols import rotation_about
from sitesym.tolerances import SAME_MATRIX

#: An angle (radians) of no finite order: a turn by it that keeps a group belongs to turns by any angle.
_ARBITRARY_ANGLE = 0.3


@lru_cache(maxsize=256)
def equivalent_turns(group: PointGroup) -> tuple[FloatArray, ...]:
    """Proper rotations (3, 3), in the group's own axes, that map the group onto itself and are none of its
    elements.

    One for each coset of the group in its normaliser, searched in the standard orientation among the
    rotations of a cube and of upright prisms with six, eight and twelve sides: in 422, 4mm and 4/mmm turns by
    45 degrees, in 622, 6mm and 6/mmm by 30 degrees make the two sorts of twofold axes or mirrors change
    places. Where any angle does (`directions_of_any_turn`) the list holds only the members among these. Time
    reversal is not looked at.
    """
    to_standard = standard_rotation(group)
    found: list[FloatArray] = []
    for candidate in _candidates():
        turn = to_standard.T @ candidate @ to_standard
        if normalises(group, turn) and not any(
            _contains(known @ group.rotations_cart, turn) for known in [np.eye(3), *found]
        ):
            found.append(frozen(turn))
    return tuple(found)


@lru_cache(maxsize=256)
def directions_of_any_turn(group: PointGroup) -> FloatArray:
    """Unit vectors (m, 3), in the group's own axes, about which a turn by any angle maps the group onto
    itself.

    The main axis of 2, m, 3, 4, 6 and the like; three axes stand for all in 1 and -1; none in other classes.
    """
    axes = standard_rotation(group)
    turns = (rotation_about(axis, _ARBITRARY_ANGLE) for axis in axes)
    return frozen(np.array([a for a, turn in zip(axes, turns, strict=True) if normalises(group, turn)]))


def normalises(group: PointGroup, turn: FloatArray, within: float = SAME_MATRIX) -> bool:
    """Whether a turn maps the operations of a group onto themselves, entries equal ``within`` so much."""
    images = turn @ group.rotations_cart @ turn.T
    distance = np.abs(images[:, None] - group.rotations_cart[None]).max(axis=(2, 3))
    return bool((distance.min(axis=1) < within).all())


@lru_cache(maxsize=1)
def _candidates() -> tuple[FloatArray, ...]:
    """The rotations tried: half turns about x, y, z first, then those of prism and cube by angle, then those
    of finer prisms.
    """
    known = [
        matrix
        for symbol in ("622", "432")
        for matrix in PointGroup.from_symbol(symbol).rotations_cart
        if np.trace(matrix) < 3.0 - SAME_MATRIX
    ]
    known.sort(key=lambda m: (np.count_nonzero(np.abs(m) > SAME_MATRIX), -m[2, 2]))
    flipped = np.diag([1.0, -1.0, -1.0])
    z = np.array([0.0, 0.0, 1.0])
    upright = [rotation_about(z, 2.0 * np.pi * k / sides) for sides in (8, 12) for k in range(1, sides)]
    return (*known, *upright, *(turn @ flipped for turn in upright))


def _contains(matrices: FloatArray, matrix: FloatArray) -> bool:
    return bool((np.abs(matrices - matrix).max(axis=(1, 2)) < SAME_MATRIX).any())
