"""Empty space in a cell: slabs, wires and molecules that were put in a box."""

from __future__ import annotations

import numpy as np

from sitesym.arrays import FloatArray
from sitesym.crystals.validation import plane_spacings
from sitesym.tolerances import VACUUM_GAP_ANGSTROM

_SHAPES = {1: "a slab", 2: "a wire", 3: "a molecule in a box"}


def empty_gaps(lattice: FloatArray, positions_frac: FloatArray) -> FloatArray:
    """(3,) widest layer without an atom's centre between (100), (010) and (001) planes, in angstrom."""
    ordered = np.sort(positions_frac % 1.0, axis=0)
    steps = np.diff(ordered, axis=0, append=ordered[:1] + 1.0)
    gaps: FloatArray = steps.max(axis=0) * plane_spacings(lattice)
    return gaps


def vacuum_remarks(lattice: FloatArray, positions_frac: FloatArray) -> tuple[str, ...]:
    """A warning for a cell with gaps wider than `VACUUM_GAP_ANGSTROM` along a, b or c; else nothing."""
    # No gap is wider than the period across its planes, and most cells are small.
    if plane_spacings(lattice).max() <= VACUUM_GAP_ANGSTROM:
        return ()
    gaps = empty_gaps(lattice, positions_frac)
    wide = np.flatnonzero(gaps > VACUUM_GAP_ANGSTROM)
    if not len(wide):
        return ()
    listed = ", ".join(f"{gaps[axis]:.3g} angstrom across the planes of {'abc'[axis]}" for axis in wide)
    return (
        f"no atoms for {listed} (more than {VACUUM_GAP_ANGSTROM:g}): this may be {_SHAPES[len(wide)]}; "
        "space group and tensors are those of the periodic arrangement, not of one layer or molecule",
    )
