"""Quantities of one crystal against each other: s = 1/c, e = d c, d = e s, eps(T) - eps(S) = d e^T / eps0.

Each relation holds between contracted matrices in common axes and SI units (J. F. Nye, Physical Properties
of Crystals (1957), chapters 8 to 10). What it may miss follows from the stated standard deviations or the
printed digits, to first order.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from itertools import product
from typing import Final

import numpy as np

from sitesym.arrays import FloatArray, frozen
from sitesym.audit.units import VACUUM_PERMITTIVITY
from sitesym.groups import PointGroup
from sitesym.tensors import TensorKind, allowed_form, contraction

#: Standard deviations that a difference may have before it counts.
_SIGMAS: Final = 3.0
#: Rounding of the arithmetic, relative to the largest entry.
_NUMERICAL: Final = 1e-9


@dataclass(frozen=True, eq=False)
class Quantity:
    """One tensor of a crystal for cross-checking.

    ``matrix``: contracted, order 11 22 33 23 13 12, factors of the kind, SI units. ``group``: in the same
    axes. ``sigma`` and ``step`` (one unit of the last digit): of each entry, or None. ``clamping``: "T" for
    constant stress, "S" for constant strain, "" where not said.
    """

    id: str
    kind: TensorKind
    matrix: FloatArray
    group: PointGroup
    sigma: FloatArray | None = None
    step: FloatArray | None = None
    clamping: str = ""

    @property
    def symbol(self) -> str:
        """c, s, d, e, eps(T), eps(S); the name of the kind for what enters no relation."""
        short = _SYMBOLS.get(self.kind.name, self.kind.name)
        return f"{short}({self.clamping})" if short == "eps" else short

    def changes(self) -> Iterator[tuple[FloatArray, bool]]:
        """For each independent component: the change of the matrix that its uncertainty makes, and whether
        that is a standard deviation (or half a rounding step, the largest error of rounding).
        """
        form, names = allowed_form(self.kind, self.group), contraction(self.kind)
        places = dict(zip(names.keys, names.multi_indices.tolist(), strict=True))
        for one in form.independent:
            change = form.matrix({name: float(name == one) for name in form.independent})
            if self.sigma is not None:
                yield change * float(self.sigma[tuple(places[one])]), True
            elif self.step is not None:
                yield change * float(self.step[tuple(places[one])]) / 2.0, False


_SYMBOLS: Final = {
    "elastic-stiffness": "c",
    "elastic-compliance": "s",
    "piezoelectric-strain": "d",
    "piezoelectric-stress": "e",
    "permittivity": "eps",
}


@dataclass(frozen=True)
class Relation:
    """left = right, each a function of some of the quantities."""

    text: str
    symbols: tuple[str, ...]
    left: Callable[..., FloatArray]
    right: Callable[..., FloatArray]


def _inverse_of(_: FloatArray, c: FloatArray) -> FloatArray:
    return np.asarray(np.linalg.inv(c), dtype=np.float64)


RELATIONS: Final = (
    Relation("s = 1/c", ("s", "c"), lambda s, c: s, _inverse_of),
    Relation("e = d c", ("e", "d", "c"), lambda e, d, c: e, lambda e, d, c: d @ c),
    Relation("d = e s", ("d", "e", "s"), lambda d, e, s: d, lambda d, e, s: e @ s),
    Relation(
        "eps(T) - eps(S) = d e^T / eps0",
        ("eps(T)", "eps(S)", "d", "e"),
        lambda free, clamped, d, e: free - clamped,
        lambda free, clamped, d, e: d @ e.T / VACUUM_PERMITTIVITY,
    ),
)


@dataclass(frozen=True, eq=False)
class CrossCheck:
    """One relation between records.

    ``left``, ``right`` and ``tolerance`` have one shape, in SI units. ``worst`` names the entry with the
    largest share of its tolerance (from 1), ``share`` is that share; ``relative``: norm of the difference
    over that of the left side. ``basis``: what the tolerance stands on.
    """

    relation: str
    ids: tuple[str, ...]
    holds: bool
    left: FloatArray
    right: FloatArray
    tolerance: FloatArray
    worst: tuple[int, int]
    share: float
    relative: float
    basis: str


def cross_checks(quantities: Sequence[Quantity], noise: float) -> tuple[CrossCheck, ...]:
    """Every relation among quantities of one crystal in common axes, for every choice of records that fits.

    ``noise``: what an entry may deviate relative to the largest one, where no deviations are stated.
    """
    return tuple(
        _checked(relation, members, noise)
        for relation in RELATIONS
        for members in product(*([q for q in quantities if q.symbol == s] for s in relation.symbols))
        if _computable(relation, members)
    )


def _computable(relation: Relation, members: Sequence[Quantity]) -> bool:
    """Whether the right side exists: a stiffness without an inverse gives none."""
    if relation.symbols != ("s", "c"):
        return True
    values = np.linalg.svd(members[1].matrix, compute_uv=False)
    return bool(values[-1] > _NUMERICAL * values[0])


def _checked(relation: Relation, members: Sequence[Quantity], noise: float) -> CrossCheck:
    matrices = [member.matrix for member in members]
    left, right = relation.left(*matrices), relation.right(*matrices)
    tolerance, basis = _tolerance(relation, members, noise)
    tolerance = tolerance + _NUMERICAL * float(np.abs([left, right]).max(initial=0.0))
    difference = np.abs(left - right)
    shares = np.divide(difference, tolerance, out=np.zeros_like(difference), where=tolerance > 0.0)
    row, column = divmod(int(np.argmax(shares)), shares.shape[1])
    norm = float(np.linalg.norm(left))
    return CrossCheck(
        relation.text,
        tuple(member.id for member in members),
        bool(shares.max(initial=0.0) <= 1.0),
        frozen(left),
        frozen(right),
        frozen(tolerance),
        (row + 1, column + 1),
        float(shares.max(initial=0.0)),
        float(np.linalg.norm(left - right)) / norm if norm > 0.0 else 0.0,
        basis,
    )


def _tolerance(relation: Relation, members: Sequence[Quantity], noise: float) -> tuple[FloatArray, str]:
    """Three standard deviations, plus the largest error of rounding, plus the noise level where deviations
    are not stated.
    """
    matrices = [member.matrix for member in members]
    left = relation.left(*matrices)
    variance = rounding = np.zeros_like(left)
    basis: set[str] = set()
    for position, member in enumerate(members):
        for change, is_deviation in member.changes():
            effect = _effect(relation, matrices, position, change)
            if is_deviation:
                variance = variance + effect**2
            else:
                rounding = rounding + np.abs(effect)
            basis.add("three standard deviations" if is_deviation else "the printed digits")
    if any(member.sigma is None for member in members):
        rounding = rounding + noise * float(np.abs(left).max(initial=0.0))
        basis.add(f"noise of {noise:g} of the largest entry")
    return _SIGMAS * np.sqrt(variance) + rounding, ", ".join(sorted(basis, reverse=True))


def _effect(
    relation: Relation, matrices: Sequence[FloatArray], position: int, change: FloatArray
) -> FloatArray:
    """Change of left - right with one matrix, to first order (central difference)."""

    def difference(sign: float) -> FloatArray:
        moved = [m + sign * change if k == position else m for k, m in enumerate(matrices)]
        return relation.left(*moved) - relation.right(*moved)

    return (difference(1.0) - difference(-1.0)) / 2.0
