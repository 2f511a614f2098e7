"""The conventions behind every number, as a document and in every format."""

from __future__ import annotations

import tomllib
from collections.abc import Iterator
from importlib import resources
from typing import Any, Final

from sitesym.reports.layout import TEXT_WIDTH, labelled, paragraph, table
from sitesym.reports.markup import (
    Document,
    csv_text,
    latex_escape,
    latex_table,
    markdown_escape,
    markdown_table,
)
from sitesym.reports.provenance import CAUTION
from sitesym.tensors import all_kinds

_KIND_COLUMNS: Final = (
    "property",
    "symbol",
    "index symmetry",
    "parity",
    "unit",
    "factors in contracted indices",
)


def conventions_document() -> dict[str, Any]:
    """Schema ``sitesym.conventions/1``: the sections, and the kinds of tensor with their factors."""
    text = resources.files("sitesym.reports").joinpath("conventions.toml").read_text(encoding="utf-8")
    sections = tomllib.loads(text)["sections"]
    return {
        "schema": "sitesym.conventions/1",
        "sections": sections,
        "kinds": list(_kinds()),
        "caution": CAUTION,
    }


def _kinds() -> Iterator[dict[str, str]]:
    for kind in all_kinds():
        values = (kind.name, kind.symbol, kind.jahn, kind.parity, kind.unit, kind.factor_rule)
        yield dict(zip(_KIND_COLUMNS, values, strict=True))


def conventions_text(document: Document) -> str:
    """Sections with hanging terms, then the table of kinds."""
    blocks = []
    for section in document["sections"]:
        width = max(len(statement["term"]) for statement in section["statements"]) + 2
        lines = [labelled(entry["term"], entry["text"], label_width=width) for entry in section["statements"]]
        blocks.append("\n".join([section["title"], "-" * len(section["title"]), *lines]))
    blocks.append(table(_KIND_COLUMNS, _kind_rows(document)))
    blocks.append(paragraph(document["caution"], TEXT_WIDTH))
    return "\n\n".join(blocks) + "\n"


def conventions_csv(document: Document) -> str:
    """One row a statement; the kinds of tensor follow under their names."""
    rows = [
        (section["title"], entry["term"], entry["text"])
        for section in document["sections"]
        for entry in section["statements"]
    ]
    kinds = [("Kinds of tensor", name, "; ".join(rest)) for name, *rest in _kind_rows(document)]
    return csv_text(("section", "term", "text"), rows + kinds)


def conventions_markdown(document: Document) -> str:
    """Headed lists and a table."""
    lines = ["# Conventions"]
    for section in document["sections"]:
        lines.extend(["", f"## {section['title']}", ""])
        lines.extend(
            f"- **{entry['term']}** {markdown_escape(entry['text'])}" for entry in section["statements"]
        )
    lines.extend(["", "## Kinds of tensor", "", markdown_table(_KIND_COLUMNS, _kind_rows(document))])
    return "\n".join([*lines, "", f"> {document['caution']}"]) + "\n"


def conventions_latex(document: Document) -> str:
    """Paragraphs and a tabular."""
    lines = []
    for section in document["sections"]:
        lines.append(rf"\paragraph{{{latex_escape(section['title'])}}}")
        lines.extend(
            rf"\emph{{{latex_escape(entry['term'])}}}: {latex_escape(entry['text'])}"
            for entry in section["statements"]
        )
        lines.append("")
    lines.extend([latex_table(_KIND_COLUMNS, _kind_rows(document)), "", latex_escape(document["caution"])])
    return "\n".join(lines) + "\n"


def _kind_rows(document: Document) -> list[list[str]]:
    return [[kind[column] for column in _KIND_COLUMNS] for kind in document["kinds"]]
