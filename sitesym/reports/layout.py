"""Plain-text building blocks: labelled lines, wrapped paragraphs and tables without frames."""

from __future__ import annotations

import textwrap
from collections.abc import Iterable, Sequence
from io import StringIO

from rich.box import Box
from rich.console import Console, JustifyMethod
from rich.table import Table
from rich.text import Text

#: Lines of prose are wrapped here; tables keep their natural width.
TEXT_WIDTH = 100

_LABEL_WIDTH = 11
_UNLIMITED = 100_000
#: One line of dashes under the head, nothing else.
_UNDERLINED = Box("    \n    \n -- \n    \n    \n    \n    \n    \n", ascii=True)


def labelled(label: str, text: str, width: int = TEXT_WIDTH, label_width: int = _LABEL_WIDTH) -> str:
    """``text`` behind its label, wrapped with a hanging indent; lines of ``text`` stay lines.

    >>> print(labelled("axes", "ieee"))
    axes       ieee
    """
    indent = " " * label_width
    lines = [paragraph(line, width, label_width) for line in text.splitlines()]
    return label.ljust(label_width) + "\n".join(lines).removeprefix(indent)


def paragraph(text: str, width: int = TEXT_WIDTH, indent: int = 0) -> str:
    """Wrapped prose behind a left margin."""
    margin = " " * indent
    return textwrap.fill(
        text,
        width,
        initial_indent=margin,
        subsequent_indent=margin,
        break_on_hyphens=False,
        break_long_words=False,
    )


def joined(items: Iterable[str], gap: str = "    ", width: int = TEXT_WIDTH, indent: str = "  ") -> str:
    """Short items beside each other, never broken inside, as many on a line as fit.

    >>> print(joined(["d12 = -d11", "d26 = -2 d11"]))
      d12 = -d11    d26 = -2 d11
    """
    lines: list[str] = []
    for item in items:
        if lines and len(lines[-1]) + len(gap) + len(item) <= width:
            lines[-1] += gap + item
        else:
            lines.append(indent + item)
    return "\n".join(lines)


def table(
    head: Sequence[str] | None,
    rows: Iterable[Sequence[object]],
    *,
    right: Sequence[int] | None = None,
    indent: int = 0,
    gap: int = 2,
) -> str:
    """Columns aligned under an underlined head, or bare text cells without a head.

    ``right`` lists the columns set flush right; ``indent`` is the left margin, ``gap`` that between columns.
    """
    listed = [[str(cell) if head is None else cell_text(cell) for cell in row] for row in rows]
    columns = len(head) if head is not None else max((len(row) for row in listed), default=0)
    drawn = Table(box=_UNDERLINED, show_header=head is not None, padding=(0, gap - 1, 0, 0))
    drawn.show_edge = drawn.pad_edge = False
    for position in range(columns):
        flush: JustifyMethod = "right" if right is not None and position in right else "left"
        drawn.add_column(Text(head[position]) if head is not None else "", justify=flush, no_wrap=True)
    for row in listed:
        drawn.add_row(*(Text(cell) for cell in row))
    stream = StringIO()
    Console(file=stream, width=_UNLIMITED, color_system=None, markup=False, highlight=False).print(drawn)
    margin = " " * indent
    return "\n".join((margin + line).rstrip() for line in stream.getvalue().splitlines())


def cell_text(value: object) -> str:
    """One cell: yes and no for truth values, a dash for nothing, control characters made visible.

    >>> cell_text(True), cell_text(None), cell_text("a\\nb")
    ('yes', '-', 'a\\\\nb')
    """
    if value is None or value == "":
        return "-"
    if isinstance(value, bool):
        return "yes" if value else "no"
    text = str(value)
    return text if text.isprintable() else text.encode("unicode_escape").decode("ascii")


def vector_text(vector: Sequence[float], digits: int = 6) -> str:
    """Three Cartesian components, aligned; minus zero never shows.

    >>> vector_text([1.0, -0.0, -0.5])
    '( 1.000000  0.000000 -0.500000)'
    """
    cells = (f"{round(value, digits) + 0.0:{digits + 3}.{digits}f}" for value in vector)
    return "(" + " ".join(cells) + ")"
