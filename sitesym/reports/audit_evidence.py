"""The evidence behind a verdict as strict JSON: readings, residuals, findings, symmetry, stability."""

from __future__ import annotations

from dataclasses import asdict
from typing import Any

import numpy as np

from sitesym.audit.orders import order_text
from sitesym.audit.result import (
    Ambiguity,
    AuditResult,
    Deviation,
    IndexFinding,
    Reading,
    Slip,
    TensorSymmetry,
    Turn,
)
from sitesym.audit.stability import Stability


def evidence(result: AuditResult | None) -> dict[str, Any]:
    """The fields of a record that come from its result; empty where there is none."""
    if result is None:
        lists = ("rivals", "forbidden", "relations", "equivalent_axes", "cannot_tell", "message")
        nothing = (
            "stated",
            "best",
            "index_symmetry",
            "tensor_symmetry",
            "cause",
            "constraints",
            "independent",
        )
        return {**{name: [] for name in lists}, **dict.fromkeys(nothing)}
    symmetry = result.tensor_symmetry
    return {
        "stated": None if result.stated is None else _stated_entry(result.stated),
        "best": None if result.best is None else reading_entry(result.best),
        "rivals": [reading_entry(rival) for rival in result.rivals],
        "index_symmetry": _index_entry(result.index_symmetry),
        "forbidden": [_deviation_entry(deviation) for deviation in result.forbidden],
        "relations": [_deviation_entry(deviation) for deviation in result.relations],
        "equivalent_axes": [
            {"turn": axes.turn, "flips": list(axes.flips), "mixes": axes.mixes}
            for axes in result.equivalent_axes
        ],
        "cannot_tell": [_ambiguity_entry(one) for one in result.cannot_tell],
        "tensor_symmetry": None if symmetry is None else _symmetry_entry(symmetry),
        "cause": result.cause or None,
        "message": result.message.splitlines(),
        "constraints": result.constraints,
        "independent": result.independent,
    }


def _stated_entry(reading: Reading) -> dict[str, Any]:
    residual = reading.residual
    return {
        "relative_residual": finite(residual.relative),
        "chi2": finite(residual.chi2),
        "dof": residual.dof,
        "p_value": finite(residual.p_value),
        "absolute_residual": finite(residual.absolute),
        "tolerance": finite(residual.tolerance),
        "within": residual.within,
        "axes": reading.axes,
        "rotation": reading.rotation.tolist(),
        "order": order_text(reading.order),
        "layout": reading.layout,
    }


def reading_entry(reading: Reading) -> dict[str, Any]:
    """A reading: how the array is read, how well it then obeys, and what that cost."""
    residual = reading.residual
    return {
        "axes": reading.axes,
        "rotation": reading.rotation.tolist(),
        "order": order_text(reading.order),
        "factor": reading.factor or None,
        "relative_residual": finite(residual.relative),
        "layout": reading.layout,
        "tolerance": finite(residual.tolerance),
        "p_value": finite(residual.p_value),
        "choices": reading.choices,
        "log_chance": finite(reading.score),
        "equal_to": list(reading.joined),
        "slip": None if reading.slip is None else _slip_entry(reading.slip),
        "turn": None if reading.turn is None else _turn_entry(reading.turn),
    }


def _slip_entry(slip: Slip) -> dict[str, Any]:
    return {
        "sort": slip.sort,
        "entries": list(slip.entries),
        "expected": [finite(value) for value in slip.expected],
        "exponent": slip.exponent,
    }


def _turn_entry(turn: Turn) -> dict[str, Any]:
    return {
        "angle_degrees": turn.angle_degrees,
        "axis": turn.axis.tolist(),
        "nearest": [{"direction": direction, "degrees": degrees} for direction, degrees in turn.nearest],
    }


def _index_entry(finding: IndexFinding) -> dict[str, Any]:
    return {
        "applies": finding.applies,
        "holds": finding.holds,
        "largest": finite(finding.largest),
        "relative": finite(finding.relative),
        "broken": [
            {
                "first": pair.first,
                "second": pair.second,
                "first_value": pair.first_value,
                "second_value": pair.second_value,
                "tolerance": pair.tolerance,
            }
            for pair in finding.broken
        ],
    }


def _deviation_entry(deviation: Deviation) -> dict[str, Any]:
    return {
        "component": deviation.component,
        "value": deviation.value,
        "expected": deviation.expected,
        "tolerance": deviation.tolerance,
        "relation": deviation.relation or None,
    }


def _ambiguity_entry(one: Ambiguity) -> dict[str, Any]:
    """The sort and the reading in words, and beside them only what applies to the sort."""
    entry: dict[str, Any] = {"sort": one.sort, "reading": one.reading}
    match one.sort:
        case "axes":
            rotation = {} if one.any_angle else {"rotation": one.rotation.tolist()}
            return entry | {"flips": list(one.flips), "mixes": one.mixes} | rotation
        case "hand":
            return entry | {"flips": list(one.flips), "mixes": one.mixes}
        case "entry":
            return entry | {"entries": list(one.entries)}
        case _:
            read = {"order": order_text(one.order), "layout": one.layout, "factor": one.factor or None}
            return entry | read


def _symmetry_entry(symmetry: TensorSymmetry) -> dict[str, Any]:
    return {
        "symbol": symmetry.symbol,
        "system": symmetry.system,
        "elements": list(symmetry.elements),
        "crystal_symbol": symmetry.crystal_symbol,
        "relation": symmetry.relation,
        "axes": symmetry.axes,
        "rotation": symmetry.rotation.tolist(),
    }


def stability_entry(stability: Stability) -> dict[str, Any]:
    """Strict JSON: answer, reasons, eigenvalues, the blocks of the irreps with their conditions, averages.

    Eigenvalues stand in the unit of the record, averages in the unit of the stiffness; conditions refer to
    stiffnesses of the nearest allowed tensor in the standard orientation.
    """
    averages = stability.averages
    return {
        "answer": stability.answer,
        "reasons": list(stability.reasons),
        "eigenvalues": stability.eigenvalues.tolist(),
        "margin": stability.margin,
        "blocks": [
            {
                "irrep": block.label,
                "dimension": block.dimension,
                "eigenvalues": block.eigenvalues.tolist(),
                "conditions": [asdict(condition) for condition in block.conditions],
            }
            for block in stability.blocks
        ],
        "rotation": stability.rotation.tolist(),
        "averages": None if averages is None else {**asdict(averages), "bounds_hold": averages.bounds_hold},
    }


def finite(value: float | None) -> float | None:
    """A finite number, or None: strict JSON has no infinity."""
    return float(value) if value is not None and np.isfinite(value) else None
