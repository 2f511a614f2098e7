"""The atoms of a cell against the formula a CIF states: _chemical_formula_sum times _cell_formula_units_Z."""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping
from typing import TYPE_CHECKING

from sitesym.crystals.cif_values import first_text
from sitesym.crystals.species import ISOTOPES, Species

if TYPE_CHECKING:
    import gemmi

_FORMULA_TAGS = ("_chemical_formula_sum", "_chemical_formula.sum")
_UNITS_TAGS = ("_cell_formula_units_Z", "_cell.formula_units_Z")
_PART = re.compile(r"([A-Z][a-z]?)(\d*\.?\d*)")
# Occupancies and formulas are rounded: counts this close, relative to the larger, are the same.
_SAME_COUNT = 0.02


def formula_remarks(block: gemmi.cif.Block, species: Iterable[Species]) -> tuple[str, ...]:
    """A remark where the atoms of the cell are not the stated formula times Z, or, without Z, not a multiple
    of it; nothing where the file states no formula that can be read."""
    stated = _formula(first_text(block, _FORMULA_TAGS))
    if not stated:
        return ()
    units_text = first_text(block, _UNITS_TAGS)
    present: dict[str, float] = {}
    for kind in species:
        for element, occupancy in kind.parts:
            present[element] = present.get(element, 0.0) + occupancy
    units = float(units_text) if units_text.isdecimal() else _multiple(stated, present)
    expected = {element: count * units for element, count in stated.items()}
    if expected.keys() == present.keys() and all(map(_same, expected.values(), map(present.get, expected))):
        return ()
    rule = f"formula x Z = {_text(stated)} x {units:g}" if units_text else f"formula {_text(stated)}"
    return (f"the atoms of the cell are {_text(present)}, the file states {rule}",)


def _formula(text: str) -> dict[str, float]:
    """Counts of the elements in a formula such as 'Ba0.6 O3 Sr0.4 Ti'; empty where it cannot be read."""
    words = text.split()
    matches = [_PART.fullmatch(word) for word in words]
    counts: dict[str, float] = {}
    for match in matches:
        if match is None or match.group(2) == ".":
            return {}
        element = ISOTOPES.get(match.group(1), match.group(1))
        counts[element] = counts.get(element, 0.0) + float(match.group(2) or 1)
    return counts


def _multiple(stated: Mapping[str, float], present: Mapping[str, float]) -> float:
    total = sum(stated.values())
    return sum(present.values()) / total if total else 1.0


def _same(first: float, second: float | None) -> bool:
    return second is not None and abs(first - second) <= _SAME_COUNT * max(first, second)


def _text(counts: Mapping[str, float]) -> str:
    return " ".join(f"{element}{round(count, 4):g}" for element, count in sorted(counts.items()))
