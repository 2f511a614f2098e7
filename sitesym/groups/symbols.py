"""Point-group symbols: from a spelling to generators in the conventional lattice basis.

A Hermann-Mauguin symbol is a list of elements along the symmetry directions of its crystal system
(International Tables for Crystallography A, table on lattice symmetry directions); the reading here is that
rule, not a table of groups. Schoenflies symbols are names only and are translated to Hermann-Mauguin first.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from difflib import get_close_matches
from typing import Final

import numpy as np

from sitesym.arrays import FloatArray, IntArray
from sitesym.errors import UsageError

#: The 32 classes in their short Hermann-Mauguin symbol, with their Schoenflies symbol.
SCHOENFLIES: Final = {
    "1": "C1", "-1": "Ci", "2": "C2", "m": "Cs", "2/m": "C2h", "222": "D2", "mm2": "C2v", "mmm": "D2h",
    "4": "C4", "-4": "S4", "4/m": "C4h", "422": "D4", "4mm": "C4v", "-42m": "D2d", "4/mmm": "D4h",
    "3": "C3", "-3": "C3i", "32": "D3", "3m": "C3v", "-3m": "D3d", "6": "C6", "-6": "C3h", "6/m": "C6h",
    "622": "D6", "6mm": "C6v", "-6m2": "D3h", "6/mmm": "D6h", "23": "T", "m-3": "Th", "432": "O", "-43m":
    "Td", "m-3m": "Oh",
}  # fmt: skip

#: Every oriented spelling of each class, the one in the standard orientation first.
ORIENTED: Final = {
    "2": ("121", "112", "211"),
    "m": ("1m1", "11m", "m11"),
    "2/m": ("12/m1", "112/m", "2/m11"),
    "mm2": ("mm2", "m2m", "2mm"),
    "-42m": ("-42m", "-4m2"),
    "32": ("321", "312"),
    "3m": ("3m1", "31m"),
    "-3m": ("-3m1", "-31m"),
    "-6m2": ("-6m2", "-62m"),
}

_OTHER_SPELLINGS: Final = {
    "C1h": "m", "S2": "-1", "S6": "-3", "V": "222", "Vh": "mmm", "Vd": "-42m",
    "2/m2/m2/m": "mmm", "4/m2/m2/m": "4/mmm", "6/m2/m2/m": "6/mmm", "-32/m": "-3m", "-32/m1": "-3m1",
    "-312/m": "-31m", "2/m-3": "m-3", "4/m-32/m": "m-3m", "m3": "m-3", "m3m": "m-3m",
}  # fmt: skip

_HEXAGONAL_LATTICE: Final = np.array([[1.0, 0.0, 0.0], [-0.5, np.sqrt(0.75), 0.0], [0.0, 0.0, 1.0]])

_DIRECTIONS: Final = {
    "triclinic": ((0, 0, 1),),
    "monoclinic": ((1, 0, 0), (0, 1, 0), (0, 0, 1)),
    "orthorhombic": ((1, 0, 0), (0, 1, 0), (0, 0, 1)),
    "tetragonal": ((0, 0, 1), (1, 0, 0), (1, -1, 0)),
    "trigonal": ((0, 0, 1), (1, 0, 0), (1, -1, 0)),
    "hexagonal": ((0, 0, 1), (1, 0, 0), (1, -1, 0)),
    "cubic": ((0, 0, 1), (1, 1, 1), (1, -1, 0)),
}


@dataclass(frozen=True, eq=False)
class Spelling:
    """A symbol that was understood: class, oriented symbol, lattice rows (3, 3), integer generators (k, 3,
    3).
    """

    symbol: str
    oriented: str
    lattice: FloatArray
    generators: IntArray


def read_symbol(text: str) -> Spelling:
    """Generators of the point group a symbol names, in the conventional lattice basis (hexagonal axes for 3
    and 6).

    A bare monoclinic symbol has its unique axis along b. Raises UsageError for anything that is no point
    group.
    """
    oriented = _oriented_spelling(text)
    symbol = class_of_spelling(oriented)
    system = crystal_system(symbol)
    lattice = _HEXAGONAL_LATTICE if system in ("trigonal", "hexagonal") else np.eye(3)
    generators = [
        matrix
        for token, direction in zip(_tokens(oriented), _DIRECTIONS[system], strict=False)
        for matrix in _matrices(token, np.array(direction), lattice)
    ]
    return Spelling(symbol, oriented, lattice, np.array(generators, dtype=np.int64))


def generated(generators: IntArray) -> IntArray:
    """All products of integer matrices (k, 3, 3), shape (n, 3, 3): proper ones first, then by trace."""
    found = {np.eye(3, dtype=np.int64).tobytes(): np.eye(3, dtype=np.int64)}
    frontier = list(found.values())
    while frontier:
        products = [generator @ element for element in frontier for generator in generators]
        frontier = []
        for product in products:
            if product.tobytes() not in found:
                found[product.tobytes()] = product
                frontier.append(product)
    matrices = np.array(list(found.values()))
    determinants = np.rint(np.linalg.det(matrices)).astype(np.int64)
    angles = determinants * np.trace(matrices, axis1=1, axis2=2)
    # The last key counts first.
    sequence = np.lexsort((*-matrices.reshape(-1, 9).T[::-1], -angles, -determinants))
    return np.asarray(matrices[sequence])


def class_of_spelling(oriented: str) -> str:
    """The short symbol of the class of an oriented spelling: 31m -> 3m."""
    return next((symbol for symbol, spellings in ORIENTED.items() if oriented in spellings), oriented)


def crystal_system(symbol: str) -> str:
    """Crystal system of a class given by its short Hermann-Mauguin symbol."""
    if symbol in ("1", "-1"):
        return "triclinic"
    if symbol in ("2", "m", "2/m"):
        return "monoclinic"
    if symbol[0] in "2m" and "3" not in symbol:
        return "orthorhombic"
    if symbol in ("23", "m-3", "432", "-43m", "m-3m"):
        return "cubic"
    return {"4": "tetragonal", "3": "trigonal", "6": "hexagonal"}[symbol.lstrip("-")[0]]


def _oriented_spelling(text: str) -> str:
    plain = _plain(text)
    by_schoenflies = {name.lower(): symbol for symbol, name in SCHOENFLIES.items()}
    others = {name.lower(): symbol for name, symbol in _OTHER_SPELLINGS.items()}
    symbol = others.get(plain.lower()) or by_schoenflies.get(plain.lower()) or plain
    known = {spelling for spellings in ORIENTED.values() for spelling in spellings} | set(SCHOENFLIES)
    if symbol not in known:
        near = get_close_matches(plain, sorted(known | set(SCHOENFLIES.values())), n=4)
        hint = f"did you mean {', '.join(near)}? " if near else ""
        raise UsageError(
            "no crystallographic point group has this symbol",
            value=repr(text),
            rule="a Hermann-Mauguin or Schoenflies symbol of one of the 32 classes, oriented spellings too",
            next_step=hint + "examples: -43m, 31m, -4m2, 112/m, D3h; a space group is given as a file",
        )
    return ORIENTED.get(symbol, (symbol,))[0]


def _plain(text: str) -> str:
    """A symbol without spaces and mathematical markup: overlined digits get a minus sign, subscripts their
    place in the line.
    """
    plain = re.sub(r"\s", "", text).strip("$").replace("\u2212", "-")
    plain = re.sub(r"\\(?:bar|overline)(?:\{([1-6])\}|([1-6]))", r"-\1\2", plain)
    plain = re.sub(r"([1-6])[\u0304\u0305]", r"-\1", plain)
    # In a Hermann-Mauguin symbol an underscore is a screw axis.
    is_schoenflies = plain[:1].isalpha() and not plain.startswith("m")
    return re.sub(r"[_{}]", "", plain) if is_schoenflies else plain


def _tokens(oriented: str) -> list[str]:
    return re.findall(r"-?[1-6](?:/m)?|m", oriented)


def _matrices(token: str, direction: IntArray, lattice: FloatArray) -> list[IntArray]:
    """Integer generators of one position of the symbol: 4/m gives the rotation and the mirror."""
    rotation, _, mirror = token.partition("/")
    parts = [rotation, mirror] if mirror else [rotation]
    return [_integer_matrix(part, direction, lattice) for part in parts]


def _integer_matrix(part: str, direction: IntArray, lattice: FloatArray) -> IntArray:
    order = 2 if part == "m" else int(part.lstrip("-"))
    sign = -1.0 if part == "m" or part.startswith("-") else 1.0
    to_cart = lattice.T
    rotation = sign * rotation_about(to_cart @ direction, 2.0 * np.pi / order)
    matrix: IntArray = np.rint(np.linalg.solve(to_cart, rotation @ to_cart)).astype(np.int64)
    return matrix


def rotation_about(axis: FloatArray, angle: float) -> FloatArray:
    """Proper rotation by ``angle`` (radians) about ``axis``, shape (3, 3) (Rodrigues' formula)."""
    x, y, z = axis / np.linalg.norm(axis)
    cross = np.array([[0.0, -z, y], [z, 0.0, -x], [-y, x, 0.0]])
    rotation: FloatArray = np.eye(3) + np.sin(angle) * cross + (1.0 - np.cos(angle)) * cross @ cross
    return rotation
