"""Jahn symbols: V a polar vector, [ ] symmetric, { } antisymmetric, e axial, a odd under time reversal.

Examples: [V2] permittivity, V[V2] piezoelectricity, [[V2]2] elasticity, e[V2] gyration, e{V2}V Hall effect.
Source: H. A. Jahn, Acta Cryst. 2 (1949) 30.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from functools import lru_cache

from sitesym.errors import TensorInputError
from sitesym.tensors.indexsymmetry import IndexSymmetry, Power, Product, Vector

_HIGHEST_RANK = 8
_MOST_COMPONENTS = 1000
_SUPERSCRIPTS = str.maketrans("⁰¹²³⁴⁵⁶⁷⁸⁹", "0123456789")


@dataclass(frozen=True)
class Jahn:
    """A symbol that was understood: its text, axial or not, odd under time reversal or not, and its index
    symmetry.
    """

    text: str
    axial: bool
    time_odd: bool
    symmetry: IndexSymmetry


@lru_cache(maxsize=256)
def read_jahn(text: str) -> Jahn:
    """The index symmetry a Jahn symbol states. Raises TensorInputError for a symbol that is not
    understood.
    """
    plain = text.translate(_SUPERSCRIPTS).replace("^", "").replace(" ", "").replace("ε", "e")
    marks = re.match(r"[ae]*", plain)
    prefix = marks.group() if marks else ""
    if len(set(prefix)) < len(prefix):
        raise _not_understood(text, "e and a stand once, before everything else")
    if not plain:
        raise _not_understood(
            text, "the symbol is empty: a scalar that is neither axial nor odd has no constraint"
        )
    symmetry, rest = _sequence(text, plain[len(prefix) :])
    if rest:
        raise _not_understood(text, f"nothing begins with {rest[0]!r} here")
    if symmetry.rank > _HIGHEST_RANK:
        raise _not_understood(text, f"rank {symmetry.rank} is above the highest rank {_HIGHEST_RANK}")
    if symmetry.dimension > _MOST_COMPONENTS:
        raise _not_understood(text, f"{symmetry.dimension} components are more than {_MOST_COMPONENTS}")
    return Jahn(plain, "e" in prefix, "a" in prefix, symmetry)


def _sequence(text: str, rest: str) -> tuple[IndexSymmetry, str]:
    """Factors up to a closing bracket or the end."""
    factors: list[IndexSymmetry] = []
    while rest and rest[0] not in "]}":
        factor, rest = _factor(text, rest)
        count, rest = _exponent(text, rest)
        factors.extend([factor] * count)
    return (factors[0] if len(factors) == 1 else Product(tuple(factors))), rest


def _factor(text: str, rest: str) -> tuple[IndexSymmetry, str]:
    if rest[0] == "V":
        return Vector(), rest[1:]
    closing = {"[": "]", "{": "}"}.get(rest[0])
    if closing is None:
        raise _not_understood(text, f"{rest[0]!r} is none of V [ ] {{ }} and exponents")
    inside, after = _sequence(text, rest[1:])
    if not after.startswith(closing):
        raise _not_understood(text, f"{rest[0]!r} is not closed by {closing!r}")
    factors = inside.factors if isinstance(inside, Product) else (inside,)
    if len(set(factors)) != 1:
        raise _not_understood(text, "brackets symmetrise a power of one thing, such as [V2], [[V2]3], {V2}")
    power = Power(factors[0], len(factors), symmetric=closing == "]")
    # What is of too high a rank is refused later; its components are too many to be counted here.
    if power.rank <= _HIGHEST_RANK and not power.dimension:
        raise _not_understood(
            text,
            f"no {power.count} of {power.base.dimension} components differ: nothing antisymmetric is left",
        )
    return power, after[1:]


def _exponent(text: str, rest: str) -> tuple[int, str]:
    """A number from 1 to the highest rank, 1 where none is written."""
    digits = re.match(r"\d+", rest)
    if digits is None:
        return 1, rest
    if digits.group() not in map(str, range(1, _HIGHEST_RANK + 1)):
        raise _not_understood(text, f"an exponent is a number from 1 to {_HIGHEST_RANK}")
    return int(digits.group()), rest[digits.end() :]


def _not_understood(text: str, rule: str) -> TensorInputError:
    return TensorInputError(
        "the Jahn symbol is not understood",
        value=repr(text),
        rule=rule,
        next_step="examples: V, [V2], V[V2], e[V2], [[V2]2], [V2][V2], e{V2}V, aeV2",
    )
