"""The `irreps` document: classes, exact characters, matrices and functions of every irrep of a point
group.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import asdict
from typing import Any

from sitesym.arrays import ComplexArray
from sitesym.groups import CharacterTable, PointGroup, functions_of_irreps, functions_of_joined
from sitesym.reports.allowed import group_entry
from sitesym.reports.markup import Document
from sitesym.reports.provenance import CAUTION, library_versions
from sitesym.tensors import TensorKind, TensorSpace

SCHEMA = "sitesym.irreps/1"


def irreps_document(
    table: CharacterTable,
    axes: Mapping[str, Any],
    crystal: Mapping[str, Any] | None = None,
    reduced: TensorKind | None = None,
    remarks: Iterable[str] = (),
) -> Document:
    """The document `sitesym.irreps/1`.

    Cartesian matrices, functions and irrep matrices are written in the axes of the labels (the standard
    orientation), which ``axes`` describes; directions in names are lattice directions. ``remarks``: what the
    reader of the crystal's file had to say.
    """
    group = table.group.rotated(table.rotation)
    document: Document = {
        "schema": SCHEMA,
        "group": group_entry(group),
        "crystal": dict(crystal) if crystal is not None else None,
        "axes": dict(axes),
        "elements": [
            {"name": name, "matrix": (matrix + 0.0).tolist(), "time_reversal": bool(flag)}
            for name, matrix, flag in zip(group.names, group.rotations_cart, group.time_reversal, strict=True)
        ],
        "classes": [
            {"label": class_label(group, members), "size": len(members), "elements": list(members)}
            for members in group.classes
        ],
        "irreps": _irreps(table),
        "joined": _joined(table),
        "checks": asdict(table.checks),
        "reduction": None if reduced is None else _reduction(table, reduced),
        "remarks": list(remarks),
        "versions": library_versions(),
        "caution": CAUTION,
    }
    return document


def class_label(group: PointGroup, members: tuple[int, ...]) -> str:
    """Name of a class: the element whose direction has the fewest minus signs, the first of such.

    Without sign of rotation where the class holds the inverse too: in 23 the classes of 3+ [111] and 3- [111]
    are two.
    """
    chosen = min(members, key=lambda index: group.elements[index].direction.count("-"))
    element = group.elements[chosen]
    if element.sense and group.inverses[chosen] in members:
        return f"{element.symbol} {element.direction}"
    return element.name


def _irreps(table: CharacterTable) -> list[dict[str, Any]]:
    functions = functions_of_irreps(table)
    return [
        {
            "label": irrep.label,
            "dimension": irrep.dimension,
            "reality": irrep.reality,
            "characters": [str(value) for value in irrep.characters],
            "characters_numeric": _pairs(irrep.characters_numeric),
            "components": list(names),
            "matrices": _pairs(irrep.matrices),
        }
        for irrep, names in zip(table.irreps, functions, strict=True)
    ]


def _joined(table: CharacterTable) -> list[dict[str, Any]]:
    """Complex pairs only: what stays apart in `irreps` and belongs together in a real tensor."""
    functions = functions_of_joined(table)
    return [
        {
            "label": joined.label,
            "dimension": joined.dimension,
            "members": [table.irreps[index].label for index in joined.members],
            "components": list(names),
        }
        for joined, names in zip(table.joined, functions, strict=True)
        if len(joined.members) > 1
    ]


def _reduction(table: CharacterTable, kind: TensorKind) -> dict[str, Any]:
    space = TensorSpace.of(kind)
    return {
        "property": kind.name,
        "index_symmetry": kind.jahn,
        "dimension": space.dimension,
        "multiplicity": space.multiplicities(table),
    }


def _pairs(values: ComplexArray) -> list[Any]:
    """Complex numbers as [real, imaginary], nested like the array."""
    if values.ndim == 0:
        return [float(values.real) + 0.0, float(values.imag) + 0.0]
    return [_pairs(value) for value in values]
