"""What stands on an atomic site: elements with their occupancies; and the chemical formula made of them."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from functools import lru_cache
from math import gcd
from typing import Final

from sitesym.errors import OccupancyError, ReadingError
from sitesym.tolerances import OCCUPANCY_EXCESS

_SYMBOLS_IN_ORDER: Final = """
    - H He Li Be B C N O F Ne Na Mg Al Si P S Cl Ar K Ca Sc Ti V Cr Mn Fe Co Ni Cu Zn Ga Ge As Se Br Kr
    Rb Sr Y Zr Nb Mo Tc Ru Rh Pd Ag Cd In Sn Sb Te I Xe Cs Ba La Ce Pr Nd Pm Sm Eu Gd Tb Dy Ho Er Tm Yb Lu
    Hf Ta W Re Os Ir Pt Au Hg Tl Pb Bi Po At Rn Fr Ra Ac Th Pa U Np Pu Am Cm Bk Cf Es Fm Md No Lr
    Rf Db Sg Bh Hs Mt Ds Rg Cn Nh Fl Mc Lv Ts Og
"""
#: Element symbols by atomic number; number 0 is no element.
SYMBOLS: Final = tuple(_SYMBOLS_IN_ORDER.split())
ATOMIC_NUMBERS: Final = {symbol: number for number, symbol in enumerate(SYMBOLS) if number}
#: Symbols of isotopes that stand for atoms of an element.
ISOTOPES: Final = {"D": "H", "T": "H"}
_NOBLE_GASES: Final = (0, 2, 10, 18, 36, 54, 86, 118)


@dataclass(frozen=True, order=True)
class Species:
    """What one site holds: pairs of element symbol and occupancy, sorted by element.

    Two sites hold the same species when these pairs are equal. The text form is 'O', 'Fe0.9' or 'Ba0.6Sr0.4'.
    """

    parts: tuple[tuple[str, float], ...]

    @classmethod
    def pure(cls, element: str) -> Species:
        """One element that fills the site. Raises ReadingError for an unknown element."""
        return _pure(element)

    @classmethod
    def mixed(cls, occupancies: Mapping[str, float]) -> Species:
        """Elements with their occupancies, each in (0, 1] and at most one together (1 % above is rounding).

        Raises ReadingError for an unknown element, OccupancyError for an occupancy that cannot be.
        """
        for element, occupancy in occupancies.items():
            if element not in ATOMIC_NUMBERS:
                raise ReadingError(
                    "an atom of no known element",
                    repr(element),
                    "element symbols are H to Og",
                    "name the element",
                )
            if not 0.0 < occupancy <= 1.0 + OCCUPANCY_EXCESS:
                raise _occupancy_error(f"{element} {occupancy:g}")
        if not 0.0 < sum(occupancies.values()) <= 1.0 + OCCUPANCY_EXCESS:
            raise _occupancy_error(" + ".join(f"{name} {value:g}" for name, value in occupancies.items()))
        return cls(tuple(sorted((element, float(value)) for element, value in occupancies.items())))

    @property
    def is_ordered(self) -> bool:
        """True for one element that fills the site."""
        return len(self.parts) == 1 and self.parts[0][1] == 1.0

    def __str__(self) -> str:
        return _counts_text(dict(self.parts))


@lru_cache(maxsize=len(SYMBOLS))
def _pure(element: str) -> Species:
    return Species.mixed({element: 1.0})


def _occupancy_error(value: str) -> OccupancyError:
    return OccupancyError(
        "an occupancy that cannot be",
        value,
        "occupancies are above zero and add up to at most one on a site",
        "correct the occupancies; an empty site is left out",
    )


def reduced_formula(species: Iterable[Species]) -> str:
    """Reduced formula, such as 'BaTiO3': elements from electropositive to electronegative.

    Counts are divided by the largest whole number that divides the site counts of all species, so that a
    supercell has the formula of its cell. Order: N. G. Connelly et al., Nomenclature of Inorganic Chemistry
    (2005), Table VI.
    """
    sites = Counter(species)
    divisor = gcd(*sites.values())
    totals: dict[str, float] = {}
    for kind, count in sites.items():
        for element, occupancy in kind.parts:
            totals[element] = totals.get(element, 0.0) + occupancy * count / divisor
    ordered = sorted(totals, key=_iupac_order)
    return _counts_text({element: totals[element] for element in ordered})


def _counts_text(counts: Mapping[str, float]) -> str:
    return "".join(
        name if abs(count - 1.0) < 1e-6 else f"{name}{round(count, 4):g}" for name, count in counts.items()
    )


def _iupac_order(element: str) -> tuple[float, int]:
    """Sort key: noble gases, groups 1 to 17, heavy before light; hydrogen between groups 15 and 16."""
    number = ATOMIC_NUMBERS[element]
    if element == "H":
        return 15.5, 0
    period = next(index for index, last in enumerate(_NOBLE_GASES) if number <= last)
    from_left = number - _NOBLE_GASES[period - 1]
    from_right = _NOBLE_GASES[period] - number
    if from_right == 0:
        return 0.0, -number
    if from_left <= 2:
        return float(from_left), -number
    if from_right <= 15:
        return float(18 - from_right), -number
    return 3.0, number
