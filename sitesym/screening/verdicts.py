"""Verdicts about a crystal class, and where they flip on a crystal's tolerance ladder.

A verdict on a tensor is a count of invariant components that is not zero; none is read from a list of
classes.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from itertools import pairwise
from typing import Final

from sitesym.crystals.ladder import Ladder
from sitesym.crystals.reliability import Reliability
from sitesym.crystals.symmetry import group_of_setting
from sitesym.screening.columns import Row
from sitesym.tensors import independent_count, kind

#: Verdicts watched along the ladder that ask whether any component of a kind of tensor is allowed.
_TENSOR_VERDICTS: Final = {"piezoelectric": "piezoelectric-strain", "optical_activity": "gyration"}

#: All verdicts watched along the ladder.
LADDER_VERDICTS: Final = ("centrosymmetric", "polar", *_TENSOR_VERDICTS)


@dataclass(frozen=True)
class Flip:
    """A verdict that differs between two neighbouring rungs (angstrom).

    ``above``: its value at the upper one. ``in_window``: whether both belong to the window in which a change
    makes the symmetry fragile.
    """

    verdict: str
    lower_angstrom: float
    upper_angstrom: float
    above: bool
    in_window: bool


def verdict_flips(ladder: Ladder) -> tuple[Flip, ...]:
    """Every flip, from the lowest tolerance up; rungs without an answer are passed over."""
    answered = [(rung, verdicts_of_setting(rung.hall_number)) for rung in ladder.rungs if rung.hall_number]
    window = ladder.in_window
    return tuple(
        Flip(
            verdict,
            lower.tolerance_angstrom,
            upper.tolerance_angstrom,
            above[verdict],
            lower in window and upper in window,
        )
        for (lower, below), (upper, above) in pairwise(answered)
        for verdict in LADDER_VERDICTS
        if below[verdict] != above[verdict]
    )


@lru_cache(maxsize=530)
def verdicts_of_setting(hall_number: int) -> dict[str, bool]:
    """The values of `LADDER_VERDICTS`; verdicts do not depend on axes, so any lattice of the setting does."""
    group = group_of_setting(hall_number)
    counted = {
        verdict: independent_count(kind(name), group) > 0 for verdict, name in _TENSOR_VERDICTS.items()
    }
    return {"centrosymmetric": group.has_inversion, "polar": group.is_polar, **counted}


def reliability_columns(reliability: Reliability | None) -> Row:
    """The columns of a screening table that say how far the verdicts can be relied on."""
    asked = reliability or Reliability()
    ladder, distance = asked.ladder, asked.pseudosymmetry
    nearest = None if distance is None else distance.centrosymmetric
    low, high = (None, None) if ladder is None else ladder.stable_interval_angstrom
    return {
        "stability": None if ladder is None else "fragile" if ladder.fragile else "robust",
        "interval_low_angstrom": low,
        "interval_high_angstrom": high,
        # Where the finder does not confirm the arrangement, the number is the distance to nothing.
        "distance_to_centrosymmetric_angstrom": (
            nearest.largest_displacement_angstrom if nearest is not None and nearest.checked else None
        ),
    }


def reliability_remarks(reliability: Reliability | None) -> list[str]:
    """What a row must say in words: verdicts that flip near the tolerance, a second finder that differs."""
    asked = reliability or Reliability()
    flips = () if asked.ladder is None else verdict_flips(asked.ladder)
    remarks = [
        f"{flip.verdict.replace('_', ' ')} becomes {'yes' if flip.above else 'no'} "
        f"between {flip.lower_angstrom:g} and {flip.upper_angstrom:g} angstrom"
        for flip in flips
        if flip.in_window
    ]
    second = asked.second_opinion
    if second is not None and not second.agrees:
        found = second.reason if second.symmetry is None else second.symmetry.space_group_symbol
        remarks.append(f"{second.finder} differs in {', '.join(second.differences)}: {found}")
    return remarks
