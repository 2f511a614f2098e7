"""`sitesym allowed`: the components of tensors that symmetry allows, and how they depend on each other."""

from __future__ import annotations

from typing import Any, Final

import click
import numpy as np

from sitesym.choices import ReadingChoices
from sitesym.cli.options import emit, output_options, reading_options, reliability_options, split_names
from sitesym.cli.subject import Subject, read_matrix, subject_arguments, subject_of
from sitesym.crystals import AXES_NAMES, Site
from sitesym.errors import TensorInputError, UsageError
from sitesym.reports.allowed import allowed_document
from sitesym.reports.sites import site_entry
from sitesym.tensors import TensorKind, all_kinds, kind, kind_from_jahn

#: Shown when no property is named.
EVERYDAY: Final = (
    "pyroelectric",
    "permittivity",
    "thermal-expansion",
    "gyration",
    "piezoelectric-strain",
    "electro-optic",
    "second-harmonic",
    "elasto-optic",
    "elastic-stiffness",
    "elastic-compliance",
)


@click.command("allowed")
@subject_arguments
@click.option(
    "--property",
    "names",
    multiple=True,
    metavar="NAME",
    help="A property, several separated by commas, or 'all'; may be repeated. See `sitesym conventions`.",
)
@click.option("--jahn", multiple=True, metavar="SYMBOL", help="Any index symmetry, such as V[V2] or aeV[V2].")
@click.option(
    "--axes",
    "axes_name",
    type=click.Choice(AXES_NAMES),
    help="Axes of the answer.  [default: file with FILE, ieee with --group]",
)
@click.option(
    "--rotation", metavar="MATRIX", help="With --axes given: nine numbers, rows x, y, z in the file's axes."
)
@click.option("--site", "label", metavar="LABEL", help="Tensors of one atom: the group of its site.")
@reliability_options
@reading_options
@output_options
def command(
    file: str | None,
    symbol: str | None,
    names: tuple[str, ...],
    jahn: tuple[str, ...],
    axes_name: str | None,
    rotation: str | None,
    label: str | None,
    tolerance_angstrom: float,
    finder: str,
    ladder: str,
    reading: ReadingChoices,
    format_name: str,
    output: str | None,
) -> None:
    """Independent components and relations of the tensors that the point group of FILE, or SYMBOL, allows.

    Without --property: the ten properties most asked for. Exit code 0 also when a property is forbidden: the
    count of independent components is then 0.
    """
    subject = subject_of(file, symbol, tolerance_angstrom, finder, ladder == "on", reading)
    site = _site(subject, label)
    kinds = _kinds(names, jahn, site is not None or subject.symmetry is None)
    axes = subject.axes(*_axes_choice(axes_name, rotation, file))
    group = subject.group if site is None else site.point_group
    document = allowed_document(
        group.rotated(np.array(axes["rotation_from_file"])),
        kinds,
        axes,
        subject.crystal,
        None if site is None else site_entry(site),
        subject.remarks,
    )
    emit(document, format_name, output)


def _site(subject: Subject, label: str | None) -> Site | None:
    if label is None:
        return None
    if subject.symmetry is None:
        raise UsageError(
            "a point group has no sites", label, "--site goes with a file", "give FILE instead of --group"
        )
    return subject.symmetry.site(label)


def _axes_choice(name: str | None, rotation: str | None, file: str | None) -> tuple[str, Any]:
    """Name of the axes and the given matrix or None."""
    if rotation is not None and name not in (None, "given"):
        raise UsageError(
            "a rotation goes with --axes given",
            str(name),
            "one choice of axes",
            "leave out --axes or --rotation",
        )
    if rotation is not None:
        return "given", read_matrix(rotation)
    if name == "given":
        raise UsageError(
            "the axes 'given' need a matrix",
            "no --rotation",
            "--rotation 'x x x; y y y; z z z', rows in the file's axes",
            "add --rotation",
        )
    return name or ("ieee" if file is None else "file"), None


def _kinds(names: tuple[str, ...], jahn: tuple[str, ...], sites: bool) -> list[TensorKind]:
    """The kinds asked for, in that order; ``sites``: whether tensors of one atom make sense here."""
    chosen: list[TensorKind] = []
    asked = split_names(names)
    for name in asked or ([] if jahn else EVERYDAY):
        listed = [k for k in all_kinds() if sites or not k.site] if name == "all" else [kind(name)]
        chosen.extend(k for k in listed if k not in chosen)
    for wrong in (k for k in chosen if k.site and not sites):
        raise UsageError(
            "this is a tensor of one atom, not of the crystal",
            wrong.name,
            "its form follows from the group of the atom's site",
            "add --site LABEL; `sitesym sites` lists the labels",
        )
    return [*chosen, *map(_jahn_kind, jahn)]


def _jahn_kind(symbol: str) -> TensorKind:
    try:
        return kind_from_jahn(symbol)
    except TensorInputError as error:
        raise UsageError(error.what, error.value, error.rule, error.next_step) from error
