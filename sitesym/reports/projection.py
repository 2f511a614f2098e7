"""The `projection` document: nearest allowed tensors, with what was there before."""

from __future__ import annotations

from typing import Any

from sitesym.audit.batch import AuditedRecord, AuditRun
from sitesym.reports.markup import Document
from sitesym.reports.provenance import library_versions

SCHEMA = "sitesym.projection/1"


def projection_document(run: AuditRun) -> Document:
    """The document `sitesym.projection/1`: for each record before, after, difference, independent values.

    Arrays are contracted in the order 11 22 33 23 13 12, with the factors of the kind, in the unit of the
    record and the axes of the reading named. Records without a reading say why there is nothing.
    """
    return {
        "schema": SCHEMA,
        "records": [_entry(one) for one in run.records],
        "rule": "difference = before - after; rows of rotation are the axes, in those of the structure file",
        "versions": library_versions(),
    }


def _entry(one: AuditedRecord) -> dict[str, Any]:
    head: dict[str, Any] = {
        "id": one.record.id,
        "quantity": one.record.quantity or None,
        "verdict": None if one.result is None else one.result.verdict,
    }
    projection = one.projected()
    if projection is None or one.read is None or one.record.measurement is None:
        problem = "the record has an error" if one.result is None else "no reading of the array was settled"
        return {**head, "problem": problem}
    return {
        **head,
        "problem": None,
        "unit": one.record.measurement.unit,
        "group": projection.group.oriented,
        "reading": one.read.words,
        "rotation": one.read.rotation.tolist(),
        "before": projection.before.tolist(),
        "after": projection.after.tolist(),
        "difference": projection.difference.tolist(),
        "relative_change": projection.relative_change,
        "independent": [
            {"component": fitted.name, "value": fitted.value, "uncertainty": fitted.uncertainty}
            for fitted in projection.independent
        ],
        "weights": projection.weights,
        "uncertainty_source": projection.uncertainty_source,
        "chi2": projection.chi2,
        "dof": projection.dof,
    }
