"""Adapter to spglib: its search, its database of space-group settings, its errors.

It is called with validated crystals only: numbers that are not finite end the process inside the library. The
angle tolerance stays at the library's -1, so that one length decides.
"""

from __future__ import annotations

from functools import lru_cache
from types import ModuleType
from typing import Any

import numpy as np

from sitesym.arrays import FloatArray, IntArray, frozen
from sitesym.crystals.crystal import Crystal
from sitesym.crystals.found import FoundSymmetry, SpaceGroupSetting
from sitesym.errors import SymmetryNotFoundError

_ANGLE_TOLERANCE = -1.0


def find_with_spglib(crystal: Crystal, tolerance_angstrom: float) -> FoundSymmetry:
    """Space group and orbits of a crystal. Raises SymmetryNotFoundError when the library gives no answer."""
    dataset = _dataset(crystal, tolerance_angstrom)
    primitive_atoms = np.asarray(dataset.mapping_to_primitive, dtype=np.int64)

    def ideal_positions() -> FloatArray:
        # Of each atom of the primitive cell one standardised position; the others are copies of it.
        ideal = np.zeros((int(primitive_atoms.max()) + 1, 3))
        ideal[dataset.std_mapping_to_primitive] = dataset.std_positions
        return ideal[primitive_atoms]

    return FoundSymmetry(
        setting(int(dataset.hall_number)),
        dataset.transformation_matrix,
        dataset.origin_shift,
        crystal.positions_frac,
        ideal_positions,
        dataset.crystallographic_orbits,
        primitive_atoms,
        dataset.wyckoffs,
        dataset.site_symmetry_symbols,
        f"spglib {_spglib().__version__}",
        tolerance_angstrom,
    )


def hall_number_with_spglib(crystal: Crystal, tolerance_angstrom: float) -> int:
    """Only the setting. Raises SymmetryNotFoundError when the library gives no answer."""
    return int(_dataset(crystal, tolerance_angstrom).hall_number)


@lru_cache(maxsize=530)
def setting(hall_number: int) -> SpaceGroupSetting:
    """The operations and symbols of one of the 530 settings, numbered as in spglib's database."""
    spglib = _spglib()
    try:
        operations = spglib.get_symmetry_from_database(hall_number)
        kind = spglib.get_spacegroup_type(hall_number)
    except spglib.SpglibError:
        operations = kind = None
    if operations is None or kind is None:
        raise SymmetryNotFoundError(
            "there is no such space-group setting",
            str(hall_number),
            "Hall numbers are 1 to 530",
            "correct the number",
        )
    rotations = np.asarray(operations["rotations"], dtype=np.int64)
    # Translations are 12ths or 8ths; the database holds them as decimals.
    translations = np.rint(np.asarray(operations["translations"]) * 24) / 24
    unique = list({rotation.tobytes(): rotation for rotation in rotations}.values())
    return SpaceGroupSetting(
        int(kind.number),
        str(kind.international_short),
        hall_number,
        str(kind.hall_symbol),
        str(kind.choice),
        frozen(rotations),
        frozen(translations),
        frozen(np.array(unique, dtype=np.int64)),
    )


def number_of_operations(rotations: IntArray, translations: FloatArray, lattice: FloatArray) -> int:
    """Number in International Tables A of the space group with these operations (n, 3, 3), (n, 3) of a cell
    (rows). Raises SymmetryNotFoundError when the library does not recognise them."""
    spglib = _spglib()
    try:
        kind = spglib.get_spacegroup_type_from_symmetry(rotations, translations, lattice=lattice)
    except spglib.SpglibError as error:
        raise SymmetryNotFoundError("the operations are of no space group known", str(error)) from error
    if kind is None:
        raise SymmetryNotFoundError("the operations are of no space group known", "no answer of spglib")
    return int(kind.number)


@lru_cache(maxsize=1)
def full_symbols() -> tuple[tuple[str, str], ...]:
    """Full Hermann-Mauguin symbol, such as F 4_1/d -3 2/m, and Hall symbol of each of the 530 settings."""
    kinds = (_spglib().get_spacegroup_type(hall_number) for hall_number in range(1, 531))
    return tuple((str(kind.international_full), str(kind.hall_symbol)) for kind in kinds)


def niggli_lattice(lattice: FloatArray) -> FloatArray:
    """Niggli-reduced cell vectors (rows) of the same lattice. Raises SymmetryNotFoundError when it fails."""
    spglib = _spglib()
    try:
        reduced = spglib.niggli_reduce(lattice)
    except spglib.SpglibError as error:
        raise SymmetryNotFoundError("the cell cannot be reduced", str(error)) from error
    if reduced is None:
        raise SymmetryNotFoundError("the cell cannot be reduced", "no answer of spglib")
    return np.asarray(reduced, dtype=np.float64)


def _spglib() -> ModuleType:
    """The library, set to raise its errors: by default it returns None and keeps the reason in a global."""
    import spglib
    import spglib.error

    spglib.error.OLD_ERROR_HANDLING = False
    return spglib


def _dataset(crystal: Crystal, tolerance_angstrom: float) -> Any:
    spglib = _spglib()
    cell = (crystal.lattice, crystal.positions_frac, crystal.species_indices)
    try:
        dataset = spglib.get_symmetry_dataset(
            cell, symprec=tolerance_angstrom, angle_tolerance=_ANGLE_TOLERANCE
        )
    except spglib.SpglibError as error:
        raise _not_found(str(error), tolerance_angstrom) from error
    if dataset is None:
        raise _not_found("no dataset", tolerance_angstrom)
    return dataset


def _not_found(reason: str, tolerance_angstrom: float) -> SymmetryNotFoundError:
    return SymmetryNotFoundError(
        "spglib found no symmetry",
        f"{reason}; tolerance {tolerance_angstrom:g} angstrom",
        "the tolerance is smaller than the distances between atoms",
        "try another tolerance",
    )
