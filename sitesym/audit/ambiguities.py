"""What a vanishing residual does not prove: other ways to read an array that give another obeying tensor.

A way that gives the very same tensor (a cubic stiffness in another order of columns) is no ambiguity. Ways
are compared with one reading, changed in one respect at a time; combinations of them obey as well.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from functools import cached_property, lru_cache

import numpy as np

from sitesym.arrays import FloatArray, frozen
from sitesym.audit.equivalents import OTHER_HAND, Change, allowed_entries, axes_after, changes, words_of
from sitesym.audit.neumann import acting_group, subspaces
from sitesym.audit.orders import order_text
from sitesym.audit.result import Ambiguity, AmbiguitySort, Reading
from sitesym.audit.rotation_words import direction_words, turn_text
from sitesym.audit.search import Field, index_finding, residual_of
from sitesym.audit.variants import Variant
from sitesym.groups import PointGroup
from sitesym.groups.normaliser import directions_of_any_turn
from sitesym.groups.symbols import rotation_about
from sitesym.tensors import TensorKind, contraction

#: Two tensors that are each within the tolerance of one tensor differ by at most so many tolerances.
_DIFFERENT = 2.0
#: An entry is free when at most this share of it (in the orthonormal metric) is forbidden: axes of files are
#: tilted by their rounding.
_TIED = 1e-3


@dataclass(frozen=True, eq=False)
class _Base:
    """The reading others are compared with: where its axes lead, its variant, its coordinates (n,) there."""

    field: Field
    rotation: FloatArray
    variant: Variant
    tolerance: float

    @cached_property
    def to_standard(self) -> FloatArray:
        matrix: FloatArray = self.field.frames.standard_from_file @ self.rotation.T
        return matrix

    @cached_property
    def coefficients(self) -> FloatArray:
        """Of the allowed part, shape (k,)."""
        part: FloatArray = self.field.spaces.allowed @ self.field.moved(self.rotation, self.variant)
        return part

    def differs(self, distance: FloatArray | float) -> bool:
        return float(np.max(distance, initial=0.0)) > _DIFFERENT * self.tolerance

    def otherwise(self, sort: AmbiguitySort, words: str, variant: Variant | None = None) -> Ambiguity:
        """The base with another variant, or with its own."""
        read = variant or self.variant
        return Ambiguity(sort, words, self.rotation, read.order, read.layout, read.factor)


def ambiguities(field: Field, reading: Reading) -> tuple[Ambiguity, ...]:
    """Orders, layouts, factors, axes and hands that read another tensor which obeys as well as a reading, and
    the entries that symmetry ties to no other.
    """
    keys = [(v.order, v.layout, v.factor) for v in field.variants]
    number = keys.index((reading.order, reading.layout, reading.factor))
    base = _Base(field, reading.rotation, field.variants[number], field.noise_left(number))
    return (*_variants(base), *_axes(base), *_principal_axes(base), *_entries(base))


def _variants(base: _Base) -> Iterator[Ambiguity]:
    """Orders, layouts, factors, and combinations of them whose parts do not obey alone."""
    obeying = [base.field.variants[n] for n in _obeying_variants(base)]
    differences = [(variant, _differences(base.variant, variant)) for variant in obeying]
    differences.sort(key=lambda one: len(one[1]))
    known: set[str] = set()
    for variant, parts in differences:
        if not known.intersection(parts.values()):
            known.add("; ".join(parts.values()))
            yield base.otherwise(next(iter(parts)), ", ".join(parts.values()), variant)


def _obeying_variants(base: _Base) -> list[int]:
    field = base.field
    coordinates = np.array([v.coordinates for v in field.variants])
    distances = np.linalg.norm(coordinates - base.variant.coordinates, axis=1)
    moved = field.spaces.space.rotated(base.to_standard[None], coordinates.T)[0]
    left = np.linalg.norm(field.spaces.forbidden_part(moved), axis=0)
    # The noise is that of the array as it stands, also where a factor makes the tensor smaller.
    within = left <= np.maximum(field.tolerances, base.tolerance)
    near = np.flatnonzero((distances > _DIFFERENT * base.tolerance) & within)
    return [n for n in near.tolist() if _accepted(base, field.variants[n])]


def _accepted(base: _Base, variant: Variant) -> bool:
    """Whether a variant within its tolerance obeys altogether.

    Known uncertainties ask for a closer look, and another layout may break index symmetry; orders and
    factors cannot.
    """
    field = base.field
    within = field.measurement.sigma is None or residual_of(field, base.rotation, variant).within
    return within and (variant.layout == base.variant.layout or index_finding(field, variant).holds)


def _differences(own: Variant, other: Variant) -> dict[AmbiguitySort, str]:
    differences: dict[AmbiguitySort, str] = {}
    if own.order != other.order:
        differences["order"] = f"order {order_text(other.order)}"
    if own.layout != other.layout:
        differences["layout"] = f"layout {other.layout}"
    if own.factor != other.factor:
        differences["factor"] = other.factor or "the factors of the kind"
    return differences


def _axes(base: _Base) -> Iterator[Ambiguity]:
    """Turns that symmetry cannot detect and the other hand, where they change this tensor."""
    spaces = base.field.spaces
    entries = allowed_entries(spaces.space.kind, spaces.group, base.to_standard)
    seen = [base.coefficients]
    for change in changes(spaces.space.kind, spaces.group):
        images = change.actions @ base.coefficients
        if all(base.differs(np.linalg.norm(images - other, axis=1)) for other in seen):
            seen.append(images[0])
            flips, mixes = entries.effect(change)
            yield _other_axes(base, change, flips, mixes)


def _other_axes(base: _Base, change: Change, flips: tuple[str, ...], mixes: bool) -> Ambiguity:
    words = words_of(change, base.to_standard)
    own = base.variant
    if change.turn is None:
        return Ambiguity(
            "hand", OTHER_HAND, base.rotation, own.order, own.layout, own.factor, flips=flips, mixes=mixes
        )
    return Ambiguity(
        "axes",
        f"axes turned by {words}",
        frozen(axes_after(change, base.to_standard) @ base.rotation),
        own.order,
        own.layout,
        own.factor,
        change.axis is not None,
        flips,
        mixes,
    )


def _principal_axes(base: _Base) -> Iterator[Ambiguity]:
    """Turns that bring another principal axis of a symmetric 3x3 tensor along the unique axis of the crystal.

    No operation of a monoclinic crystal tells which of the three lies there.
    """
    spaces, own = base.field.spaces, base.variant
    kind = spaces.space.kind
    unique = directions_of_any_turn(acting_group(kind, spaces.group))
    if kind.rank != 2 or not contraction(kind).commuting or len(unique) != 1:
        return
    obeying = spaces.allowed.T @ base.coefficients
    for axis in np.linalg.eigh(spaces.space.array(obeying))[1].T:
        turn = rotation_about(axis, np.pi / 2.0)
        moved = spaces.space.rotated(turn[None], obeying[:, None])[0, :, 0]
        obeys = float(np.linalg.norm(spaces.forbidden_part(moved))) <= base.tolerance
        if obeys and abs(axis @ unique[0]) < 0.5 and base.differs(float(np.linalg.norm(moved - obeying))):
            axes = base.to_standard.T @ turn.T @ base.to_standard
            there = direction_words(base.to_standard.T @ unique[0])
            words = f"axes turned by {turn_text(axes)}, another principal axis along {there}"
            rotation = frozen(axes @ base.rotation)
            yield Ambiguity("axes", words, rotation, own.order, own.layout, own.factor, mixes=True)


def _entries(base: _Base) -> Iterator[Ambiguity]:
    """Entries that stand in no relation: a slip in one of them gives another tensor that obeys."""
    spaces, own = base.field.spaces, base.variant
    free = _free_entries(spaces.space.kind, spaces.group, (np.round(base.to_standard, 12) + 0.0).tobytes())
    if free:
        words = f"entries in no relation to others: {', '.join(free)}"
        yield Ambiguity("entry", words, base.rotation, own.order, own.layout, own.factor, entries=free)


@lru_cache(maxsize=256)
def _free_entries(kind: TensorKind, group: PointGroup, to_standard: bytes) -> tuple[str, ...]:
    """Entries (one of those that index symmetry makes equal) that may have any value whatever the others."""
    spaces = subspaces(kind, group)
    matrix = np.frombuffer(to_standard).reshape(3, 3)
    form = spaces.space.rotated(matrix.T[None], spaces.allowed.T)[0]
    basis = spaces.space.index_basis
    allowed = ((basis @ form) ** 2).sum(axis=1)
    rows = basis[allowed > 1.0 - _TIED**2]
    return tuple(spaces.space.names[int(np.flatnonzero(np.abs(row) > _TIED)[0])] for row in rows)
