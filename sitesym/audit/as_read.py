"""The contracted matrix that a reading of a measurement stands for, with its uncertainties."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from sitesym.arrays import FloatArray, frozen
from sitesym.audit.arrayspace import array_space
from sitesym.audit.layouts import contracted
from sitesym.audit.measurement import Measurement
from sitesym.audit.result import AuditResult, Reading
from sitesym.audit.variants import variants_of
from sitesym.groups import PointGroup


@dataclass(frozen=True, eq=False)
class ReadMatrix:
    """Contracted array in the order 11 22 33 23 13 12 with the factors of the kind, in the unit as stated.

    ``group``: the crystal's, in the axes of the matrix. ``sigma`` and ``step`` (one unit of the last digit):
    of each entry, or None. ``words``: how the array was read.
    """

    matrix: FloatArray
    group: PointGroup
    sigma: FloatArray | None
    step: FloatArray | None
    rotation: FloatArray
    words: str


def chosen_reading(result: AuditResult) -> Reading | None:
    """The stated reading where the tensor obeys in it, else the best one found, else the stated one."""
    if result.stated is not None and (
        result.verdict in ("consistent", "no-constraint") or result.best is None
    ):
        return result.stated
    return result.best


def matrix_as_read(result: AuditResult, reading: Reading) -> ReadMatrix:
    """The measurement of a result in one of its readings. A slip the reading names is not put right."""
    measurement = result.measurement
    divisors = _divisors(measurement, reading)

    def entries(values: FloatArray | float) -> FloatArray:
        whole = np.broadcast_to(np.asarray(values, dtype=np.float64), measurement.values.shape)
        return frozen(contracted(measurement.kind, whole, reading.layout, reading.order) / divisors)

    return ReadMatrix(
        entries(measurement.values),
        result.group.rotated(reading.rotation),
        None if measurement.sigma is None else entries(measurement.sigma),
        None if measurement.rounding is None else entries(measurement.rounding),
        reading.rotation,
        reading.words,
    )


def _divisors(measurement: Measurement, reading: Reading) -> FloatArray:
    """What the reading divides each entry by, in the shape of the contracted array."""
    told = reading.order, reading.layout, reading.factor
    divisors = next(
        variant.divisors
        for variant in variants_of(measurement)
        if (variant.order, variant.layout, variant.factor) == told
    )
    return divisors.reshape(array_space(measurement.kind).blocks)
