"""What kind of operation an orthogonal matrix is, and its name in trade notation.

Names follow the Hermann-Mauguin symbols of single elements: ``3+ [111]`` is a rotation by +120 degrees about
[111], ``-4- [001]`` a rotoinversion, ``m [100]`` a mirror perpendicular to [100]. A prime marks time
reversal. Directions are lattice directions where the group has a lattice basis, Cartesian ones otherwise.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import gcd

import numpy as np

from sitesym.arrays import FloatArray, IntArray, frozen
from sitesym.errors import SymmetryError
from sitesym.tolerances import SAME_MATRIX

_LARGEST_INDEX = 9
_HIGHEST_ORDER = 120
#: Largest difference between a direction, its longest component scaled to an index, and integers.
_SAME_DIRECTION = 1e-4


@dataclass(frozen=True, eq=False)
class Element:
    """One operation of a point group.

    ``order`` is that of its proper part (1, 2, 3, 4, 6; a mirror has 2, the inversion 1), ``axis`` the
    Cartesian unit vector of the axis (the normal for a mirror; None for 1 and -1), ``sense`` +1 or -1 about
    that axis (0 for order up to 2), ``direction`` the text of the axis. ``steps``: the angle is 360 degrees
    times steps / order, at most half a turn; always 1 in crystals, also 2 for order 5.
    """

    order: int
    improper: bool
    axis: FloatArray | None
    sense: int
    direction: str
    time_reversal: bool = False
    steps: int = 1

    @property
    def symbol(self) -> str:
        """Symbol without direction: 1, -1, 2, m, 3, -3, 4, -4, 6, -6; in a general group any order, and 5^2
        for two fifths of a turn.
        """
        if self.improper and self.order == 2:
            return "m"
        power = f"^{self.steps}" if self.steps > 1 else ""
        return f"{'-' if self.improper else ''}{self.order}{power}"

    @property
    def name(self) -> str:
        """Full name, such as ``3+ [001]``, ``m [100]``, ``-1``, ``2' [010]``."""
        sign = {1: "+", -1: "-", 0: ""}[self.sense]
        prime = "'" if self.time_reversal else ""
        return f"{self.symbol}{sign}{prime} {self.direction}".strip()


def classify(
    rotation_cart: FloatArray, lattice: FloatArray | None = None, time_reversal: bool = False
) -> Element:
    """The kind of one orthogonal matrix, shape (3, 3); ``lattice`` has rows a, b, c for lattice
    directions. Raises SymmetryError for a rotation by no rational part of a turn.
    """
    improper = bool(np.linalg.det(rotation_cart) < 0)
    proper = -rotation_cart if improper else rotation_cart
    order = _rotation_order(proper)
    if order == 1:
        return Element(1, improper, None, 0, "", time_reversal)
    axis, direction = _axis(proper, order, lattice)
    sense = 0 if order == 2 else _sense(proper, axis)
    angle = np.arccos(np.clip((np.trace(proper) - 1.0) / 2.0, -1.0, 1.0))
    steps = round(float(angle) * order / (2.0 * np.pi))
    return Element(order, improper, frozen(axis), sense, direction, time_reversal, steps)


def _rotation_order(proper: FloatArray) -> int:
    power = np.eye(3)
    for order in range(1, _HIGHEST_ORDER + 1):
        power = power @ proper
        if np.abs(power - np.eye(3)).max() < SAME_MATRIX:
            return order
    raise SymmetryError(
        "an operation has no finite order",
        value=f"rotation part with trace {float(np.trace(proper)):.6g}",
        rule=f"some power up to {_HIGHEST_ORDER} of a rotation in a finite group is the identity",
        next_step="give the operations to more digits",
    )


def _axis(proper: FloatArray, order: int, lattice: FloatArray | None) -> tuple[FloatArray, str]:
    """Unit axis and its text. The sum of all powers projects onto the axis."""
    total = np.zeros((3, 3))
    power = np.eye(3)
    for _ in range(order):
        power = power @ proper
        total += power
    column = total[:, int(np.argmax(np.linalg.norm(total, axis=0)))]
    axis = column / np.linalg.norm(column)
    components: FloatArray = axis if lattice is None else np.asarray(np.linalg.solve(lattice.T, axis))
    indices = small_integers(components)
    if indices is None:
        axis = axis * _leading_sign(axis)
        return axis, "(" + " ".join(f"{value:.4f}" for value in axis + 0.0) + ")"
    sign = _leading_sign(indices.astype(np.float64))
    return axis * sign, direction_text(indices * int(sign))


def small_integers(vector: FloatArray) -> IntArray | None:
    """The shortest integer vector along a direction, or None when no index up to 9 fits."""
    scale = np.abs(vector).max()
    for largest in range(1, _LARGEST_INDEX + 1):
        candidate = vector / scale * largest
        rounded: IntArray = np.rint(candidate).astype(np.int64)
        if np.abs(candidate - rounded).max() < _SAME_DIRECTION:
            return rounded // np.int64(gcd(*(int(abs(v)) for v in rounded)))
    return None


def direction_text(indices: IntArray) -> str:
    """Trade notation of a direction: [110], [1-10]."""
    return "[" + "".join(str(int(v)) for v in indices) + "]"


def _leading_sign(vector: FloatArray) -> float:
    leading = vector[np.abs(vector) > 1e-6][0]
    return float(np.sign(leading))


def _sense(proper: FloatArray, axis: FloatArray) -> int:
    antisymmetric = np.array(
        [proper[2, 1] - proper[1, 2], proper[0, 2] - proper[2, 0], proper[1, 0] - proper[0, 1]]
    )
    return 1 if antisymmetric @ axis > 0 else -1
