"""What may be chosen on reading: one structure of several, whom to believe, what tells atoms apart."""

from __future__ import annotations

from collections.abc import Iterable
from typing import TypedDict

from sitesym.crystals.cif_symmetry import check_statement
from sitesym.crystals.marks import checked_marks
from sitesym.errors import UsageError


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
