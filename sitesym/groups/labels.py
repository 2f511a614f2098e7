"""Mulliken labels of irreps, by rule from the characters and the orientation of the group.

Letter: A or B for dimension one (even or odd under the main rotation), E for two and for a complex pair, T
for three. Number: 1 or 2 for even or odd under a reference operation across the main axis, or the winding
number of E, or the sign under the fourfold operation for T. Parity: g and u with an inversion, one and two
primes with a mirror across the main axis. The members of a complex pair are 1E and 2E: 1E takes exp(+2 pi i
m/n) under the positive main rotation. Axes are those of the standard orientation. Source: R. S. Mulliken,
J. Chem. Phys. 23 (1955) 1997; the choices that he leaves open stand in `reference_operation`. Other books
choose otherwise: read the characters too. The rules cover the 32 crystallographic classes; irreps of other
groups are numbered after H. A. Bethe, Ann. Phys. 395 (1929) 133.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TypeAlias

import numpy as np

from sitesym.arrays import ComplexArray, FloatArray
from sitesym.groups.elements import Element
from sitesym.groups.pointgroup import PointGroup
from sitesym.tolerances import SAME_MATRIX

#: Characters of one irrep, one value for each element.
ElementCharacter: TypeAlias = ComplexArray

_X, _Y, _Z = np.eye(3)


@dataclass(frozen=True, eq=False)
class LabelFrame:
    """The operations of a group, in the standard orientation, that decide about labels (indices of
    elements).
    """

    group: PointGroup
    dihedral_two: tuple[int, ...]
    main: int
    reference: int | None
    inversion: int | None
    mirror_across: int | None


def label_frame(group: PointGroup) -> LabelFrame:
    """Pick the deciding operations of a group that is already in the standard orientation."""
    inversion = next((i for i, e in enumerate(group.elements) if e.improper and e.order == 1), None)
    return LabelFrame(
        group=group,
        dihedral_two=_twofold_along_zyx(group) if group.symbol in ("222", "mmm") else (),
        main=_main_rotation(group),
        reference=reference_operation(group),
        inversion=inversion,
        mirror_across=None if inversion is not None else _mirror_across(group),
    )


def _twofold_along_zyx(group: PointGroup) -> tuple[int, ...]:
    """The twofold rotations of 222 and mmm, in the order in which they number B1, B2, B3."""
    found = (_find(group, 2, False, axis) for axis in (_Z, _Y, _X))
    return tuple(index for index in found if index is not None)


def reference_operation(group: PointGroup) -> int | None:
    """The element whose sign gives the number 1 or 2 of A and B.

    Cubic: the fourfold operation along z. mm2: the mirror perpendicular to y. With twofold axes across the
    main axis: the one along x (in -6m2, where they lie along y, any: they are one class). Else the mirror
    perpendicular to x.
    """
    if group.system == "cubic":
        return _first_found(_find(group, 4, False, _Z), _find(group, 4, True, _Z))
    if group.system in ("triclinic", "monoclinic") or group.symbol in ("222", "mmm"):
        return None
    if group.symbol == "mm2":
        return _find(group, 2, True, _Y)
    return _first_found(_find(group, 2, False, _X), _find(group, 2, False, _Y), _find(group, 2, True, _X))


def letter_and_number(frame: LabelFrame, character: ElementCharacter, is_complex: bool) -> tuple[str, int]:
    """Letter and number of one irrep; number 0 where there is none to give."""
    dimension = round(character[0].real)
    if is_complex and dimension == 1:
        return "E", _winding(frame, character)
    if dimension == 1:
        return _one_dimensional(frame, character)
    if dimension == 2:
        return "E", _winding(frame, character)
    if frame.reference is None:
        return "T", 0
    return "T", 1 if character[frame.reference].real > 0 else 2


def parity_mark(frame: LabelFrame, character: ElementCharacter) -> str:
    """g, u, one prime, two primes, or nothing."""
    if frame.inversion is not None:
        return "g" if character[frame.inversion].real > 0 else "u"
    if frame.mirror_across is not None:
        return "'" if character[frame.mirror_across].real > 0 else "''"
    return ""


def pair_member(frame: LabelFrame, character: ElementCharacter) -> str:
    """'1' for the member of a complex pair with exp(+2 pi i m/n) under the main rotation, '2' for the
    other.
    """
    return "1" if character[frame.main].imag > 0 else "2"


def _one_dimensional(frame: LabelFrame, character: ElementCharacter) -> tuple[str, int]:
    if frame.dihedral_two:
        even = [character[i].real > 0 for i in frame.dihedral_two]
        return ("A", 0) if all(even) else ("B", 1 + even.index(True))
    number = 0 if frame.reference is None else 1 if character[frame.reference].real > 0 else 2
    return ("B" if character[frame.main].real < 0 else "A"), number


def _winding(frame: LabelFrame, character: ElementCharacter) -> int:
    """m of the eigenvalues exp(+-2 pi i m/n) of the main rotation of order n."""
    order = frame.group.elements[frame.main].order
    dimension = round(character[0].real)
    angle = float(np.arccos(np.clip(character[frame.main].real / dimension, -1.0, 1.0)))
    return round(angle * order / (2.0 * np.pi))


def _main_rotation(group: PointGroup) -> int:
    """The positive rotation of highest order along z; y in monoclinic, [111] in cubic groups.

    The fourfold rotoinversion where there is no fourfold rotation, the identity where there is no axis.
    """
    if group.system == "cubic":
        return _find(group, 3, False, np.ones(3) / np.sqrt(3.0)) or 0
    axis = _Y if group.system == "monoclinic" else _Z
    orders = sorted({e.order for e in group.elements if e.order > 1}, reverse=True)
    proper = [_find(group, order, False, axis) for order in orders]
    highest = next((i for i in proper if i is not None), None)
    fourfold_improper = _find(group, 4, True, axis)
    if fourfold_improper is not None and (highest is None or group.elements[highest].order < 4):
        return fourfold_improper
    return highest or 0


def _mirror_across(group: PointGroup) -> int | None:
    """The mirror perpendicular to the main axis, in the groups where it gives one and two primes: m, -6,
    -6m2.
    """
    axis = _Y if group.system == "monoclinic" else _Z
    return _find(group, 2, True, axis) if group.symbol in ("m", "-6", "-6m2") else None


def _find(group: PointGroup, order: int, improper: bool, axis: FloatArray) -> int | None:
    return next((i for i, e in enumerate(group.elements) if _is(e, order, improper, axis)), None)


def _is(element: Element, order: int, improper: bool, axis: FloatArray) -> bool:
    if element.axis is None or element.order != order or element.improper != improper:
        return False
    overlap = float(element.axis @ axis)
    return abs(abs(overlap) - 1.0) < SAME_MATRIX and element.sense * overlap >= 0


def _first_found(*indices: int | None) -> int | None:
    return next((i for i in indices if i is not None), None)
