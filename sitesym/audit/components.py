"""Forbidden components and broken relations, one by one, in the axes of the tensor."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from sitesym.arrays import FloatArray, IntArray
from sitesym.audit.neumann import Subspaces
from sitesym.audit.result import Deviation
from sitesym.tensors import contraction

#: Coefficients smaller than this are not written: axes of files are tilted by their rounding.
_VISIBLE = 5e-4
#: A component is independent of others when at least this much of it (in the orthonormal metric) is.
_INDEPENDENT = 0.02


@dataclass(frozen=True, eq=False)
class Relations:
    """Every entry by independent ones: ``chosen`` (k,) their places, ``coefficients`` (n, k)."""

    chosen: IntArray
    coefficients: FloatArray


def deviations(
    spaces: Subspaces, to_group_axes: FloatArray, entries: FloatArray, tolerance: FloatArray
) -> tuple[tuple[Deviation, ...], tuple[Deviation, ...]]:
    """Forbidden components and broken relations of entries (n,) of a tensor in its own axes.

    ``to_group_axes`` (3, 3) leads from these axes to those of the subspaces; ``tolerance`` (n,): of each
    entry. A relation is compared with the entries it names; its tolerance adds theirs.
    """
    relations = relations_in(spaces, to_group_axes)
    names = [spaces.space.names[place] for place in relations.chosen]
    forbidden: list[Deviation] = []
    broken: list[Deviation] = []
    for place, name in enumerate(spaces.space.names):
        row = np.where(np.abs(relations.coefficients[place]) > _VISIBLE, relations.coefficients[place], 0.0)
        value = float(entries[place])
        expected = float(row @ entries[relations.chosen])
        allowed = float(tolerance[place] + np.abs(row) @ tolerance[relations.chosen])
        if place in relations.chosen or abs(value - expected) <= allowed:
            continue
        if row.any():
            text = f"{name} = {relation_text(dict(zip(names, row.tolist(), strict=True)))}"
            broken.append(Deviation(name, value, expected, allowed, text))
        else:
            forbidden.append(Deviation(name, value, 0.0, allowed))
    return tuple(forbidden), tuple(broken)


def relations_in(spaces: Subspaces, to_group_axes: FloatArray) -> Relations:
    """The allowed form in axes that need not be aligned with the crystal.

    Components are chosen in the order of the published tables; one that depends on those chosen before up
    to the tilt of the axes is not.
    """
    space = spaces.space
    form = space.rotated(to_group_axes.T[None], spaces.allowed.T)[0]
    preference = [
        space.names.index(contraction(space.kind).keys[k]) for k in contraction(space.kind).preference
    ]
    chosen: list[int] = []
    free = np.eye(spaces.independent)
    for place in preference:
        rest = free @ form[place]
        length = float(np.linalg.norm(rest))
        if length > _INDEPENDENT and len(chosen) < spaces.independent:
            chosen.append(place)
            free = free - np.outer(rest, rest) / length**2
    places = np.array(sorted(chosen), dtype=np.int64)
    coefficients = np.zeros((space.size, len(places)))
    if len(places):
        coefficients = form @ np.linalg.pinv(form[places])
        coefficients *= space.weights[places] / space.weights[:, None]
    return Relations(places, coefficients)


def relation_text(terms: Mapping[str, float]) -> str:
    """The right-hand side of a relation, terms of zero left out: ``-2*11``, ``0.5*11 - 0.5*12``."""
    text = ""
    for name, coefficient in terms.items():
        if coefficient == 0.0:
            continue
        size = abs(coefficient)
        number = "" if abs(size - 1.0) < _VISIBLE else f"{size:.4g}*"
        sign = "-" if coefficient < 0 else "+"
        text += f" {sign} {number}{name}" if text else f"{sign.strip('+')}{number}{name}"
    return text
