"""Crystals that several tests of this folder build, and the demo structures."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from sitesym.crystals import Crystal

STRUCTURES = Path(__file__).parents[2] / "structures"

_FACE_CENTRED = np.array([[0, 0, 0], [0, 0.5, 0.5], [0.5, 0, 0.5], [0.5, 0.5, 0]])
_CUBIC = {
    "GaAs": (5.653, [31, 33], [[0, 0, 0], [0.25, 0.25, 0.25]]),
    "NaCl": (5.640, [11, 17], [[0, 0, 0], [0.5, 0.5, 0.5]]),
    "Si": (5.431, [14, 14], [[0, 0, 0], [0.25, 0.25, 0.25]]),
}


@pytest.fixture
def structures():
    """The folder of demo structures."""
    return STRUCTURES


@pytest.fixture
def cubic():
    """A function: name of a face-centred cubic crystal -> (lattice, positions, numbers) of its cubic cell."""

    def build(name):
        edge, numbers, offsets = _CUBIC[name]
        positions = np.vstack([_FACE_CENTRED + offset for offset in offsets])
        return np.eye(3) * edge, positions, np.repeat(numbers, 4).tolist()

    return build


@pytest.fixture
def supercell():
    """A function: (cell, integer matrix) -> the crystal in the cell with vectors matrix times the old ones.

    Atoms are found by trying all lattice translations that can reach into the new cell, a route of its own.
    """

    def build(cell, matrix):
        lattice, positions, numbers = cell
        matrix = np.array(matrix)
        steps = np.arange(-6, 7)
        shifts = np.stack(np.meshgrid(steps, steps, steps, indexing="ij"), axis=-1).reshape(-1, 3)
        everywhere = (np.asarray(positions)[:, None, :] + shifts[None, :, :]).reshape(-1, 3)
        fractional = everywhere @ np.linalg.inv(matrix)
        inside = ((fractional > -1e-9) & (fractional < 1 - 1e-9)).all(axis=1)
        repeated = np.repeat(numbers, len(shifts))[inside]
        assert len(repeated) == len(numbers) * round(abs(np.linalg.det(matrix)))
        return Crystal.from_tuple((matrix @ lattice, fractional[inside], repeated.tolist()))

    return build
