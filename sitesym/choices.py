"""What may be chosen on reading a structure and on finding its symmetry, and the checks of these words.

It loads nothing else of the package, so that what only hands the choices on stays quick.
"""

from __future__ import annotations

from collections.abc import Iterable
from typing import Final, TypedDict

from sitesym.errors import UsageError

#: Statements a CIF can make of its space group, the most telling first.
STATEMENTS: Final = ("operations", "hall", "hm", "number")

#: Marks of atoms, beside element and occupancy, that can be asked for.
MARKS: Final = ("isotope", "oxidation", "label", "moment")

#: What can be asked for by name: one finder of symmetry, or spglib with moyo as second opinion.
FINDER_CHOICES: Final = ("spglib", "moyo", "both")
DEFAULT_FINDER: Final = "spglib"


class ReadingChoices(TypedDict, total=False):
    """What may be chosen on reading; each may be left out.

    ``frame``: number of one structure of the file, from 1, or "last". ``block``: name of a data block of a
    CIF. ``symmetry_from``: the only statement of a CIF to believe, where its statements contradict each
    other: operations, hall, hm or number. ``distinguish``: what tells atoms apart beside element and
    occupancy: isotope, oxidation, label, moment. ``largest_megabytes``: limit of the file's size.
    """

    frame: int | str | None
    block: str | None
    symmetry_from: str | None
    distinguish: Iterable[str]
    largest_megabytes: float


def check_choices(choices: ReadingChoices) -> None:
    """Return where every name and number means something, whatever the file; else UsageError."""
    frame_index(choices.get("frame"))
    checked_marks(choices.get("distinguish", ()))
    if (statement := choices.get("symmetry_from")) is not None:
        check_statement(statement)


def check_finder(name: str) -> None:
    """Return for one of `FINDER_CHOICES`; else UsageError."""
    if name not in FINDER_CHOICES:
        raise UsageError(
            "unknown symmetry finder", name, f"one of {', '.join(FINDER_CHOICES)}", "name one of these"
        )


def check_statement(name: str) -> None:
    """Return for one of `STATEMENTS`; else UsageError."""
    if name not in STATEMENTS:
        raise UsageError(
            "there is no such statement of symmetry",
            name,
            f"one of {', '.join(STATEMENTS)}",
            "name one of these",
        )


def checked_marks(names: Iterable[str]) -> tuple[str, ...]:
    """The names in the order of `MARKS`, each once. Raises UsageError for any other name."""
    asked = set(names)
    unknown = sorted(asked - set(MARKS))
    if unknown:
        raise UsageError(
            "atoms cannot be told apart by this",
            ", ".join(unknown),
            f"any of {', '.join(MARKS)}",
            "name these",
        )
    return tuple(name for name in MARKS if name in asked)


def refuse_block(choices: ReadingChoices, file_format: str) -> None:
    """Raises UsageError where a data block is chosen in a file of this format, which is no CIF."""
    if choices.get("block") is not None:
        raise UsageError(
            "only a CIF has data blocks",
            f"block {choices['block']}, format {file_format}",
            "a block is chosen in a CIF",
            "choose a frame",
        )


def refuse_symmetry_from(choices: ReadingChoices, file_format: str) -> None:
    """Raises UsageError where a statement is to be believed in a file of this format, which is no CIF."""
    if choices.get("symmetry_from") is not None:
        raise UsageError(
            "only a CIF states its symmetry",
            f"symmetry from {choices['symmetry_from']}, format {file_format}",
            "symmetry-from chooses between the statements of a CIF; in other files the atoms tell all",
            "leave it out",
        )


def frame_index(frame: int | str | None) -> int | None:
    """Index of a frame given as its number from 1 or as "last"; None for all. Raises UsageError."""
    if frame is None:
        return None
    if frame == "last":
        return -1
    if str(frame).isdecimal() and int(frame) > 0:
        return int(frame) - 1
    raise UsageError(
        "there is no such frame", str(frame), "last, or a number from 1", "name a frame of the file"
    )
