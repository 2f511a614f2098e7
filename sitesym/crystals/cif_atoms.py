"""The atoms a CIF lists: labels, positions, elements, occupancies, isotopes, oxidation states, moments."""

from __future__ import annotations

import re
from collections import Counter
from functools import lru_cache
from typing import TYPE_CHECKING, Final

import numpy as np

from sitesym.arrays import FloatArray
from sitesym.crystals.cif_magnetic import listed_moments
from sitesym.crystals.cif_values import columns, number, text
from sitesym.crystals.expansion import ListedSite
from sitesym.crystals.species import ATOMIC_NUMBERS, ISOTOPES
from sitesym.errors import EmptyStructureError, OccupancyError, ReadingError

if TYPE_CHECKING:
    import gemmi

_COORDINATES: Final = ("fract_x", "fract_y", "fract_z")
_OPTIONAL: Final = (
    "label",
    "type_symbol",
    "occupancy",
    "calc_flag",
    "attached_hydrogens",
    "site_symmetry_multiplicity",
    "symmetry_multiplicity",
)
# As type symbols and labels (Va1) for an empty place; VA1 may be a vanadium.
_VACANCIES: Final = ("Va", "Vac", "vac", "VAC")
_CHARGE: Final = re.compile(r"(?:(\d*)([+-])|([+-])(\d+))$")


def lists_atoms(block: gemmi.cif.Block) -> bool:
    """Whether a block has fractional coordinates of any atom."""
    return any(len(block.find_values(f"_atom_site{separator}fract_x")) for separator in "_.")


def listed_sites(block: gemmi.cif.Block, remarks: list[str]) -> list[ListedSite]:
    """The lines of the asymmetric unit; vacancies and dummies are left out, with a remark.

    Raises EmptyStructureError, NotANumberError, InfiniteValueError, OccupancyError, or ReadingError for an
    unknown element.
    """
    coordinates, others = columns(block, "_atom_site", _COORDINATES, _OPTIONAL)
    count = len(coordinates[0]) if coordinates else 0
    texts = {item: _texts(others.get(item), count) for item in _OPTIONAL}
    labels = texts["label"]
    oxidation = _oxidation_numbers(block)
    moments = listed_moments(block)
    seen: Counter[str] = Counter()
    sites = []
    for row, label in enumerate(labels):
        kind = texts["type_symbol"][row]
        if texts["calc_flag"][row].lower() == "dum":
            remarks.append(f"site {label} is a dummy and holds no atom")
            continue
        symbol = element(kind or label)
        if symbol in _VACANCIES:
            remarks.append(f"site {label} is a vacancy and holds no atom")
            continue
        name = _unique(label or symbol, seen, remarks)
        position = _position([column[row] for column in coordinates], name)
        charge = oxidation.get(kind) or _charge(kind)
        marks = {"isotope": symbol if symbol in ISOTOPES else "", "oxidation": charge}
        contents = ((ISOTOPES.get(symbol, symbol), _occupancy(texts["occupancy"][row], name)),)
        places = texts["site_symmetry_multiplicity"][row] or texts["symmetry_multiplicity"][row]
        stated = int(places) if places.isdecimal() else None
        sites.append(ListedSite(name, position, contents, marks, moments.get(label), stated))
        if texts["attached_hydrogens"][row].strip("0"):
            remarks.append(
                f"hydrogen atoms attached to {name} have no positions and are not in the structure"
            )
    if not sites:
        raise EmptyStructureError(
            "the structure has no atoms",
            f"data block {block.name}",
            "a crystal has at least one atom",
            "look for the missing atoms",
        )
    return sites


@lru_cache(maxsize=4096)
def element(name: str) -> str:
    """Element, isotope or vacancy of a type symbol or label: Ti4+, O2-, Ti1A, OW2, D1, Va2.

    Two letters are tried before one. Raises ReadingError.
    """
    letters = name.rstrip("0123456789")
    if letters in _VACANCIES:
        return letters
    for length in (2, 1):
        symbol = name[:length].capitalize()
        known = symbol in ATOMIC_NUMBERS or symbol in ISOTOPES
        if known and symbol.isalpha() and len(symbol) == length:
            return symbol
    raise ReadingError(
        "an atom of no known element",
        repr(name),
        "the type symbol or the label starts with an element symbol",
        "add _atom_site_type_symbol",
    )


def _texts(column: list[str] | None, count: int) -> list[str]:
    return [""] * count if column is None else [text(raw) for raw in column]


def _unique(label: str, seen: Counter[str], remarks: list[str]) -> str:
    seen[label] += 1
    if seen[label] == 1:
        return label
    name = f"{label}_{seen[label]}"
    remarks.append(f"a label stands on more than one site; one of them is called {name} here")
    return name


def _position(raw: list[str], label: str) -> FloatArray:
    return np.array(
        [
            number(value, f"_atom_site_{axis} of {label}")
            for value, axis in zip(raw, _COORDINATES, strict=True)
        ]
    )


def _occupancy(raw: str, label: str) -> float:
    if not raw:
        return 1.0
    occupancy = number(raw, f"_atom_site_occupancy of {label}")
    if occupancy <= 0.0:
        raise OccupancyError(
            "an occupancy that cannot be",
            f"{label} {occupancy:g}",
            "occupancies are above zero and at most one",
            "correct the occupancy; an empty site is left out",
        )
    return occupancy


def _oxidation_numbers(block: gemmi.cif.Block) -> dict[str, str]:
    """Oxidation number of each type symbol, as text with its sign; types without one are left out."""
    found, _ = columns(block, "_atom_type", ("symbol", "oxidation_number"))
    if not found:
        return {}
    pairs = ((text(kind), text(raw)) for kind, raw in zip(*found, strict=True))
    return {kind: f"{number(raw, f'the oxidation number of {kind}'):+g}" for kind, raw in pairs if raw}


@lru_cache(maxsize=4096)
def _charge(kind: str) -> str:
    """The charge in a type symbol: +4 of Ti4+, -2 of O2- or O-2; '' where it has none."""
    match = _CHARGE.search(kind)
    if match is None:
        return ""
    sign, size = match.group(2) or match.group(3), match.group(1) or match.group(4) or "1"
    return f"{sign}{int(size)}"
