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
class Images:
    """What proper matrices do to the components: ``parts`` / ``scale``, T'_c = sum_k D_ck T_k.

    ``parts``: (1 or 2, generators, N, N) integers a, b of a + b sqrt(3) in standard axes (``exact``), else
    floats.
    """

    parts: FloatArray
    scale: float
    exact: bool

    @cached_property
    def largest_row_sum(self) -> float:
        """Largest sum of absolute entries in a row of a or b."""
        return float(np.abs(self.parts).sum(axis=-1).max(initial=0.0))

    @cached_property
    def matrices(self) -> FloatArray:
        """D as floats, shape (generators, N, N)."""
        total: FloatArray = self.parts[0] if len(self.parts) == 1 else self.parts[0] + ROOT * self.parts[1]
        return total / self.scale


@lru_cache(maxsize=1024)
def images(symmetry: IndexSymmetry, generator_matrices: bytes) -> Images:
    """The images of generators given as ``Action.generator_matrices``."""
    exact = _exact_generators(generator_matrices)
    if exact is None:
        matrices = np.frombuffer(generator_matrices).reshape(1, -1, 3, 3)
        return Images(symmetry.represent(matrices), 1.0, exact=False)
    return Images(symmetry.represent(exact), 2.0**symmetry.rank, exact=True)


@lru_cache(maxsize=256)
def _exact_generators(generator_matrices: bytes) -> FloatArray | None:
    """Twice the generators as exact numbers, without the sqrt(3) part where there is none; or None."""
    doubled = doubled_exact(np.frombuffer(generator_matrices).reshape(-1, 3, 3))
    if doubled is None:
        return None
    return frozen(doubled if doubled[1].any() else doubled[:1])


def defect(space: TensorSpace, action: Action) -> FloatArray:
    """sum (1 - D)^T (1 - D) over the generators, in orthonormal components, shape (N, N).

    Component c of a tensor stands there times the square root of its multiplicity. A vanishing trace is
    one more condition.
    """
    scale = np.sqrt(space.symmetry.multiplicities)
    signs = action.generators[1][:, None, None]
    matrices = images(space.symmetry, action.generator_matrices).matrices
    change = (np.eye(len(scale)) - matrices * (signs * (scale[:, None] / scale))).reshape(-1, len(scale))
    total: FloatArray = change.T @ change
    if space.traceless:
        trace = space.trace_vector / scale
        total += np.outer(trace, trace)
    return total
