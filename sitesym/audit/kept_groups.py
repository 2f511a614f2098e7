"""How much an operation may change a tensor so that its group still agrees with the stated noise."""

from __future__ import annotations

import numpy as np

from sitesym.arrays import FloatArray
from sitesym.audit.neumann import subspaces
from sitesym.audit.own_symmetry import Kept, group_of, kept_operations
from sitesym.audit.search import Field
from sitesym.audit.uncertainty import judged, noise_of

#: How often a tolerance is halved until the group it leaves agrees with stated uncertainties.
_HALVINGS = 6


def tolerances_to_try(field: Field, number: int) -> list[float]:
    """Tolerances of the change by an operation for a variant, the largest first, in the unit of the tensor.

    A relative level gives one. Uncertainties need not be even, so that the first is a guess.
    """
    length = float(np.linalg.norm(field.variants[number].coordinates))
    # Where everything must vanish the tensor sets no scale for its own noise.
    first = field.noise_left(number) if field.spaces.independent else field.noise * length
    if field.measurement.sigma is None:
        return [first]
    return [first / 2.0**k for k in range(_HALVINGS)]


def agrees(field: Field, number: int, kept: Kept, to_axes: FloatArray) -> bool:
    """Whether a variant obeys the operations, in axes that ``to_axes`` (3, 3) leads to, within its
    uncertainties; without stated ones the operations were chosen so.
    """
    if field.measurement.sigma is None:
        return True
    read, kind = field.variants[number], field.spaces.space.kind
    noise = noise_of(field.measurement, read.layout, read.order, read.divisors, field.noise)
    return judged(noise, subspaces(kind, group_of(kept)), read.coordinates, to_axes).within


def symmetry_tolerance(field: Field, number: int, to_axes: FloatArray) -> float:
    """The largest tolerance to try whose operations agree with the noise; zero where none does."""
    kind = field.spaces.space.kind
    moved = field.spaces.space.rotated(to_axes[None], field.variants[number].coordinates[:, None])[0, :, 0]
    for tolerance in tolerances_to_try(field, number):
        if agrees(field, number, kept_operations(kind, moved, tolerance), to_axes):
            return tolerance
    return 0.0
