"""Exact numbers: sums of roots of unity with integer coefficients.

A value is ``sum_k coefficients[k] * exp(2 pi i k / n)``. Two values are equal when they agree after reduction
modulo the n-th cyclotomic polynomial, so that equality and orthogonality are decided exactly.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from math import gcd

import numpy as np


@dataclass(frozen=True)
class RootSum:
    """An algebraic integer of a cyclotomic field; ``coefficients`` has one integer for each n-th root of
    unity.
    """

    coefficients: tuple[int, ...]

    @property
    def n(self) -> int:
        """The order of the roots of unity in use."""
        return len(self.coefficients)

    def __add__(self, other: RootSum) -> RootSum:
        return RootSum(tuple(a + b for a, b in zip(self.coefficients, other.coefficients, strict=True)))

    def __mul__(self, other: RootSum) -> RootSum:
        product = [0] * self.n
        for i, a in enumerate(self.coefficients):
            if a:
                for k, b in enumerate(other.coefficients):
                    product[(i + k) % self.n] += a * b
        return RootSum(tuple(product))

    def times(self, factor: int) -> RootSum:
        """The value multiplied by an integer."""
        return RootSum(tuple(factor * c for c in self.coefficients))

    def conjugate(self) -> RootSum:
        """The complex conjugate: every root goes to its inverse."""
        return RootSum((self.coefficients[0], *reversed(self.coefficients[1:])))

    def reduced(self) -> tuple[int, ...]:
        """Coefficients in the basis 1, z, z^2, ... of the cyclotomic field: equal values have equal
        reductions.
        """
        remainder = list(self.coefficients)
        divisor = cyclotomic_polynomial(self.n)
        degree = len(divisor) - 1
        for top in range(len(remainder) - 1, degree - 1, -1):
            factor = remainder[top]
            for offset in range(degree + 1):
                remainder[top - degree + offset] -= factor * divisor[offset]
        return tuple(remainder[:degree])

    def equals(self, other: RootSum) -> bool:
        """Exact equality."""
        return (self + other.times(-1)).as_integer() == 0

    def as_integer(self) -> int | None:
        """The value if it is an integer, else None."""
        first, *rest = self.reduced()
        return None if any(rest) else first

    def __complex__(self) -> complex:
        angles = 2.0 * np.pi * np.arange(self.n) / self.n
        value = np.dot(self.coefficients, np.exp(1j * angles))
        return complex(round(value.real, 15) + 0.0, round(value.imag, 15) + 0.0)

    def __str__(self) -> str:
        integer = self.as_integer()
        if integer is not None:
            return str(integer)
        terms = [_term(c, k, self.n) for k, c in enumerate(self.coefficients) if c]
        return " + ".join(terms).replace("+ -", "- ")


def integer(value: int, n: int = 1) -> RootSum:
    """An integer as a sum of n-th roots of unity."""
    return RootSum((value, *([0] * (n - 1))))


@lru_cache(maxsize=128)
def cyclotomic_polynomial(n: int) -> tuple[int, ...]:
    """Integer coefficients of the n-th cyclotomic polynomial, constant term first."""
    polynomial = [-1, *([0] * (n - 1)), 1]
    for divisor in range(1, n):
        if n % divisor == 0:
            polynomial = _exact_quotient(polynomial, cyclotomic_polynomial(divisor))
    return tuple(polynomial)


def _exact_quotient(numerator: list[int], denominator: tuple[int, ...]) -> list[int]:
    remainder = list(numerator)
    quotient = [0] * (len(numerator) - len(denominator) + 1)
    for place in range(len(quotient) - 1, -1, -1):
        quotient[place] = remainder[place + len(denominator) - 1]
        for offset, coefficient in enumerate(denominator):
            remainder[place + offset] -= quotient[place] * coefficient
    return quotient


def _term(coefficient: int, k: int, n: int) -> str:
    root = _root_text(k, n)
    if root == "1":
        return str(coefficient)
    sign = {1: "", -1: "-"}.get(coefficient, f"{coefficient} ")
    return sign + root


def _root_text(k: int, n: int) -> str:
    """A root of unity in words a reader can check: i, -1, exp(2*pi*i/3), exp(-pi*i/3)."""
    common = gcd(k, n)
    k, n = k // common, n // common
    if 2 * k > n:
        k -= n
    special = {(0, 1): "1", (1, 2): "-1", (1, 4): "i", (-1, 4): "-i"}
    if (k, n) in special:
        return special[k, n]
    top, bottom = (2 * k, n) if n % 2 else (k, n // 2)
    sign = "-" if top < 0 else ""
    factor = "" if abs(top) == 1 else f"{abs(top)}*"
    return f"exp({sign}{factor}pi*i/{bottom})"
