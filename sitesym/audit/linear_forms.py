"""Linear combinations of independent components with rational coefficients, as values and as texts."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from fractions import Fraction
from math import gcd, lcm

import numpy as np

from sitesym.arrays import FloatArray
from sitesym.tolerances import RECOGNISED

_LARGEST_DENOMINATOR = 64


@dataclass(frozen=True)
class LinearForm:
    """sum of coefficient times component; components that do not occur are left out."""

    terms: tuple[tuple[str, Fraction], ...]

    def value(self, values: Mapping[str, float]) -> float:
        """The number for given components."""
        return sum(float(coefficient) * values[name] for name, coefficient in self.terms)

    def text(self, symbol: str) -> str:
        """As "c11 + 2 c12"; "0" for nothing."""
        text = ""
        for name, coefficient in self.terms:
            size = "" if abs(coefficient) == 1 else f"{abs(coefficient)} "
            sign = "-" if coefficient < 0 else "+"
            text += f" {sign} {size}{symbol}{name}" if text else f"{sign.strip('+')}{size}{symbol}{name}"
        return text or "0"

    @property
    def is_single(self) -> bool:
        """Whether it is one component with coefficient one."""
        return len(self.terms) == 1 and self.terms[0][1] == 1


def primitive(names: Sequence[str], coefficients: FloatArray) -> tuple[float, LinearForm]:
    """Factor and form with coprime whole coefficients, the first one positive, whose product is the given
    one.

    Coefficients whose ratios are no simple fractions stay decimal fractions of twelve digits.
    """
    present = np.flatnonzero(np.abs(coefficients) > RECOGNISED).tolist()
    if not present:
        return 0.0, LinearForm(())
    lead = float(coefficients[present[0]])
    ratios = [_fraction(float(coefficients[k]) / lead) for k in present]
    whole = lcm(*(ratio.denominator for ratio in ratios))
    content = gcd(*(int(ratio * whole) for ratio in ratios))
    scale = Fraction(whole, content)
    terms = tuple((names[k], ratio * scale) for k, ratio in zip(present, ratios, strict=True))
    return lead / float(scale), LinearForm(terms)


def _fraction(number: float) -> Fraction:
    simple = Fraction(number).limit_denominator(_LARGEST_DENOMINATOR)
    return simple if abs(float(simple) - number) < RECOGNISED else Fraction(f"{number:.12g}")
