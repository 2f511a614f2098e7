"""The `screen` document, and the document as text, CSV, Markdown and LaTeX."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import asdict
from typing import Any

from sitesym.reports.headings import footer, latex_footer, markdown_footer
from sitesym.reports.layout import cell_text, labelled, paragraph, table
from sitesym.reports.markup import Document, latex_escape, latex_table, markdown_table
from sitesym.reports.provenance import library_versions
from sitesym.reports.screen_summary import counts_line, verdicts_line
from sitesym.reports.table_csv import csv_lines
from sitesym.screening import Column, Row, Settings, Tally

#: What a person sees of a row: head and column. Every column is in CSV and JSON.
_SHOWN = (
    ("id", "id"),
    ("formula", "formula"),
    ("space group", "space_group"),
    ("point group", "point_group"),
    ("centric", "centrosymmetric"),
    ("chiral", "chiral_class"),
    ("polar", "polar"),
    ("piezo", "piezoelectric"),
    ("pyro", "pyroelectric"),
    ("SHG", "second_harmonic"),
    ("optical act.", "optical_activity"),
    ("d", "count_piezoelectric_strain"),
    ("eps", "count_permittivity"),
    ("c", "count_elastic_stiffness"),
)
_HEAD = tuple(head for head, _ in _SHOWN)
_RIGHT = (11, 12, 13)


def screen_document(inputs: Sequence[str], settings: Settings, rows: Iterable[Row]) -> dict[str, Any]:
    """Schema ``sitesym.screen/1``: the rows of everything named, with the settings they were made with."""
    return {
        "schema": "sitesym.screen/1",
        "inputs": list(inputs),
        "tolerance_angstrom": settings.tolerance_angstrom,
        "finder": settings.finder,
        "ladder": settings.ladder,
        "frame": settings.frame,
        "symmetry_from": settings.symmetry_from,
        "distinguished_by": ["element", "occupancy", *sorted(settings.distinguish)],
        "columns": [asdict(column) for column in settings.columns],
        "rows": list(rows),
        "versions": library_versions(),
    }


def screen_text(document: Document) -> str:
    """The table of structures, the failures with their reasons, and the counts."""
    rows = document["rows"]
    facts = [
        labelled("inputs", ", ".join(document["inputs"])),
        labelled("tolerance", _tolerance(document)),
        labelled("settings", _settings(document)),
    ]
    blocks = ["\n".join(facts)]
    good = [row for row in rows if row["status"] == "ok" and row.get("stability") != "fragile"]
    fragile = [row for row in rows if row["status"] == "ok" and row.get("stability") == "fragile"]
    bad = [row for row in rows if row["status"] != "ok"]
    if good:
        blocks.append(table(_HEAD, map(_shown, good), right=_RIGHT))
    if fragile:
        drawn = table((*_HEAD, "holds from", "to"), map(_fragile, fragile), right=(*_RIGHT, 14, 15))
        blocks.append(f"fragile: the group changes near the tolerance (angstrom)\n\n{drawn}")
    if good or fragile:
        blocks.append(paragraph("A dot is a no. Columns d, eps and c count independent components."))
    if bad:
        blocks.append("\n".join(["could not be read or settled", *map(_failure, bad)]))
    blocks.append(labelled("summary", _summary(document)))
    blocks.append(footer(document))
    return "\n\n".join(blocks) + "\n"


def screen_csv(document: Document) -> str:
    """Every column of every row.

    Read it with the columns as text (in pandas: ``dtype=str, keep_default_na=False``): point groups may all
    be "-1", and a formula may be "NaN".
    """
    return "".join(csv_lines(document["rows"], [Column(**entry) for entry in document["columns"]]))


def screen_markdown(document: Document) -> str:
    """The table a person sees, failures included, and the counts."""
    facts = _facts(document)
    drawn = markdown_table(*_with_status(document))
    return "\n\n".join(["# Screening", facts, drawn, markdown_footer(document)])


def screen_latex(document: Document) -> str:
    """The same as a tabular."""
    facts = latex_escape(_facts(document))
    return "\n\n".join([latex_table(*_with_status(document)), facts, latex_footer(document)])


def _shown(row: Row) -> list[object]:
    """The cells a person sees; a dot for no, so that the yes stands out."""
    cells = (row[column] for _, column in _SHOWN)
    return ["." if cell is False else cell for cell in cells]


def _fragile(row: Row) -> list[object]:
    """The cells a person sees of a fragile structure, and the tolerances between which its group holds."""
    low, high = row["interval_low_angstrom"], row["interval_high_angstrom"]
    return [*_shown(row), f"{low:g}", f"{high:g}"]


def _with_status(document: Document) -> tuple[tuple[str, ...], list[list[object]]]:
    rows = [
        [*(row[column] for _, column in _SHOWN), row["error_code"] or row["status"]]
        for row in document["rows"]
    ]
    return (*_HEAD, "status"), rows


def _failure(row: Document) -> str:
    """Name and code of a failed structure, its reason indented below."""
    reason = paragraph(cell_text(row["error_message"]), indent=4)
    return f"  {cell_text(row['id'])}  {row['error_code']}\n{reason}"


def _tolerance(document: Document) -> str:
    return f"{document['tolerance_angstrom']:g} angstrom"


def _settings(document: Document) -> str:
    """What was asked for beside the tolerance; choices of reading only where they were made."""
    said = [
        f"finder {document['finder']}",
        f"tolerance ladder {'on' if document['ladder'] else 'off'}",
        f"atoms told apart by {', '.join(document['distinguished_by'])}",
    ]
    if document["frame"] is not None:
        frame = document["frame"]
        said.append(f"of several structures in a file {'the last' if frame == 'last' else f'number {frame}'}")
    if document["symmetry_from"] is not None:
        said.append(f"symmetry of CIFs from {document['symmetry_from']} alone")
    return "; ".join(said)


def _facts(document: Document) -> str:
    return f"{_summary(document)}. Tolerance: {_tolerance(document)}; {_settings(document)}."


def _summary(document: Document) -> str:
    tally = Tally()
    for row in document["rows"]:
        tally.add(row)
    return "; ".join((counts_line(tally), verdicts_line(tally)))
