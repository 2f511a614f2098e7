"""Whether the tensor would be at home in another crystal class, in one of the named axes of this crystal."""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from sitesym.arrays import FloatArray
from sitesym.audit.frames import standard_groups
from sitesym.audit.neumann import Subspaces, subspaces
from sitesym.audit.own_symmetry import Kept, expected_order, expected_symbol, kept_operations
from sitesym.audit.search import Field, chance
from sitesym.tensors import TensorKind

#: Subgroups of the two holohedries, 98 of m-3m and 54 of 6/mmm: naming one of them is a choice among so many.
_CLASSES_TRIED = 152


@dataclass(frozen=True)
class OtherCrystal:
    """The group a tensor obeys instead: symbol, crystal system, in which axes, and the score of the reading.

    ``is_lower``: whether it has fewer operations than a tensor of the kind should show in this crystal.
    """

    symbol: str
    system: str
    axes: str
    score: float
    is_lower: bool


def other_crystal(field: Field) -> OtherCrystal | None:
    """The class that the tensor obeys within noise, read as stated; None where it obeys none but 1.

    In a crystal whose class forbids the whole tensor any other class is a better home.
    """
    variant = field.variants[0]
    plain = [orientation for orientation in field.orientations if orientation.is_plain]
    found = [
        _in_axes(field, variant.coordinates, "as stated", 1),
        *(
            _in_axes(field, field.moved(o.rotation, variant), f"{o.words} (standard orientation)", o.choices)
            for o in plain
        ),
    ]
    return min((other for other in found if other is not None), key=lambda other: other.score, default=None)


def _in_axes(field: Field, coordinates: FloatArray, axes: str, choices: int) -> OtherCrystal | None:
    """The group kept by coordinates in some axes."""
    kind = field.spaces.space.kind
    length = float(np.linalg.norm(coordinates))
    tolerance = float(field.tolerances[0]) if field.spaces.independent else field.noise * length
    spaces = _subspaces_of(kind, kept_operations(kind, coordinates, tolerance))
    left = float(np.linalg.norm(spaces.forbidden_part(coordinates)))
    group = spaces.group
    # The same class in other axes is a matter of axes, not of another crystal.
    same_class = group.symbol == expected_symbol(kind, field.spaces.group)
    if spaces.constraints == 0 or left > tolerance or same_class:
        return None
    likelihood = chance(np.array(left / length), field.typical, field.floor(0), spaces.constraints)
    score = float(np.log(_CLASSES_TRIED * choices) + likelihood)
    lower = group.order < expected_order(kind, field.spaces.group)
    return OtherCrystal(group.symbol, group.system, axes, score, lower)


def _subspaces_of(kind: TensorKind, kept: Kept) -> Subspaces:
    return _cached(kind, kept.holohedry, tuple(sorted(kept.elements)))


@lru_cache(maxsize=1024)
def _cached(kind: TensorKind, holohedry: str, elements: tuple[int, ...]) -> Subspaces:
    return subspaces(kind, standard_groups()[holohedry].subgroup(list(elements)))
