"""What the generators of a group do to the components of a tensor.

In orthonormal components each generator acts as an orthogonal matrix D, and sum (1 - D)^T (1 - D) vanishes
exactly on the tensors that no generator changes.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property, lru_cache

import numpy as np

from sitesym.arrays import FloatArray, frozen
from sitesym.tensors.action import Action
from sitesym.tensors.indexsymmetry import IndexSymmetry
from sitesym.tensors.root3 import ROOT, doubled_exact
from sitesym.tensors.spaces import TensorSpace


@dataclass(frozen=True, eq=False)
class Image:
    """What a proper matrix does to the components: ``parts`` / ``scale``, T'_c = sum_k D_ck T_k.

    ``parts``: (1 or 2, N, N) integers a, b of a + b sqrt(3) in standard axes (``exact``), else floats
    (1, N, N).
    """

    parts: FloatArray
    scale: float
    exact: bool

    @cached_property
    def largest_row_sum(self) -> float:
        """Largest sum of absolute entries in a row of a or b."""
        return float(np.abs(self.parts).sum(axis=2).max(initial=0.0))

    @property
    def matrix(self) -> FloatArray:
        """D as floats, shape (N, N)."""
        total: FloatArray = self.parts[0] if len(self.parts) == 1 else self.parts[0] + ROOT * self.parts[1]
        return total / self.scale


@lru_cache(maxsize=1024)
def images(symmetry: IndexSymmetry, generator_matrices: bytes) -> tuple[Image, ...]:
    """The image of each generator, given as ``Action.generator_matrices``."""
    exact = _exact_generators(generator_matrices)
    if exact is None:
        matrices = np.frombuffer(generator_matrices).reshape(-1, 3, 3)
        return tuple(Image(symmetry.represent(matrix[None]), 1.0, exact=False) for matrix in matrices)
    scale = 2.0**symmetry.rank
    return tuple(Image(symmetry.represent(doubled), scale, exact=True) for doubled in exact)


@lru_cache(maxsize=256)
def _exact_generators(generator_matrices: bytes) -> tuple[FloatArray, ...] | None:
    """Twice each generator as exact numbers, without the sqrt(3) part where there is none; or None."""
    doubled = doubled_exact(np.frombuffer(generator_matrices).reshape(-1, 3, 3))
    if doubled is None:
        return None
    return tuple(frozen(m if m[1].any() else m[:1]) for m in np.moveaxis(doubled, 1, 0))


def defect(space: TensorSpace, action: Action) -> FloatArray:
    """sum (1 - D)^T (1 - D) over the generators, in orthonormal components, shape (N, N).

    Component c of a tensor stands there times the square root of its multiplicity. A vanishing trace is
    one more condition.
    """
    scale = np.sqrt(space.symmetry.multiplicities)
    one = np.eye(len(scale))
    total = np.zeros_like(one)
    generators = images(space.symmetry, action.generator_matrices)
    for image, sign in zip(generators, action.generators[1].tolist(), strict=True):
        change = one - image.matrix * (sign * scale[:, None] / scale)
        total += change.T @ change
    if space.traceless:
        trace = space.trace_vector / scale
        total += np.outer(trace, trace)
    return total
