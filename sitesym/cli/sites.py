"""`sitesym sites`: the atomic sites of a crystal and their symmetry."""

from __future__ import annotations

import click

from sitesym.cli.options import emit, output_options, tolerance_option
from sitesym.crystals import find_symmetry, read_crystal
from sitesym.reports.sites import sites_document


@click.command("sites")
@click.argument("file")
@tolerance_option
@output_options
def command(file: str, tolerance_angstrom: float, format_name: str, output: str | None) -> None:
    """Orbit, Wyckoff letter, oriented site symmetry, operations and axis directions of every site in FILE."""
    symmetry = find_symmetry(read_crystal(file), tolerance_angstrom)
    emit(sites_document(symmetry), format_name, output)
