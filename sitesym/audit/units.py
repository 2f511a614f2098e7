"""Units of a measurement: factor to the kind's SI unit, and whether the size of the values fits the unit.

A unit that is not understood, or not stated, stays 'unknown'; the values are then left as they are.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from sitesym.arrays import FloatArray
from sitesym.audit.unit_text import UnitValue, read_unit
from sitesym.tensors import TensorKind, all_kinds

UNKNOWN: Final = "unknown"

#: Electric constant, F/m (CODATA 2018).
VACUUM_PERMITTIVITY: Final = 8.8541878128e-12
_RELATIVE_TO_VACUUM: Final = {
    "permittivity": VACUUM_PERMITTIVITY,
    "impermeability": 1.0 / VACUUM_PERMITTIVITY,
}


@dataclass(frozen=True)
class Magnitudes:
    """Usual sizes of the largest component of a kind, in its SI unit, and units it is quoted in."""

    smallest: float
    largest: float
    quoted: tuple[str, ...]


#: Common practice, no source: from soft molecular crystals to diamond, from quartz to relaxors.
USUAL_MAGNITUDES: Final = {
    "elastic-stiffness": Magnitudes(1e9, 1.5e12, ("Pa", "GPa", "kbar", "Mbar", "eV/angstrom^3")),
    "elastic-compliance": Magnitudes(5e-13, 2e-9, ("1/Pa", "1/GPa", "1/TPa", "1/Mbar", "1e-12 m^2/N")),
    "third-order-elastic": Magnitudes(3e9, 1e13, ("Pa", "GPa", "kbar", "Mbar")),
    "piezoelectric-strain": Magnitudes(5e-14, 1e-8, ("C/N", "pC/N", "m/V", "1e-12 C/N", "1e-10 C/N")),
    "piezoelectric-stress": Magnitudes(1e-3, 60.0, ("C/m^2", "uC/cm^2", "e/angstrom^2")),
    "piezoelectric-voltage": Magnitudes(1e-4, 1.0, ("m^2/C", "V m/N", "mV m/N")),
    "electro-optic": Magnitudes(5e-14, 5e-9, ("m/V", "pm/V", "cm/V")),
    "second-harmonic": Magnitudes(1e-14, 1e-9, ("m/V", "pm/V")),
    "permittivity": Magnitudes(1.0, 5e4, ("1", "F/m", "pF/m")),
    "pyroelectric": Magnitudes(1e-7, 1e-2, ("C/(m^2 K)", "uC/(m^2 K)", "nC/(cm^2 K)")),
    "spontaneous-polarisation": Magnitudes(1e-4, 2.0, ("C/m^2", "uC/cm^2")),
    "thermal-expansion": Magnitudes(1e-7, 5e-4, ("1/K", "1e-6/K")),
    "thermal-conductivity": Magnitudes(5e-2, 5e3, ("W/(m K)", "W/(cm K)", "mW/(m K)")),
    "elasto-optic": Magnitudes(5e-3, 2.0, ("1",)),
}  # fmt: skip
MAGNITUDE_SOURCE: Final = "common practice, no source"


def si_factor(kind: TensorKind, unit: str) -> float | None:
    """Size of the stated unit in the kind's SI unit; None where the unit is unknown or of another quantity.

    >>> from sitesym.tensors import kind
    >>> si_factor(kind("elastic-stiffness"), "kbar"), si_factor(kind("elastic-stiffness"), "unknown")
    (100000000.0, None)
    """
    stated, own = read_unit(unit), read_unit(kind.unit)
    if stated is None or own is None:
        return None
    if stated.dimension == own.dimension:
        return stated.factor / own.factor
    return _relative(kind, stated)


def _relative(kind: TensorKind, stated: UnitValue) -> float | None:
    """Absolute permittivities and their inverses, taken relative to the vacuum."""
    reference = _RELATIVE_TO_VACUUM.get(kind.name)
    permittivity = read_unit("F/m")
    if reference is None or permittivity is None:
        return None
    dimension = permittivity.power(1 if kind.name == "permittivity" else -1).dimension
    return stated.factor / reference if stated.dimension == dimension else None


def unit_warnings(kind: TensorKind, unit: str, values: FloatArray) -> tuple[str, ...]:
    """What is doubtful about the unit: not understood, of another quantity, or unusual for the values."""
    if unit == UNKNOWN:
        return ()
    stated = read_unit(unit)
    if stated is None:
        return (f"the unit {unit!r} is not understood; the SI unit of {kind.name} is {kind.unit}",)
    if si_factor(kind, unit) is None:
        return (_of_another_quantity(kind, unit, stated),)
    return _magnitude_warnings(kind, unit, values)


def _of_another_quantity(kind: TensorKind, unit: str, stated: UnitValue) -> str:
    own = [other.name for other in all_kinds() if _dimension(other) == stated.dimension]
    meant = f"; it is a unit of {', '.join(own)}" if own and stated.dimension != (0, 0, 0, 0, 0) else ""
    return f"{unit} is no unit of {kind.name} ({kind.unit}){meant}"


def _dimension(kind: TensorKind) -> tuple[int, ...] | None:
    unit = read_unit(kind.unit)
    return unit.dimension if unit is not None else None


def _magnitude_warnings(kind: TensorKind, unit: str, values: FloatArray) -> tuple[str, ...]:
    usual, factor = USUAL_MAGNITUDES.get(kind.name), si_factor(kind, unit)
    largest = float(np.abs(values).max(initial=0.0))
    if usual is None or factor is None or largest == 0.0:
        return ()
    if usual.smallest <= largest * factor <= usual.largest:
        return ()
    fitting = [name for name in usual.quoted if _fits(kind, usual, name, largest)]
    meant = f"; the same numbers would be usual in {' or '.join(fitting)}" if fitting else ""
    low, high = usual.smallest / factor, usual.largest / factor
    return (
        f"the largest entry is {largest:g} {unit}, outside {low:g} to {high:g} {unit} "
        f"({MAGNITUDE_SOURCE}){meant}",
    )


def _fits(kind: TensorKind, usual: Magnitudes, unit: str, largest: float) -> bool:
    factor = si_factor(kind, unit)
    return factor is not None and usual.smallest <= largest * factor <= usual.largest
