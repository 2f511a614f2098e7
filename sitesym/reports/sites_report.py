"""A `sites` document as text, CSV, Markdown and LaTeX."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from typing import Any

from sitesym.reports.headings import (
    footer,
    header,
    latex_footer,
    latex_header,
    markdown_footer,
    markdown_header,
)
from sitesym.reports.layout import TEXT_WIDTH, joined, labelled, table, vector_text
from sitesym.reports.markup import Document, csv_text, latex_table, markdown_table

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
_AXES_HEAD = ("elements", "lattice direction", "unit vector in the file's axes (of m: its normal)")


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
    drawn = markdown_table(_HEAD, _rows(document))
    return "\n\n".join(["# Sites", markdown_header(document), drawn, markdown_footer(document)])


def sites_latex(document: Document) -> str:
    """The table of sites as a tabular."""
    return "\n\n".join([latex_header(document), latex_table(_HEAD, _rows(document)), latex_footer(document)])


def _rows(document: Document) -> Iterator[list[object]]:
    for site in document["sites"]:
        yield [site[field] for _, field in _COLUMNS]


def _details(site: Mapping[str, Any]) -> str:
    title = f"{site['label']}  {site['multiplicity']}{site['wyckoff']}  {site['site_symmetry']}"
    position = " ".join(f"{value:.6f}" for value in site["position_conventional"])
    lines = [
        title,
        "-" * len(title),
        labelled("atoms", f"{' '.join(map(str, site['atoms']))}  (numbered from 0 in the file)"),
        labelled("position", f"{position}  (fractional, first atom, conventional cell, idealised)"),
    ]
    if site["axes"]:
        lines.append(labelled("axes", table(_AXES_HEAD, _axis_rows(site["axes"]))))
    names = [f"{operation['name']}: {operation['xyz']}" for operation in site["operations"]]
    lines.append(labelled("operations", joined(names, gap="   ", indent="", width=TEXT_WIDTH - 11)))
    return "\n".join(lines)


def _axis_rows(axes: Sequence[Mapping[str, Any]]) -> Iterator[tuple[str, str, str]]:
    """One row a direction, with all elements about it."""
    symbols: dict[str, list[str]] = {}
    for axis in axes:
        symbols.setdefault(axis["direction_lattice"], []).append(axis["name"])
    vectors = {axis["direction_lattice"]: axis["direction_file"] for axis in axes}
    for direction, names in symbols.items():
        yield ", ".join(names), direction, vector_text(vectors[direction])
