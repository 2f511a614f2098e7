"""Which functions belong to which irrep: x, y, z; the rotations Rx, Ry, Rz (axial vectors); products x2,
yz, ...

Every membership is derived: a function belongs to an irrep when the irrep's projection operator leaves it
unchanged. The names are candidates only. Functions are written in the standard orientation of the table.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import Final, TypeAlias

import numpy as np

from sitesym.arrays import ComplexArray, FloatArray
from sitesym.groups.table import CharacterTable

#: Coefficients of named functions.
Candidates: TypeAlias = Mapping[str, tuple[complex, ...]]

_VECTOR: Final[Candidates] = {
    "x": (1, 0, 0),
    "y": (0, 1, 0),
    "z": (0, 0, 1),
    "x+iy": (1, 1j, 0),
    "x-iy": (1, -1j, 0),
}

# Coefficients of xx, yy, zz, yz, xz, xy.
_PRODUCTS: Final[Candidates] = {
    "x2": (1, 0, 0, 0, 0, 0),
    "y2": (0, 1, 0, 0, 0, 0),
    "z2": (0, 0, 1, 0, 0, 0),
    "x2+y2": (1, 1, 0, 0, 0, 0),
    "x2-y2": (1, -1, 0, 0, 0, 0),
    "x2+y2+z2": (1, 1, 1, 0, 0, 0),
    "2z2-x2-y2": (-1, -1, 2, 0, 0, 0),
    "yz": (0, 0, 0, 1, 0, 0),
    "xz": (0, 0, 0, 0, 1, 0),
    "xy": (0, 0, 0, 0, 0, 1),
    "xz+iyz": (0, 0, 0, 1j, 1, 0),
    "xz-iyz": (0, 0, 0, -1j, 1, 0),
    "x2-y2+2ixy": (1, -1, 0, 0, 0, 2j),
    "x2-y2-2ixy": (1, -1, 0, 0, 0, -2j),
    "2z2-x2-y2+i*sqrt(3)*(x2-y2)": (-1 + 1j * 3**0.5, -1 - 1j * 3**0.5, 2, 0, 0, 0),
    "2z2-x2-y2-i*sqrt(3)*(x2-y2)": (-1 - 1j * 3**0.5, -1 + 1j * 3**0.5, 2, 0, 0, 0),
}

_PAIRS: Final = ((0, 0), (1, 1), (2, 2), (1, 2), (0, 2), (0, 1))


def functions_of_irreps(table: CharacterTable) -> tuple[tuple[str, ...], ...]:
    """Names of functions that belong to each irrep, in the order of ``table.irreps``."""
    characters = [table.element_characters(k) for k in range(len(table.irreps))]
    dimensions = [irrep.dimension for irrep in table.irreps]
    return _functions(table, characters, dimensions)


def functions_of_joined(table: CharacterTable) -> tuple[tuple[str, ...], ...]:
    """Names of real functions that belong to each physically irreducible representation, as
    ``table.joined``.
    """
    characters = [
        np.sum([table.element_characters(k) for k in joined.members], axis=0) for joined in table.joined
    ]
    return _functions(
        table, characters, [table.irreps[joined.members[0]].dimension for joined in table.joined]
    )


def _functions(
    table: CharacterTable, characters: list[ComplexArray], dimensions: list[int]
) -> tuple[tuple[str, ...], ...]:
    group = table.group.rotated(table.rotation)
    polar = group.rotations_cart
    axial = polar * group.determinants[:, None, None]
    spaces = (("", _VECTOR, polar), ("R", _VECTOR, axial), ("", _PRODUCTS, _on_products(polar)))
    return tuple(
        tuple(
            name
            for prefix, candidates, representation in spaces
            for name in _members(prefix, candidates, _projector(representation, character, dimension))
        )
        for character, dimension in zip(characters, dimensions, strict=True)
    )


def _projector(representation: FloatArray, character: ComplexArray, dimension: int) -> ComplexArray:
    projector: ComplexArray = (
        dimension * np.einsum("g,gij->ij", character.conj(), representation) / len(character)
    )
    return projector


def _members(prefix: str, candidates: Candidates, projector: ComplexArray) -> list[str]:
    """Candidates in the range of the projector that are not combinations of those already listed."""
    names: list[str] = []
    chosen = np.zeros((projector.shape[0], 0), dtype=np.complex128)
    for name, coefficients in candidates.items():
        vector = np.array(coefficients, dtype=np.complex128)
        extended = np.column_stack([chosen, vector])
        inside = np.abs(projector @ vector - vector).max() < 1e-9
        if inside and np.linalg.matrix_rank(extended, tol=1e-9) == extended.shape[1]:
            names.append(_prefixed(prefix, name))
            chosen = extended
    return names


def _prefixed(prefix: str, name: str) -> str:
    if not prefix:
        return name
    return {"x+iy": "Rx+iRy", "x-iy": "Rx-iRy"}.get(name, prefix + name)


def _on_products(rotations: FloatArray) -> FloatArray:
    """How the coefficients of xx, yy, zz, yz, xz, xy transform, shape (n, 6, 6)."""
    n = len(rotations)
    action = np.zeros((n, 6, 6))
    for column, (k, m) in enumerate(_PAIRS):
        image = np.einsum("ga,gb->gab", rotations[:, :, k], rotations[:, :, m])
        image = (image + np.swapaxes(image, 1, 2)) / 2.0
        for row, (a, b) in enumerate(_PAIRS):
            action[:, row, column] = image[:, a, b] * (1.0 if a == b else 2.0)
    return action
