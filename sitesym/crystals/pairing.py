"""Pairing of atoms under an operation of order two that is not quite a symmetry, and what it costs.

The operation {W|t} carries atom i near atom j of the same kind. The least costly pairing (sum of squared
distances) is an assignment problem for each kind of atom; moving every atom half of the way makes {W|t}
exact. The translation is then improved by the mean of the mismatches, until the pairing stays.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from functools import cached_property
from typing import TypeAlias

import numpy as np

from sitesym.arrays import FloatArray, IntArray

_ROUNDS = 20
#: Cells with more atoms are paired kind by kind.
_FEW = 60
#: Candidates are measured together in blocks of at most this many distances.
_BLOCK = 500_000


@dataclass(frozen=True, eq=False)
class Pairing:
    """n atoms paired under {W|t}.

    ``partners`` (n,): atom near the image of each atom. ``displacements`` (n, 3): Cartesian, angstrom, to be
    added to the atoms to make the operation exact; they add up to zero. ``translation``: t, fractional.
    """

    rotation: IntArray
    translation: FloatArray
    partners: IntArray
    displacements: FloatArray

    @property
    def rms(self) -> float:
        """Root mean square displacement, angstrom."""
        return float(np.sqrt((self.displacements**2).sum(axis=1).mean()))

    @property
    def largest(self) -> float:
        """Largest displacement, angstrom."""
        return float(np.linalg.norm(self.displacements, axis=1).max())


@dataclass(frozen=True, eq=False)
class Arrangement:
    """n atoms in a reduced cell: lattice (3, 3) rows, angstrom; fractional positions (n, 3); indices of the
    atoms of each kind. In a reduced cell the vector with coordinates rounded into [-1/2, 1/2] is the shortest
    one whenever it is shorter than half of the cell's height; see `inversion_pairing` for longer ones."""

    lattice: FloatArray
    positions: FloatArray
    kinds: tuple[IntArray, ...]

    @cached_property
    def inverse(self) -> FloatArray:
        """(3, 3): Cartesian rows times this are fractional coordinates."""
        return np.asarray(np.linalg.inv(self.lattice), dtype=np.float64)

    @cached_property
    def unlike(self) -> FloatArray:
        """(n, n): infinite for atoms of different kinds, zero for like ones."""
        kinds = np.empty(len(self.positions), dtype=np.int64)
        for number, members in enumerate(self.kinds):
            kinds[members] = number
        return np.where(kinds[:, None] == kinds, 0.0, np.inf)

    def mismatches(self, rotation: IntArray, translations: FloatArray, members: IntArray) -> FloatArray:
        """(c, k, k, 3) angstrom: for c translations, the way from the image of atom i to atom j."""
        positions = self.positions[members]
        images = positions @ rotation.T + translations[:, None, :]
        ways = positions[None, None, :, :] - images[:, :, None, :]
        return np.asarray((ways - np.rint(ways)) @ self.lattice, dtype=np.float64)


def best_pairing(
    arrangement: Arrangement, rotation: IntArray, translations: FloatArray, best: Pairing | None
) -> Pairing | None:
    """The pairing with the least root mean square displacement over the translations (c, 3) tried; ``best``
    where none is better."""
    bounds = lower_bounds(arrangement, rotation, translations)
    count = len(arrangement.positions)
    for index in np.argsort(bounds, kind="stable"):
        # A start that fits atom 0 exactly costs at most n + 1 times what it costs with the best translation;
        # a pairing moves atoms half of the way, hence the 4.
        if best is not None and bounds[index] > 4.0 * (count + 1) * count * best.rms**2:
            break
        pairing = refined(arrangement, rotation, translations[index])
        if best is None or pairing.rms < best.rms - 1e-9:
            best = pairing
    return best


