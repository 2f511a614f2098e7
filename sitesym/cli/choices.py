"""Options about reading and about how symmetry is found; loads nothing of the package but constants."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, TypeVar

import click

from sitesym.choices import DEFAULT_FINDER, FINDER_CHOICES, MARKS, STATEMENTS
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
        type=click.Choice(FINDER_CHOICES),
        default=DEFAULT_FINDER,
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


def frame_option(which: str) -> Callable[[_Command], _Command]:
    """``--frame``; ``which`` begins its help."""
    return click.option(
        "--frame", metavar="last|N", help=f"{which} with several structures: the last, or number N from 1."
    )


def symmetry_from_option(which: str) -> Callable[[_Command], _Command]:
    """``--symmetry-from``; ``which`` begins its help."""
    return click.option(
        "--symmetry-from",
        type=click.Choice(STATEMENTS),
        help=f"{which}: the only statement of symmetry to believe.",
    )


distinguish_option = click.option(
    "--distinguish",
    multiple=True,
    metavar="MARKS",
    help=f"Tell atoms apart also by these: {', '.join(MARKS)}; several separated by commas.",
)


def batch_reading_options(command: _Command) -> _Command:
    """``--frame``, ``--symmetry-from`` and ``--distinguish`` for many files."""
    frame = frame_option("One row a file; of one")
    symmetry = symmetry_from_option("Of each CIF (other files have none)")
    return frame(symmetry(distinguish_option(command)))


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
