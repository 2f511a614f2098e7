"""`sitesym conventions`: the conventions behind every number the program prints."""

from __future__ import annotations

import click

from sitesym.cli.options import emit, output_options
from sitesym.reports.conventions import conventions_document


@click.command("conventions")
@output_options
def command(format_name: str, output: str | None) -> None:
    """Print the axes, index orders, factors, labels and words that the output uses."""
    emit(conventions_document(), format_name, output)
