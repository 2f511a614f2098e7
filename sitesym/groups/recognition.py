"""The symbol of a group, found from its matrices: of its class, and of its orientation in a lattice basis."""

from __future__ import annotations

from functools import lru_cache

import numpy as np

from sitesym.arrays import FloatArray, IntArray
from sitesym.groups.symbols import ORIENTED, SCHOENFLIES, generated, read_symbol


def class_symbol(rotations: FloatArray | IntArray) -> str:
    """Short Hermann-Mauguin symbol of the class of matrices (n, 3, 3) in any basis; '' for none of the 32."""
    return _class_symbols().get(_signature(rotations), "")


def oriented_symbol(rotations_frac: IntArray) -> str:
    """Symbol that tells how integer matrices (n, 3, 3) lie in a conventional basis (31m, 112/m); else ''."""
    return _oriented_symbols().get(_matrix_set(rotations_frac), "")


def _signature(rotations: FloatArray | IntArray) -> tuple[tuple[int, int], ...]:
    """Trace and determinant of every element in any basis, sorted: it tells the 32 classes apart."""
    traces = np.rint(np.trace(rotations, axis1=1, axis2=2) * 1e4).astype(int)
    determinants = np.rint(np.linalg.det(rotations)).astype(int)
    return tuple(sorted(zip(traces.tolist(), determinants.tolist(), strict=True)))


def _matrix_set(rotations: IntArray) -> frozenset[bytes]:
    return frozenset(np.ascontiguousarray(matrix).tobytes() for matrix in rotations)


@lru_cache(maxsize=1)
def _groups_by_spelling() -> dict[str, IntArray]:
    """The integer matrices of every oriented spelling, of each class the standard one first."""
    spellings = [s for symbol in SCHOENFLIES for s in ORIENTED.get(symbol, (symbol,))]
    return {spelling: generated(read_symbol(spelling).generators) for spelling in spellings}


@lru_cache(maxsize=1)
def _class_symbols() -> dict[tuple[tuple[int, int], ...], str]:
    groups = _groups_by_spelling()
    return {_signature(groups[ORIENTED.get(symbol, (symbol,))[0]]): symbol for symbol in SCHOENFLIES}


@lru_cache(maxsize=1)
def _oriented_symbols() -> dict[frozenset[bytes], str]:
    return {_matrix_set(rotations): spelling for spelling, rotations in _groups_by_spelling().items()}
