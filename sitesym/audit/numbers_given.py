"""Arrays of numbers as people write them in records, to arrays with the rounding that their digits tell."""

from __future__ import annotations

import json
import re
from collections.abc import Iterator, Mapping
from itertools import permutations
from typing import Any, Final

import numpy as np

from sitesym.arrays import FloatArray
from sitesym.audit.printed import PrintedNumber, rounding_steps
from sitesym.errors import TensorInputError
from sitesym.tensors import TensorKind, contraction

_COMPONENT: Final = re.compile(r"[A-Za-z]*[ _]*(?P<digits>[1-6]+)")
_LONGEST_LIST: Final = 12
#: Squares and products of numbers up to this stay finite.
_LARGEST: Final = 1e100


def array_given(value: Any, name: str) -> tuple[FloatArray, FloatArray]:
    """Values and rounding steps (one unit of the last digit), of one shape.

    ``value``: a number, nested lists of numbers or of texts of numbers, or a text: JSON, or rows separated
    by semicolons or line ends. Raises TensorInputError naming the entry that is no number, or rows of
    unequal length, or a number too large to compute with.
    """
    nested = _from_text(value) if isinstance(value, str) else value
    shape = _shape(nested)
    printed = [_number(entry, place, shape, name) for place, entry in _entries(nested)]
    if len(printed) != int(np.prod(shape)):
        raise _uneven(name, shape)
    immense = [number.text for number in printed if _LARGEST < abs(number) < np.inf]
    if immense:
        raise TensorInputError(
            f"{name} holds a number that nothing measured is as large as",
            immense[0],
            f"numbers up to {_LARGEST:g}",
            "correct the number or choose a larger unit",
        )
    steps = rounding_steps([number.text for number in printed])
    return np.array([float(number) for number in printed]).reshape(shape), steps.reshape(shape)


def components_given(kind: TensorKind, components: Mapping[str, Any], name: str) -> list[Any]:
    """The contracted array, as nested lists, of components given one by one under names such as 14 or c14.

    Of components that index symmetry makes equal (12 and 21) one is enough. Raises TensorInputError for a
    name that is none, or components that are missing: they are not taken for zero.
    """
    notation = contraction(kind)
    array = np.full(notation.shape, None, dtype=object)
    for label, value in components.items():
        array[_place(label, notation.blocks, kind)] = value
    if notation.commuting:
        for place in np.ndindex(*notation.shape):
            equal = (array[other] for other in permutations(place) if array[other] is not None)
            array[place] = array[place] if array[place] is not None else next(equal, None)
    absent = [
        "".join(str(i + 1) for i in place) for place in np.ndindex(*array.shape) if array[place] is None
    ]
    if absent:
        shown = " ".join(absent[:_LONGEST_LIST]) + (" ..." if len(absent) > _LONGEST_LIST else "")
        raise TensorInputError(
            f"{len(absent)} components of {name} are not given",
            shown,
            "every component of the contracted array; what is not listed is not known to be zero",
            "add them, with 0 where they are zero",
        )
    nested: list[Any] = array.tolist()
    return nested


def _place(label: str, blocks: tuple[int, ...], kind: TensorKind) -> tuple[int, ...]:
    match = _COMPONENT.fullmatch(label.strip())
    digits = [int(digit) for digit in match["digits"]] if match else []
    if len(digits) != len(blocks) or any(d > block for d, block in zip(digits, blocks, strict=True)):
        raise TensorInputError(
            f"a component of {kind.name} has no such name",
            repr(label),
            f"{len(blocks)} digits, from 1 to {', '.join(map(str, blocks))}",
            "correct the name",
        )
    return tuple(digit - 1 for digit in digits)


def _from_text(text: str) -> Any:
    """Nested lists from JSON, or from rows of numbers."""
    if text.lstrip().startswith("["):
        try:
            return json.loads(text, parse_float=PrintedNumber, parse_int=PrintedNumber)
        except json.JSONDecodeError as error:
            raise TensorInputError(
                "an array written as text is not well-formed",
                f"column {error.colno}: {error.msg}",
                "[[1, 2, ...], ...] or rows of numbers separated by semicolons",
                "correct the text",
            ) from error
    rows = [re.split(r"[\s,]+", row.strip()) for row in re.split(r"[;\n]", text) if row.strip()]
    return rows if len(rows) > 1 else (rows[0] if rows and len(rows[0]) > 1 else text)


def _shape(nested: Any) -> tuple[int, ...]:
    """The shape that the first entries tell."""
    shape = []
    while isinstance(nested, list | tuple):
        shape.append(len(nested))
        if not nested:
            break
        nested = nested[0]
    return tuple(shape)


def _entries(nested: Any, place: tuple[int, ...] = ()) -> Iterator[tuple[tuple[int, ...], Any]]:
    if isinstance(nested, list | tuple):
        for number, inner in enumerate(nested, start=1):
            yield from _entries(inner, (*place, number))
    else:
        yield place, nested


def _number(entry: Any, place: tuple[int, ...], shape: tuple[int, ...], name: str) -> PrintedNumber:
    if len(place) != len(shape):
        raise _uneven(name, shape)
    if isinstance(entry, PrintedNumber):
        return entry
    if isinstance(entry, int | float | str) and not isinstance(entry, bool):
        try:
            return PrintedNumber(str(entry))
        except ValueError:
            pass
    where = f"entry ({', '.join(map(str, place))}) " if place else ""
    raise TensorInputError(
        f"{name} holds something that is not a number",
        f"{where}{'null' if entry is None else repr(entry)}",
        "every entry is a number",
        "correct the entry; a component that was not measured cannot be audited",
    )


def _uneven(name: str, shape: tuple[int, ...]) -> TensorInputError:
    return TensorInputError(
        f"the rows of {name} are not alike",
        f"the first rows tell the shape {shape}, others differ",
        "rows of equal length",
        "give every entry, zeros too",
    )
