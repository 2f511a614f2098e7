"""Ways to read the numbers of an array: order of the pairs, layout, factors of columns 4 to 6.

Each departure from what was stated counts as one of so many choices, and the choices multiply.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from functools import lru_cache
from itertools import product

import numpy as np

from sitesym.arrays import FloatArray, frozen
from sitesym.audit.arrayspace import array_space
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


@dataclass(frozen=True, eq=False)
class _Plan:
    """A variant before any numbers."""

    order: Order
    layout: Layout
    factor: str
    divisors: FloatArray
    choices: int
    departs: bool


@dataclass(frozen=True)
class _Factor:
    words: str
    powers: tuple[float, ...]
    choices: int


def variants_of(measurement: Measurement) -> tuple[Variant, ...]:
    """All variants, the one as stated first; the standard order counts as stated where none is."""
    plans = _plans(measurement.kind, measurement.stated_layout, measurement.order)
    weights = array_space(measurement.kind).weights
    arrays: dict[tuple[Layout, Order], FloatArray] = {}
    variants = []
    for plan in plans:
        key = (plan.layout, plan.order)
        if key not in arrays:
            array = contracted(measurement.kind, measurement.values, plan.layout, plan.order)
            arrays[key] = array.reshape(-1) * weights
        variants.append(
            Variant(
                plan.order,
                plan.layout,
                plan.factor,
                plan.divisors,
                arrays[key] / plan.divisors,
                plan.choices,
                plan.departs,
            )
        )
    return tuple(variants)


@lru_cache(maxsize=256)
def _plans(kind: TensorKind, stated_layout: Layout, stated_order: Order | None) -> tuple[_Plan, ...]:
    """The variants of every array of one kind that was stated alike."""
    space = array_space(kind)
    layouts: tuple[Layout, ...] = (stated_layout, *other_layouts(kind, stated_layout))
    orders = _orders(kind, stated_layout, stated_order)
    plans = []
    for factor, layout, order in product(_factors(kind, stated_layout), layouts, orders):
        order_choices = _order_choices(order, orders[0])
        departs = bool(factor.words) or layout != stated_layout
        plans.append(
            _Plan(
                order,
                layout,
                factor.words,
                frozen(np.prod(np.array(factor.powers) ** space.shears, axis=1)),
                order_choices * (1 if layout == stated_layout else len(layouts)) * factor.choices,
                departs or (stated_order is not None and order_choices > 1),
            )
        )
    return tuple(plans)


def _orders(kind: TensorKind, stated_layout: Layout, stated: Order | None) -> tuple[Order, ...]:
    """The stated order (or the standard one) first."""
    first = stated or STANDARD_ORDER
    return (first, *(order for order in orders_of(kind, stated_layout) if order != first))


def _order_choices(order: Order, stated: Order) -> int:
    """1 for the stated order, 3 for the orders in common use, 6 for the rest."""
    if order == stated:
        return 1
    return 3 if order in SHEAR_ORDERS[:3] else 6


def _factors(kind: TensorKind, stated_layout: Layout) -> tuple[_Factor, ...]:
    space = array_space(kind)
    axes = len(space.blocks)
    pairs = [axis for axis, block in enumerate(space.blocks) if block == 6]
    plain = _Factor("", (1.0,) * axes, 1)
    if not pairs or stated_layout.startswith("full") or space.size > _LARGEST_WITH_FACTORS:
        return (plain,)
    return (plain, *_other_factors(kind, axes, pairs))


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
