"""Many records: each audited, with what belongs to it, and quantities of one crystal against each other."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass, field, replace
from pathlib import Path

import numpy as np

from sitesym.audit.as_read import ReadMatrix, chosen_reading, matrix_as_read
from sitesym.audit.auditing import audit
from sitesym.audit.crosschecks import CrossCheck
from sitesym.audit.crystal_references import CrystalReference, CrystalShelf, Host
from sitesym.audit.measurement import Measurement
from sitesym.audit.projection import Projection, nearest_allowed
from sitesym.audit.records import Record, records_of_file
from sitesym.audit.related import RelatedRecord, checks_among
from sitesym.audit.result import AuditResult
from sitesym.audit.stability import ELASTIC_KINDS, Stability, elastic_stability
from sitesym.audit.units import unit_warnings
from sitesym.choices import ReadingChoices
from sitesym.errors import SitesymError, TensorInputError, UsageError
from sitesym.groups import standard_rotation


@dataclass(frozen=True, eq=False)
class AuditedRecord:
    """A record with its answer, or with the error that prevented one.

    ``read``: the matrix the answer refers to, None where the array could not be read in any way.
    ``stability``: of elastic tensors.
    """

    record: Record
    crystal: CrystalReference | None = None
    host: Host | None = None
    result: AuditResult | None = None
    read: ReadMatrix | None = None
    stability: Stability | None = None
    warnings: tuple[str, ...] = ()
    error: SitesymError | None = None

    def projected(self) -> Projection | None:
        """The nearest allowed tensor, in the reading the answer refers to; None where there is no such."""
        if self.result is None or self.read is None:
            return None
        return nearest_allowed(
            self.result.measurement.kind, self.read.matrix, self.read.group, self.read.sigma
        )


@dataclass(frozen=True, eq=False)
class AuditRun:
    """The records in their order, cross-checks among them, and what was decided beforehand.

    ``unread``: the errors, with the file's name, of files that could not be read at all. ``choices``: of
    reading the crystals.
    """

    records: tuple[AuditedRecord, ...]
    cross_checks: tuple[CrossCheck, ...]
    noise: float
    tolerance_angstrom: float
    unread: tuple[SitesymError, ...] = ()
    choices: ReadingChoices = field(default_factory=lambda: ReadingChoices())


def audit_files(
    paths: Iterable[str | Path],
    shelf: CrystalShelf,
    noise: float,
    explain: bool = True,
    crystal: str | None = None,
) -> AuditRun:
    """Audit every record of the files. ``crystal`` (a path or a symbol) serves records that name none.

    What is wrong with a record stands in its answer, and a file that cannot be read stands aside with its
    error. Raises UsageError for a noise that is no fraction.
    """
    default = CrystalReference(crystal) if crystal is not None else None
    audited: list[AuditedRecord] = []
    unread: list[SitesymError] = []
    for path in paths:
        try:
            records = list(records_of_file(path))
        except SitesymError as error:
            unread.append(error)
            continue
        audited.extend(audited_record(record, shelf, noise, explain, default) for record in records)
    checks = checks_among(list(_related(audited)), noise)
    return AuditRun(tuple(audited), checks, noise, shelf.tolerance_angstrom, tuple(unread), shelf.choices)


def audited_record(
    record: Record,
    shelf: CrystalShelf,
    noise: float,
    explain: bool = True,
    default: CrystalReference | None = None,
) -> AuditedRecord:
    """One record audited; what prevents that, its own error or that of its crystal, stands in the answer."""
    if record.measurement is None:
        return AuditedRecord(record, error=record.error)
    measurement, reference = record.measurement, record.crystal or default
    told = AuditedRecord(
        record, reference, warnings=unit_warnings(measurement.kind, measurement.unit, measurement.values)
    )
    try:
        return _answered(told, measurement, shelf, noise, explain)
    except UsageError:
        raise
    except SitesymError as error:
        return replace(told, error=error.in_file(record.place))
    except np.linalg.LinAlgError as error:
        return replace(told, error=_not_computed(error).in_file(record.place))


def _answered(
    told: AuditedRecord, measurement: Measurement, shelf: CrystalShelf, noise: float, explain: bool
) -> AuditedRecord:
    if told.crystal is None:
        raise TensorInputError(
            "the record names no crystal",
            "",
            "a path, the text of a structure file or a point-group symbol under crystal",
            "add it, or give one for all such records",
        )
    host = shelf.host(told.crystal)
    result = audit(measurement, host, noise, explain)
    reading = chosen_reading(result)
    read = None if reading is None else matrix_as_read(result, reading)
    return replace(told, host=host, result=result, read=read, stability=_stability(result, read))


def _not_computed(error: np.linalg.LinAlgError) -> SitesymError:
    """Numbers that an iteration of the linear algebra does not come to an end with."""
    return TensorInputError(
        "the numbers are beyond what can be computed with",
        str(error),
        "entries of comparable size",
        "look at the largest and the smallest entry",
    )


def _stability(result: AuditResult, read: ReadMatrix | None) -> Stability | None:
    kind = result.measurement.kind
    if read is None or kind.name not in ELASTIC_KINDS:
        return None
    to_standard = standard_rotation(result.group) @ read.rotation.T
    return elastic_stability(kind, read.matrix, read.group, result.noise, read.sigma, to_standard)


def _related(audited: Iterable[AuditedRecord]) -> Iterator[RelatedRecord]:
    for one in audited:
        if one.result is not None and one.read is not None:
            record = one.record
            yield RelatedRecord(record.id, one.crystal, record.sample, one.result.measurement, one.read)
