"""Options that subcommands share, and how a document leaves the program."""

from __future__ import annotations

from collections.abc import Callable
from functools import wraps
from typing import Any, TypeVar, cast

import click

from sitesym.choices import ReadingChoices
from sitesym.cli.choices import distinguish_option, frame_option, symmetry_from_option
from sitesym.cli.choices import reliability_options as reliability_options
from sitesym.cli.choices import split_names as split_names
from sitesym.cli.choices import tolerance_option as tolerance_option
from sitesym.cli.output import write as write
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

    frame = frame_option("Of a file")
    block = click.option("--block", metavar="NAME", help="Of a CIF: the data block of this name.")
    symmetry = symmetry_from_option("Of a CIF that contradicts itself")
    return cast(_Command, frame(block(symmetry(distinguish_option(collected)))))


def emit(document: Document, format_name: str, output: str | None) -> None:
    """Write the document in a format to standard output or to a file. Raises UsageError as `write` does."""
    write(render(document, format_name), output)
