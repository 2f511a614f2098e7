"""The tolerance ladder: what group a crystal has at tolerances from 1e-5 to 0.2 angstrom.

A space group is the answer to two questions: which crystal, and how near is near enough. A group that holds
over decades of tolerance is a property of the crystal; one that appears or goes within a small range is a
property of the rounding, the noise or the relaxation of the file. The ladder tells them apart.

Answers need not be monotonic in the tolerance. Between two tolerances with the same group no search is made:
such rungs are marked as not searched. On 1091 calculated structures (open data of de Jong et al. 2015 and
Petousis et al. 2017) searching all rungs gave no other answer than this.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Final

from sitesym.choices import DEFAULT_FINDER
from sitesym.crystals.crystal import Crystal
from sitesym.crystals.moyo_finder import hall_number_with_moyo
from sitesym.crystals.spglib_finder import hall_number_with_spglib, setting
from sitesym.crystals.symmetry import CrystalSymmetry
from sitesym.errors import SymmetryNotFoundError

#: Tolerances of the ladder, angstrom; the one asked for is added to them.
RUNGS_ANGSTROM: Final = (1e-5, 1e-4, 1e-3, 0.01, 0.02, 0.05, 0.1, 0.2)

#: A symmetry is fragile when the group changes within this factor of the tolerance asked for.
WINDOW_FACTOR: Final = 10.0
#: The window reaches at least this far up, since rounding and noise of files do (angstrom) ...
WINDOW_AT_LEAST_ANGSTROM: Final = 0.01
#: ... and at most this far, unless the tolerance itself lies beyond: larger displacements are not noise
#: (angstrom; both limits are common practice, no source).
WINDOW_AT_MOST_ANGSTROM: Final = 0.1


@dataclass(frozen=True)
class Rung:
    """One tolerance (angstrom) with the setting found, None when the finder gave no answer.

    ``finder``: who was asked; empty when no one was, since the group is the same below and above.
    ``tolerance_used_angstrom``: what the finder ended with; moyo lowers a tolerance where its search fails.
    """

    tolerance_angstrom: float
    hall_number: int | None
    finder: str
    tolerance_used_angstrom: float

    @property
    def space_group_number(self) -> int | None:
        """Number in International Tables A."""
        return None if self.hall_number is None else setting(self.hall_number).number

    @property
    def space_group_symbol(self) -> str:
        """Short Hermann-Mauguin symbol, empty when the finder gave no answer."""
        return "" if self.hall_number is None else setting(self.hall_number).symbol


@dataclass(frozen=True)
class Ladder:
    """Rungs in order of tolerance, one of them at the tolerance asked for (``chosen``, an index)."""

    rungs: tuple[Rung, ...]
    chosen: int

    @property
    def stable_interval_angstrom(self) -> tuple[float, float]:
        """Lowest and highest tolerance of the unbroken stretch of rungs with the group of the chosen one."""
        group = self.rungs[self.chosen].space_group_number
        low = high = self.chosen
        while low > 0 and self.rungs[low - 1].space_group_number == group:
            low -= 1
        while high + 1 < len(self.rungs) and self.rungs[high + 1].space_group_number == group:
            high += 1
        return self.rungs[low].tolerance_angstrom, self.rungs[high].tolerance_angstrom

    @property
    def window_angstrom(self) -> tuple[float, float]:
        """Tolerances within which a change of group makes the symmetry fragile."""
        tolerance = self.rungs[self.chosen].tolerance_angstrom
        reach = max(WINDOW_FACTOR * tolerance, WINDOW_AT_LEAST_ANGSTROM)
        return tolerance / WINDOW_FACTOR, max(min(reach, WINDOW_AT_MOST_ANGSTROM), tolerance)

    @property
    def in_window(self) -> tuple[Rung, ...]:
        """The rungs of the window; its ends count, rounding of the numbers aside."""
        low, high = self.window_angstrom
        return tuple(rung for rung in self.rungs if 0.999 * low < rung.tolerance_angstrom < 1.001 * high)

    @property
    def fragile(self) -> bool:
        """Whether the space group changes within the window."""
        return len({rung.space_group_number for rung in self.in_window}) > 1


def tolerance_ladder(symmetry: CrystalSymmetry, finder: str = DEFAULT_FINDER) -> Ladder:
    """The ladder about a symmetry found with ``finder``.

    With `spglib` the faster moyo climbs where the two agree: at the chosen tolerance they must, else spglib
    climbs alone; and wherever moyo lowers the tolerance by itself, spglib is asked at the one meant. With
    `moyo` only moyo is asked. Every rung names its finder.
    """
    tolerance, crystal = symmetry.tolerance_angstrom, symmetry.crystal
    answer = symmetry.setting.hall_number
    chosen = Rung(tolerance, answer, symmetry.found.finder.split()[0], symmetry.found.tolerance_used_angstrom)
    if finder == "moyo":
        return climb(chosen, lambda length: moyo_rung(crystal, length))
    if moyo_rung(crystal, tolerance).space_group_number == chosen.space_group_number:
        return climb(chosen, lambda length: _fast_rung(crystal, length))
    return climb(chosen, lambda length: spglib_rung(crystal, length))


def climb(chosen: Rung, search: Callable[[float], Rung]) -> Ladder:
    """Search the lowest and the highest rung, then by bisection wherever the ends of a stretch differ."""
    others = (rung for rung in RUNGS_ANGSTROM if abs(rung - chosen.tolerance_angstrom) > 1e-9)
    lengths = sorted([*others, chosen.tolerance_angstrom])
    place = lengths.index(chosen.tolerance_angstrom)
    known = {place: chosen}
    for end in (0, len(lengths) - 1):
        if end not in known:
            known[end] = search(lengths[end])
    stretches = [(0, place), (place, len(lengths) - 1)]
    while stretches:
        low, high = stretches.pop()
        if high - low < 2:
            continue
        if known[low].space_group_number == known[high].space_group_number:
            for between in range(low + 1, high):
                length = lengths[between]
                known[between] = Rung(length, known[low].hall_number, "", length)
            continue
        middle = (low + high) // 2
        known[middle] = search(lengths[middle])
        stretches += [(low, middle), (middle, high)]
    return Ladder(tuple(known[index] for index in range(len(lengths))), place)


def spglib_rung(crystal: Crystal, tolerance_angstrom: float) -> Rung:
    """The setting that spglib finds."""
    try:
        hall_number = hall_number_with_spglib(crystal, tolerance_angstrom)
    except SymmetryNotFoundError:
        return Rung(tolerance_angstrom, None, "spglib", tolerance_angstrom)
    return Rung(tolerance_angstrom, hall_number, "spglib", tolerance_angstrom)


def moyo_rung(crystal: Crystal, tolerance_angstrom: float) -> Rung:
    """The setting that moyo finds."""
    try:
        hall_number, used = hall_number_with_moyo(crystal, tolerance_angstrom)
    except SymmetryNotFoundError:
        return Rung(tolerance_angstrom, None, "moyo", tolerance_angstrom)
    return Rung(tolerance_angstrom, hall_number, "moyo", used)


def _fast_rung(crystal: Crystal, tolerance_angstrom: float) -> Rung:
    rung = moyo_rung(crystal, tolerance_angstrom)
    lowered = rung.tolerance_used_angstrom < 0.999 * tolerance_angstrom
    return spglib_rung(crystal, tolerance_angstrom) if lowered or rung.hall_number is None else rung
