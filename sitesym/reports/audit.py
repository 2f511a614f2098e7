"""The `audit` document: for each record the verdict with its evidence, then what the records say together."""

from __future__ import annotations

from collections import Counter
from collections.abc import Mapping
from typing import Any

from sitesym.audit.batch import AuditedRecord, AuditRun
from sitesym.audit.crosschecks import CrossCheck
from sitesym.audit.measurement import Measurement
from sitesym.audit.orders import order_text
from sitesym.audit.result import VERDICTS
from sitesym.choices import ReadingChoices
from sitesym.crystals import CrystalSymmetry
from sitesym.errors import SitesymError
from sitesym.reports.audit_evidence import evidence, finite, stability_entry
from sitesym.reports.markup import Document
from sitesym.reports.provenance import CAUTION, library_versions
from sitesym.reports.sites import crystal_remarks

SCHEMA = "sitesym.audit/1"


def audit_document(run: AuditRun) -> Document:
    """The document `sitesym.audit/1` of audited records: strict JSON types.

    Values stand in the unit of their record, rotations have the tensor's axes as rows in the axes of the
    structure file. A record with an error has no verdict.
    """
    return {
        "schema": SCHEMA,
        "records": [record_entry(one) for one in run.records],
        "summary": _summary(run),
        "cross_checks": [_cross_check_entry(check) for check in run.cross_checks],
        "unread_files": [{"file": error.file, **_error_entry(error)} for error in run.unread],
        "noise": run.noise,
        "tolerance_angstrom": run.tolerance_angstrom,
        "reading": _choices_entry(run.choices),
        "versions": library_versions(),
        "caution": CAUTION,
    }


def record_entry(one: AuditedRecord) -> dict[str, Any]:
    """One record: its verdict and evidence, or its error with everything else empty."""
    record, measurement = one.record, one.record.measurement
    return {
        "id": record.id,
        "verdict": None if one.result is None else one.result.verdict,
        "quantity": record.quantity or None,
        "group": None if one.result is None else one.result.group.oriented,
        **evidence(one.result),
        "stability": None if one.stability is None else stability_entry(one.stability),
        "error": None if one.error is None else _error_entry(one.error),
        "place": record.place,
        "crystal": _crystal_entry(one),
        "measurement": None if measurement is None else _measurement_entry(measurement),
        "warnings": list(one.warnings),
        "remarks": list(record.remarks),
    }


def _error_entry(error: SitesymError) -> dict[str, Any]:
    return {
        "code": error.code,
        "what": error.what,
        "value": error.value or None,
        "rule": error.rule or None,
        "next_step": error.next_step or None,
    }


def _crystal_entry(one: AuditedRecord) -> dict[str, Any] | None:
    """What is known of the crystal; only the reference for one that could not be read."""
    if one.crystal is None:
        return None
    told = "the text in the record" if one.crystal.is_structure_text else one.crystal.text
    entry: dict[str, Any] = {"reference": told, "remarks": []}
    entry |= dict.fromkeys(("formula", "space_group", "frame", "part", "distinguished_by"))
    if isinstance(one.host, CrystalSymmetry):
        crystal = one.host.crystal
        entry |= {
            "formula": crystal.formula,
            "space_group": one.host.space_group_symbol,
            "frame": crystal.frame_note,
            "part": crystal.source.part or None,
            "distinguished_by": ["element", "occupancy", *crystal.distinguish],
            "remarks": crystal_remarks(one.host),
        }
    return entry


def _choices_entry(choices: ReadingChoices) -> dict[str, Any]:
    """What was chosen on reading the crystals; null for what was not."""
    return {
        "frame": choices.get("frame"),
        "block": choices.get("block"),
        "symmetry_from": choices.get("symmetry_from"),
        "distinguish": list(choices.get("distinguish", ())),
    }


def _measurement_entry(measurement: Measurement) -> dict[str, Any]:
    axes = measurement.axes
    return {
        "values": measurement.values.tolist(),
        "unit": measurement.unit,
        "order": "unknown" if measurement.order is None else order_text(measurement.order),
        "axes": axes if isinstance(axes, str) else axes.tolist(),
        "layout": measurement.stated_layout,
        "symbol": measurement.kind.symbol,
        "sigma_stated": measurement.sigma is not None,
        "source": measurement.source or None,
        "conditions": measurement.conditions or None,
    }


def _cross_check_entry(check: CrossCheck) -> dict[str, Any]:
    return {
        "relation": check.relation,
        "records": list(check.ids),
        "holds": check.holds,
        "relative_difference": finite(check.relative),
        "worst_entry": "".join(map(str, check.worst)),
        "share_of_tolerance": finite(check.share),
        "basis": check.basis,
        "left": check.left.tolist(),
        "right": check.right.tolist(),
        "tolerance": check.tolerance.tolist(),
    }


def _summary(run: AuditRun) -> dict[str, Any]:
    results = [one.result for one in run.records if one.result is not None]
    counted = Counter(result.verdict for result in results)
    stated = [result.stated for result in results if result.stated is not None and result.constraints]
    return {
        "records": len(run.records),
        "verdicts": {verdict: counted[verdict] for verdict in VERDICTS},
        "errors": len(run.records) - len(results),
        "violating_in_stated_axes_alone": sum(not reading.residual.within for reading in stated),
        "axes_or_order_not_stated": sum(result.stated is None for result in results),
        "cross_checks": len(run.cross_checks),
        "cross_checks_failing": sum(not check.holds for check in run.cross_checks),
    }


def nothing_was_read(document: Mapping[str, Any]) -> bool:
    """Whether no file could be read, or every record ended in an error."""
    summary = document["summary"]
    return bool(summary["errors"] == summary["records"])


def something_violates(document: Mapping[str, Any]) -> bool:
    """Whether any record violates its crystal's symmetry."""
    return bool(document["summary"]["verdicts"]["violates"])
