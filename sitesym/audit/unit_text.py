"""Units as they are written ("GPa", "pC/N", "uC/cm^2", "1e-12 m/V", "C m-2"), as a factor and a dimension.

A unit that cannot be read is None: unknown stays unknown. Factors are those of the SI (BIPM, The
International System of Units, 9th ed. (2019)); bar and dyn as defined there.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from functools import lru_cache
from typing import Final

#: Exponents of kg, m, s, A, K.
Dimension = tuple[int, int, int, int, int]

ELEMENTARY_CHARGE_COULOMB: Final = 1.602176634e-19

_PREFIXES: Final = {
    "": 0, "f": -15, "p": -12, "n": -9, "u": -6, "m": -3, "c": -2, "d": -1, "h": 2, "k": 3, "M": 6, "G": 9,
    "T": 12,
}  # fmt: skip
_SYMBOLS: Final[dict[str, tuple[float, Dimension]]] = {
    "g": (1e-3, (1, 0, 0, 0, 0)),
    "m": (1.0, (0, 1, 0, 0, 0)),
    "s": (1.0, (0, 0, 1, 0, 0)),
    "A": (1.0, (0, 0, 0, 1, 0)),
    "K": (1.0, (0, 0, 0, 0, 1)),
    "N": (1.0, (1, 1, -2, 0, 0)),
    "Pa": (1.0, (1, -1, -2, 0, 0)),
    "bar": (1e5, (1, -1, -2, 0, 0)),
    "dyn": (1e-5, (1, 1, -2, 0, 0)),
    "J": (1.0, (1, 2, -2, 0, 0)),
    "W": (1.0, (1, 2, -3, 0, 0)),
    "C": (1.0, (0, 0, 1, 1, 0)),
    "e": (ELEMENTARY_CHARGE_COULOMB, (0, 0, 1, 1, 0)),
    "V": (1.0, (1, 2, -3, -1, 0)),
    "F": (1.0, (-1, -2, 4, 2, 0)),
    "T": (1.0, (1, 0, -2, -1, 0)),
    "S": (1.0, (-1, -2, 3, 2, 0)),
    "ohm": (1.0, (1, 2, -3, -2, 0)),
    "eV": (ELEMENTARY_CHARGE_COULOMB, (1, 2, -2, 0, 0)),
    "angstrom": (1e-10, (0, 1, 0, 0, 0)),
}
#: Units that take no prefix, although a prefix and another symbol would spell something ("cd", "mangstrom").
_WITHOUT_PREFIX: Final = {"angstrom", "e", "eV"}
_SUPERSCRIPTS: Final = str.maketrans("⁰¹²³⁴⁵⁶⁷⁸⁹⁻", "0123456789-")
_SPELLINGS: Final = (
    ("µ", "u"), ("μ", "u"), ("Å", "angstrom"), ("Å", "angstrom"), ("Ω", "ohm"), ("Ω", "ohm"), ("−", "-"),
    ("**", "^"), ("·", " "), ("⋅", " "), ("×", "*"),
)  # fmt: skip
_NUMBERS_OF_ONE: Final = {"1", "relative", "dimensionless", "none"}
_TOKEN: Final = re.compile(
    r"\s*(?:(?P<number>\d+(?:\.\d*)?(?:[eE][+-]?\d+)?)|(?P<symbol>[A-Za-z]+)|(?P<mark>[()/*^])|(?P<power>-\d+))"
)


@dataclass(frozen=True)
class UnitValue:
    """A unit: its size in the coherent SI unit, and its dimension (exponents of kg, m, s, A, K)."""

    factor: float
    dimension: Dimension

    def times(self, other: UnitValue, sign: int = 1) -> UnitValue:
        """The product (sign 1) or the quotient (sign -1)."""
        dimension = [a + sign * b for a, b in zip(self.dimension, other.dimension, strict=True)]
        return UnitValue(self.factor * other.factor**sign, _dimension(dimension))

    def power(self, exponent: int) -> UnitValue:
        """The unit raised to a whole power."""
        return UnitValue(self.factor**exponent, _dimension([a * exponent for a in self.dimension]))


_ONE = UnitValue(1.0, (0, 0, 0, 0, 0))


def _dimension(exponents: list[int]) -> Dimension:
    kg, m, s, ampere, kelvin = exponents
    return kg, m, s, ampere, kelvin


@lru_cache(maxsize=512)
def read_unit(text: str) -> UnitValue | None:
    """The unit a text stands for, or None. A division by several symbols needs parentheses or repeated bars.

    >>> read_unit("uC/cm^2").factor, read_unit("pm/V").dimension == read_unit("pC/N").dimension
    (0.01, True)
    >>> read_unit("furlong") is None
    True
    """
    clean = text.translate(_SUPERSCRIPTS).strip()
    for spelling, plain in _SPELLINGS:
        clean = clean.replace(spelling, plain)
    if clean.lower() in _NUMBERS_OF_ONE:
        return _ONE
    tokens = _tokens(clean)
    if not tokens:
        return None
    reader = _Reader(tokens)
    unit = reader.product()
    return unit if unit is not None and reader.at_end else None


def _tokens(text: str) -> list[tuple[str, str]]:
    """(kind, text) of each token; empty when something is none."""
    tokens, position = [], 0
    while position < len(text):
        match = _TOKEN.match(text, position)
        if match is None or match.lastgroup is None:
            return []
        tokens.append((match.lastgroup, match[match.lastgroup]))
        position = match.end()
    return tokens


class _Reader:
    """Product of factors, each a number, a symbol or a bracket with an optional power; a bar divides by the
    next.
    """

    def __init__(self, tokens: list[tuple[str, str]]) -> None:
        self._tokens = tokens
        self._place = 0

    @property
    def at_end(self) -> bool:
        return self._place == len(self._tokens)

    def product(self) -> UnitValue | None:
        total, sign = _ONE, 1
        while not self.at_end and self._text != ")":
            if self._text in ("/", "*"):
                sign = -1 if self._text == "/" else 1
                self._place += 1
            factor = self._factor()
            if factor is None:
                return None
            total, sign = total.times(factor, sign), 1
        return total

    @property
    def _text(self) -> str:
        return "" if self.at_end else self._tokens[self._place][1]

    def _factor(self) -> UnitValue | None:
        if self.at_end:
            return None
        kind, text = self._tokens[self._place]
        self._place += 1
        base: UnitValue | None
        if text == "(":
            base = self.product()
            if base is None or self._text != ")":
                return None
            self._place += 1
        elif kind == "number":
            base = UnitValue(float(text), _ONE.dimension)
        else:
            base = _symbol(text) if kind == "symbol" else None
        exponent = self._exponent(kind == "number")
        return None if base is None or exponent is None else base.power(exponent)

    def _exponent(self, of_number: bool) -> int | None:
        """The power that follows: "^2", "^-2", "-2", behind a symbol also a bare "2"; None when broken."""
        marked = self._text == "^"
        self._place += marked
        if not self.at_end:
            kind, text = self._tokens[self._place]
            if kind == "power" or (kind == "number" and text.isdigit() and (marked or not of_number)):
                self._place += 1
                return int(text)
        return None if marked else 1


def _symbol(text: str) -> UnitValue | None:
    """A symbol as it stands, or with a prefix."""
    for length in range(2):
        prefix, symbol = text[:length], text[length:]
        if symbol in _SYMBOLS and prefix in _PREFIXES and not (prefix and symbol in _WITHOUT_PREFIX):
            factor, dimension = _SYMBOLS[symbol]
            return UnitValue(factor * 10.0 ** _PREFIXES[prefix], dimension)
    return None
