"""What counts as noise: a relative level, stated standard uncertainties, the rounding of printed digits.

One rule serves all: a tensor obeys unless chance alone gives so large a residual less than once in a thousand
times. A relative level is taken to be spread evenly over the N components that index symmetry leaves, so that
each has the standard uncertainty level * |T| / sqrt(N) in the orthonormal metric.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from typing import Final

import numpy as np

from sitesym.arrays import FloatArray
from sitesym.audit.layouts import contracted
from sitesym.audit.measurement import Layout, Measurement
from sitesym.audit.neumann import Subspaces
from sitesym.audit.orders import Order
from sitesym.audit.result import Residual

#: A tensor with known uncertainties obeys when chance gives so large a chi-squared at least this often.
SMALLEST_P: Final = 0.001

#: An uncertainty stated as zero counts as this fraction of the largest entry: no weight can be infinite.
_SMALLEST_SIGMA = 1e-6
#: Rounding of the computer's numbers, relative to the tensor.
_NUMERICAL = 1e-9
#: Residuals beyond so many standard uncertainties of the whole tensor need no closer look.
_SCREENING_DEVIATIONS = 3.0
#: A tensor shorter than so many standard uncertainties of it could be noise altogether.
_DROWNED_DEVIATIONS = 2.0
#: A single entry may deviate by so many of its standard uncertainties.
_ENTRY_DEVIATIONS = 3.0


@dataclass(frozen=True, eq=False)
class Noise:
    """Noise of one reading of a measurement, over the entries of the contracted array, shape (n,).

    ``relative``: level relative to the length of the tensor, used where ``sigma`` is None. ``sigma`` and
    ``step``: per entry, in the unit of the entries.
    """

    relative: float
    sigma: FloatArray | None
    step: FloatArray | None

    def tolerance(self, spaces: Subspaces, length: float) -> float:
        """Largest residual that noise may leave, for a tensor of this length, both in the orthonormal metric.

        With known uncertainties a bound for screening only: the verdict is that of `chi_squared`.
        """
        share = 1.0 / max(spaces.constraints + spaces.independent, 1)
        square = (_NUMERICAL * length) ** 2
        if self.step is not None:
            rounding = float(((spaces.space.weights * self.step) ** 2).sum()) / 12.0
            square += largest_by_chance(spaces.constraints) * rounding * share
        if self.sigma is not None:
            variance = float(((spaces.space.weights * self.sigma) ** 2).sum())
            square += _SCREENING_DEVIATIONS**2 * variance
        elif spaces.independent:
            # Where everything must vanish the tensor sets no scale for its own noise.
            square += largest_by_chance(spaces.constraints) * (self.relative * length) ** 2 * share
        return float(np.sqrt(square))

    def spread_tolerance(self, spaces: Subspaces, length: float) -> float:
        """The same with stated uncertainties spread evenly over the components: no bound, but what to expect.

        `tolerance` has to hold however they are spread, and is no measure of what an operation may change.
        """
        if self.sigma is None:
            return self.tolerance(spaces, length)
        variance = float(((spaces.space.weights * self.sigma) ** 2).sum())
        share = 1.0 / max(spaces.constraints + spaces.independent, 1)
        even = Noise(0.0, None, self.step).tolerance(spaces, length)
        return float(np.sqrt(even**2 + largest_by_chance(spaces.constraints) * variance * share))

    def drowns(self, spaces: Subspaces, coordinates: FloatArray) -> bool:
        """Whether the whole tensor could be noise.

        Rounding moves an entry by half a step at most: it never makes a number that is printed of nothing.
        """
        weights = spaces.space.weights
        half_step = np.zeros(1) if self.step is None else weights * self.step / 2.0
        sigma = np.zeros(1) if self.sigma is None else weights * self.sigma
        least = np.maximum(np.abs(coordinates) - half_step, 0.0)
        return float(np.linalg.norm(least)) <= _DROWNED_DEVIATIONS * float(
            np.linalg.norm(np.broadcast_to(sigma, least.shape))
        )

    def entry_tolerance(self, spaces: Subspaces, length: float) -> FloatArray:
        """Largest deviation of each entry from its expected value that is no finding, shape (n,)."""
        weights = spaces.space.weights
        if self.sigma is not None:
            tolerance = _ENTRY_DEVIATIONS * self.sigma
        else:
            share = self.relative * length / np.sqrt(spaces.constraints + spaces.independent)
            tolerance = _ENTRY_DEVIATIONS * share / weights
        if self.step is not None:
            tolerance = tolerance + self.step
        floored: FloatArray = tolerance + _NUMERICAL * length / weights
        return floored


def noise_of(
    measurement: Measurement, layout: Layout, order: Order, divisors: FloatArray, relative: float
) -> Noise:
    """The noise of a reading; ``divisors`` (n,) are what its entries were divided by."""
    arrays: list[FloatArray | None] = []
    for value in (measurement.sigma, measurement.rounding):
        if value is None:
            arrays.append(None)
        else:
            full = np.broadcast_to(np.asarray(value, dtype=np.float64), measurement.values.shape)
            arrays.append(contracted(measurement.kind, full, layout, order).reshape(-1) / divisors)
    return Noise(relative, arrays[0], arrays[1])


def judged(noise: Noise, spaces: Subspaces, coordinates: FloatArray, to_group_axes: FloatArray) -> Residual:
    """The residual of a tensor with coordinates (n,) in its own axes; the rotation (3, 3) leads to the
    group's.
    """
    moved = spaces.space.rotated(to_group_axes[None], coordinates[:, None])[0, :, 0]
    absolute = float(np.linalg.norm(spaces.forbidden_part(moved)))
    length = float(np.linalg.norm(coordinates))
    relative = absolute / length if length else 0.0
    tolerance = noise.tolerance(spaces, length)
    if noise.sigma is None:
        return Residual(absolute, relative, tolerance, absolute <= tolerance)
    chi2, dof = chi_squared(noise, spaces, coordinates, to_group_axes)
    p_value = upper_tail(chi2, dof)
    return Residual(absolute, relative, tolerance, p_value >= SMALLEST_P, chi2, dof, p_value)


def chi_squared(
    noise: Noise, spaces: Subspaces, coordinates: FloatArray, to_group_axes: FloatArray
) -> tuple[float, int]:
    """Chi-squared of the best allowed tensor by least squares with the stated uncertainties, and its degrees
    of freedom.

    Entries that index symmetry makes equal are one number written twice and count once.
    """
    space = spaces.space
    design = space.rotated(to_group_axes.T[None], spaces.allowed.T)[0]
    basis = space.index_basis
    sigma = np.zeros(space.size) if noise.sigma is None else noise.sigma
    step = np.zeros(space.size) if noise.step is None else noise.step
    spread = space.weights * np.sqrt(sigma**2 + step**2 / 12.0)
    spread = np.maximum(spread, _SMALLEST_SIGMA * float(np.abs(coordinates).max(initial=0.0)))
    # A component that stands in c entries has weight 1/sqrt(c) in each: c = 1 / (sum of fourth powers).
    scale = np.sqrt((basis**2) @ spread**2 / (basis**4).sum(axis=1))
    scale = np.where(scale > 0.0, scale, 1.0)
    left, right = (basis @ design) / scale[:, None], (basis @ coordinates) / scale
    fitted = left @ np.linalg.lstsq(left, right, rcond=None)[0] if spaces.independent else 0.0
    return float(((right - fitted) ** 2).sum()), spaces.constraints


@lru_cache(maxsize=256)
def largest_by_chance(dof: int) -> float:
    """The chi-squared that chance exceeds once in a thousand times."""
    from scipy.special import chdtri

    return float(chdtri(dof, SMALLEST_P)) if dof else 0.0


def upper_tail(chi2: float, dof: int) -> float:
    """How often chance alone gives a chi-squared at least this large."""
    from scipy.special import chdtrc

    return float(chdtrc(dof, chi2)) if dof else 1.0
