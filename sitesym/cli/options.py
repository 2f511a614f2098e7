"""Options that subcommands share, and how a document leaves the program."""

from __future__ import annotations

from collections.abc import Callable
from functools import wraps
from typing import Any, TypeVar, cast

import click

from sitesym.cli.choices import reliability_options as reliability_options
from sitesym.cli.choices import split_names as split_names
from sitesym.cli.choices import tolerance_option as tolerance_option
from sitesym.cli.output import write as write
from sitesym.crystals import MARKS, STATEMENTS, ReadingChoices
from sitesym.reports.markup import Document
from sitesym.reports.render import FORMATS, render

_Command = TypeVar("_Command", bound=Callable[..., Any])


def output_options(command: _Command) -> _Command:
    """``--format`` and ``--output``."""
    output = click.option("--output", metavar="PATH", help="Write to this file and not to the terminal.")
    format_choice = click.option(
        "--format",
        "format_name",
        type=click.Choice(FORMATS),
        default="text",
        show_default=True,
        help="Output format.",
    )
    return format_choice(output(command))


def reading_options(command: _Command) -> _Command:
    """``--frame``, ``--block``, ``--symmetry-from`` and ``--distinguish``, together as ``reading``."""

    @wraps(command)
    def collected(
        *args: Any,
        frame: str | None,
        block: str | None,
        symmetry_from: str | None,
        distinguish: tuple[str, ...],
        **others: Any,
    ) -> Any:
        reading = ReadingChoices(
            frame=frame, block=block, symmetry_from=symmetry_from, distinguish=split_names(distinguish)
        )
        return command(*args, reading=reading, **others)

    frame_choice = click.option(
        "--frame", metavar="last|N", help="Of a file with several structures: the last, or number N from 1."
    )
    block_choice = click.option("--block", metavar="NAME", help="Of a CIF: the data block of this name.")
    symmetry = click.option(
        "--symmetry-from",
        type=click.Choice(STATEMENTS),
        help="Of a CIF that contradicts itself: the only statement of symmetry to believe.",
    )
    told_apart = click.option(
        "--distinguish",
        multiple=True,
        metavar="MARKS",
        help=f"Tell atoms apart also by these: {', '.join(MARKS)}; several separated by commas.",
    )
    return cast(_Command, frame_choice(block_choice(symmetry(told_apart(collected)))))


def emit(document: Document, format_name: str, output: str | None) -> None:
    """Write the document in a format to standard output or to a file. Raises UsageError as `write` does."""
    write(render(document, format_name), output)
