"""Whether the tensor would be at home in another crystal class, in one of the named axes of this crystal."""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from sitesym.audit.frames import standard_groups
from sitesym.audit.neumann import Subspaces, subspaces
from sitesym.audit.own_symmetry import Kept, kept_operations
from sitesym.audit.search import Field, chance
from sitesym.tensors import TensorKind

#: Subgroups of the two holohedries, 98 of m-3m and 54 of 6/mmm: naming one of them is a choice among so many.
_CLASSES_TRIED = 152


@dataclass(frozen=True)
class OtherCrystal:
    """The group a tensor obeys instead: symbol, crystal system, in which axes, and the score of the reading."""

    symbol: str
    system: str
    axes: str
    score: float


def other_crystal(field: Field) -> OtherCrystal | None:
    """The class that the tensor obeys within noise, read as stated; None where it obeys none but 1."""
    found: list[OtherCrystal] = []
    variant = field.variants[0]
    length = float(np.linalg.norm(variant.coordinates))
    kind = field.spaces.space.kind
    for orientation in field.orientations:
        if not orientation.is_plain:
            continue
        moved = field.moved(orientation.rotation, variant)
        kept = kept_operations(kind, moved, float(field.tolerances[0]))
        spaces = _subspaces_of(kind, kept)
        left = float(np.linalg.norm(spaces.forbidden_part(moved)))
        if spaces.constraints == 0 or left > field.tolerances[0]:
            continue
        score = np.log(_CLASSES_TRIED * orientation.choices) + chance(
            np.array(left / length), field.typical, field.floor(0), spaces.constraints
        )
        group = spaces.group
        found.append(OtherCrystal(group.symbol, group.system, orientation.words, float(score)))
    return min(found, key=lambda other: other.score, default=None)


def _subspaces_of(kind: TensorKind, kept: Kept) -> Subspaces:
    return _cached(kind, kept.holohedry, tuple(sorted(kept.elements)))


@lru_cache(maxsize=1024)
def _cached(kind: TensorKind, holohedry: str, elements: tuple[int, ...]) -> Subspaces:
    return subspaces(kind, standard_groups()[holohedry].subgroup(list(elements)))

