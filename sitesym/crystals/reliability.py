"""How far a symmetry can be relied on: tolerance ladder, second opinion, distance from higher symmetry."""

from __future__ import annotations

from dataclasses import dataclass, replace

from sitesym.choices import DEFAULT_FINDER
from sitesym.crystals.crystal import Crystal
from sitesym.crystals.ladder import Ladder, tolerance_ladder
from sitesym.crystals.pseudosymmetry import Pseudosymmetry, pseudosymmetry
from sitesym.crystals.second_opinion import SecondOpinion, second_opinion
from sitesym.crystals.symmetry import CrystalSymmetry, find_symmetry
from sitesym.tolerances import DEFAULT_TOLERANCE_ANGSTROM


@dataclass(frozen=True, eq=False)
class Reliability:
    """What was asked about a symmetry; None for what was not."""

    ladder: Ladder | None = None
    pseudosymmetry: Pseudosymmetry | None = None
    second_opinion: SecondOpinion | None = None


def examined_symmetry(
    crystal: Crystal,
    tolerance_angstrom: float = DEFAULT_TOLERANCE_ANGSTROM,
    finder: str = DEFAULT_FINDER,
    ladder: bool = True,
) -> CrystalSymmetry:
    """The symmetry of a crystal with its `Reliability`.

    ``finder`` is one of `sitesym.choices.FINDER_CHOICES`. ``ladder``: also climb the tolerance ladder, and
    measure how far a crystal without inversion is from having it. Raises as `find_symmetry` does.
    """
    first = DEFAULT_FINDER if finder == "both" else finder
    symmetry = find_symmetry(crystal, tolerance_angstrom, first)
    return replace(
        symmetry,
        reliability=Reliability(
            tolerance_ladder(symmetry, first) if ladder else None,
            pseudosymmetry(symmetry) if ladder else None,
            second_opinion(symmetry) if finder == "both" else None,
        ),
    )
