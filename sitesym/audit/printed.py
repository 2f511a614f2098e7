"""Numbers that remember how they were printed, and the rounding step that the digits of an array tell."""

from __future__ import annotations

import re
from collections.abc import Sequence
from typing import Final, Self

import numpy as np

from sitesym.arrays import FloatArray

_NUMBER: Final = re.compile(r"[+-]?(?P<whole>\d*)(?:\.(?P<decimals>\d*))?(?:[eE](?P<power>[+-]?\d+))?")


class PrintedNumber(float):
    """A float with the text it was read from."""

    text: str

    def __new__(cls, text: str) -> Self:
        """Raises ValueError for a text that is no number."""
        number = super().__new__(cls, text)
        number.text = text.strip()
        return number

    def __reduce__(self) -> tuple[type[PrintedNumber], tuple[str]]:
        return type(self), (self.text,)


def rounding_steps(texts: Sequence[str]) -> FloatArray:
    """One unit of the last digit that each number of an array can be trusted to, shape (n,).

    Writers print an array with a fixed number of decimals or of significant digits, and may strip final
    zeros: 0.25 between numbers of four decimals means 0.2500. So a number is trusted to the step that the
    best printed entry tells, by decimals or by significant digits whichever is coarser, and never coarser
    than its own digits. A zero follows the decimals.

    >>> rounding_steps(["390", "145", "123"]).tolist(), rounding_steps(["0.1234", "0.25", "0"]).tolist()
    ([1.0, 1.0, 1.0], [0.0001, 0.0001, 0.0001])
    """
    exponents = [_last_digit(text) for text in texts]
    sizes = [_first_digit(text) for text in texts]
    nonzero = [k for k, size in enumerate(sizes) if size is not None]
    if not nonzero:
        return np.full(len(texts), 10.0 ** min(exponents, default=0))
    finest = min(exponents[k] for k in nonzero)
    digits = max((sizes[k] or 0) - exponents[k] + 1 for k in nonzero)
    steps = [
        finest if size is None else min(own, max(finest, size - digits + 1))
        for own, size in zip(exponents, sizes, strict=True)
    ]
    return np.array([float(f"1e{step}") for step in steps])


def _parts(text: str) -> tuple[str, str, int]:
    """Digits before and behind the point, and the power of ten."""
    match = _NUMBER.fullmatch(text.strip())
    if match is None:
        return "", "", 0
    return match["whole"], match["decimals"] or "", int(match["power"] or 0)


def _last_digit(text: str) -> int:
    """Exponent of the power of ten of the last printed digit."""
    _, decimals, power = _parts(text)
    return power - len(decimals)


def _first_digit(text: str) -> int | None:
    """Exponent of the first digit that is not zero; None for zero."""
    whole, decimals, power = _parts(text)
    digits = (whole + decimals).lstrip("0")
    return power - len(decimals) + len(digits) - 1 if digits else None
