"""`sitesym screen`: one row of verdicts for every structure below a folder."""

from __future__ import annotations

import click

from sitesym.cli.options import emit, output_options, reliability_options
from sitesym.reports.screen_report import screen_document
from sitesym.screening import screen_folder


@click.command("screen")
@click.argument("folder")
@reliability_options
@output_options
def command(
    folder: str, tolerance_angstrom: float, finder: str, ladder: str, format_name: str, output: str | None
) -> None:
    """Symmetry and verdicts of every structure file below FOLDER, in the order of the paths.

    A file that cannot be read is a row with its error, and the run goes on. Columns of CSV are best read as
    text: in pandas with dtype=str and keep_default_na=False.
    """
    rows = screen_folder(folder, tolerance_angstrom, finder, ladder == "on")
    emit(screen_document(folder, rows, tolerance_angstrom), format_name, output)
