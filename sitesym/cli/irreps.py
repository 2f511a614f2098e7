"""`sitesym irreps`: irreducible representations of a point group, and the reduction of a tensor."""

from __future__ import annotations

from typing import Final

import click
import numpy as np

from sitesym.choices import ReadingChoices
from sitesym.cli.options import output_options, reading_options, tolerance_option, write
from sitesym.cli.subject import subject_arguments, subject_of
from sitesym.errors import TensorInputError, UsageError
from sitesym.groups import character_table
from sitesym.reports.irreps import irreps_document
from sitesym.reports.irreps_report import irreps_text
from sitesym.reports.render import render
from sitesym.tensors import TensorKind, kind, kind_from_jahn

#: Formats that can show the matrices of irreps.
_WITH_MATRICES: Final = ("text", "json")


@click.command("irreps")
@subject_arguments
@click.option("--matrices", is_flag=True, help="Print the matrices in text too; JSON always has them.")
@click.option(
    "--reduce",
    "name",
    metavar="NAME",
    help="How often each irrep occurs in this tensor: a property, or a Jahn symbol such as V[V2].",
)
@tolerance_option
@reading_options
@output_options
def command(
    file: str | None,
    symbol: str | None,
    matrices: bool,
    name: str | None,
    tolerance_angstrom: float,
    reading: ReadingChoices,
    format_name: str,
    output: str | None,
) -> None:
    """Classes, exact characters, labels and functions of the point group of FILE, or SYMBOL, in ieee axes."""
    if matrices and format_name not in _WITH_MATRICES:
        raise UsageError(
            "this format has no place for matrices",
            format_name,
            f"matrices stand in {' and '.join(_WITH_MATRICES)}",
            "leave out --matrices, or choose one of these formats",
        )
    subject = subject_of(file, symbol, tolerance_angstrom, reading=reading)
    axes = subject.axes("ieee")
    table = character_table(subject.group, np.array(axes["rotation_from_file"]))
    reduced = None if name is None else _kind(name)
    document = irreps_document(table, axes, subject.crystal, reduced, subject.remarks)
    in_full = matrices and format_name == "text"
    write(irreps_text(document, matrices=True) if in_full else render(document, format_name), output)


def _kind(name: str) -> TensorKind:
    """A kind by its name or, as soon as there is a V in it, by its Jahn symbol. Raises UsageError."""
    if "V" not in name:
        return kind(name)
    try:
        return kind_from_jahn(name)
    except TensorInputError as error:
        raise UsageError(error.what, error.value, error.rule, error.next_step) from error