def lower_bounds(arrangement: Arrangement, rotation: IntArray, translations: FloatArray) -> FloatArray:
    """(c,) angstrom^2: sum over atoms of the squared distance from the image to the nearest like atom."""
    bounds = np.zeros(len(translations))
    step = max(1, _BLOCK // max(len(members) for members in arrangement.kinds) ** 2)
    for start in range(0, len(translations), step):
        block = slice(start, start + step)
        for members in arrangement.kinds:
            ways = arrangement.mismatches(rotation, translations[block], members)
            bounds[block] += (ways**2).sum(axis=3).min(axis=2).sum(axis=1)
    return bounds


_Paired: TypeAlias = Callable[[Arrangement, IntArray, FloatArray], tuple[IntArray, FloatArray]]


def refined(
    arrangement: Arrangement, rotation: IntArray, translation: FloatArray, paired: _Paired | None = None
) -> Pairing:
    """What the pairing by ``paired``, by default the least costly one, and the best translation for it settle
    on, from a translation (3,) on."""
    paired = paired or least_costly
    partners = np.full(len(arrangement.positions), -1, dtype=np.int64)
    for _ in range(_ROUNDS):
        before, partners, ways = partners, *paired(arrangement, rotation, translation)
        mean = ways.mean(axis=0)
        translation = translation + mean @ arrangement.inverse
        ways = ways - mean
        if (before == partners).all():
            break
    displacements = np.empty_like(ways)
    displacements[partners] = -ways / 2.0
    return Pairing(rotation, translation, partners, displacements)


def least_costly(
    arrangement: Arrangement, rotation: IntArray, translation: FloatArray
) -> tuple[IntArray, FloatArray]:
    """Partner of each atom and the way (angstrom) from its image to the partner."""
    count = len(arrangement.positions)
    if count <= _FEW:
        # Mostly the nearest like atom of each is its partner, and that is found for all kinds at once.
        every = np.arange(count)
        all_ways = arrangement.mismatches(rotation, translation[None], every)[0]
        nearest = ((all_ways**2).sum(axis=2) + arrangement.unlike).argmin(axis=1)
        if (nearest[nearest] == every).all():
            return nearest, all_ways[every, nearest]
    partners = np.empty(count, dtype=np.int64)
    ways = np.empty((count, 3))
    for members in arrangement.kinds:
        kind_ways = arrangement.mismatches(rotation, translation[None], members)[0]
        chosen = _assigned((kind_ways**2).sum(axis=2))
        partners[members] = members[chosen]
        ways[members] = kind_ways[np.arange(len(members)), chosen]
    return partners, ways


def _assigned(costs: FloatArray) -> IntArray:
    """The permutation of least cost that is its own inverse; ``costs`` (k, k) is symmetric."""
    nearest = costs.argmin(axis=1)
    if len(set(nearest.tolist())) < len(nearest):
        from scipy.optimize import linear_sum_assignment

        nearest = linear_sum_assignment(costs)[1]
    chosen = np.asarray(nearest, dtype=np.int64)
    return chosen if (chosen[chosen] == np.arange(len(chosen))).all() else _involution(chosen, costs)


def _involution(permutation: IntArray, costs: FloatArray) -> IntArray:
    """Cycles longer than two split into pairs.

    With symmetric costs a cycle of even length costs at least as much as the better of its two splittings
    into pairs. A cycle of odd length keeps one atom alone, the one that makes it cheapest; it can cost more.
    """
    result, seen = permutation.copy(), np.zeros(len(permutation), dtype=np.bool_)
    for start in range(len(permutation)):
        cycle = []
        while not seen[start]:
            seen[start] = True
            cycle.append(start)
            start = int(permutation[start])
        if len(cycle) > 2:
            turns = [cycle[shift:] + cycle[:shift] for shift in range(len(cycle))]
            for first, second in min(map(_pairs, turns), key=lambda pairs: _cost(pairs, costs)):
                result[first], result[second] = second, first
    return result


def _pairs(cycle: Sequence[int]) -> list[tuple[int, int]]:
    pairs = [(cycle[place], cycle[place + 1]) for place in range(0, len(cycle) - 1, 2)]
    return [*pairs, (cycle[-1], cycle[-1])] if len(cycle) % 2 else pairs


def _cost(pairs: Sequence[tuple[int, int]], costs: FloatArray) -> float:
    return float(sum(costs[first, second] * (1 if first == second else 2) for first, second in pairs))
