"""Options about how symmetry is found, in a module that loads nothing of the package but its constants."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, TypeVar

import click

from sitesym.tolerances import DEFAULT_TOLERANCE_ANGSTROM

_Command = TypeVar("_Command", bound=Callable[..., Any])

tolerance_option = click.option(
    "--tolerance",
    "tolerance_angstrom",
    type=click.FloatRange(min=0, min_open=True),
    default=DEFAULT_TOLERANCE_ANGSTROM,
    show_default=True,
    metavar="ANGSTROM",
    help="Distance within which atoms count as related by symmetry.",
)


def reliability_options(command: _Command) -> _Command:
    """``--tolerance``, ``--finder`` and ``--ladder``."""
    finder = click.option(
        "--finder",
        type=click.Choice(("spglib", "moyo", "both")),
        default="spglib",
        show_default=True,
        help="Library that finds the symmetry; both: the first, with the second as second opinion.",
    )
    ladder = click.option(
        "--ladder",
        type=click.Choice(("on", "off")),
        default="on",
        show_default=True,
        help="Try other tolerances, and measure the distance from inversion and a reversed polar axis.",
    )
    return tolerance_option(finder(ladder(command)))


spreadsheet_option = click.option(
    "--spreadsheet-safe/--plain-cells",
    default=True,
    show_default=True,
    help="In CSV, an apostrophe before outside text that a spreadsheet would run; or every text as it is.",
)


def split_names(values: tuple[str, ...]) -> list[str]:
    """Names from a repeated option whose values may be lists separated by commas; doubles are dropped.

    >>> split_names(("pyroelectric, seebeck", "seebeck"))
    ['pyroelectric', 'seebeck']
    """
    names = (name.strip() for value in values for name in value.split(","))
    return list(dict.fromkeys(name for name in names if name))
