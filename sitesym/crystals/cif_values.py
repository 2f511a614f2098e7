"""Values of a CIF data block: texts, numbers, and tags in both spellings of the dictionaries."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

import numpy as np

from sitesym.errors import InfiniteValueError, NotANumberError

if TYPE_CHECKING:
    import gemmi

_NUMBER_RULE = "a finite number, with its uncertainty in brackets or none"


def text(raw: str) -> str:
    """The text of a value without its quotes, blanks joined; '?' and '.' are no text."""
    import gemmi

    return "" if gemmi.cif.is_null(raw) else " ".join(str(gemmi.cif.as_string(raw)).split())


def number(raw: str, name: str) -> float:
    """A number that may carry an uncertainty in brackets. Raises NotANumberError or InfiniteValueError."""
    import gemmi

    value = float(gemmi.cif.as_number(raw))
    if np.isfinite(value):
        return value
    if raw.strip("'\"+- ").lower() in ("inf", "infinity"):
        raise InfiniteValueError("a value is infinite", f"{name} is {raw}", _NUMBER_RULE, "correct the value")
    raise NotANumberError("a value is not a number", f"{name} is {raw}", _NUMBER_RULE, "correct the value")


def first_text(block: gemmi.cif.Block, tags: Sequence[str]) -> str:
    """The text of the first of these tags that has one, else ''."""
    for tag in tags:
        raw = block.find_value(tag)
        found = text(raw) if raw is not None else ""
        if found:
            return found
    return ""


def first_column(block: gemmi.cif.Block, tags: Sequence[str]) -> tuple[str, ...]:
    """The texts of the first of these tags that is there, '?' and '.' left out."""
    for tag in tags:
        column = block.find_values(tag)
        if len(column):
            return tuple(found for found in map(text, column) if found)
    return ()


def columns(
    block: gemmi.cif.Block, category: str, needed: Sequence[str], optional: Sequence[str] = ()
) -> tuple[list[list[str]], dict[str, list[str]]]:
    """Raw columns of a loop: the needed ones in their order, and those of the optional ones that are there.

    ``category`` such as _atom_site; items follow it after an underscore, or after a dot in newer
    dictionaries. No columns when a needed one is missing.
    """
    for separator in "_.":
        tags = [f"{category}{separator}{item}" for item in needed]
        table = block.find([*tags, *(f"?{category}{separator}{item}" for item in optional)])
        if len(table):
            found = [list(table.column(place)) for place in range(len(needed))]
            others = {
                item: list(table.column(place))
                for place, item in enumerate(optional, start=len(needed))
                if table.has_column(place)
            }
            return found, others
    return [], {}
