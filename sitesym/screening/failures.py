"""Rows of what came to nothing. Nothing here loads more than the standard library."""

from __future__ import annotations

from collections.abc import Sequence

from sitesym.errors import SitesymError, TooMuchMemoryError
from sitesym.screening.columns import STATUSES, Row
from sitesym.screening.settings import Settings
from sitesym.screening.work import WorkItem, storable


def failed_row(item: WorkItem, name: str, error: SitesymError, settings: Settings) -> Row:
    """The row of a structure, or of a whole item, that came to nothing.

    Its status is the code of the error where that is a status of its own (crashed, ...), else `error`.
    """
    labelled = (("value", error.value), ("rule", error.rule), ("next step", error.next_step))
    message = "; ".join([error.what, *(f"{label}: {text}" for label, text in labelled if text)])
    status = error.code if error.code in STATUSES else "error"
    failure: Row = {"status": status, "error_code": error.code, "error_message": storable(message)}
    return blank_row(item, name, settings) | failure


def lost_row(item: WorkItem, at: str, before: int, error: SitesymError, settings: Settings) -> Row:
    """The row of the structure called ``at``, or where none was begun, of the one after ``before`` others,
    with which the item then ends."""
    if at or not before:
        return failed_row(item, at, error, settings)
    row = failed_row(item, f"structure {before + 1}", error, settings)
    return row | {"remarks": "what follows in the file could not be reached"}


def blank_row(item: WorkItem, name: str, settings: Settings) -> Row:
    """All columns, with what is known before anything is read."""
    row: Row = dict.fromkeys(settings.column_names)
    row["id"] = storable(f"{item.identity}#{name}" if name else item.identity)
    row["source"] = storable(item.source)
    row["frame"] = storable(joined((item.frame, name), ", ") or "")
    row["tolerance_angstrom"] = settings.tolerance_angstrom
    return row


def joined(parts: Sequence[str], separator: str = "; ") -> str | None:
    """The parts that are not empty in one text; None for none."""
    return storable(separator.join(part for part in parts if part)) or None


def too_much_memory(megabytes: float, said: str = "") -> TooMuchMemoryError:
    """The error of a structure that was refused memory; ``said``: the words of the code that asked for it."""
    return TooMuchMemoryError(
        "the structure takes too much memory",
        f"more than {megabytes:g} megabytes{': ' if said else ''}{said}",
        "memory for one structure is limited",
        "raise --limit-memory",
    )
