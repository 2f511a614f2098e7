"""A finite group as its product table alone: inverses, classes, orders, powers, generators.

No matrices here. Two sets of matrices that multiply alike share one `AbstractGroup`, so that whatever
follows from the table (characters, classes) is computed once.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from sitesym.arrays import IntArray


@dataclass(frozen=True, eq=False)
class AbstractGroup:
    """A finite group given by ``table[g, h]`` = index of the product g h (h acts first). Element 0 is the
    identity.
    """

    table: IntArray

    @property
    def order(self) -> int:
        """Number of elements."""
        return len(self.table)

    @cached_property
    def inverses(self) -> IntArray:
        """Index of the inverse of each element, shape (order,)."""
        inverses: IntArray = np.argmin(self.table, axis=1)
        return inverses

    @cached_property
    def element_orders(self) -> IntArray:
        """Smallest k > 0 with g^k = 1, shape (order,)."""
        orders = np.zeros(self.order, dtype=np.int64)
        power = np.arange(self.order)
        for k in range(1, self.order + 1):
            orders[(power == 0) & (orders == 0)] = k
            power = self.table[power, np.arange(self.order)]
        return orders

    @cached_property
    def exponent(self) -> int:
        """Smallest e > 0 with g^e = 1 for every element."""
        return int(np.lcm.reduce(self.element_orders))

    @cached_property
    def power_table(self) -> IntArray:
        """``power_table[k, g]`` = index of g^k for k from 0 to exponent - 1."""
        elements = np.arange(self.order)
        rows = [np.zeros(self.order, dtype=np.int64)]
        for _ in range(self.exponent - 1):
            rows.append(self.table[rows[-1], elements])
        return np.array(rows)

    def powers(self, k: int) -> IntArray:
        """Index of g^k for each element g, k >= 0, shape (order,)."""
        row: IntArray = self.power_table[k % self.exponent]
        return row

    @cached_property
    def classes(self) -> tuple[tuple[int, ...], ...]:
        """Classes of conjugate elements, each sorted, ordered by their first element."""
        conjugates = self.table[self.table, self.inverses[:, None]]  # [g, h] = g h g^-1
        found: dict[int, tuple[int, ...]] = {}
        for h in range(self.order):
            members = tuple(sorted({int(c) for c in conjugates[:, h]}))
            found.setdefault(members[0], members)
        return tuple(found[first] for first in sorted(found))

    @cached_property
    def class_of(self) -> IntArray:
        """Index of the class of each element, shape (order,)."""
        index = np.zeros(self.order, dtype=np.int64)
        for c, members in enumerate(self.classes):
            index[list(members)] = c
        return index

    @cached_property
    def generators(self) -> tuple[int, ...]:
        """A small generating set: the elements, of high order first, that enlarge what is generated so
        far.
        """
        chosen: list[int] = []
        reached = {0}
        for g in sorted(range(1, self.order), key=lambda g: (-int(self.element_orders[g]), g)):
            if g not in reached:
                chosen.append(g)
                reached = self.closure(chosen)
        return tuple(chosen)

    def closure(self, elements: list[int]) -> set[int]:
        """All products of the given elements."""
        reached = {0}
        frontier = {0}
        while frontier:
            frontier = {int(self.table[g, h]) for g in frontier for h in elements} - reached
            reached |= frontier
        return reached
