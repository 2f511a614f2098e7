"""Character tables: irreps with labels, exact characters and unitary matrices, verified on construction."""

from __future__ import annotations

import re
from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from sitesym.arrays import ComplexArray, FloatArray, IntArray, frozen
from sitesym.errors import SymmetryError
from sitesym.groups.abstract import AbstractGroup
from sitesym.groups.characters import irreducible_characters
from sitesym.groups.irreps import irrep_matrices
from sitesym.groups.labels import LabelFrame, label_frame, letter_and_number, pair_member, parity_mark
from sitesym.groups.orientation import standard_rotation
from sitesym.groups.pointgroup import PointGroup
from sitesym.groups.rootsum import RootSum, integer
from sitesym.groups.verify import Checks, verified
from sitesym.tolerances import REPRESENTATION, SAME_MATRIX


@dataclass(frozen=True, eq=False)
class Irrep:
    """One irreducible representation over the complex numbers.

    ``characters`` holds one exact value a class, ``matrices`` one unitary (d, d) matrix an element,
    ``reality`` is 'real', 'complex' (its conjugate is another irrep) or 'quaternionic' (Frobenius and Schur
    1906).
    """

    label: str
    dimension: int
    reality: str
    characters: tuple[RootSum, ...]
    matrices: ComplexArray

    @property
    def characters_numeric(self) -> ComplexArray:
        """One complex number a class."""
        return np.array([complex(value) for value in self.characters])


@dataclass(frozen=True, eq=False)
class JoinedIrrep:
    """A physically irreducible representation: a real irrep, or a complex one together with its conjugate."""

    label: str
    dimension: int
    members: tuple[int, ...]


@dataclass(frozen=True, eq=False)
class CharacterTable:
    """All irreps of a point group. ``rotation`` leads from the group's axes to those the labels refer to."""

    group: PointGroup
    rotation: FloatArray
    irreps: tuple[Irrep, ...]
    joined: tuple[JoinedIrrep, ...]
    checks: Checks

    def element_characters(self, index: int) -> ComplexArray:
        """Character of one irrep for every element, shape (n,)."""
        return self.irreps[index].characters_numeric[self.group.abstract.class_of]


def character_table(group: PointGroup, rotation: FloatArray | None = None) -> CharacterTable:
    """Character table of a point group, its irreps labelled in the standard orientation.

    ``rotation`` (3, 3) leads to the standard orientation; where it is not given, `standard_rotation` finds
    one. The matrices are written in that orientation. Raises SymmetryError if any check of the table fails,
    if ``rotation`` leads elsewhere, or for a group with time reversal; AxesError if it is no rotation.
    """
    _require_unitary(group)
    matrix = standard_rotation(group) if rotation is None else np.asarray(rotation, dtype=np.float64)
    oriented = group.rotated(matrix)
    _require_standard(oriented)
    characters = _exact_characters(group.abstract)
    labels = _labels(oriented, characters)
    irreps = [
        Irrep(label, row[0].as_integer() or 0, _reality(row, group.abstract), row, _matrices(oriented, row))
        for label, row in zip(labels, characters, strict=True)
    ]
    irreps.sort(key=_place)
    checks = verified(group.abstract, [(irrep.characters, irrep.matrices) for irrep in irreps])
    return CharacterTable(group, frozen(matrix), tuple(irreps), _joined(irreps), checks)


@lru_cache(maxsize=512)
def _exact_characters(group: AbstractGroup) -> tuple[tuple[RootSum, ...], ...]:
    return irreducible_characters(group)


def _require_unitary(group: PointGroup) -> None:
    if group.time_reversal.any():
        raise SymmetryError(
            "a group with time reversal has no table of ordinary irreps",
            value=f"{int(group.time_reversal.sum())} of {group.order} operations reverse time",
            rule="time reversal is antiunitary: such a group has corepresentations (E. P. Wigner 1959)",
            next_step="take the subgroup of the operations that do not reverse time",
        )


