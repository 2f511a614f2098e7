"""Tables in CSV, Markdown and LaTeX, with every cell escaped; strict JSON."""

from __future__ import annotations

import csv
import json
from collections.abc import Iterable, Mapping, Sequence
from io import StringIO
from typing import Any

from sitesym.reports.layout import cell_text

#: A parsed JSON document.
Document = Mapping[str, Any]

_LATEX = {
    "\\": r"\textbackslash{}", "{": r"\{", "}": r"\}", "$": r"\$", "&": r"\&", "#": r"\#", "_": r"\_",
    "%": r"\%",
    "~": r"\textasciitilde{}", "^": r"\textasciicircum{}", "<": r"\textless{}", ">": r"\textgreater{}",
    "|": r"\textbar{}",
}  # fmt: skip
_MARKDOWN = str.maketrans({character: "\\" + character for character in "\\|*_`<>[]#"})


def json_text(document: Document) -> str:
    """Strict JSON: no NaN, no infinity.

    Raises
    ------
    ValueError
        A number in ``document`` is not finite.
    """
    return json.dumps(document, allow_nan=False, ensure_ascii=False, indent=1) + "\n"


def csv_text(head: Sequence[str], rows: Iterable[Sequence[object]]) -> str:
    """CSV with texts quoted and numbers bare; nothing is an empty cell, truth values are true and false."""
    stream = StringIO()
    writer = csv.writer(stream, quoting=csv.QUOTE_NONNUMERIC, lineterminator="\n")
    writer.writerow(head)
    writer.writerows([_csv_cell(cell) for cell in row] for row in rows)
    return stream.getvalue()


def markdown_table(head: Sequence[str], rows: Iterable[Sequence[object]]) -> str:
    """A pipe table."""
    lines = [list(map(markdown_escape, head)), ["---"] * len(head)]
    lines.extend([markdown_escape(cell_text(cell)) for cell in row] for row in rows)
    return "\n".join(f"| {' | '.join(line)} |" for line in lines)


def latex_table(head: Sequence[str], rows: Iterable[Sequence[object]]) -> str:
    """A plain tabular whose cells are escaped text."""
    lines = [[latex_escape(cell_text(cell)) for cell in row] for row in rows]
    return latex_tabular(list(map(latex_escape, head)), lines)


def latex_tabular(head: Sequence[str], rows: Iterable[Sequence[str]]) -> str:
    """A plain tabular of cells that are LaTeX already."""
    body = [r"\hline", *(" & ".join(row) + r" \\" for row in rows), r"\hline"]
    columns = "l" * len(head)
    return "\n".join([rf"\begin{{tabular}}{{{columns}}}", " & ".join(head) + r" \\", *body, r"\end{tabular}"])


def markdown_escape(text: str) -> str:
    r"""Text that Markdown shows as it is.

    >>> markdown_escape("P6_3mc | <b>")
    'P6\\_3mc \\| \\<b\\>'
    """
    return text.translate(_MARKDOWN)


def latex_escape(text: str) -> str:
    r"""Text that LaTeX shows as it is.

    >>> latex_escape("P6_3mc & 5%")
    'P6\\_3mc \\& 5\\%'
    """
    return "".join(_LATEX.get(character, character) for character in text)


def _csv_cell(value: object) -> object:
    if isinstance(value, bool):
        return "true" if value else "false"
    if value is None or isinstance(value, int | float):
        return value
    return str(value)
