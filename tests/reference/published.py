"""Published sets of constants (published_sets.json), written out to whole arrays by textbook relations.

The relations are typed from J. F. Nye, Physical Properties of Crystals (1957), tables 9 to 11 and appendix E
(s, c, d, e, eps; r has the transposed forms of e), D. A. Kleinman, Phys. Rev. 126 (1962) 1977, and
K. Brugger, J. Appl. Phys. 36 (1965) 759 (third order); from memory, and independent of the program.
"""

from __future__ import annotations

import json
import re
from collections.abc import Iterator
from dataclasses import dataclass
from functools import cached_property
from itertools import permutations
from pathlib import Path
from typing import Any, Final

import numpy as np

from sitesym.arrays import FloatArray

FILE: Final = Path(__file__).parent / "published_sets.json"
#: Numbers keep their digits as text.
REFERENCE: Final[dict[str, Any]] = json.loads(
    FILE.read_text(encoding="utf-8"), parse_float=str, parse_int=str
)

_TRIGONAL = "22=11 23=13 24=-14 55=44 56=14 66=0.5*11-0.5*12"
_TRIGONAL_S = "22=11 23=13 24=-14 55=44 56=2*14 66=2*11-2*12"
_UNIAXIAL, _CUBIC = "22=11 23=13 55=44", "22=11 33=11 13=12 23=12 55=44 66=44"
_HEXAGONAL = "22=11 23=13 55=44 66=0.5*11-0.5*12"
_EPS = {"2": "", "222": "", "-43m": "22=11 33=11", "m-3m": "22=11 33=11"} | dict.fromkeys(
    ["32", "3m", "4mm", "6mm", "-42m", "4/mmm"], "22=11"
)
_E = {
    "32": "12=-11 25=-14 26=-11",
    "3m": "16=-22 21=-22 24=15 32=31",
    "4mm": "24=15 32=31",
    "6mm": "24=15 32=31",
    "-42m": "25=14",
    "-43m": "25=14 36=14",
    "422": "25=-14",
}
#: Components that follow from others, by quantity and class.
RELATIONS: Final = {
    "c": {
        "222": "", "32": _TRIGONAL, "3m": _TRIGONAL, "-3m": _TRIGONAL, "6mm": _HEXAGONAL, "4mm": _UNIAXIAL,
        "-42m": _UNIAXIAL, "4/mmm": _UNIAXIAL, "-43m": _CUBIC, "m-3m": _CUBIC,
    },
    "s": {"32": _TRIGONAL_S, "3m": _TRIGONAL_S, "4mm": _UNIAXIAL},
    "d": _E | {"32": "12=-11 25=-14 26=-2*11", "3m": "16=-2*22 21=-22 24=15 32=31", "222": ""},
    "e": _E,
    "shg": _E,
    "shg-kleinman": {"3m": "15=31 16=-22 21=-22 24=31 32=31", "-42m": "14=36 25=36"},
    "r": {
        "32": "21=-11 52=-41 62=-11", "3m": "12=-22 23=13 42=51 61=-22", "4mm": "23=13 42=51",
        "-42m": "52=41", "-43m": "52=41 63=41",
    },
    "epsT": _EPS,
    "epsS": _EPS,
    "pyro": {"2": ""},
    "c3": {
        "m-3m": "222=111 333=111 113=112 122=112 133=112 223=112 233=112 255=144 366=144 "
        "166=155 244=155 266=155 344=155 355=155",
    },
}  # fmt: skip
_SHAPES: Final[dict[str, tuple[int, ...]]] = {
    "pyro": (3,), "epsT": (3, 3), "epsS": (3, 3), "c": (6, 6), "s": (6, 6), "c3": (6, 6, 6), "r": (6, 3),
}  # fmt: skip
_SYMMETRIC = ("c", "s", "c3", "epsT", "epsS")


