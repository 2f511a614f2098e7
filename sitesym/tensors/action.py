"""How a group acts on tensors of one parity: proper matrices and signs, nothing that acts trivially.

An improper matrix -P acts on a tensor of rank r as (-1)^r P; an axial tensor adds a sign for improper
elements, a time-odd one for time reversal. So an element acts through its proper part P and one sign, and
groups that differ only by operations without effect (4mm, 422, 4/mmm on a stiffness) share one action, and
with it their forms.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from sitesym.arrays import FloatArray
from sitesym.groups import PointGroup
from sitesym.tolerances import SAME_MATRIX

#: Decimals that are kept, so that actions equal up to rounding have equal keys.
_DIGITS = 12


@dataclass(frozen=True)
class Action:
    """Bytes of float64 arrays, so that equal actions are equal keys.

    ``generator_matrices`` (k, 3, 3) and ``generator_signs`` (k,) generate it. ``angles`` has the distinct
    angles of rotation (radians), ``weights`` for each the sum of signs of its elements over their number.
    """

    generator_matrices: bytes
    generator_signs: bytes
    angles: bytes
    weights: bytes

    @property
    def generators(self) -> tuple[FloatArray, FloatArray]:
        """Matrices (k, 3, 3) and signs (k,) of the generators."""
        return np.frombuffer(self.generator_matrices).reshape(-1, 3, 3), np.frombuffer(self.generator_signs)

    def mean(self, values: FloatArray) -> float:
        """Mean over the group of the sign times a function of the angle, shape (angles,)."""
        return float(values @ np.frombuffer(self.weights))


@lru_cache(maxsize=512)
def action_of(group: PointGroup, improper_sign: bool, time_odd: bool) -> Action:
    """The action of a group on tensors that change sign (or not) under -1 and under time reversal."""
    determinants = group.determinants.astype(np.float64)
    matrices = np.round(group.rotations_cart * determinants[:, None, None], _DIGITS) + 0.0
    signs = determinants if improper_sign else np.ones(group.order)
    if time_odd:
        signs = signs * np.where(group.time_reversal, -1.0, 1.0)
    chosen = _generators(group, matrices, signs)
    angles, weights = _weighted_angles(matrices, signs)
    return Action(matrices[chosen].tobytes(), signs[chosen].tobytes(), angles.tobytes(), weights.tobytes())


def _weighted_angles(proper: FloatArray, signs: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Distinct angles of rotation, and the sum of signs for each over the number of all elements."""
    twice_sine = np.linalg.norm(
        [
            proper[:, 2, 1] - proper[:, 1, 2],
            proper[:, 0, 2] - proper[:, 2, 0],
            proper[:, 1, 0] - proper[:, 0, 1],
        ],
        axis=0,
    )
    twice_cosine = np.trace(proper, axis1=1, axis2=2) - 1.0
    angles, which = np.unique(np.round(np.arctan2(twice_sine, twice_cosine), _DIGITS), return_inverse=True)
    return angles, np.bincount(which, weights=signs) / len(signs)


def _generators(group: PointGroup, matrices: FloatArray, signs: FloatArray) -> list[int]:
    """Elements that, together with those that act trivially, generate the group: the same ones for every
    group with this action.
    """
    trivial = (np.abs(matrices - np.eye(3)).max(axis=(1, 2)) < SAME_MATRIX) & (signs == signs[0])
    kernel = np.flatnonzero(trivial).tolist()
    chosen: list[int] = []
    reached = set(kernel)
    for index in sorted(range(group.order), key=lambda i: _place(matrices[i], float(signs[i]))):
        if index not in reached:
            chosen.append(index)
            reached = group.abstract.closure([*kernel, *chosen])
    return chosen


def _place(matrix: FloatArray, sign: float) -> tuple[float, float, list[float]]:
    """Order of choice that depends on the operation alone: threefold and fourfold rotations before twofold
    ones.
    """
    return abs(float(np.trace(matrix)) - 0.5), -sign, (-matrix).ravel().tolist()
