"""Tables and lists of all choices of integer inputs, against going through them one by one."""

import itertools
import random
from fractions import Fraction

import numpy as np
import pytest

from guardbit.model.sizing import Interval
from guardbit.sizing.error.choices import Work, pixel_choices
from guardbit.sizing.error.inputs import Inputs
from guardbit.sizing.error.pixels import sum_range
from guardbit.sizing.error.table import Choices, Input, Item, Menu, listed, tabled

from .test_error_envelope import random_inputs

TABLE, LIST = Work(list=0, table=1 << 20), Work(list=1 << 16, table=0)


def best_by_hand(inputs: Inputs, values: Interval, sign: int) -> dict[int, Fraction]:
    """The least sign * ideal of every sum."""
    pairs = [(w.amount, w.ideal) for w in inputs.weights for _ in range(w.count)]
    found: dict[int, Fraction] = {}
    for xs in itertools.product(range(values.low, values.high + 1), repeat=len(pairs)):
        total = inputs.amount + sum(k * x for (k, _), x in zip(pairs, xs, strict=True))
        ideal = inputs.ideal + sum(w * x for (_, w), x in zip(pairs, xs, strict=True))
        cost = Fraction(sign * ideal, inputs.denominator)
        found[total] = min(found.get(total, cost), cost)
    return found


def least(made: Choices, inputs: Inputs, values: Interval) -> dict[int, Fraction]:
    base, step = sum_range(inputs, values).low, inputs.common
    found: dict[int, Fraction] = {}
    for n, cost in zip(made.numbers.tolist(), made.costs.tolist(), strict=True):
        value = Fraction(cost, made.unit)
        found[base + step * n] = min(found.get(base + step * n, value), value)
    return found


@pytest.mark.parametrize("work", [TABLE, LIST], ids=["table", "list"])
def test_the_least_of_every_sum(work: Work) -> None:
    rng = random.Random("tables")
    for _ in range(40):
        inputs, sign = random_inputs(rng, 4), rng.choice([1, -1])
        values = Interval(low := rng.randint(-2, 1), low + rng.randint(0, 2))
        made = pixel_choices(inputs, values, sign, 255, work)
        assert made is not None
        assert made.exact
        assert least(made, inputs, values) == best_by_hand(inputs, values, sign)
        for n in set(made.numbers.tolist()):
            options = made.options(n)
            sizes = [int(each.sizes[o]) for each, o in zip(made.inputs, options, strict=True)]
            assert sum(sizes) == n


def test_costs_beyond_a_word_are_rounded_down_a_little() -> None:
    inputs = random_inputs(random.Random("fine"), 4)
    huge = 10**40
    fine = Inputs(
        tuple(type(w)(w.amount, w.ideal * huge + 7, w.count) for w in inputs.weights),
        inputs.amount,
        inputs.ideal * huge,
        inputs.denominator * huge,
        {},
    )
    for work in (TABLE, LIST):
        made = pixel_choices(fine, Interval(0, 3), 1, 255, work)
        assert made is not None
        assert not made.exact
        truth, found = best_by_hand(fine, Interval(0, 3), 1), least(made, fine, Interval(0, 3))
        assert truth.keys() == found.keys()
        assert all(0 <= truth[a] - found[a] < Fraction(1, 10**6) for a in truth)


def test_too_much_work_is_not_done() -> None:
    inputs = random_inputs(random.Random("much"), 4)
    assert pixel_choices(inputs, Interval(0, 255), 1, 255, Work(9, 9)) is None


@pytest.mark.parametrize("most", [0, 1, 2, 3, 6, 7, 8, 100])
def test_a_repeated_item_is_the_menu_of_its_multiples(most: int) -> None:
    item = Item(3, -5, most)
    menu = Menu(item.sizes, item.costs)
    start = np.array([0, 4, 1, 9, *[1 << 61] * 300], dtype=np.int64)
    assert item.extended(start)[:304].tolist() == menu.extended(start).tolist()


def test_options_of_a_list_and_of_a_table() -> None:
    menus: list[Input] = [Menu(np.array([0, 2, 5]), np.array([1, 0, 7])), Item(1, 2, 4)]
    for made in (listed(menus, 10, 1, True), tabled(menus, 10, 10, 1, True)):
        assert made.options(6) == [1, 4]
        assert made.options(9) == [2, 4]
        assert min(made.costs[made.numbers == 6]) == 18
