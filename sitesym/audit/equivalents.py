"""Changes of axes that symmetry cannot detect: turns of the normaliser, and the change of hand.

A turn is named in the axes a tensor is given in, and so are the components it changes. What it does to the
allowed part of a tensor does not depend on these axes and is computed once for each kind and group.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from sitesym.arrays import FloatArray, frozen
from sitesym.audit.components import relations_in
from sitesym.audit.neumann import acting_group, inversion_sign, subspaces
from sitesym.audit.result import EquivalentAxes
from sitesym.audit.rotation_words import direction_words, turn_text
from sitesym.groups import PointGroup
from sitesym.groups.elements import classify
from sitesym.groups.normaliser import directions_of_any_turn, equivalent_turns
from sitesym.groups.symbols import rotation_about
from sitesym.tensors import TensorKind

OTHER_HAND = "the other hand"
_SAME = 1e-6
#: Angles in degrees that stand for any: one of them changes every tensor that some angle changes.
_SAMPLES = (20.0, 45.0, 90.0)


@dataclass(frozen=True, eq=False)
class Change:
    """A change of axes under which a group stays what it is, in the standard orientation.

    ``turn`` (3, 3): what it does to the tensor; None for a change of hand. ``axis`` (3,): where any angle
    about it will do, with ``turn`` one of them. ``actions`` (j, k, k): on the coefficients of the allowed
    tensors, for each angle tried.
    """

    turn: FloatArray | None
    axis: FloatArray | None
    actions: FloatArray


@lru_cache(maxsize=512)
def changes(kind: TensorKind, group: PointGroup) -> tuple[Change, ...]:
    """Changes of axes that keep a group and not every allowed tensor; of those with one effect the first.

    ``group`` in the standard orientation. Besides any angle about an axis, only one turn that reverses it is
    listed.
    """
    kept: list[Change] = []
    for change in _all_changes(kind, group):
        identity = np.eye(change.actions.shape[-1])
        earlier = [identity, *(known.actions[0] for known in kept)]
        if not any(np.abs(change.actions - action).max(initial=0.0) < _SAME for action in earlier):
            kept.append(change)
    return tuple(kept)


def _all_changes(kind: TensorKind, group: PointGroup) -> Iterator[Change]:
    acting = acting_group(kind, group)
    directions = directions_of_any_turn(acting)
    turns = [turn for turn in equivalent_turns(acting) if not _is_about(directions, turn)]
    # A turn and its inverse are both equivalent; positive angles read better.
    both_ways = sorted([*turns, *(turn.T for turn in turns)], key=lambda turn: classify(turn).sense < 0)
    for turn in both_ways[:1] if len(directions) else both_ways:
        yield Change(turn, None, _actions(kind, group, [turn]))
    for axis in directions:
        samples = [rotation_about(axis, float(np.radians(angle))) for angle in _SAMPLES]
        yield Change(samples[0], axis, _actions(kind, group, samples))
    if inversion_sign(kind) < 0:
        yield Change(None, None, -np.eye(subspaces(kind, group).independent)[None])


def _is_about(directions: FloatArray, turn: FloatArray) -> bool:
    return any(np.abs(turn @ axis - axis).max() < _SAME for axis in directions)


def _actions(kind: TensorKind, group: PointGroup, turns: list[FloatArray]) -> FloatArray:
    spaces = subspaces(kind, group)
    return frozen(spaces.allowed @ spaces.space.rotated(np.array(turns), spaces.allowed.T))


def axes_after(change: Change, to_standard: FloatArray) -> FloatArray:
    """The new axes as rows in the old ones, (3, 3), from which ``to_standard`` leads to the standard
    orientation. Only for a turn.
    """
    assert change.turn is not None
    axes: FloatArray = to_standard.T @ change.turn.T @ to_standard
    return axes


def words_of(change: Change, to_standard: FloatArray) -> str:
    """A change in words, in axes that ``to_standard`` (3, 3) takes to the standard orientation."""
    if change.turn is None:
        return OTHER_HAND
    if change.axis is None:
        return turn_text(axes_after(change, to_standard))
    return f"any angle about {direction_words(to_standard.T @ change.axis)}"


@dataclass(frozen=True, eq=False)
class AllowedEntries:
    """Independent entries of a tensor in its axes: ``names`` (k), and their values (k, k) for each of the
    coefficients of the allowed tensors, with the inverse.
    """

    names: tuple[str, ...]
    values: FloatArray
    inverse: FloatArray

    def effect(self, change: Change) -> tuple[tuple[str, ...], bool]:
        """Entries a change reverses, and whether it does anything but reversing."""
        action = self.values @ change.actions[0] @ self.inverse
        signs = np.sign(np.diag(action))
        if np.abs(action - np.diag(signs)).max(initial=0.0) > _SAME:
            return (), True
        return tuple(name for name, sign in zip(self.names, signs, strict=True) if sign < 0), False


def allowed_entries(kind: TensorKind, group: PointGroup, to_standard: FloatArray) -> AllowedEntries:
    """The independent entries in axes that ``to_standard`` (3, 3) takes to the standard orientation."""
    return _allowed_entries(kind, group, (np.round(to_standard, 12) + 0.0).tobytes())


@lru_cache(maxsize=256)
def _allowed_entries(kind: TensorKind, group: PointGroup, key: bytes) -> AllowedEntries:
    to_standard = np.frombuffer(key).reshape(3, 3)
    spaces = subspaces(kind, group)
    chosen = relations_in(spaces, to_standard).chosen
    form = spaces.space.rotated(to_standard.T[None], spaces.allowed.T)[0]
    values = form[chosen] / spaces.space.weights[chosen, None]
    names = tuple(spaces.space.names[place] for place in chosen)
    return AllowedEntries(names, frozen(values), frozen(np.linalg.pinv(values)))


def equivalent_axes(
    kind: TensorKind, group: PointGroup, to_standard: FloatArray
) -> tuple[EquivalentAxes, ...]:
    """Turns of the axes that keep the allowed form and change the components, the change of hand, and both
    together where that reverses other components again.

    ``group`` in the standard orientation, to which ``to_standard`` (3, 3) takes the tensor's axes: in these
    the turns and the components are named.
    """
    entries = allowed_entries(kind, group, to_standard)
    found = [
        EquivalentAxes(words_of(change, to_standard), *entries.effect(change))
        for change in changes(kind, group)
    ]
    # Reversed signs say more than a mixture, and come first.
    found.sort(key=lambda axes: axes.mixes)
    return (*found, *_with_the_other_hand(found, entries.names))


def _with_the_other_hand(found: list[EquivalentAxes], names: tuple[str, ...]) -> Iterator[EquivalentAxes]:
    """Turns that only reverse components together with the change of hand, where one is among those found."""
    known = {(), *(axes.flips for axes in found)}
    for hand in (axes for axes in found if axes.turn == OTHER_HAND):
        for turned in (axes for axes in found if not axes.mixes and axes is not hand):
            flips = tuple(name for name in names if (name in turned.flips) != (name in hand.flips))
            if flips not in known:
                known.add(flips)
                yield EquivalentAxes(f"{turned.turn} and {OTHER_HAND}", flips, mixes=False)
