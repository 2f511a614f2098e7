"""Adapter to gemmi: data blocks of a CIF to crystals."""

from __future__ import annotations

from collections import Counter
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from sitesym.arrays import FloatArray
from sitesym.crystals.cif_symmetry import stated_operations
from sitesym.crystals.crystal import Crystal, Source
from sitesym.crystals.expansion import ListedSite, expand
from sitesym.crystals.species import ATOMIC_NUMBERS
from sitesym.errors import (
    EmptyStructureError,
    InfiniteValueError,
    NotANumberError,
    OccupancyError,
    ReadingError,
    SingularCellError,
)

if TYPE_CHECKING:
    import gemmi

FRAME_NOTE = "x || a, b in the xy plane, right-handed; a CIF gives no Cartesian axes"

_CELL_TAGS = tuple(f"_cell_{part}" for part in ("length_a", "length_b", "length_c")) + tuple(
    f"_cell_angle_{part}" for part in ("alpha", "beta", "gamma")
)
_COORDINATES = ("_atom_site_fract_x", "_atom_site_fract_y", "_atom_site_fract_z")
_COLUMNS = (*_COORDINATES, "?_atom_site_label", "?_atom_site_type_symbol", "?_atom_site_occupancy")
_ISOTOPES = {"D": "H", "T": "H"}
# As type symbols and labels (Va1) for an empty place; VA1 may be a vanadium.
_VACANCIES = ("Va", "Vac", "vac", "VAC")


def read_cif(path: Path) -> tuple[Crystal, ...]:
    """All structures of a CIF, one for each data block that lists atoms.

    Raises ReadingError and its subclasses.
    """
    document = _parse(path)
    blocks = [block for block in document if len(block.find_values(_COORDINATES[0]))]
    if not blocks:
        names = ", ".join(block.name for block in document) or "none"
        raise EmptyStructureError(
            "no data block lists atoms",
            f"data blocks: {names}",
            f"atoms stand in a loop with {_COORDINATES[0]}",
            "look for the missing atoms",
        )
    return tuple(crystal_from_block(block, path.name) for block in blocks)


def crystal_from_block(block: gemmi.cif.Block, file: str) -> Crystal:
    """The crystal of one data block, its atoms expanded by the stated operations; see `cif_symmetry`."""
    lattice = _lattice(block)
    remarks: list[str] = []
    sites = _listed_sites(block, remarks)
    operations, statements = stated_operations(block, lattice)
    atoms = expand(sites, operations, lattice)
    return Crystal(
        lattice,
        atoms.positions_frac,
        atoms.species,
        atoms.labels,
        Source(file, "cif", f"data block {block.name}; symmetry from the {operations.stated_by}"),
        FRAME_NOTE,
        statements.declared,
        (*remarks, *atoms.remarks),
    )


def _parse(path: Path) -> gemmi.cif.Document:
    import gemmi

    raw = path.read_bytes()
    try:
        text = raw.decode("utf-8")
    except UnicodeDecodeError:
        text = raw.decode("latin-1")
    try:
        return gemmi.cif.read_string(text)
    except (ValueError, RuntimeError) as error:
        raise ReadingError(
            "the text is not a CIF", str(error), "the grammar of CIF 1.1", "correct the line named"
        ) from error


def _lattice(block: gemmi.cif.Block) -> FloatArray:
    import gemmi

    parameters = [_number(block.find_value(tag) or "?", tag) for tag in _CELL_TAGS]
    if min(parameters[:3]) <= 0.0 or not all(0.0 < angle < 180.0 for angle in parameters[3:]):
        raise SingularCellError(
            "the cell parameters span no volume",
            " ".join(f"{value:g}" for value in parameters),
            "lengths are above zero, angles between 0 and 180 degrees",
            "correct the cell",
        )
    lattice = np.array(gemmi.UnitCell(*parameters).orth.mat.tolist(), dtype=np.float64).T
    if not np.isfinite(lattice).all():
        raise SingularCellError(
            "the cell angles do not close",
            " ".join(f"{value:g}" for value in parameters[3:]),
            "each angle is smaller than the sum of the other two",
            "correct the cell",
        )
    return lattice


def _listed_sites(block: gemmi.cif.Block, remarks: list[str]) -> list[ListedSite]:
    sites = []
    isotopes: Counter[str] = Counter()
    labels: Counter[str] = Counter()
    for row in block.find(_COLUMNS):
        position = np.array([_number(row[i], f"{_COORDINATES[i]} of {_optional(row, 3)}") for i in range(3)])
        label, type_symbol = _optional(row, 3), _optional(row, 4)
        symbol = _element(type_symbol or label)
        if symbol in _VACANCIES:
            remarks.append(f"site {label} is a vacancy and holds no atom")
            continue
        if symbol in _ISOTOPES:
            isotopes[symbol] += 1
        label = label or symbol
        labels[label] += 1
        if labels[label] > 1:
            label = f"{label}_{labels[label]}"
            remarks.append(f"a label stands on more than one site; one of them is called {label} here")
        sites.append(ListedSite(label, position, ((_ISOTOPES.get(symbol, symbol), _occupancy(row, label)),)))
    remarks.extend(f"{symbol} counts as hydrogen" for symbol in isotopes)
    if not sites:
        raise EmptyStructureError(
            "the structure has no atoms",
            f"data block {block.name}",
            "a crystal has at least one atom",
            "look for the missing atoms",
        )
    return sites


def _optional(row: gemmi.cif.Table.Row, column: int) -> str:
    import gemmi

    if not row.has(column) or gemmi.cif.is_null(row[column]):
        return ""
    return str(gemmi.cif.as_string(row[column])).strip()


def _number(raw: str, name: str) -> float:
    """A number that may carry an uncertainty in brackets. Raises NotANumberError or InfiniteValueError."""
    import gemmi

    value = float(gemmi.cif.as_number(raw))
    if np.isfinite(value):
        return value
    rule, step = "a finite number, with its uncertainty in brackets or none", "correct the value"
    if raw.strip("'\"+- ").lower() in ("inf", "infinity"):
        raise InfiniteValueError("a value is infinite", f"{name} is {raw}", rule, step)
    raise NotANumberError("a value is not a number", f"{name} is {raw}", rule, step)


def _occupancy(row: gemmi.cif.Table.Row, label: str) -> float:
    if not _optional(row, 5):
        return 1.0
    occupancy = _number(row[5], f"_atom_site_occupancy of {label}")
    if occupancy <= 0.0:
        raise OccupancyError(
            "an occupancy that cannot be",
            f"{label} {occupancy:g}",
            "occupancies are above zero and at most one",
            "correct the occupancy; an empty site is left out",
        )
    return occupancy


def _element(text: str) -> str:
    """Element of a type symbol or label: Ti4+, O2-, Ti1A, OW2. Two letters are tried before one."""
    letters = text.rstrip("0123456789")
    if letters in _VACANCIES:
        return letters
    for length in (2, 1):
        symbol = text[:length].capitalize()
        known = symbol in ATOMIC_NUMBERS or symbol in _ISOTOPES
        if known and symbol.isalpha() and len(symbol) == length:
            return symbol
    raise ReadingError(
        "an atom of no known element",
        repr(text),
        "the type symbol or the label starts with an element symbol",
        "add _atom_site_type_symbol",
    )
