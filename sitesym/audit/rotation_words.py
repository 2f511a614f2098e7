"""Rotations in words: angle and axis, directions in trade notation where small integers fit."""

from __future__ import annotations

import numpy as np

from sitesym.arrays import FloatArray
from sitesym.groups.elements import direction_text, small_integers

#: Angles (degrees) and components of axes smaller than this are none.
_NONE = 1e-6


def angle_and_axis(turn: FloatArray) -> tuple[float, FloatArray]:
    """Angle in degrees (0 to 180) and unit axis of a proper rotation."""
    cosine = float(np.clip((np.trace(turn) - 1.0) / 2.0, -1.0, 1.0))
    vector = np.array([turn[2, 1] - turn[1, 2], turn[0, 2] - turn[2, 0], turn[1, 0] - turn[0, 1]]) / 2.0
    angle = float(np.degrees(np.arctan2(np.linalg.norm(vector), cosine)))
    # The eigenvector keeps its accuracy near 180 degrees, where the antisymmetric part vanishes.
    _, _, rows = np.linalg.svd(turn - np.eye(3))
    axis = rows[2]
    return angle, axis * (-1.0 if axis @ vector < 0.0 else 1.0)


def direction_words(direction: FloatArray) -> str:
    """A Cartesian direction: ``[110]``, or its components where no small integers fit."""
    indices = small_integers(direction)
    if indices is None:
        # Adding zero turns -0.0 into 0.0.
        return f"({' '.join(f'{value:.4f}' for value in np.round(direction, 4) + 0.0)})"
    return direction_text(indices)


def turn_text(axes: FloatArray) -> str:
    """Angle and axis, in the old axes, of a turn of axes (3, 3): ``60 degrees about [001]``; '' for none.

    The first component of the axis that is not zero is positive; the angle may be negative.
    """
    # The rows of the matrix are the new axes: the turn itself is the transposed matrix.
    angle, axis = angle_and_axis(axes.T)
    if angle < _NONE:
        return ""
    leading = float(np.sign(axis[np.abs(axis) > _NONE][0]))
    sign = "-" if leading < 0.0 and angle < 180.0 - _NONE else ""
    return f"{sign}{round(angle, 4):g} degrees about {direction_words(axis * leading)}"
