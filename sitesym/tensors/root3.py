"""Exact numbers a + b sqrt(3) with rational a, b: what the matrices of point groups in standard axes are
made of.

Arrays of such numbers are doubles that hold integers, with a leading axis of length two (a, then b); where no
sqrt(3) occurs, and for floats of which nothing exact is claimed, that axis has length one. `multiply` works
for all of them, so that one code builds exact and float representations.
"""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction
from functools import lru_cache

import numpy as np

from sitesym.arrays import BoolArray, FloatArray, IntArray
from sitesym.tolerances import RECOGNISED

ROOT = 3.0**0.5
_LARGEST_DENOMINATOR = 64
#: Values of twice an entry that occur in standard axes, as a + b sqrt(3).
_DOUBLED_ENTRIES = ((0, 0), (1, 0), (-1, 0), (2, 0), (-2, 0), (0, 1), (0, -1))


@dataclass(frozen=True)
class Surd:
    """The number rational + root * sqrt(3)."""

    rational: Fraction
    root: Fraction

    def __float__(self) -> float:
        return float(self.rational) + float(self.root) * ROOT

    def __str__(self) -> str:
        if not self.root:
            return str(self.rational)
        top = abs(self.root.numerator)
        sign = "-" if self.root < 0 else ""
        text = f"{sign}{'' if top == 1 else f'{top}*'}sqrt(3)"
        if self.root.denominator != 1:
            text += f"/{self.root.denominator}"
        return text if not self.rational else f"{self.rational} + {text}".replace("+ -", "- ")

    def times(self, factor: Fraction) -> Surd:
        """The number times a rational one."""
        return Surd(self.rational * factor, self.root * factor)


@dataclass(frozen=True, eq=False)
class Recognised:
    """Numbers p/q or p sqrt(3)/q: ``numerators``, ``denominators`` and ``rooted`` (with the sqrt(3)), shape
    (n,) each.
    """

    numerators: IntArray
    denominators: IntArray
    rooted: BoolArray

    def surds(self) -> list[Surd]:
        """One exact number each."""
        columns = (self.numerators.tolist(), self.denominators.tolist(), self.rooted.tolist())
        return [_surd(*number) for number in zip(*columns, strict=True)]

    def over_common_denominator(self) -> FloatArray:
        """Integers a, b of numbers (a + b sqrt(3)) / c with one c for all, shape (2, n)."""
        whole = self.numerators * (np.lcm.reduce(self.denominators) // self.denominators)
        return np.stack([whole * ~self.rooted, whole * self.rooted]).astype(np.float64)


def multiply(left: FloatArray, right: FloatArray) -> FloatArray:
    """Elementwise product of two arrays of numbers (leading axes of one length), with broadcasting."""
    if len(left) == 1:
        return left * right
    return np.stack([left[0] * right[0] + 3.0 * left[1] * right[1], left[0] * right[1] + left[1] * right[0]])


def doubled_exact(matrices: FloatArray) -> FloatArray | None:
    """Twice the given matrices (k, 3, 3) as integers a, b of a + b sqrt(3), shape (2, k, 3, 3).

    None when an entry is none of 0, 1/2, 1, sqrt(3)/2 and their negatives: the axes are not standard ones.
    """
    doubled = 2.0 * matrices
    exact = np.zeros((2, *doubled.shape))
    matched = np.zeros(doubled.shape, dtype=np.bool_)
    for a, b in _DOUBLED_ENTRIES:
        here = np.abs(doubled - (a + b * ROOT)) < RECOGNISED
        exact[0][here], exact[1][here] = a, b
        matched |= here
    return exact if matched.all() else None


def recognise(values: FloatArray) -> Recognised | None:
    """Simple rationals p/q, or p sqrt(3)/q, q up to 64, within 1e-7 of each float; None when one is
    neither.
    """
    numerators = np.zeros(len(values), dtype=np.int64)
    denominators = np.zeros(len(values), dtype=np.int64)
    rooted = np.zeros(len(values), dtype=np.bool_)
    for unit in (1.0, ROOT):
        for denominator in range(1, _LARGEST_DENOMINATOR + 1):
            scaled = values / unit * denominator
            nearest = np.rint(scaled)
            here = (denominators == 0) & (np.abs(scaled - nearest) < RECOGNISED)
            numerators[here], denominators[here], rooted[here] = nearest[here], denominator, unit != 1.0
            if denominators.all():
                return Recognised(numerators, denominators, rooted)
    return None


@lru_cache(maxsize=4096)
def _surd(numerator: int, denominator: int, rooted: bool) -> Surd:
    value = Fraction(numerator, denominator)
    return Surd(Fraction(0), value) if rooted else Surd(value, Fraction(0))
