"""Which records belong to one crystal, and their matrices in common axes and SI units for cross-checking."""

from __future__ import annotations

import re
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import Final

import numpy as np

from sitesym.arrays import FloatArray
from sitesym.audit.as_read import ReadMatrix
from sitesym.audit.crosschecks import CrossCheck, Quantity, cross_checks
from sitesym.audit.crystal_references import CrystalReference
from sitesym.audit.measurement import Measurement
from sitesym.audit.units import si_factor
from sitesym.tensors import to_full, to_matrix, turned

#: Words of a record's conditions that tell a permittivity at constant stress from one at constant strain.
_FREE: Final = re.compile(r"\b(constant stress|free|unclamped)\b")
_CLAMPED: Final = re.compile(r"\b(constant strain|clamped)\b")


@dataclass(frozen=True, eq=False)
class RelatedRecord:
    """What cross-checking needs to know of an audited record."""

    id: str
    crystal: CrystalReference | None
    sample: str
    measurement: Measurement
    read: ReadMatrix

    @property
    def crystal_key(self) -> tuple[CrystalReference | None, str] | None:
        """Equal for records of one crystal; None where nothing says which crystal it is.

        A point-group symbol is shared by many crystals: there the records must name their sample.
        """
        is_structure = self.crystal is not None and (
            self.crystal.is_structure_text or self.crystal.path.is_file()
        )
        return (self.crystal if is_structure else None, self.sample) if is_structure or self.sample else None


def checks_among(records: Sequence[RelatedRecord], noise: float) -> tuple[CrossCheck, ...]:
    """Cross-checks between the records of each crystal."""
    crystals: dict[tuple[CrystalReference | None, str], list[RelatedRecord]] = {}
    for record in records:
        if record.crystal_key is not None:
            crystals.setdefault(record.crystal_key, []).append(record)
    return tuple(
        check for group in crystals.values() for check in cross_checks(list(_quantities(group)), noise)
    )


def _quantities(records: Sequence[RelatedRecord]) -> Iterator[Quantity]:
    """The matrices as written where all state the same axes; else turned into the axes of the first."""
    alike = all(_same_axes(record, records[0]) for record in records)
    for record in records:
        factor = si_factor(record.measurement.kind, record.measurement.unit)
        if factor is not None:
            turn = np.eye(3) if alike else records[0].read.rotation @ record.read.rotation.T
            yield _quantity(record, factor, turn)


def _same_axes(one: RelatedRecord, other: RelatedRecord) -> bool:
    first, second = one.measurement.axes, other.measurement.axes
    if isinstance(first, str) or isinstance(second, str):
        return isinstance(first, str) and isinstance(second, str) and first == second
    return bool(np.allclose(first, second, atol=1e-6))


def _quantity(record: RelatedRecord, factor: float, turn: FloatArray) -> Quantity:
    read, kind = record.read, record.measurement.kind
    straight = bool(np.abs(turn - np.eye(3)).max() < 1e-9)
    matrix = (
        read.matrix if straight else to_matrix(kind, turned(to_full(kind, read.matrix), turn, kind.axial))
    )
    # Uncertainties belong to entries in the axes of the record; turned ones are not known entry by entry.
    sigma = read.sigma * factor if straight and read.sigma is not None else None
    step = read.step * factor if straight and read.step is not None else None
    return Quantity(
        record.id,
        kind,
        matrix * factor,
        read.group if straight else read.group.rotated(turn),
        sigma,
        step,
        _clamping(record.measurement),
    )


def _clamping(measurement: Measurement) -> str:
    if measurement.kind.name != "permittivity":
        return ""
    free, clamped = (pattern.search(measurement.conditions) is not None for pattern in (_FREE, _CLAMPED))
    return "" if free == clamped else ("T" if free else "S")
