"""What a vanishing residual does not prove: turns and hands of the axes that symmetry cannot tell apart."""

from __future__ import annotations

from functools import lru_cache

import numpy as np

from sitesym.arrays import FloatArray, frozen
from sitesym.audit.arrayspace import array_space
from sitesym.audit.neumann import about_z, inversion_sign, normalises, turns_of_normaliser
from sitesym.audit.orders import order_text
from sitesym.audit.result import EquivalentAxes
from sitesym.audit.search import Field
from sitesym.audit.variants import Variant
from sitesym.groups import PointGroup
from sitesym.groups.elements import classify
from sitesym.tensors import TensorKind, allowed_form

_SAME = 1e-6
_ARBITRARY_DEGREES = 17.0


def undetected_variants(field: Field, rotation: FloatArray, stated: int) -> tuple[str, ...]:
    """Orders, layouts and factors, one at a time, that read another tensor which obeys as well in these axes.

    ``rotation`` (3, 3): the axes as rows in the file's axes; ``stated``: the variant they are compared with.
    """
    own = field.variants[stated]
    coordinates = np.array([v.coordinates for v in field.variants])
    changes = np.linalg.norm(coordinates - own.coordinates, axis=1)
    to_standard = field.frames.standard_from_file @ rotation.T
    moved = field.spaces.space.rotated(to_standard[None], coordinates.T)[0]
    left = np.linalg.norm(field.spaces.forbidden_part(moved), axis=0)
    obeying = np.flatnonzero((changes > 2.0 * field.tolerances[stated]) & (left <= field.tolerances))
    differences = (_differences(own, field.variants[number]) for number in obeying)
    return tuple(found[0] for found in differences if len(found) == 1)


def _differences(own: Variant, other: Variant) -> list[str]:
    differences = []
    if own.order != other.order:
        differences.append(f"order {order_text(other.order)}")
    if own.layout != other.layout:
        differences.append(f"layout {other.layout}")
    if own.factor != other.factor:
        differences.append(other.factor or "the factors of the kind")
    return differences


@lru_cache(maxsize=512)
def equivalent_axes(kind: TensorKind, group: PointGroup) -> tuple[EquivalentAxes, ...]:
    """Turns of the axes that keep the allowed form and change the components, and the change of hand.

    ``group`` in the standard orientation, in which the directions are named. Of turns with one effect the
    first is named; of those that mix components, every one.
    """
    found: dict[tuple[str, ...], EquivalentAxes] = {}
    mixing: list[EquivalentAxes] = []
    for words, turn in (*_named_turns(group), *_arbitrary_turns(group)):
        flips, mixes = _effect(kind, group, turn)
        if mixes:
            mixing.append(EquivalentAxes(words, (), mixes=True))
        elif flips:
            found.setdefault(flips, EquivalentAxes(words, flips, mixes=False))
    form = allowed_form(kind, group)
    if inversion_sign(kind) < 0 and form.independent:
        found.setdefault(form.independent, EquivalentAxes("the other hand", form.independent, mixes=False))
    return (*found.values(), *mixing)


def _named_turns(group: PointGroup) -> list[tuple[str, FloatArray]]:
    named = []
    for turn in turns_of_normaliser(group):
        element = classify(turn)
        named.append((f"{360 // element.order} degrees about {element.direction}", turn))
    return named


def _arbitrary_turns(group: PointGroup) -> list[tuple[str, FloatArray]]:
    """One turn for each axis about which every angle maps the group onto itself."""
    turn = about_z(_ARBITRARY_DEGREES)
    cycles = (("[001]", [0, 1, 2]), ("[010]", [1, 2, 0]), ("[100]", [2, 0, 1]))
    return [
        (f"any angle about {direction}", turn[np.ix_(cycle, cycle)])
        for direction, cycle in cycles
        if normalises(group, turn[np.ix_(cycle, cycle)])
    ]


def _effect(kind: TensorKind, group: PointGroup, turn: FloatArray) -> tuple[tuple[str, ...], bool]:
    """Independent components that a turn of the axes reverses, and whether it does anything but reversing."""
    form = allowed_form(kind, group)
    if not form.independent:
        return (), False
    change = _unit_tensors(kind, group)[1] @ _turned_units(kind, group, turn)
    diagonal = np.diag(np.sign(np.diag(change)))
    if np.abs(change - diagonal).max() > _SAME:
        return (), True
    return tuple(n for n, sign in zip(form.independent, np.diag(diagonal), strict=True) if sign < 0), False


def _turned_units(kind: TensorKind, group: PointGroup, turn: FloatArray) -> FloatArray:
    space = array_space(kind)
    turned: FloatArray = space.rotated(turn[None], _unit_tensors(kind, group)[0])[0]
    return turned


@lru_cache(maxsize=512)
def _unit_tensors(kind: TensorKind, group: PointGroup) -> tuple[FloatArray, FloatArray]:
    """Tensors with one independent component equal to one, as columns (n, k); what reads them off (k, n)."""
    form = allowed_form(kind, group)
    space = array_space(kind)
    units = np.array(
        [
            space.coordinates(form.matrix({n: float(n == name) for n in form.independent}))
            for name in form.independent
        ]
    ).T
    return frozen(units), frozen(np.linalg.pinv(units))
