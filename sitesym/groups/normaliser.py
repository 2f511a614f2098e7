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
from sitesym.tolerances import SAME_MATRIX


@lru_cache(maxsize=256)
def equivalent_turns(group: PointGroup) -> tuple[FloatArray, ...]:
    """Proper rotations (3, 3), in the group's own axes, that map the group onto itself and are none of its
    elements.

    One for each coset of the group in its normaliser, searched among the rotations of a cube and of a
    hexagonal prism in the standard orientation. Where the normaliser is larger (any turn about the main
    axis of 1, 2, m, 3, 4, 6 and the like, turns by 45 degrees in 422, 4mm and 4/mmm) the list holds only
    its members among those. Time reversal is not looked at.
    """
    to_standard = standard_rotation(group)
    found: list[FloatArray] = []
    for candidate in _candidates():
        turn = to_standard.T @ candidate @ to_standard
        if _maps_onto_itself(group, turn) and not any(
            _contains(known @ group.rotations_cart, turn) for known in [np.eye(3), *found]
        ):
            found.append(frozen(turn))
    return tuple(found)


def _candidates() -> list[FloatArray]:
    """Proper rotations of the cube and the hexagonal prism: half turns about x, y, z first, then by angle."""
    rotations = [
        matrix
        for symbol in ("622", "432")
        for matrix in PointGroup.from_symbol(symbol).rotations_cart
        if np.trace(matrix) < 3.0 - SAME_MATRIX
    ]
    return sorted(rotations, key=lambda m: (np.count_nonzero(np.abs(m) > SAME_MATRIX), -m[2, 2]))


def _maps_onto_itself(group: PointGroup, turn: FloatArray) -> bool:
    images = turn @ group.rotations_cart @ turn.T
    return all(_contains(group.rotations_cart, image) for image in images)


def _contains(matrices: FloatArray, matrix: FloatArray) -> bool:
    return bool((np.abs(matrices - matrix).max(axis=(1, 2)) < SAME_MATRIX).any())
