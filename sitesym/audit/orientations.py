"""The axes a tensor may have been given in: as stated, every named set, and every turn of these."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from sitesym.arrays import FloatArray, IntArray
from sitesym.audit.frames import Frames, tried_turns
from sitesym.audit.layouts import orders_of
from sitesym.audit.measurement import Measurement
from sitesym.audit.neumann import equivalent_rotations

#: So many readings that come to the same are told by name.
MOST_JOINED: Final = 5
#: Weights of the entries of a matrix without rational relations: square roots of primes.
_MARK = np.sqrt(np.array([2.0, 3.0, 5.0, 7.0, 11.0, 13.0, 17.0, 19.0, 23.0]))


@dataclass(frozen=True, eq=False)
class Orientation:
    """Axes the tensor may have: in words, as rows in the file's axes (3, 3), how many such there are, whether
    they contradict the stated ones, whether they are named axes not turned, other words for equivalent axes.
    """

    words: str
    rotation: FloatArray
    choices: int
    departs: bool
    is_plain: bool
    same_axes: tuple[str, ...]


def stated_orientation(measurement: Measurement, frames: Frames) -> Orientation | None:
    """The axes as stated; None where something that a verdict needs is not stated.

    That is the axes and, where the array has contracted pairs, their order.
    """
    if measurement.order is None and len(orders_of(measurement.kind, measurement.stated_layout)) > 1:
        return None
    if not isinstance(measurement.axes, str):
        return Orientation("given", measurement.axes, 1, departs=False, is_plain=True, same_axes=())
    if measurement.axes == "unknown":
        return None
    rotation = frames.named[measurement.axes]
    return Orientation(measurement.axes, rotation, 1, departs=False, is_plain=True, same_axes=())


def orientations(measurement: Measurement, frames: Frames) -> tuple[Orientation, ...]:
    """The stated axes, or all named ones where none are stated, then every turn of every named set of axes.

    Axes that an equivalent turn of the crystal takes to earlier ones are listed with these.
    """
    stated = measurement.axes
    named = dict(frames.named)
    if not isinstance(stated, str):
        named = {"given": stated, **named}
        stated = "given"
    unknown = stated == "unknown"
    if not unknown:
        named = {stated: named.pop(stated), **named}
    turns = tried_turns()
    bases = np.array(list(named.values()))
    # No turn comes first, so that all named axes stand before all turned ones.
    rotations = np.array([turn.matrix for turn in turns])[:, None] @ bases[None]
    labels = [f"{name}, {turn.words}" if turn.words else name for turn in turns for name in named]
    flat = rotations.reshape(-1, 3, 3)
    equivalent = equivalent_rotations(measurement.kind, frames.standard)
    first, member = _classes_of_axes(frames.standard_from_file @ np.swapaxes(flat, 1, 2), equivalent)
    together: list[list[str]] = [[] for _ in first]
    for number, label in zip(member.tolist(), labels, strict=True):
        together[number].append(label)
    return tuple(
        Orientation(
            labels[place],
            flat[place],
            _axes_choices(place, len(named), unknown),
            not unknown and place > 0,
            place < len(named),
            tuple(together[number][1 : 1 + MOST_JOINED]),
        )
        for number, place in enumerate(first.tolist())
    )


def _axes_choices(place: int, named: int, unknown: bool) -> int:
    if place == 0 and not unknown:
        return 1
    return named if place < named else named * len(tried_turns())


def _classes_of_axes(to_standard: FloatArray, turns: FloatArray) -> tuple[IntArray, IntArray]:
    """First member of each class of rotations (m, 3, 3) that ``turns`` (t, 3, 3) make equivalent, and the
    class of each.

    A fixed linear function of the matrices, its largest value over all turns, names the class.
    """
    images = (turns[:, None] @ to_standard[None]).reshape(len(turns), -1, 9)
    marks = np.round(images @ _MARK, 6).max(axis=0)
    _, first, member = np.unique(marks, return_index=True, return_inverse=True)
    order = np.argsort(first)
    place = np.empty_like(order)
    place[order] = np.arange(len(order))
    return first[order], place[member]
