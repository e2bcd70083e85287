"""The least ideal value for each value of a sum over integer inputs: a bounded knapsack, exactly.

Either by a table over all sums (R. Bellman, "Dynamic Programming", 1957), or by a list of all
choices where these are few. What alike inputs add is one bounded item; a table is extended by a
number of them in as many steps as that number has bits, since the least over 2n of them is the
lesser of the least over n and the same n further on. All is exact in int64: costs are bounded
beforehand.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from functools import reduce
from math import prod
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

Ints = NDArray[np.int64]

UNREACHED = 1 << 61
# what the sum of all costs, or of all sizes, may come to
MOST_COST = 1 << 60


class Input(Protocol):
    """One of several independent inputs, each of which takes one of its options."""

    @property
    def sizes(self) -> Ints:
        """Return what each option adds to the sum, none of it negative."""
        ...

    @property
    def costs(self) -> Ints:
        """Return what each option costs."""
        ...

    @property
    def work(self) -> int:
        """Return how often a table is gone over to extend it."""
        ...

    def extended(self, costs: Ints) -> Ints:
        """Return a table of least costs with this input's added."""
        ...


@dataclass(frozen=True)
class Item:
    """Option number n, of 0..most, adds n * size, size > 0, and costs n * cost."""

    size: int
    cost: int
    most: int

    @property
    def sizes(self) -> Ints:
        """Return what each option adds to the sum."""
        return np.arange(self.most + 1, dtype=np.int64) * self.size

    @property
    def costs(self) -> Ints:
        """Return what each option costs."""
        return np.arange(self.most + 1, dtype=np.int64) * self.cost

    @property
    def work(self) -> int:
        """Return how often a table is gone over to extend it."""
        return self.most.bit_length() + 1

    def extended(self, costs: Ints) -> Ints:
        """Return a table of least costs with this input's added, by doubling."""
        covered, best = 0, costs
        while covered < self.most:
            more = min(covered + 1, self.most - covered)
            made = best.copy()
            _lower(made, best, more * self.size, more * self.cost)
            best = made
            covered += more
        return best


@dataclass(frozen=True, eq=False)
class Menu:
    """Options with whatever sizes and costs."""

    sizes: Ints
    costs: Ints

    @property
    def work(self) -> int:
        """Return how often a table is gone over to extend it."""
        return len(self.sizes)

    def extended(self, costs: Ints) -> Ints:
        """Return a table of least costs with this input's added."""
        best = np.full_like(costs, UNREACHED)
        for size, cost in zip(self.sizes.tolist(), self.costs.tolist(), strict=True):
            _lower(best, costs, size, cost)
        return best


def _lower(best: Ints, costs: Ints, size: int, cost: int) -> None:
    """Lower the best costs to those of the sums `size` before, plus `cost`."""
    if size < len(costs):
        np.minimum(best[size:], costs[: len(costs) - size] + cost, out=best[size:])


@dataclass(frozen=True, eq=False)
class Choices:
    """The sums that inputs reach, `numbers`, with the least cost of each in 1/`unit`.

    A number may occur more than once. `exact`: costs are not rounded down. `tables` are those
    after no, one, two... inputs; None for a list of all choices, the last input's fastest.
    """

    inputs: Sequence[Input]
    numbers: Ints
    costs: Ints
    unit: int
    exact: bool
    tables: Sequence[Ints] | None

    def options(self, number: int) -> list[int]:
        """Return which option of each input reaches a number at the least cost."""
        if self.tables is not None:
            return _traced(self.tables, self.inputs, number)
        found = np.flatnonzero(self.numbers == number)
        best = int(found[int(np.argmin(self.costs[found]))])
        shape = tuple(len(each.sizes) for each in self.inputs)
        return [int(i) for i in np.unravel_index(best, shape)] if shape else []


def list_work(inputs: Sequence[Input]) -> int:
    """Return how many choices there are."""
    return prod(len(each.sizes) if isinstance(each, Menu) else _count(each) for each in inputs)


def _count(each: Input) -> int:
    return each.most + 1 if isinstance(each, Item) else len(each.sizes)


def table_work(inputs: Sequence[Input], length: int) -> int:
    """Return how many entries are computed for a table of that many sums."""
    return length * sum(each.work for each in inputs)


def listed(inputs: Sequence[Input], cost: int, unit: int, exact: bool) -> Choices:
    """Return all choices, `cost` being what they cost besides."""
    numbers = reduce(_outer, (each.sizes for each in inputs), np.zeros(1, dtype=np.int64))
    costs = reduce(_outer, (each.costs for each in inputs), np.full(1, cost, dtype=np.int64))
    return Choices(inputs, numbers, costs, unit, exact, None)


def _outer(a: Ints, b: Ints) -> Ints:
    return (a[:, None] + b).ravel()


def tabled(inputs: Sequence[Input], length: int, cost: int, unit: int, exact: bool) -> Choices:
    """Return the least costs of all sums 0..length - 1, `cost` being what they cost besides."""
    costs = np.full(length, UNREACHED, dtype=np.int64)
    costs[0] = 0
    tables = [costs]
    for each in inputs:
        tables.append(each.extended(tables[-1]))
    numbers = np.flatnonzero(tables[-1] < UNREACHED - MOST_COST).astype(np.int64)
    return Choices(inputs, numbers, tables[-1][numbers] + cost, unit, exact, tables)


def _traced(tables: Sequence[Ints], inputs: Sequence[Input], number: int) -> list[int]:
    options = []
    for before, each, after in zip(tables[-2::-1], reversed(inputs), tables[:0:-1], strict=True):
        sizes = each.sizes
        fits = np.flatnonzero(sizes <= number)
        reached = before[number - sizes[fits]] + each.costs[fits]
        option = int(fits[int(np.argmax(reached == after[number]))])
        options.append(option)
        number -= int(sizes[option])
    return options[::-1]
