"""The components of one property laid out as a column or a matrix, and its relations as equations.

Works on one entry of ``properties`` of an `allowed` document; shared by text, Markdown and LaTeX.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Any

from sitesym.reports.expressions import Namer, combination, negated

#: One entry of ``properties`` of an `allowed` document.
Property = Mapping[str, Any]

#: Writes a linear combination in some notation.
Combine = Callable[[Mapping[str, str], Namer], str]

_AXES = ("x", "y", "z")
_PAIRS = ("xx", "yy", "zz", "yz", "xz", "xy")
_HEADS = {3: _AXES, 6: _PAIRS}


@dataclass(frozen=True)
class Cell:
    """One place of the matrix: the key under which its component is listed, the sign with which it stands
    there ("" or "-"), and its terms with that sign, none where it is zero.
    """

    key: str
    sign: str
    terms: Mapping[str, str]


@dataclass(frozen=True)
class ComponentMatrix:
    """Components in rows and columns, with what each row and column stands for.

    ``rows`` and ``columns`` pair the digit of the key with its axis or pair of axes: ("4", "yz"). A vector
    has one column and empty ``columns``.
    """

    rows: tuple[tuple[str, str], ...]
    columns: tuple[tuple[str, str], ...]
    cells: tuple[tuple[Cell, ...], ...]


def component_matrix(entry: Property) -> ComponentMatrix | None:
    """The layout of a property whose keys have one or two digits; None for longer keys, which are listed."""
    blocks = entry["blocks"]
    if len(blocks) not in (1, 2) or any(length not in _HEADS for length in blocks):
        return None
    heads = [tuple(zip(map(str, range(1, length + 1)), _HEADS[length], strict=True)) for length in blocks]
    if len(heads) == 1:
        return ComponentMatrix(heads[0], (), tuple((_cell(entry, digit),) for digit, _ in heads[0]))
    rows, columns = heads
    cells = tuple(tuple(_cell(entry, row + column) for column, _ in columns) for row, _ in rows)
    return ComponentMatrix(rows, columns, cells)


def _cell(entry: Property, key: str) -> Cell:
    """The component at a place. Where two indices may be exchanged, "21" is listed as "12"."""
    if key in entry["keys"]:
        return Cell(key, "", entry["components"].get(key, {}))
    terms = entry["components"].get(key[::-1], {})
    if entry["antisymmetric"]:
        return Cell(key[::-1], "-", {name: negated(coefficient) for name, coefficient in terms.items()})
    return Cell(key[::-1], "", terms)


def relations(entry: Property, name: Namer, combine: Combine = combination) -> list[str]:
    """Every dependent component that is not zero, as equations in the notation of ``name``.

    Components equal but for the sign stand in one chain (c11 = c22 = c33; d11 = -d12), the others follow one
    by one (d26 = -2 d11; c66 = (c11 - c12)/2).
    """
    chains = {key: [name(key)] for key in entry["independent"]}
    single: list[str] = []
    for key, terms in entry["components"].items():
        if key in chains:
            continue
        source, coefficient = next(iter(terms.items()))
        if len(terms) == 1 and coefficient in ("1", "-1"):
            chains[source].append(f"{coefficient[:-1]}{name(key)}")
        else:
            single.append(f"{name(key)} = {combine(terms, name)}")
    return [" = ".join(chain) for chain in chains.values() if len(chain) > 1] + single


def open_signs(entry: Property, name: Namer) -> list[str]:
    """The signs that symmetry leaves open: equally valid axes, and the components they reverse."""
    return [
        f"axes turned {choice['turn']} are equally valid and reverse {', '.join(map(name, choice['flips']))}"
        for choice in entry["equivalent_axes"]
    ]


def kind_text(entry: Property) -> str:
    """Index symmetry, parity, rank and unit in a line."""
    unit = entry["unit"] or "unknown"
    traceless = ", traceless" if entry["traceless"] else ""
    return f"{entry['index_symmetry']}{traceless}, {entry['parity']}, rank {entry['rank']}, unit {unit}"


def exchange_text(entry: Property) -> str:
    """What is not listed of antisymmetric indices; '' where there are none."""
    if "{" not in entry["index_symmetry"]:
        return ""
    return "an exchange inside { } reverses the sign; one of both components is listed"


def zero_count(entry: Property) -> int:
    """How many of the listed components vanish."""
    return len(entry["keys"]) - len(entry["components"])
