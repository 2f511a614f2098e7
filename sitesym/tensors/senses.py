"""Which independent components change sign in an equivalent choice of axes.

Symmetry fixes directions of axes but not always their senses: quartz turned by 180 degrees about its
threefold axis obeys the same form with the sign of d11 reversed. Without data the sense is open, and these
are the components that it decides about.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from sitesym.arrays import FloatArray, IntArray
from sitesym.groups import PointGroup
from sitesym.groups.elements import classify, small_integers
from sitesym.groups.normaliser import equivalent_turns
from sitesym.tensors.contraction import contraction, to_matrix
from sitesym.tensors.forms import AllowedForm

_SAME = 1e-6


@dataclass(frozen=True)
class SenseChoice:
    """An equivalent choice of axes: the turn in words (``180 degrees about z``, one of the axes themselves)
    and the components that change sign.
    """

    turn: str
    flips: tuple[str, ...]


def sense_choices(form: AllowedForm, group: PointGroup) -> tuple[SenseChoice, ...]:
    """Turns of the axes that keep the form and reverse the signs of some independent components.

    Turns that mix components, or change nothing, are left out; of turns with one effect the first is named.
    """
    choices: dict[tuple[str, ...], SenseChoice] = {}
    for turn in equivalent_turns(group):
        flips = _flips(form, turn)
        if flips:
            choices.setdefault(flips, SenseChoice(_words(turn), flips))
    return tuple(choices.values())


def turned(tensor: FloatArray, rotation: FloatArray, axial: bool = False) -> FloatArray:
    """A full tensor, shape (3,)*rank, in other axes: T'_ij.. = R_ia R_jb .. T_ab.. (times det R if axial)."""
    result = np.asarray(tensor, dtype=np.float64)
    for axis in range(result.ndim):
        result = np.moveaxis(np.tensordot(rotation, result, axes=(1, axis)), 0, axis)
    return result * (np.sign(np.linalg.det(rotation)) if axial else 1.0)


def _flips(form: AllowedForm, turn: FloatArray) -> tuple[str, ...]:
    """Independent components that the turn reverses; empty unless it changes nothing but signs."""
    keys = contraction(form.kind).keys
    places = [keys.index(name) for name in form.independent]
    written = contraction(form.kind).multi_indices[places]
    flips = []
    for column, name in enumerate(form.independent):
        image = to_matrix(form.kind, turned(form.full({n: float(n == name) for n in form.independent}), turn))
        values = np.atleast_1d(image[tuple(written.T)])
        expected = np.zeros(len(values))
        expected[column] = np.sign(values[column])
        if np.abs(values - expected).max() > _SAME:
            return ()
        if values[column] < 0:
            flips.append(name)
    return tuple(flips)


def _words(turn: FloatArray) -> str:
    """Angle and direction of a turn. The direction is no [001]: that would be one of the lattice."""
    angle = np.degrees(np.arccos(np.clip((np.trace(turn) - 1.0) / 2.0, -1.0, 1.0)))
    element = classify(turn)
    indices = None if element.axis is None else small_integers(element.axis)
    direction = element.direction if indices is None else _in_letters(indices)
    return f"{angle:.0f} degrees about {direction}"


def _in_letters(indices: IntArray) -> str:
    """A Cartesian direction of small integers as a sum of axes.

    >>> _in_letters(np.array([0, 0, 1])), _in_letters(np.array([1, -2, 0]))
    ('z', 'x - 2y')
    """
    terms = [
        f"{'-' if n < 0 else '+'} {abs(n) if abs(n) > 1 else ''}{letter}"
        for n, letter in zip(indices.tolist(), "xyz", strict=True)
        if n
    ]
    return " ".join(terms).removeprefix("+ ")
