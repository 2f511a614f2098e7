"""`sitesym sites`: the atomic sites of a crystal and their symmetry."""

from __future__ import annotations

import click

from sitesym.choices import ReadingChoices
from sitesym.cli.options import emit, output_options, reading_options, reliability_options
from sitesym.cli.subject import symmetry_of_file
from sitesym.reports.sites import sites_document


@click.command("sites")
@click.argument("file")
@reliability_options
@reading_options
@output_options
def command(
    file: str,
    tolerance_angstrom: float,
    finder: str,
    ladder: str,
    reading: ReadingChoices,
    format_name: str,
    output: str | None,
) -> None:
    """Orbit, Wyckoff letter, oriented site symmetry, operations and axis directions of every site in FILE."""
    symmetry = symmetry_of_file(file, tolerance_angstrom, finder, ladder == "on", reading)
    emit(sites_document(symmetry), format_name, output)
