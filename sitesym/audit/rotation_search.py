"""Search over all rotations: a fixed grid, then damped Gauss-Newton steps from its best points.

The grid is the same in every run. Source of the map from three numbers to rotations: K. Shoemake, in Graphics
Gems III (1992), p. 124.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from sitesym.arrays import FloatArray, frozen
from sitesym.audit.neumann import Subspaces
from sitesym.groups.symbols import rotation_about

_GRID_POINTS = 600
_STARTS = 16
_STEPS = 30
#: Singular values of the derivative below this fraction of the tensor's length: the turn changes nothing.
_NO_CHANGE = 1e-4
#: Steps shorter than this (radians) end a refinement.
_SHORTEST_STEP = 1e-10


@dataclass(frozen=True, eq=False)
class FoundRotation:
    """``rotation`` (3, 3) takes the tensor's axes to the group's; ``residual`` what is left; ``effective``:
    how many of the three angles the residual depends on there.
    """

    rotation: FloatArray
    residual: float
    effective: int

    @property
    def choices(self) -> int:
        """How many hypotheses the search counts as, besides the angles fitted."""
        return _GRID_POINTS


def best_rotation(spaces: Subspaces, coordinates: FloatArray) -> FoundRotation:
    """The rotation that leaves the smallest forbidden part of a tensor with coordinates (n,)."""
    grid = rotation_grid()
    residuals = np.linalg.norm(_forbidden(spaces, grid, coordinates), axis=1)
    order = np.argsort(residuals, kind="stable")[:_STARTS]
    length = float(np.linalg.norm(coordinates))
    refined = [refined_rotation(spaces, coordinates, grid[k], length) for k in order]
    return min(refined, key=lambda found: found.residual)


def refined_rotation(
    spaces: Subspaces, coordinates: FloatArray, start: FloatArray, length: float
) -> FoundRotation:
    """Levenberg-Marquardt from one start (3, 3), for a tensor with coordinates (n,) of a length; every step
    that is taken makes the residual smaller.
    """
    rotation, damping = start, 1e-3
    vector, slope = _with_slope(spaces, rotation, coordinates)
    for _ in range(_STEPS):
        normal = slope.T @ slope
        damped = normal + damping * (np.diag(np.diag(normal)) + 1e-12 * length**2 * np.eye(3))
        # A turn that does not change the tensor makes the matrix singular: the shortest step leaves it out.
        shortest = np.linalg.lstsq(damped, slope.T @ vector, rcond=None)[0]
        step = np.asarray(-shortest, dtype=np.float64)
        trial = rotation_of(step) @ rotation
        trial_vector, trial_slope = _with_slope(spaces, trial, coordinates)
        if trial_vector @ trial_vector < vector @ vector:
            rotation, vector, slope, damping = trial, trial_vector, trial_slope, damping / 10.0
        else:
            damping *= 10.0
        if np.linalg.norm(step) < _SHORTEST_STEP or damping > 1e8:
            break
    singular = np.linalg.svd(slope, compute_uv=False)
    effective = int((singular > _NO_CHANGE * length).sum())
    return FoundRotation(rotation, float(np.linalg.norm(vector)), effective)


def _with_slope(
    spaces: Subspaces, rotation: FloatArray, coordinates: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Forbidden part (n,) and its derivatives by a further turn about x, y, z, shape (n, 3)."""
    moved = spaces.space.rotated(rotation[None], coordinates[:, None])[0, :, 0]
    slope = np.stack([generator @ moved for generator in spaces.space.generators], axis=1)
    return spaces.forbidden_part(moved), spaces.forbidden_part(slope)


def _forbidden(spaces: Subspaces, rotations: FloatArray, coordinates: FloatArray) -> FloatArray:
    moved = spaces.space.rotated(rotations, coordinates[:, None])[:, :, 0]
    rest: FloatArray = moved - (moved @ spaces.allowed.T) @ spaces.allowed
    return rest


def rotation_of(vector: FloatArray) -> FloatArray:
    """The rotation (3, 3) by |vector| radians about the vector."""
    angle = float(np.linalg.norm(vector))
    return np.eye(3) if angle < 1e-15 else rotation_about(vector, angle)


@lru_cache(maxsize=1)
def rotation_grid() -> FloatArray:
    """Rotations spread evenly over all, shape (m, 3, 3): an additive sequence of three irrational numbers."""
    # The root of x^4 = x + 1 generates the most even additive sequence in three dimensions.
    ratio = 1.2207440846057596
    numbers = (0.5 + np.outer(np.arange(1, _GRID_POINTS + 1), ratio ** -np.arange(1.0, 4.0))) % 1.0
    radius, first, second = numbers[:, 0], 2 * np.pi * numbers[:, 1], 2 * np.pi * numbers[:, 2]
    inner, outer = np.sqrt(1.0 - radius), np.sqrt(radius)
    x, y, z, w = inner * np.sin(first), inner * np.cos(first), outer * np.sin(second), outer * np.cos(second)
    rows = [
        [1 - 2 * (y * y + z * z), 2 * (x * y - z * w), 2 * (x * z + y * w)],
        [2 * (x * y + z * w), 1 - 2 * (x * x + z * z), 2 * (y * z - x * w)],
        [2 * (x * z - y * w), 2 * (y * z + x * w), 1 - 2 * (x * x + y * y)],
    ]
    return frozen(np.moveaxis(np.array(rows), 2, 0))
