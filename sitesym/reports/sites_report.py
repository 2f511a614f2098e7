"""A `sites` document as text, CSV, Markdown and LaTeX."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

from sitesym.reports.headings import footer, header, header_lines
from sitesym.reports.layout import cell_text, labelled, table, vector_text
from sitesym.reports.markup import (
    Document,
    csv_text,
    latex_escape,
    latex_table,
    markdown_escape,
    markdown_table,
)
from sitesym.reports.provenance import CAUTION, versions_line

#: Columns of the table of sites: head and field of the document.
_COLUMNS = (
    ("site", "label"),
    ("species", "species"),
    ("multiplicity", "multiplicity"),
    ("Wyckoff", "wyckoff"),
    ("site symmetry", "site_symmetry"),
    ("point group", "point_group"),
    ("order", "order"),
    ("inversion", "has_inversion"),
    ("mirror", "has_mirror"),
    ("polar", "polar"),
)
_HEAD = tuple(head for head, _ in _COLUMNS)
_RIGHT = (2, 6)


def sites_text(document: Document) -> str:
    """The table of sites, then for each site its atoms, axes and operations."""
    blocks = [header(document), table(_HEAD, _rows(document), right=_RIGHT)]
    blocks.extend(map(_details, document["sites"]))
    blocks.append(footer(document))
    return "\n\n".join(blocks) + "\n"


def sites_csv(document: Document) -> str:
    """One row a site; the fields of the document are the columns, the atoms separated by spaces."""
    fields = [field for _, field in _COLUMNS]
    rows = (
        [*(site[field] for field in fields), " ".join(map(str, site["atoms"]))] for site in document["sites"]
    )
    return csv_text([*fields, "atoms"], rows)


def sites_markdown(document: Document) -> str:
    """The table of sites under the conventions."""
    lines = ["# Sites", ""]
    for label, text in header_lines(document):
        lines.append(f"- **{label}** {markdown_escape('; '.join(text.splitlines()))}")
    lines.extend(["", markdown_table(_HEAD, _rows(document)), ""])
    lines.extend([f"Versions: {versions_line(document['versions'])}", "", f"> {CAUTION}"])
    return "\n".join(lines) + "\n"


def sites_latex(document: Document) -> str:
    """The table of sites as a tabular."""
    heading = [(label, "; ".join(text.splitlines())) for label, text in header_lines(document)]
    lines = [
        latex_table(("", ""), heading),
        "",
        latex_table(_HEAD, _rows(document)),
        "",
        latex_escape(CAUTION),
    ]
    return "\n".join(lines) + "\n"


def _rows(document: Document) -> Iterator[list[object]]:
    for site in document["sites"]:
        yield [site[field] for _, field in _COLUMNS]


def _details(site: Mapping[str, Any]) -> str:
    title = f"{site['label']}  {site['multiplicity']}{site['wyckoff']}  {site['site_symmetry']}"
    lines = [title, "-" * len(title), labelled("atoms", " ".join(map(str, site["atoms"])))]
    axes = "\n".join(map(_axis_text, site["axes"]))
    operations = "; ".join(map(_operation_text, site["operations"]))
    lines.extend(
        labelled(label, text) for label, text in (("axes", axes), ("operations", operations)) if text
    )
    return "\n".join(lines)


def _axis_text(axis: Mapping[str, Any]) -> str:
    return f"{cell_text(axis['name'])}  {vector_text(axis['direction'])}"


def _operation_text(operation: Mapping[str, Any]) -> str:
    return str(operation["name"])
