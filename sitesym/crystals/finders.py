"""The two symmetry finders by name."""

from __future__ import annotations

from typing import Final

from sitesym.crystals.crystal import Crystal
from sitesym.crystals.found import FoundSymmetry
from sitesym.crystals.moyo_finder import find_with_moyo
from sitesym.crystals.spglib_finder import find_with_spglib
from sitesym.errors import UsageError

_FINDERS: Final = {"spglib": find_with_spglib, "moyo": find_with_moyo}

FINDERS: Final = tuple(_FINDERS)


def find_with(finder: str, crystal: Crystal, tolerance_angstrom: float) -> FoundSymmetry:
    """The answer of the finder of this name.

    Raises UsageError for an unknown name, SymmetryNotFoundError when the finder gives no answer.
    """
    if finder not in _FINDERS:
        raise UsageError(
            "unknown symmetry finder", finder, f"one of {', '.join(FINDERS)}", "name one of these"
        )
    return _FINDERS[finder](crystal, tolerance_angstrom)
