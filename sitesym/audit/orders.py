"""Orders of the six pairs of indices in contracted notation, and how a text names them."""

from __future__ import annotations

import re
from typing import Final, TypeAlias

from sitesym.errors import TensorInputError

#: Six pairs of digits, the pair that each contracted index 1 to 6 stands for.
Order: TypeAlias = tuple[str, ...]

STANDARD_ORDER: Final[Order] = ("11", "22", "33", "23", "13", "12")

#: Every order of the three shear pairs after 11 22 33; those in common use first.
SHEAR_ORDERS: Final[tuple[Order, ...]] = (
    STANDARD_ORDER,
    ("11", "22", "33", "12", "23", "13"),
    ("11", "22", "33", "12", "13", "23"),
    ("11", "22", "33", "13", "23", "12"),
    ("11", "22", "33", "23", "12", "13"),
    ("11", "22", "33", "13", "12", "23"),
)

_LETTERS: Final = str.maketrans("xyzXYZ", "123123")


def read_order(text: str) -> Order:
    """The order a text names: six pairs such as ``11 22 33 23 13 12`` or ``xx yy zz xy yz zx``.

    A pair may be written either way round. Raises TensorInputError for anything else.
    """
    pairs = tuple("".join(sorted(pair)) for pair in re.split(r"[\s,;]+", text.strip().translate(_LETTERS)))
    if sorted(pairs) != sorted(STANDARD_ORDER):
        raise TensorInputError(
            "the order of the contracted index is not understood",
            value=repr(text),
            rule="each of the pairs 11 22 33 23 13 12 (or xx yy zz yz xz xy) once, as the columns stand",
            next_step="correct it, or leave it out: it then counts as unknown",
        )
    return pairs


def order_text(order: Order) -> str:
    """The order in words: ``11 22 33 23 13 12``."""
    return " ".join(order)
