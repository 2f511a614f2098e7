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
from sitesym.reports.markup import (
    Document,
    csv_text,
    latex_escape,
    latex_table,
    markdown_escape,
    markdown_table,
)

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
_POSITION_NOTE = "fractional, first atom, conventional cell, idealised"


def sites_text(document: Document) -> str:
    """The table of sites, then for each site its atoms, axes and operations."""
    blocks = [header(document), table(_HEAD, _rows(document), right=_RIGHT)]
    blocks.extend(map(_details, document["sites"]))
    blocks.append(footer(document))
    return "\n\n".join(blocks) + "\n"


def sites_csv(document: Document) -> str:
    """One row a site; the fields of the document are the columns.

    Atoms, the coordinates of the position and the vectors of axes are separated by spaces; operations and
    axes by semicolons.
    """
    fields = [field for _, field in _COLUMNS]
    rows = ([*(site[field] for field in fields), *_csv_details(site)] for site in document["sites"])
    return csv_text([*fields, "atoms", "position_conventional", "operations", "axes_file"], rows)


def _csv_details(site: Mapping[str, Any]) -> Iterator[str]:
    yield " ".join(map(str, site["atoms"]))
    yield _position(site)
    yield "; ".join(_operations(site))
    yield "; ".join(
        f"{elements} {direction}: {' '.join(vector.strip('( )').split())}"
        for elements, direction, vector in _axis_rows(site["axes"])
    )


def sites_markdown(document: Document) -> str:
    """The table of sites under the conventions, then a section a site."""
    blocks = ["# Sites", markdown_header(document), markdown_table(_HEAD, _rows(document))]
    for site in document["sites"]:
        blocks.append(f"## {markdown_escape(_title(site))}")
        blocks.append("\n".join(f"- **{label}** {markdown_escape(text)}" for label, text in _facts(site)))
        if site["axes"]:
            blocks.append(markdown_table(_AXES_HEAD, _axis_rows(site["axes"])))
    return "\n\n".join([*blocks, markdown_footer(document)])


def sites_latex(document: Document) -> str:
    """The table of sites as a tabular, then a paragraph a site."""
    blocks = [latex_header(document), latex_table(_HEAD, _rows(document))]
    for site in document["sites"]:
        facts = " ".join(rf"\emph{{{label}}}: {latex_escape(text)}." for label, text in _facts(site))
        blocks.append(rf"\paragraph{{{latex_escape(_title(site))}}} {facts}")
        if site["axes"]:
            blocks.append(latex_table(_AXES_HEAD, _axis_rows(site["axes"])))
    return "\n\n".join([*blocks, latex_footer(document)])


def _rows(document: Document) -> Iterator[list[object]]:
    for site in document["sites"]:
        yield [site[field] for _, field in _COLUMNS]


def _details(site: Mapping[str, Any]) -> str:
    title = _title(site)
    lines = [
        title,
        "-" * len(title),
        labelled("atoms", f"{' '.join(map(str, site['atoms']))}  (numbered from 0 in the file)"),
        labelled("position", f"{_position(site)}  ({_POSITION_NOTE})"),
    ]
    if site["axes"]:
        lines.append(labelled("axes", table(_AXES_HEAD, _axis_rows(site["axes"]))))
    operations = joined(_operations(site), gap="   ", indent="", width=TEXT_WIDTH - 11)
    lines.append(labelled("operations", operations))
    return "\n".join(lines)


def _facts(site: Mapping[str, Any]) -> Iterator[tuple[str, str]]:
    """(label, text) of what the table of sites leaves out, but for the axes."""
    yield "atoms", f"{' '.join(map(str, site['atoms']))} (numbered from 0 in the file)"
    yield "position", f"{_position(site)} ({_POSITION_NOTE})"
    yield "operations", "; ".join(_operations(site))


def _title(site: Mapping[str, Any]) -> str:
    return f"{site['label']}  {site['multiplicity']}{site['wyckoff']}  {site['site_symmetry']}"


def _position(site: Mapping[str, Any]) -> str:
    return " ".join(f"{round(value, 6) + 0.0:.6f}" for value in site["position_conventional"])


def _operations(site: Mapping[str, Any]) -> list[str]:
    return [f"{operation['name']}: {operation['xyz']}" for operation in site["operations"]]


def _axis_rows(axes: Sequence[Mapping[str, Any]]) -> Iterator[tuple[str, str, str]]:
    """One row a direction, with all elements about it."""
    symbols: dict[str, list[str]] = {}
    for axis in axes:
        symbols.setdefault(axis["direction_lattice"], []).append(axis["name"])
    vectors = {axis["direction_lattice"]: axis["direction_file"] for axis in axes}
    for direction, names in symbols.items():
        yield ", ".join(names), direction, vector_text(vectors[direction])
