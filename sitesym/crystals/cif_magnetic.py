"""What a magnetic CIF states: operations with time reversal, and moments of the listed atoms.

Moments are read as axial vectors in Bohr magnetons, along the cell edges. They serve to tell atoms apart on
request; the groups found are those of the atoms' positions, without time reversal.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from sitesym.arrays import FloatArray, frozen
from sitesym.crystals.cif_settings import setting_of_triplets
from sitesym.crystals.cif_values import columns, first_column, number, text
from sitesym.crystals.operations import StatedOperations
from sitesym.errors import SpaceGroupStatementError

if TYPE_CHECKING:
    import gemmi

_OPERATION_TAGS = ("_space_group_symop_magn_operation.xyz", "_space_group_symop_magn_operation_xyz")
_CENTRING_TAGS = ("_space_group_symop_magn_centering.xyz", "_space_group_symop_magn_centering_xyz")
_AXES = ("crystalaxis_x", "crystalaxis_y", "crystalaxis_z")


@dataclass(frozen=True, eq=False)
class MagneticOperations:
    """Operations of a magnetic space group: ``stated`` with time reversals, ``triplets`` without."""

    stated: StatedOperations
    triplets: tuple[str, ...]


def magnetic_operations(block: gemmi.cif.Block) -> MagneticOperations | None:
    """All products of listed operations and centrings, or None where a block lists no magnetic operations.

    Raises SpaceGroupStatementError for an operation that cannot be read or a list that is not a group.
    """
    import gemmi

    listed = [_split(entry) for entry in first_column(block, _OPERATION_TAGS)]
    if not listed:
        return None
    centrings = [_split(entry) for entry in first_column(block, _CENTRING_TAGS)] or [("x,y,z", 1)]
    reversal_of: dict[str, int] = {}
    for centring, centring_reversal in centrings:
        for operation, reversal in listed:
            product = _parsed(centring) * _parsed(operation)
            # A grey group holds an operation with and without time reversal: the first one listed moves the
            # moments, which are zero there.
            reversal_of.setdefault(product.wrap().triplet(), reversal * centring_reversal)
    triplets = tuple(reversal_of)
    setting_of_triplets(triplets)
    operations = [gemmi.Op(triplet) for triplet in triplets]
    stated = StatedOperations(
        frozen(np.array([operation.rot for operation in operations], dtype=np.int64) // gemmi.Op.DEN),
        frozen(np.array([operation.tran for operation in operations], dtype=np.float64) / gemmi.Op.DEN),
        "list of magnetic operations, time reversal left out",
        frozen(np.array(list(reversal_of.values()), dtype=np.int64)),
    )
    return MagneticOperations(stated, triplets)


def listed_moments(block: gemmi.cif.Block) -> dict[str, FloatArray]:
    """Moment (3,) of each labelled site, along a, b, c, in Bohr magnetons. Raises NotANumberError."""
    found, _ = columns(block, "_atom_site_moment", ("label", *_AXES))
    if not found:
        return {}
    labels, *components = found
    return {
        text(label): np.array([number(raw, f"a moment of {label}") for raw in row])
        for label, *row in zip(labels, *components, strict=True)
    }


def moments_of_images(
    moment: FloatArray, operations: StatedOperations, images: list[int], lattice: FloatArray
) -> FloatArray | None:
    """(m, 3) moments of a site's images made by these operations, along the cell edges; None when the file
    does not say what its operations do to moments. ``lattice``: rows in angstrom."""
    if operations.time_reversals is None:
        return moment[None, :] if len(operations.rotations) == 1 else None
    edges = np.linalg.norm(lattice, axis=1)
    rotations = operations.rotations[images]
    signs = operations.time_reversals[images] * np.rint(np.linalg.det(rotations))
    turned: FloatArray = signs[:, None] * (rotations @ (moment / edges)) * edges
    return turned


def _split(entry: str) -> tuple[str, int]:
    """An operation without its fourth part, and that part: +1 or -1."""
    parts = entry.replace(" ", "").split(",")
    if len(parts) == 3:
        return ",".join(parts), 1
    if len(parts) == 4 and parts[3] in ("1", "+1", "-1"):
        return ",".join(parts[:3]), int(parts[3])
    raise _unreadable(entry)


def _parsed(triplet: str) -> gemmi.Op:
    import gemmi

    try:
        return gemmi.Op(triplet)
    except (RuntimeError, ValueError) as error:
        raise _unreadable(triplet) from error


def _unreadable(entry: str) -> SpaceGroupStatementError:
    return SpaceGroupStatementError(
        "a magnetic operation cannot be read",
        repr(entry),
        "an operation and its time reversal, such as -y,x-y,z+1/3,-1",
        "correct it",
    )
