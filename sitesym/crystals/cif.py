"""Adapter to gemmi: data blocks of a CIF to crystals."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from sitesym.arrays import FloatArray
from sitesym.crystals.cif_atoms import listed_sites, lists_atoms
from sitesym.crystals.cif_symmetry import stated_symmetry
from sitesym.crystals.cif_values import number
from sitesym.crystals.composition import formula_remarks
from sitesym.crystals.crystal import Crystal, Source
from sitesym.crystals.expansion import expand
from sitesym.crystals.validation import check_cell
from sitesym.errors import EmptyStructureError, ReadingError, SingularCellError

if TYPE_CHECKING:
    import gemmi

FRAME_NOTE = "x || a, b in the xy plane, right-handed; a CIF gives no Cartesian axes"

_CELL_ITEMS = ("length_a", "length_b", "length_c", "angle_alpha", "angle_beta", "angle_gamma")


def cif_document(raw: bytes) -> gemmi.cif.Document:
    """The data blocks of a CIF in UTF-8 or Latin-1. Raises ReadingError where the grammar is broken."""
    import gemmi

    try:
        text = raw.decode("utf-8-sig")
    except UnicodeDecodeError:
        text = raw.decode("latin-1")
    try:
        return gemmi.cif.read_string(text)
    except (ValueError, RuntimeError) as error:
        raise ReadingError(
            "the text is not a CIF", str(error), "the grammar of CIF 1.1", "correct the line named"
        ) from error


def blocks_with_atoms(
    document: gemmi.cif.Document, wanted: str | None = None
) -> tuple[list[gemmi.cif.Block], tuple[str, ...]]:
    """The blocks that list atoms, or the one of the wanted name, and a remark for each block without atoms.

    Raises EmptyStructureError when there are none, ReadingError for a name that no block has.
    """
    names = [block.name for block in document]
    if wanted is not None and wanted not in names:
        raise ReadingError(
            "there is no such data block", wanted, f"data blocks: {', '.join(names)}", "name one of these"
        )
    blocks = [block for block in document if lists_atoms(block) and wanted in (None, block.name)]
    empty = [block.name for block in document if not lists_atoms(block)]
    if not blocks:
        raise EmptyStructureError(
            "no data block lists atoms" if wanted is None else "the data block lists no atoms",
            f"data blocks: {', '.join(names) or 'none'}",
            "atoms stand in a loop with _atom_site_fract_x",
            "look for the missing atoms",
        )
    return blocks, tuple(f"data block {name} lists no atoms" for name in empty)


def crystal_from_block(
    block: gemmi.cif.Block, file: str, symmetry_from: str | None = None, of_file: tuple[str, ...] = ()
) -> Crystal:
    """The crystal of one data block, its atoms expanded by the stated operations; see `cif_symmetry`.

    ``of_file`` are remarks on the file as a whole.

    Raises ReadingError and its subclasses.
    """
    lattice = _lattice(block)
    remarks = list(of_file)
    sites = listed_sites(block, remarks)
    symmetry = stated_symmetry(block, lattice, symmetry_from)
    atoms = expand(sites, symmetry.operations, lattice)
    return Crystal(
        lattice,
        atoms.positions_frac,
        atoms.species,
        atoms.labels,
        Source(file, "cif", f"data block {block.name}; symmetry from the {symmetry.operations.stated_by}"),
        FRAME_NOTE,
        symmetry.declared,
        (*remarks, *symmetry.remarks, *atoms.remarks, *formula_remarks(block, atoms.species)),
        len(symmetry.operations.rotations),
        atoms.marks,
    )


def _lattice(block: gemmi.cif.Block) -> FloatArray:
    import gemmi

    separator = "." if block.find_value("_cell.length_a") else "_"
    parameters = [
        number(block.find_value(f"_cell{separator}{item}") or "?", f"_cell_{item}") for item in _CELL_ITEMS
    ]
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
    check_cell(lattice)
    return lattice
