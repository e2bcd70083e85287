"""All that integer inputs can do: the sums they reach, and the least ideal value of each."""

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from guardbit.model.sizing import Interval
from guardbit.sizing.error.codes import codes_at
from guardbit.sizing.error.columns import Results, first_stairs
from guardbit.sizing.error.inputs import Case, Inputs
from guardbit.sizing.error.pixels import items_of
from guardbit.sizing.error.subject import Subject
from guardbit.sizing.error.table import (
    MOST_COST,
    Choices,
    Input,
    Ints,
    Item,
    Menu,
    list_work,
    listed,
    table_work,
    tabled,
)

# fraction bits of costs that are rounded down to fit a word, at least and at most
LEAST_FINE, MOST_FINE = 24, 48


@dataclass(frozen=True)
class Work:
    """How long a list of choices may be, and how many entries tables may have computed."""

    list: int
    table: int


def choices(s: Subject, work: Work) -> Choices | None:
    """Return the choices of a case's pixels; None if that is too much work."""
    widest = max(abs(s.legal.low), abs(s.legal.high), 1)
    if s.results is None:
        return pixel_choices(s.case.last, s.case.values, s.sign, widest, work)
    return _result_choices(s, widest, work)


def pixel_choices(
    inputs: Inputs, values: Interval, sign: int, widest: int, work: Work
) -> Choices | None:
    """Return the least sign * ideal value of each sum of integer pixels, from the least sum on.

    Differences to numbers up to `widest` stay in int64. None if that is too much work.
    """
    _, items, cost = items_of(inputs, values, sign)
    length = 1 + sum(item.size * item.most for item in items)
    affordable = list_work(items) <= work.list or table_work(items, length) <= work.table
    if length >= MOST_COST or not affordable:
        return None
    unit, exact = inputs.denominator, True
    total = sum(abs(item.cost) * item.most for item in items) + abs(cost)
    if total + unit * widest >= MOST_COST:
        fine = _fine(items, cost, unit, widest)
        if fine is None:
            return None
        items = [replace(item, cost=(item.cost << fine) // unit) for item in items]
        cost, unit, exact = (cost << fine) // unit, 1 << fine, False
    if list_work(items) <= work.list:
        return listed(items, cost, unit, exact)
    return tabled(items, length, cost, unit, exact)


def _fine(items: Sequence[Item], cost: int, unit: int, widest: int) -> int | None:
    """Return how many fraction bits costs in LSB can have in a word; None: too few."""
    total = sum((abs(item.cost) // unit + 1) * item.most for item in items)
    bits = 57 - (total + abs(cost) // unit + 2 * widest).bit_length()
    return min(bits, MOST_FINE) if bits >= LEAST_FINE else None


@dataclass(frozen=True, eq=False)
class Made:
    """The results that a first pass makes of integer pixels, ascending, less their pedestal.

    `costs` are the least sign * ideal results, of the sums `numbers`.
    """

    values: Ints
    costs: Ints
    numbers: Ints
    choices: Choices


def made_results(s: Subject, sign: int, work: Work) -> Made | None:
    """Return the results that neither wrap nor come of a clamped sum; None: too much work."""
    case, p = s.case, s.filter.passes[0]
    assert case.first is not None and s.results is not None
    found = pixel_choices(case.first, case.values, sign, 1, work)
    stairs = first_stairs(p, case.first, case.values)
    span = stairs.quiet()
    if found is None or span is None:
        return None
    calm = (found.numbers >= span[0]) & (found.numbers <= span[1])
    numbers, costs = found.numbers[calm], found.costs[calm]
    codes = codes_at(stairs, numbers)
    if codes is None or not len(numbers):
        return None
    order = np.lexsort((costs, codes))
    values, first = np.unique(codes[order], return_index=True)
    best = order[first]
    return Made(values - p.requantiser.to.pedestal, costs[best], numbers[best], found)


def _result_choices(s: Subject, widest: int, work: Work) -> Choices | None:
    """Return the choices of the results of a first pass, one for each place that is read.

    First the work is told from the range of results, before any are listed.
    """
    assert s.results is not None
    each = s.results.values.high - s.results.values.low + 1
    count = sum(1 for amount, _ in s.case.last.places.values() if amount)
    length = s.stairs.last + 1
    affordable = each**count <= work.list or length * each * count <= work.table
    if length >= MOST_COST or not affordable:
        return None
    sides = [made_results(s, sign, work) for sign in (1, -1)]
    least, most = sides
    if least is None or most is None or not (least.choices.exact and most.choices.exact):
        return None
    widest_result = max(abs(s.results.values.low), abs(s.results.values.high))
    if any(abs(w.amount) * widest_result * 2 >= MOST_COST for w in s.case.last.weights):
        return None
    return _combined(s.case, s, (least, most), widest, work)


def _combined(
    case: Case, s: Subject, sides: tuple[Made, Made], widest: int, work: Work
) -> Choices | None:
    menus, cost, total = list[Input](), s.sign * case.last.ideal, 0
    for amount, ideal in case.last.places.values():
        side = sides[0] if s.sign * ideal >= 0 else sides[1]
        total += abs(ideal) * int(np.abs(side.costs).max())
        if total + abs(cost) + case.denominator * widest >= MOST_COST:
            return None
        if amount:
            menus.append(_menu(s.results, amount, abs(ideal), side, case.last.common))
        else:
            cost += abs(ideal) * int(side.costs.min())
    if list_work(menus) <= work.list:
        return listed(menus, cost, case.denominator, True)
    return tabled(menus, s.stairs.last + 1, cost, case.denominator, True)


def _menu(found: Results | None, amount: int, weight: int, side: Made, common: int) -> Menu:
    assert found is not None
    ends = (amount * found.values.low, amount * found.values.high)
    sizes = (side.values * amount - min(ends)) // common
    return Menu(sizes, weight * side.costs)
