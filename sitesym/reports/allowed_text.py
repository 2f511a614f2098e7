"""An `allowed` document as plain text: conventions first, then each property as a matrix and as equations."""

from __future__ import annotations

import textwrap

from sitesym.reports.component_matrix import (
    Cell,
    ComponentMatrix,
    Property,
    component_matrix,
    exchange_text,
    kind_text,
    open_signs,
    relations,
    zero_count,
)
from sitesym.reports.expressions import Namer, combination, text_namer
from sitesym.reports.headings import footer, header
from sitesym.reports.layout import joined, labelled, paragraph, table
from sitesym.reports.markup import Document

#: Expressions longer than this stand below the matrix and not inside it.
_LONGEST_CELL = 16

_ZERO = "."


def allowed_text(document: Document) -> str:
    """The whole report."""
    parts = [header(document), *map(property_text, document["properties"]), footer(document)]
    return "\n\n".join(parts) + "\n"


def property_text(entry: Property) -> str:
    """One property: its title, its components, the relations between them and its conventions."""
    name = text_namer(entry["symbol"])
    blocks = [_title(entry, name)]
    matrix = component_matrix(entry)
    if not entry["components"]:
        blocks.append(f"  forbidden: all {len(entry['keys'])} components are zero by symmetry")
    elif matrix is not None:
        blocks.append(_matrix_text(entry, matrix, name))
    else:
        blocks.append(_list_text(entry))
    equations = relations(entry, name)
    if equations:
        blocks.append(joined(equations))
    blocks.append(_conventions(entry, name))
    return "\n\n".join(blocks)


def _title(entry: Property, name: Namer) -> str:
    title = f"{entry['name']}  {entry['symbol']}"
    count = f"{entry['independent_count']} independent of {len(entry['keys'])}"
    if entry["components"]:
        exact = "exact" if entry["exact"] else "floating-point coefficients, not exact"
        count += f" ({exact}): {', '.join(map(name, entry['independent']))}"
    return "\n".join([title, "=" * len(title), kind_text(entry), paragraph(count)])


def _matrix_text(entry: Property, matrix: ComponentMatrix, name: Namer) -> str:
    cells = [[_cell_text(cell, name) for cell in row] for row in matrix.cells]
    rows = [[digit, axes, *row] for (digit, axes), row in zip(matrix.rows, cells, strict=True)]
    if matrix.columns:
        rows.insert(0, ["", "", *(digit for digit, _ in matrix.columns)])
        rows.insert(0, ["", "", *(axes for _, axes in matrix.columns)])
    drawn = table(None, rows, right=range(2, len(rows[0])), indent=2, gap=3)
    if any(cell.endswith("*") for row in cells for cell in row):
        drawn += "\n\n  * not independent: see the equation below"
    return drawn


def _cell_text(cell: Cell, name: Namer) -> str:
    if not cell.terms:
        return _ZERO
    text = combination(cell.terms, name)
    return text if len(text) <= _LONGEST_CELL else f"{cell.sign}{name(cell.key)}*"


def _list_text(entry: Property) -> str:
    """What is said instead of a matrix of more than two indices."""
    zero, independent = zero_count(entry), entry["independent_count"]
    dependent = len(entry["keys"]) - zero - independent
    return f"  {independent} independent, {dependent} that follow from them, {zero} zero by symmetry"


def _conventions(entry: Property, name: Namer) -> str:
    lines = [
        ("indices", entry["indices"]),
        ("exchange", exchange_text(entry)),
        ("order", entry["order"]),
        ("factors", entry["factor_rule"]),
        ("signs", "\n".join(open_signs(entry, name))),
    ]
    return textwrap.indent("\n".join(labelled(label, text) for label, text in lines if text), "  ")
