"""Elastic constants of a polycrystal without texture: Voigt, Reuss and Hill averages, and the bounds check.

W. Voigt, Lehrbuch der Kristallphysik (1910); A. Reuss, Z. angew. Math. Mech. 9 (1929) 49; R. Hill, Proc.
Phys. Soc. A 65 (1952) 349. Anisotropy: S. I. Ranganathan, M. Ostoja-Starzewski, Phys. Rev. Lett. 101 (2008)
055504.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from sitesym.arrays import FloatArray


@dataclass(frozen=True)
class ElasticAverages:
    """Moduli in the unit of the stiffness; Poisson's ratio and the anisotropy index have none.

    ``anisotropy`` is 5 G_V/G_R + K_V/K_R - 6: zero for an isotropic solid.
    """

    bulk_voigt: float
    bulk_reuss: float
    bulk_hill: float
    shear_voigt: float
    shear_reuss: float
    shear_hill: float
    young_hill: float
    poisson_hill: float
    anisotropy: float

    @property
    def bounds_hold(self) -> bool:
        """Whether 0 < Reuss <= Voigt, as it must be for a stable crystal (to rounding of the arithmetic)."""
        slack = 1.0 + 1e-9
        return (
            0.0 < self.bulk_reuss <= slack * self.bulk_voigt
            and 0.0 < self.shear_reuss <= slack * self.shear_voigt
        )


def elastic_averages(stiffness: FloatArray, compliance: FloatArray) -> ElasticAverages | None:
    """Averages of a stiffness (6, 6) and its inverse, with engineering factors; None where they do not
    exist (a modulus is zero).
    """
    diagonal, off, shear = _sums(stiffness)
    bulk_voigt = (diagonal + 2.0 * off) / 9.0
    shear_voigt = (diagonal - off + 3.0 * shear) / 15.0
    diagonal, off, shear = _sums(compliance)
    inverse_bulk = diagonal + 2.0 * off
    inverse_shear = (4.0 * diagonal - 4.0 * off + 3.0 * shear) / 15.0
    if inverse_bulk == 0.0 or inverse_shear == 0.0:
        return None
    bulk_reuss, shear_reuss = 1.0 / inverse_bulk, 1.0 / inverse_shear
    bulk, modulus = (bulk_voigt + bulk_reuss) / 2.0, (shear_voigt + shear_reuss) / 2.0
    stiffest = 3.0 * bulk + modulus
    if stiffest == 0.0:
        return None
    return ElasticAverages(
        bulk_voigt,
        bulk_reuss,
        bulk,
        shear_voigt,
        shear_reuss,
        modulus,
        9.0 * bulk * modulus / stiffest,
        (3.0 * bulk - 2.0 * modulus) / (2.0 * stiffest),
        5.0 * shear_voigt / shear_reuss + bulk_voigt / bulk_reuss - 6.0,
    )


def _sums(matrix: FloatArray) -> tuple[float, float, float]:
    """11 + 22 + 33, 12 + 13 + 23 (mean of both triangles) and 44 + 55 + 66."""
    symmetric = (matrix + matrix.T) / 2.0
    normal, shear = symmetric[:3, :3], symmetric[3:, 3:]
    return float(np.trace(normal)), float(np.triu(normal, 1).sum()), float(np.trace(shear))
