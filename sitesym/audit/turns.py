"""A found rotation in words: angle, axis, nearest crystal directions."""

from __future__ import annotations

from functools import lru_cache
from itertools import product
from math import gcd

import numpy as np

from sitesym.arrays import FloatArray, IntArray, frozen
from sitesym.audit.frames import Frames
from sitesym.audit.result import Turn
from sitesym.audit.rotation_words import angle_and_axis
from sitesym.groups.elements import direction_text

_LARGEST_INDEX = 3


def smallest_turn(rotation: FloatArray, base: FloatArray, frames: Frames) -> FloatArray:
    """Of the axes that an operation of the crystal takes to ``rotation``, those nearest to axes ``base``.

    All (3, 3), axes as rows in the file's axes; the tensor cannot tell them apart.
    """
    proper = frames.group.rotations_cart[frames.group.determinants > 0]
    axes = rotation @ np.swapaxes(proper, 1, 2)
    overlap = np.round(np.einsum("gij,ij->g", axes, base), 9)
    nearest: FloatArray = axes[int(np.argmax(overlap))]
    return nearest


def turn_of(rotation: FloatArray, base: FloatArray, frames: Frames) -> Turn:
    """The turn that takes axes ``base`` to axes ``rotation``, both (3, 3) as rows in the file's axes."""
    turn = rotation.T @ base
    angle, axis = angle_and_axis(turn)
    return Turn(angle, frozen(axis), tuple(_nearest(row, frames.lattice) for row in rotation))


def _nearest(direction: FloatArray, lattice: FloatArray | None) -> tuple[str, float]:
    """The lattice direction (Cartesian without a lattice) with small indices nearest to a unit vector."""
    indices = _small_directions()
    vectors = indices @ (np.eye(3) if lattice is None else lattice)
    cosines = vectors @ direction / np.linalg.norm(vectors, axis=1)
    # Among directions equally near the one listed first has the smaller indices.
    best = int(np.argmax(np.round(cosines, 6)))
    return direction_text(indices[best]), float(np.degrees(np.arccos(np.clip(cosines[best], -1.0, 1.0))))


@lru_cache(maxsize=1)
def _small_directions() -> IntArray:
    numbers = range(-_LARGEST_INDEX, _LARGEST_INDEX + 1)
    found = [d for d in product(numbers, repeat=3) if any(d) and gcd(*(abs(i) for i in d)) == 1]
    return np.array(sorted(found, key=lambda d: sum(i * i for i in d)))
