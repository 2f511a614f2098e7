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


@dataclass(frozen=True)
class Action:
    """Bytes of float64 arrays, so that equal actions are equal keys.

    ``generator_matrices`` (k, 3, 3) and ``generator_signs`` (k,) generate it; ``angles`` and ``signs`` have
    one rotation angle (radians) and one sign for each distinct pair (P, sign).
    """

    generator_matrices: bytes
    generator_signs: bytes
    angles: bytes
    signs: bytes

    @property
    def generators(self) -> tuple[FloatArray, FloatArray]:
        """Matrices (k, 3, 3) and signs (k,) of the generators."""
        return np.frombuffer(self.generator_matrices).reshape(-1, 3, 3), np.frombuffer(self.generator_signs)

    def traces_of_powers(self, highest: int) -> FloatArray:
        """Trace of P^k for k from 0 to ``highest``, shape (highest + 1, elements): 1 + 2 cos(k angle)."""
        traces: FloatArray = 1.0 + 2.0 * np.cos(np.outer(np.arange(highest + 1), np.frombuffer(self.angles)))
        return traces

    def mean(self, values: FloatArray) -> float:
        """Mean over the group of a class function times the sign."""
        return float((values * np.frombuffer(self.signs)).mean())


@lru_cache(maxsize=4096)
def action_of(group: PointGroup, improper_sign: bool, time_odd: bool) -> Action:
    """The action of a group on tensors that change sign (or not) under -1 and under time reversal."""
    determinants = group.determinants.astype(np.float64)
    matrices = np.round(group.rotations_cart * determinants[:, None, None], 12) + 0.0
    signs = determinants if improper_sign else np.ones(group.order)
    if time_odd:
        signs = signs * np.where(group.time_reversal, -1.0, 1.0)
    keys = [matrix.tobytes() + sign.tobytes() for matrix, sign in zip(matrices, signs, strict=True)]
    distinct = list({key: index for index, key in reversed(list(enumerate(keys)))}.values())
    kernel = [index for index, key in enumerate(keys) if key == keys[0]]
    chosen = _generators(group, sorted(distinct, key=lambda i: _place(matrices[i], signs[i])), kernel)
    traces = np.trace(matrices[distinct], axis1=1, axis2=2)
    angles = np.round(np.arccos(np.clip((traces - 1.0) / 2.0, -1.0, 1.0)), 12)
    order = np.lexsort((angles, signs[distinct]))
    return Action(
        matrices[chosen].tobytes(),
        signs[chosen].tobytes(),
        angles[order].tobytes(),
        signs[distinct][order].tobytes(),
    )


def _generators(group: PointGroup, candidates: list[int], kernel: list[int]) -> list[int]:
    """The first candidates that, together with what acts trivially, generate the group."""
    chosen: list[int] = []
    reached = set(kernel)
    for index in candidates:
        if index not in reached:
            chosen.append(index)
            reached = group.abstract.closure([*kernel, *chosen])
    return chosen


def _place(matrix: FloatArray, sign: float) -> tuple[float, float, list[float]]:
    """Order of choice that depends on the operation alone: threefold and fourfold rotations before twofold
    ones.
    """
    return abs(float(np.trace(matrix)) - 0.5), -float(sign), (-matrix).ravel().tolist()
