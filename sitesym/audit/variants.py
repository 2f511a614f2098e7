"""Ways to read the numbers of an array: order of the pairs, layout, factors of columns 4 to 6.

Each departure from what was stated counts as one of so many choices, and the choices multiply.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from itertools import product

import numpy as np

from sitesym.arrays import FloatArray, frozen
from sitesym.audit.arrayspace import ArraySpace, array_space
from sitesym.audit.layouts import contracted, orders_of, other_layouts
from sitesym.audit.measurement import Layout, Measurement
from sitesym.audit.orders import SHEAR_ORDERS, STANDARD_ORDER, Order
from sitesym.tensors import TensorKind, contraction

#: Arrays with more entries are tried in every order and layout, but not with other factors.
_LARGEST_WITH_FACTORS = 300
_WORDS = {2.0: "doubled", 0.5: "halved", 2.0**0.5: "times sqrt(2)", 0.5**0.5: "divided by sqrt(2)"}


@dataclass(frozen=True, eq=False)
class Variant:
    """One way to read the numbers.

    ``divisors`` (n,): what each entry is divided by. ``coordinates`` (n,): of the tensor read in this way, in
    its own axes. ``choices``: how many such departures there are. ``departs``: whether it differs from what
    was stated (an order that was not stated cannot be departed from).
    """

    order: Order
    layout: Layout
    factor: str
    divisors: FloatArray
    coordinates: FloatArray
    choices: int
    departs: bool


@dataclass(frozen=True)
class _Factor:
    words: str
    powers: tuple[float, ...]
    choices: int


def variants_of(measurement: Measurement) -> tuple[Variant, ...]:
    """All variants, the one as stated first; where no order is stated, those in standard factors and stated
    layout come first.
    """
    space = array_space(measurement.kind)
    layouts: tuple[Layout, ...] = (measurement.stated_layout, *other_layouts(measurement))
    factors = _factors(measurement, space)
    return tuple(
        _variant(measurement, space, order, layout, factor, len(layouts))
        for factor, layout, order in product(factors, layouts, _orders(measurement))
    )


def _variant(
    measurement: Measurement,
    space: ArraySpace,
    order: Order,
    layout: Layout,
    factor: _Factor,
    layouts: int,
) -> Variant:
    divisors = np.prod(np.array(factor.powers) ** space.shears, axis=1)
    entries = contracted(measurement.kind, measurement.values, layout, order).reshape(-1) / divisors
    departs_in_layout = layout != measurement.stated_layout
    order_choices = _order_choices(order, measurement.order, len(orders_of(measurement)))
    return Variant(
        order,
        layout,
        factor.words,
        frozen(divisors),
        frozen(space.coordinates(entries)),
        order_choices * (layouts if departs_in_layout else 1) * factor.choices,
        bool(factor.words)
        or departs_in_layout
        or (measurement.order is not None and order_choices > 1),
    )


def _orders(measurement: Measurement) -> tuple[Order, ...]:
    """The stated order (or the standard one) first."""
    stated = measurement.order or STANDARD_ORDER
    return (stated, *(order for order in orders_of(measurement) if order != stated))


def _order_choices(order: Order, stated: Order | None, total: int) -> int:
    """1 for the stated order, 3 for the orders in common use, 6 for the rest."""
    if total == 1 or order == (stated or STANDARD_ORDER):
        return 1
    return 3 if order in SHEAR_ORDERS[:3] else 6


def _factors(measurement: Measurement, space: ArraySpace) -> tuple[_Factor, ...]:
    axes = len(space.blocks)
    pairs = [axis for axis, block in enumerate(space.blocks) if block == 6]
    plain = _Factor("", (1.0,) * axes, 1)
    if not pairs or measurement.stated_layout.startswith("full") or space.size > _LARGEST_WITH_FACTORS:
        return (plain,)
    return (plain, *_other_factors(measurement.kind, axes, pairs))


def _other_factors(kind: TensorKind, axes: int, pairs: list[int]) -> Iterator[_Factor]:
    sets = [pairs]
    if len(pairs) == 2 and not contraction(kind).commuting:
        sets += [[pairs[0]], [pairs[1]]]
    for chosen, (value, words) in product(sets, _WORDS.items()):
        powers = tuple(value if axis in chosen else 1.0 for axis in range(axes))
        common = value in (2.0, 0.5)
        yield _Factor(_factor_words(kind, chosen, axes, words), powers, (3 if common else 5) * len(sets))


def _factor_words(kind: TensorKind, chosen: list[int], axes: int, words: str) -> str:
    if len(chosen) == 1:
        where = "columns 4-6" if chosen[0] == axes - 1 else "rows 4-6"
    else:
        where = "entries with 4-6, for each such index,"
    halved = 2 in kind.pair_factors
    hints = {
        "doubled": "" if halved else " (factors of strain, as in d and s)",
        "halved": " (tensor components, without the factors of strain)" if halved else "",
        "times sqrt(2)": " (Kelvin's weights)",
    }
    return f"{where} {words}{hints.get(words, '')}"
