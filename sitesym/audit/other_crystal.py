"""Whether the tensor would be at home in another crystal class, in one of the named axes of this crystal."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from sitesym.arrays import FloatArray
from sitesym.audit.kept_groups import agrees, symmetry_tolerance, tolerances_to_try
from sitesym.audit.neumann import subspaces
from sitesym.audit.own_axes import OwnAxes, symmetry_in_own_axes
from sitesym.audit.own_symmetry import Kept, expected_order, expected_symbol, group_of, kept_operations
from sitesym.audit.search import Field, chance

#: Subgroups of the two holohedries, 98 of m-3m and 54 of 6/mmm: naming one of them is a choice among so many.
_CLASSES_TRIED = 152
#: Axes of its own cost three fitted angles and the frames tried.
_FRAMES, _ANGLES = 10, 3


@dataclass(frozen=True)
class OtherCrystal:
    """The group a tensor obeys instead: symbol, crystal system, in which axes, and the score of the reading.

    ``order``: number of its operations. ``is_lower``: whether these are fewer than a tensor of the kind
    should show in this crystal. ``own``: in axes that are none of the crystal's, those and the operations.
    """

    symbol: str
    system: str
    axes: str
    score: float
    order: int
    is_lower: bool
    own: OwnAxes | None = None


def other_crystal(field: Field) -> OtherCrystal | None:
    """The class that the tensor obeys within noise, read as stated; None where it obeys none but 1.

    In a crystal whose class forbids the whole tensor any other class is a better home.
    """
    plain = [orientation for orientation in field.orientations if orientation.is_plain]
    found = [
        _in_axes(field, np.eye(3), "as stated", 1),
        *(
            _in_axes(
                field,
                field.frames.standard_from_file @ o.rotation.T,
                f"{o.words} (standard orientation)",
                o.choices,
            )
            for o in plain
        ),
    ]
    return min((other for other in found if other is not None), key=lambda other: other.score, default=None)


def other_crystal_in_own_axes(field: Field) -> OtherCrystal | None:
    """The same in axes of the tensor's own, wherever they lie."""
    kind, coordinates = field.spaces.space.kind, field.variants[0].coordinates
    for tolerance in tolerances_to_try(field, 0):
        own = symmetry_in_own_axes(kind, coordinates, tolerance)
        if agrees(field, 0, own.kept, own.rotation):
            found = _home(field, own.kept, own.rotation, tolerance, "turned freely", _FRAMES, _ANGLES)
            return None if found is None else replace(found, own=own)
    return None


def _in_axes(field: Field, to_axes: FloatArray, axes: str, choices: int) -> OtherCrystal | None:
    """The group kept in axes that ``to_axes`` (3, 3) leads to from those of the tensor."""
    tolerance = symmetry_tolerance(field, 0, to_axes)
    kept = kept_operations(field.spaces.space.kind, _moved(field, to_axes), tolerance)
    return _home(field, kept, to_axes, tolerance, axes, choices)


def _moved(field: Field, to_axes: FloatArray) -> FloatArray:
    coordinates = field.variants[0].coordinates
    moved: FloatArray = field.spaces.space.rotated(to_axes[None], coordinates[:, None])[0, :, 0]
    return moved


def _home(
    field: Field,
    kept: Kept,
    to_axes: FloatArray,
    tolerance: float,
    axes: str,
    choices: int,
    fitted: int = 0,
) -> OtherCrystal | None:
    """The group of the operations kept, scored; None where it says nothing."""
    kind, moved = field.spaces.space.kind, _moved(field, to_axes)
    length = float(np.linalg.norm(moved))
    group = group_of(kept)
    spaces = subspaces(kind, group)
    left = float(np.linalg.norm(spaces.forbidden_part(moved)))
    # The same class in other axes is a matter of axes, not of another crystal.
    same_class = group.symbol == expected_symbol(kind, field.spaces.group)
    if spaces.constraints == 0 or left > tolerance or same_class:
        return None
    telling = max(spaces.constraints - fitted, 0)
    likelihood = chance(np.array(left / length), field.typical, field.floor(0), telling)
    score = float(np.log(_CLASSES_TRIED * choices) + likelihood)
    lower = group.order < expected_order(kind, field.spaces.group)
    return OtherCrystal(group.symbol, group.system, axes, score, group.order, lower)
