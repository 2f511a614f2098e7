"""An `allowed` document as CSV, Markdown and LaTeX."""

from __future__ import annotations

from collections.abc import Iterator

from sitesym.reports.component_matrix import (
    ComponentMatrix,
    Property,
    component_matrix,
    exchange_text,
    kind_text,
    open_signs,
    relations,
)
from sitesym.reports.expressions import (
    Namer,
    combination,
    latex_combination,
    latex_namer,
    text_namer,
)
from sitesym.reports.headings import (
    latex_footer,
    latex_header,
    markdown_footer,
    markdown_header,
    matrix_text,
)
from sitesym.reports.markup import Document, csv_text, latex_escape, markdown_escape, markdown_table

CSV_COLUMNS = (
    "group", "axes", "property", "component", "name", "status", "expression", "exact", "unit",
    "index_symmetry", "order", "factors", "site", "rotation_from_file",
)  # fmt: skip


def allowed_csv(document: Document) -> str:
    """One row a component, zero ones included; ``status`` is independent, dependent or zero.

    The rotation has its rows, the new axes, separated by semicolons.
    """
    return csv_text(CSV_COLUMNS, _csv_rows(document))


def _csv_rows(document: Document) -> Iterator[tuple[object, ...]]:
    group, axes = document["group"]["oriented"], document["axes"]["name"]
    site = document["site"]["label"] if document.get("site") else None
    rotation = matrix_text(document["axes"]["rotation_from_file"] or ())
    for entry in document["properties"]:
        name = text_namer(entry["symbol"])
        facts = (entry[field] for field in ("exact", "unit", "index_symmetry", "order", "factor_rule"))
        conventions = (*facts, site, rotation)
        for key in entry["keys"]:
            terms = entry["components"].get(key, {})
            expression = combination(terms, name)
            yield group, axes, entry["name"], key, name(key), _status(entry, key), expression, *conventions


def _status(entry: Property, key: str) -> str:
    if key in entry["independent"]:
        return "independent"
    return "dependent" if key in entry["components"] else "zero"


def allowed_markdown(document: Document) -> str:
    """Conventions as a list, each property as a table of its matrix and a line of equations."""
    blocks = ["# Symmetry-allowed components", markdown_header(document)]
    for entry in document["properties"]:
        blocks.append(f"## {entry['name']} ({markdown_escape(entry['symbol'])})")
        blocks.extend(_markdown_property(entry))
    return "\n\n".join([*blocks, markdown_footer(document)])


def _markdown_property(entry: Property) -> Iterator[str]:
    name = text_namer(entry["symbol"])
    yield markdown_escape(_summary(entry))
    if not entry["components"]:
        return
    matrix = component_matrix(entry)
    if matrix is not None:
        head = ["", *(f"{digit} {axes}" for digit, axes in matrix.columns)] if matrix.columns else ["", ""]
        rows = [
            [f"{digit} {axes}", *(combination(cell.terms, name) for cell in cells)]
            for (digit, axes), cells in zip(matrix.rows, matrix.cells, strict=True)
        ]
        yield markdown_table(head, rows)
    equations = relations(entry, name)
    if equations:
        yield f"Relations: {'; '.join(f'`{equation}`' for equation in equations)}"


def _summary(entry: Property) -> str:
    """The facts that stand beside the matrix, in one sentence each."""
    exact = "exact" if entry["exact"] else "floating-point coefficients, not exact"
    name = text_namer(entry["symbol"])
    independent = f": {', '.join(map(name, entry['independent']))} ({exact})" if entry["components"] else ""
    facts = [
        f"{entry['independent_count']} of {len(entry['keys'])} components independent{independent}.",
        f"{kind_text(entry)}.",
    ]
    labels = (("Indices", "indices"), ("Order", "order"), ("Factors", "factor_rule"))
    facts.extend(f"{label}: {entry[field]}." for label, field in labels if entry[field])
    if exchange_text(entry):
        facts.append(f"Antisymmetry: {exchange_text(entry)}.")
    facts.extend(f"Signs: {sentence}." for sentence in open_signs(entry, name))
    return " ".join(facts)


def allowed_latex(document: Document) -> str:
    """A fragment for a paper: conventions as a list, each property as a matrix (amsmath)."""
    blocks = [f"% needs amsmath\n{latex_header(document)}"]
    for entry in document["properties"]:
        title = rf"\paragraph{{{latex_escape(entry['name'])}}} {latex_escape(_summary(entry))}"
        blocks.append("\n".join([title, *_latex_property(entry)]))
    return "\n\n".join([*blocks, latex_footer(document)])


def _latex_property(entry: Property) -> Iterator[str]:
    if not entry["components"]:
        return
    name = latex_namer(entry["symbol"])
    matrix = component_matrix(entry)
    if matrix is not None:
        yield from ("\\[", _pmatrix(matrix, name), "\\]")
    equations = relations(entry, name, latex_combination)
    if equations:
        yield "$" + "$, $".join(equations) + "$."


def _pmatrix(matrix: ComponentMatrix, name: Namer) -> str:
    rows = [" & ".join(latex_combination(cell.terms, name) for cell in row) for row in matrix.cells]
    return "\\begin{pmatrix}\n" + " \\\\\n".join(rows) + "\n\\end{pmatrix}"