def _require_standard(oriented: PointGroup) -> None:
    """Labels mean nothing elsewhere: the operations must be those that the symbol names."""
    if oriented.system == "non-crystallographic":
        return
    standard = PointGroup.from_symbol(oriented.symbol).rotations_cart
    distances = np.abs(oriented.rotations_cart[:, None] - standard).max(axis=(2, 3)).min(axis=1)
    if distances.max() > SAME_MATRIX:
        raise SymmetryError(
            f"the rotation does not lead to the standard orientation of {oriented.symbol}",
            value=f"{int((distances > SAME_MATRIX).sum())} of {oriented.order} operations lie elsewhere",
            rule="labels refer to the standard orientation",
            next_step="give the rotation that leads there, or none",
        )


def _on_elements(row: tuple[RootSum, ...], class_of: IntArray) -> ComplexArray:
    return np.array([complex(value) for value in row])[class_of]


def _matrices(oriented: PointGroup, row: tuple[RootSum, ...]) -> ComplexArray:
    return frozen(irrep_matrices(oriented, _on_elements(row, oriented.abstract.class_of)))


def _reality(row: tuple[RootSum, ...], group: AbstractGroup) -> str:
    """Frobenius-Schur indicator: the mean of chi(g^2) is 1, 0 or -1."""
    squares = group.class_of[group.powers(2)]
    total = integer(0, row[0].n)
    for c in squares:
        total = total + row[int(c)]
    indicator = total.as_integer()
    return {group.order: "real", 0: "complex", -group.order: "quaternionic"}[
        indicator if indicator is not None else 0
    ]


def _labels(oriented: PointGroup, characters: tuple[tuple[RootSum, ...], ...]) -> list[str]:
    """One label an irrep; numbers that tell nothing apart (a single E of its parity) are left out."""
    if oriented.system == "non-crystallographic":
        return _numbered(characters)
    frame = label_frame(oriented)
    on_elements = [_on_elements(row, oriented.abstract.class_of) for row in characters]
    parts = [_parts(frame, character) for character in on_elements]
    numbers_of_e: dict[str, set[int]] = {}
    for letter, number, mark, _ in parts:
        if letter == "E":
            numbers_of_e.setdefault(mark, set()).add(number)
    return [
        f"{pair}{letter}{'' if letter == 'E' and len(numbers_of_e[mark]) == 1 else number or ''}{mark}"
        for letter, number, mark, pair in parts
    ]


def _numbered(characters: tuple[tuple[RootSum, ...], ...]) -> list[str]:
    """Γ1, Γ2, ... by dimension; the trivial one, whose characters are the largest, is the first."""
    values = [[complex(value) for value in row] for row in characters]
    order = sorted(
        range(len(values)), key=lambda k: (values[k][0].real, [(-v.real, -v.imag) for v in values[k]])
    )
    return [f"Γ{order.index(k) + 1}" for k in range(len(values))]


def _parts(frame: LabelFrame, character: ComplexArray) -> tuple[str, int, str, str]:
    is_complex = bool(np.abs(character.imag).max() > REPRESENTATION)
    letter, number = letter_and_number(frame, character, is_complex)
    return letter, number, parity_mark(frame, character), pair_member(frame, character) if is_complex else ""


def _place(irrep: Irrep) -> tuple[bool, int, int, str]:
    """Order in the table: g and one prime before u and two primes, then A, B, E, T, then by number."""
    plain = irrep.label.lstrip("12")
    number = re.search(r"\d+", plain)
    return (
        irrep.label.endswith(("u", "''")),
        "ABET".find(plain[0]),
        int(number.group()) if number else 0,
        irrep.label,
    )


def _joined(irreps: list[Irrep]) -> tuple[JoinedIrrep, ...]:
    """Complex irreps joined with their conjugates, in the order of the table."""
    joined: list[JoinedIrrep] = []
    for index, irrep in enumerate(irreps):
        partner = next(
            k
            for k, other in enumerate(irreps)
            if all(a.equals(b.conjugate()) for a, b in zip(other.characters, irrep.characters, strict=True))
        )
        if partner == index:
            joined.append(JoinedIrrep(irrep.label, irrep.dimension, (index,)))
        elif partner > index:
            joined.append(
                JoinedIrrep(_joined_label(irrep, irreps[partner]), 2 * irrep.dimension, (index, partner))
            )
    return tuple(joined)


def _joined_label(irrep: Irrep, partner: Irrep) -> str:
    """1E and 2E together are E; numbered irreps stay a sum."""
    if irrep.label[1:] == partner.label[1:]:
        return irrep.label[1:]
    return f"{irrep.label}+{partner.label}"