@dataclass(frozen=True)
class PublishedTensor:
    """One quantity of a set. ``constants``: as printed; ``left_out``: allowed, and not in the source."""

    sample: str
    symbol: str
    group: str
    constants: dict[str, str]
    left_out: tuple[str, ...]
    grade: str
    source: str
    end: str = ""

    @property
    def id(self) -> str:
        return " ".join(part for part in (self.sample, self.symbol, self.end) if part)

    @property
    def kind_name(self) -> str:
        return str(REFERENCE["quantities"][self.symbol]["kind"])

    @cached_property
    def related(self) -> dict[str, dict[str, float]]:
        """Components that follow from others: factors by the component they stand with."""
        return {
            name: {key: float(sign + (factor or "1")) for sign, factor, key in _TERM.findall(right)}
            for name, right in (part.split("=") for part in RELATIONS[self.symbol][self.group].split())
        }

    @cached_property
    def forbidden(self) -> list[str]:
        """Components that vanish."""
        every = {self._name(place) for place in np.ndindex(*_SHAPES.get(self.symbol, (3, 6)))}
        return sorted(every - set(self.related) - set(self.constants) - set(self.left_out))

    @cached_property
    def numbers(self) -> dict[str, float]:
        """The constants; one left out gets the size of the largest, since symmetry asks nothing of it."""
        printed = {name: float(text) for name, text in self.constants.items()}
        return printed | dict.fromkeys(self.left_out, max(map(abs, printed.values())))

    @cached_property
    def steps(self) -> dict[str, float]:
        """One unit of the last printed digit of each constant."""
        return {name: last_digit(text) for name, text in self.constants.items()}

    def from_others(self, name: str) -> tuple[float, float]:
        """A related component as the others give it, and how many units of their digits it carries."""
        terms = self.related[name]
        sizes = {key: abs(factor) for key, factor in terms.items()}
        return _sum(terms, self.numbers), _sum(sizes, self.steps)

    @cached_property
    def values(self) -> FloatArray:
        """The whole array: what is printed as printed, the rest by the relations."""
        given = {name: self.from_others(name)[0] for name in self.related}
        return self._array(given | self.numbers)

    @cached_property
    def rounding(self) -> FloatArray:
        """One unit of the last printed digit of each entry; of what follows from others, theirs together."""
        carried = {name: self.from_others(name)[1] for name in self.related}
        return self._array(carried | self.steps)

    def places(self, name: str) -> list[tuple[int, ...]]:
        """Where a component stands in the array."""
        place = tuple(int(digit) - 1 for digit in name)
        return sorted(set(permutations(place))) if self.symbol in _SYMMETRIC else [place]

    def moved(self, name: str, amount: float) -> FloatArray:
        """The array with one component changed."""
        array = self.values.copy()
        for place in self.places(name):
            array[place] += amount
        return array

    def record(self) -> dict[str, Any]:
        """The fields of a record for the audit."""
        quantity = REFERENCE["quantities"][self.symbol]
        return {
            "id": self.id, "sample": self.sample, "crystal": self.group, "quantity": quantity["kind"],
            "unit": quantity["unit"], "conditions": quantity.get("conditions", ""), "source": self.source,
            "axes": "ieee", "order": "11 22 33 23 13 12", "values": self.values.tolist(),
            "rounding": self.rounding.tolist(),
        }  # fmt: skip

    def _array(self, components: dict[str, float]) -> FloatArray:
        array = np.zeros(_SHAPES.get(self.symbol, (3, 6)))
        for name, value in components.items():
            for place in self.places(name):
                array[place] = value
        return array

    def _name(self, place: tuple[int, ...]) -> str:
        digits = [str(index + 1) for index in place]
        return "".join(sorted(digits) if self.symbol in _SYMMETRIC else digits)


_TERM = re.compile(r"([+-]?)(?:([\d.]+)\*)?(\d+)")


def _sum(terms: dict[str, float], numbers: dict[str, float]) -> float:
    return sum(factor * numbers.get(key, 0.0) for key, factor in terms.items())


def last_digit(text: str) -> float:
    """One unit of the last digit: 0.1 of '107.2', 1 of '203'."""
    return float(f"1e-{len(text.partition('.')[2])}")


def published_tensors() -> list[PublishedTensor]:
    """Every quantity of every set; one quoted as a range, at both ends."""
    return [tensor for published in REFERENCE["sets"] for tensor in _tensors_of(published)]


def _tensors_of(published: dict[str, Any]) -> Iterator[PublishedTensor]:
    for symbol, quantity in published["quantities"].items():
        told = published | quantity
        values = quantity["values"]
        is_range = any(isinstance(value, list) for value in values.values())
        for number, end in enumerate(("low", "high")) if is_range else ((0, ""),):
            constants = {k: v[number] if isinstance(v, list) else v for k, v in values.items()}
            left_out = tuple(quantity.get("left_out", ()))
            yield PublishedTensor(
                told["id"], symbol, told["class"], constants, left_out, told["grade"], told["source"], end
            )
