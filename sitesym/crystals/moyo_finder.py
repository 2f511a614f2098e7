"""Adapter to moyo, the second symmetry finder: a search of its own, in the settings of the first.

It is asked for the settings that spglib takes by default, so that Hall numbers and Wyckoff letters of the two
can be compared. Where a search at the given tolerance fails, the library lowers the tolerance by
itself; the answer says which one it ended with. Its warnings go through `logging`; they are kept with the
answer and shown nowhere.
"""

from __future__ import annotations

import logging
from collections.abc import Iterator
from contextlib import contextmanager
from typing import Any

import numpy as np

from sitesym.arrays import FloatArray, IntArray
from sitesym.crystals.crystal import Crystal
from sitesym.crystals.found import FoundSymmetry
from sitesym.crystals.spglib_finder import setting
from sitesym.errors import SymmetryNotFoundError


def find_with_moyo(crystal: Crystal, tolerance_angstrom: float) -> FoundSymmetry:
    """Space group and orbits of a crystal. Raises SymmetryNotFoundError when the library gives no answer."""
    import moyopy

    with _warnings_kept() as messages:
        dataset = _dataset(crystal, tolerance_angstrom)
    # moyo gives the way back: x_file = linear x_conventional + shift, and the same for its primitive cell.
    transformation = np.linalg.inv(dataset.std_linear)
    origin_shift = -transformation @ dataset.std_origin_shift
    primitive_atoms = np.asarray(dataset.mapping_std_prim, dtype=np.int64)

    def ideal_positions() -> FloatArray:
        primitive = np.array(dataset.prim_std_cell.positions) @ np.transpose(dataset.prim_std_linear)
        shifted: FloatArray = (primitive + dataset.prim_std_origin_shift) @ transformation.T + origin_shift
        return shifted[primitive_atoms]

    return FoundSymmetry(
        setting(dataset.hall_number),
        transformation,
        origin_shift,
        crystal.positions_frac,
        ideal_positions,
        dataset.orbits,
        primitive_atoms,
        dataset.wyckoffs,
        dataset.site_symmetry_symbols,
        f"moyo {moyopy.__version__}",
        float(dataset.symprec),
        tuple(messages),
    )


def hall_number_with_moyo(crystal: Crystal, tolerance_angstrom: float) -> tuple[int, float]:
    """Only the setting, and the tolerance (angstrom) the search ended with.

    Raises SymmetryNotFoundError when the library gives no answer.
    """
    with _warnings_kept():
        dataset = _dataset(crystal, tolerance_angstrom)
    return int(dataset.hall_number), float(dataset.symprec)


def lattice_rotations(lattice: FloatArray, tolerance_angstrom: float) -> IntArray:
    """(k, 3, 3) integer rotations that leave a primitive lattice (rows, angstrom) unchanged."""
    import moyopy

    point = moyopy.Cell(lattice.tolist(), [[0.0, 0.0, 0.0]], [1])
    with _warnings_kept():
        dataset = moyopy.MoyoDataset(point, symprec=tolerance_angstrom)
    return np.array(dataset.operations.rotations, dtype=np.int64)


def _dataset(crystal: Crystal, tolerance_angstrom: float) -> Any:
    import moyopy

    try:
        return moyopy.MoyoDataset(
            moyopy.Cell(
                crystal.lattice.tolist(), crystal.positions_frac.tolist(), crystal.species_indices.tolist()
            ),
            symprec=tolerance_angstrom,
            setting=moyopy.Setting.spglib(),
            rotate_basis=False,
        )
    except ValueError as error:
        raise SymmetryNotFoundError(
            "moyo found no symmetry",
            f"{error}; tolerance {tolerance_angstrom:g} angstrom",
            "the tolerance is smaller than the distances between atoms",
            "try another tolerance",
        ) from error


class _Keeper(logging.Handler):
    """Keeps the messages of a logger."""

    def __init__(self) -> None:
        super().__init__()
        self.messages: list[str] = []

    def emit(self, record: logging.LogRecord) -> None:
        """Add the message, unless it only says that the list of operations misses some in a supercell: the
        operations used here come from the database."""
        message = record.getMessage()
        if not message.startswith("Omitted"):
            self.messages.append(message)


@contextmanager
def _warnings_kept() -> Iterator[list[str]]:
    """The messages logged by the library meanwhile; they reach no other handler."""
    logger, keeper = logging.getLogger("moyo"), _Keeper()
    propagate = logger.propagate
    logger.addHandler(keeper)
    logger.propagate = False
    try:
        yield keeper.messages
    finally:
        logger.removeHandler(keeper)
        logger.propagate = propagate
