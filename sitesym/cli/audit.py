"""`sitesym audit`: measured tensors against the symmetry of their crystals."""

from __future__ import annotations

from pathlib import Path

import click

from sitesym.audit import DEFAULT_NOISE
from sitesym.audit.batch import audit_files
from sitesym.audit.crystal_references import CrystalShelf
from sitesym.choices import ReadingChoices
from sitesym.cli.options import emit, output_options, reading_options, tolerance_option, write
from sitesym.reports.audit import audit_document, nothing_was_read, something_violates
from sitesym.reports.markup import json_text
from sitesym.reports.projection import projection_document

EXIT_VIOLATES = 1
EXIT_NOTHING_READ = 3


@click.command("audit")
@click.argument("records", nargs=-1, required=True, type=click.Path(path_type=Path))
@click.option("--crystal", metavar="FILE", help="Crystal of records that name none: a file or a symbol.")
@click.option(
    "--noise",
    type=click.FloatRange(min=0, max=1, max_open=True),
    default=DEFAULT_NOISE,
    show_default=True,
    metavar="REL",
    help="Relative deviation that counts as none where no uncertainties are stated.",
)
@click.option(
    "--explain/--no-explain",
    default=True,
    show_default=True,
    help="Search for axes, orders, factors or slips that explain a failure.",
)
@click.option("--project", metavar="FILE", help="Write the nearest allowed tensors to this file (JSON).")
@tolerance_option
@reading_options
@output_options
@click.pass_context
def command(
    ctx: click.Context,
    records: tuple[Path, ...],
    crystal: str | None,
    noise: float,
    explain: bool,
    project: str | None,
    tolerance_angstrom: float,
    reading: ReadingChoices,
    format_name: str,
    output: str | None,
) -> None:
    """Whether each tensor in RECORDS obeys the symmetry of its crystal, and if not, why not.

    RECORDS are files of measurements: JSON, JSON Lines, CSV or YAML. Fields of a record: id, crystal (a path
    beside the file, the text of a POSCAR or CIF, or a point-group symbol), quantity, unit, order, axes (file,
    lattice, ieee, a 3x3 matrix), values, sigma, source, conditions. What is not stated counts as unknown; a
    record that is not understood is listed with its error, and a file that cannot be read is told on standard
    error while the others go on. Options of reading count for every structure that records name, --block and
    --symmetry-from for the CIFs among them.

    Exit codes: 0 nothing violates; 1 a tensor violates; 2 usage; 3 nothing could be read.
    """
    run = audit_files(records, CrystalShelf(tolerance_angstrom, reading), noise, explain, crystal)
    for error in run.unread:
        click.echo(f"error: {error}", err=True)
    if not run.records:
        ctx.exit(EXIT_NOTHING_READ)
    if project is not None:
        write(json_text(projection_document(run)), project)
    document = audit_document(run)
    emit(document, format_name, output)
    if nothing_was_read(document):
        ctx.exit(EXIT_NOTHING_READ)
    ctx.exit(EXIT_VIOLATES if something_violates(document) else 0)
