"""A measured tensor as it was given, with everything known about how to read it."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Final, Literal, TypeAlias

import numpy as np

from sitesym.arrays import FloatArray, frozen
from sitesym.audit.orders import STANDARD_ORDER, Order
from sitesym.errors import TensorInputError
from sitesym.tensors import TensorKind, contraction

#: ``matrix``: contracted array, shape ``contraction(kind).shape``. ``full``: every index 1 to 3.
#: ``transposed``: contracted with the two indices exchanged (6x3 for 3x6). ``by-columns``: the numbers of the
#: matrix written column after column into the rows of an array of the same shape. ``full-last-first``: full,
#: with the last index (or pair of indices) of the kind standing first.
Layout: TypeAlias = Literal["matrix", "full", "transposed", "by-columns", "full-last-first"]

#: A name of axes of the crystal, ``unknown``, or the axes as rows in the file's axes, shape (3, 3).
StatedAxes: TypeAlias = str | FloatArray

AXES_OF_MEASUREMENTS: Final = ("file", "lattice", "ieee", "unknown")


@dataclass(frozen=True, eq=False)
class Measurement:
    """One tensor of one crystal.

    ``values``: the array exactly as given, in ``unit``. ``order``: what the contracted indices 1 to 6 stand
    for; None when not stated. ``layout``: None to take it from the shape. ``axes``: `file`, `lattice`,
    `ieee`, `unknown`, or a (3, 3) matrix with the axes as rows in the file's axes. ``sigma``: standard
    uncertainty, one number or an array of the shape of ``values``. ``rounding``: one unit of the last printed
    digit, one number or an array of the shape of ``values``; None when not known.

    Raises TensorInputError for a shape, an order or values that do not fit the kind.
    """

    id: str
    kind: TensorKind
    values: FloatArray
    order: Order | None = STANDARD_ORDER
    layout: Layout | None = None
    axes: StatedAxes = "unknown"
    unit: str = "unknown"
    sigma: float | FloatArray | None = None
    rounding: float | FloatArray | None = None
    source: str = ""
    conditions: str = ""
    stated_layout: Layout = field(init=False)

    def __post_init__(self) -> None:
        values = np.asarray(self.values, dtype=np.float64)
        object.__setattr__(self, "values", frozen(values))
        object.__setattr__(self, "stated_layout", self.layout or layout_of(self.kind, values.shape))
        _check_layout(self.kind, self.stated_layout, values.shape)
        _check_finite(values)
        for name in ("sigma", "rounding"):
            object.__setattr__(self, name, _uncertainty(getattr(self, name), name, values.shape))
        if not isinstance(self.axes, str):
            object.__setattr__(self, "axes", frozen(np.asarray(self.axes, dtype=np.float64)))
        elif self.axes not in AXES_OF_MEASUREMENTS:
            raise TensorInputError(
                "the axes of the tensor have no such name",
                value=repr(self.axes),
                rule=f"one of {', '.join(AXES_OF_MEASUREMENTS)}, or a 3x3 matrix",
                next_step="name the axes, or leave them out: they then count as unknown",
            )
        if self.order is not None and sorted(self.order) != sorted(STANDARD_ORDER):
            raise TensorInputError(
                "the order of the contracted index is not understood",
                value=str(self.order),
                rule="each of the pairs 11 22 33 23 13 12 once",
                next_step="correct it, or leave it out: it then counts as unknown",
            )


def layout_of(kind: TensorKind, shape: tuple[int, ...]) -> Layout:
    """The layout a shape tells. Raises TensorInputError for a shape that fits none."""
    matrix = contraction(kind).shape
    if shape == matrix:
        return "matrix"
    if shape == (3,) * kind.rank:
        return "full"
    if len(matrix) == 2 and shape == matrix[::-1]:
        return "transposed"
    raise TensorInputError(
        f"the array does not have the shape of {kind.name}",
        value=f"shape {shape}",
        rule=f"shape {matrix} (contracted) or {(3,) * kind.rank} (full)",
        next_step="give the whole array in one of these shapes",
    )


def _check_layout(kind: TensorKind, layout: Layout, shape: tuple[int, ...]) -> None:
    matrix = contraction(kind).shape
    expected = {
        "matrix": matrix,
        "by-columns": matrix,
        "transposed": matrix[::-1],
        "full": (3,) * kind.rank,
        "full-last-first": (3,) * kind.rank,
    }
    if layout not in expected or shape != expected[layout]:
        raise TensorInputError(
            f"the array does not have the shape of {kind.name} in this layout",
            value=f"shape {shape}, layout {layout!r}",
            rule="; ".join(f"{name}: {size}" for name, size in expected.items()),
            next_step="name the layout of the array, or leave it out: the shape then tells",
        )


def _check_finite(values: FloatArray) -> None:
    if not np.isfinite(values).all():
        place = tuple(int(i) + 1 for i in np.argwhere(~np.isfinite(values))[0])
        raise TensorInputError(
            "an entry of the array is not a finite number",
            value=f"entry {place}: {values[tuple(i - 1 for i in place)]}",
            rule="every entry is a finite number",
            next_step="correct the entry; a component that was not measured cannot be audited",
        )


def _uncertainty(
    value: float | FloatArray | None, name: str, shape: tuple[int, ...]
) -> float | FloatArray | None:
    if value is None:
        return None
    array = np.asarray(value, dtype=np.float64)
    if array.shape not in ((), shape) or not np.isfinite(array).all() or (array < 0.0).any():
        raise TensorInputError(
            f"{name} does not fit the array",
            value=f"shape {array.shape}, smallest {array.min(initial=np.inf):g}",
            rule=f"one number, or an array of shape {shape}, none below zero",
            next_step=f"correct {name}, or leave it out",
        )
    return float(array) if array.shape == () else frozen(array)
