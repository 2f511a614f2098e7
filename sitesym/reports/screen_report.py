"""The `screen` document, and the document as text, CSV, Markdown and LaTeX."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterable
from typing import Any

from sitesym.reports.headings import footer, latex_footer, markdown_footer
from sitesym.reports.layout import cell_text, labelled, paragraph, table
from sitesym.reports.markup import Document, csv_text, latex_escape, latex_table, markdown_table
from sitesym.reports.provenance import library_versions
from sitesym.screening import COLUMNS, Row

#: What a person sees of a row: head and column. Every column is in CSV and JSON.
_SHOWN = (
    ("id", "id"),
    ("formula", "formula"),
    ("space group", "space_group"),
    ("point group", "point_group"),
    ("centric", "centrosymmetric"),
    ("chiral", "chiral"),
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
_VERDICTS = ("centrosymmetric", "chiral", "polar", "piezoelectric", "second_harmonic", "optical_activity")


def screen_document(folder: str, rows: Iterable[Row], tolerance_angstrom: float) -> dict[str, Any]:
    """Schema ``sitesym.screen/1``: the rows of a folder with the tolerance they were made at."""
    return {
        "schema": "sitesym.screen/1",
        "folder": folder,
        "tolerance_angstrom": tolerance_angstrom,
        "columns": list(COLUMNS),
        "rows": list(rows),
        "versions": library_versions(),
    }


def screen_text(document: Document) -> str:
    """The table of structures, the failures with their reasons, and the counts."""
    rows = document["rows"]
    blocks = [labelled("folder", document["folder"]), labelled("tolerance", _tolerance(document))]
    blocks = ["\n".join(blocks)]
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
    columns = document["columns"]
    return csv_text(columns, ([row[column] for column in columns] for row in document["rows"]))


def screen_markdown(document: Document) -> str:
    """The table a person sees, failures included, and the counts."""
    facts = f"{_summary(document)}. Tolerance: {_tolerance(document)}."
    drawn = markdown_table(*_with_status(document))
    return "\n\n".join(["# Screening", facts, drawn, markdown_footer(document)])


def screen_latex(document: Document) -> str:
    """The same as a tabular."""
    facts = latex_escape(f"{_summary(document)}. Tolerance: {_tolerance(document)}.")
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


def _summary(document: Document) -> str:
    rows = document["rows"]
    statuses = Counter(row["status"] for row in rows)
    verdicts = (
        f"{column.replace('_', ' ')} {sum(bool(row[column]) for row in rows)}" for column in _VERDICTS
    )
    counted = ", ".join(f"{number} {status}" for status, number in sorted(statuses.items(), reverse=True))
    return f"{len(rows)} structures ({counted}); {', '.join(verdicts)}"
