"""The fractional knapsack against a general solver of linear programmes, and its parts."""

import random
from fractions import Fraction

import numpy as np
import pytest

from guardbit.model.sizing import Interval
from guardbit.sizing.error.envelope import (
    Envelope,
    clipped_corners,
    from_corners,
    lower_hull,
)
from guardbit.sizing.error.inputs import Inputs, Weight
from guardbit.sizing.error.pixels import pixel_envelope, sum_range


def random_inputs(rng: random.Random, most: int) -> Inputs:
    weights = tuple(
        Weight(rng.randint(-9, 9), rng.randint(-40, 40), rng.choice([1, 1, 2]))
        for _ in range(rng.randint(1, most))
    )
    return Inputs(weights, rng.randint(-20, 20), rng.randint(-20, 20), rng.choice([1, 3, 16]), {})


def linear_programme(inputs: Inputs, values: Interval, sign: int, amount: float) -> float:
    """The least sign * ideal for a given sum, by SciPy's HiGHS."""
    from scipy.optimize import linprog

    ks = [w.amount for w in inputs.weights for _ in range(w.count)]
    ws = [sign * w.ideal for w in inputs.weights for _ in range(w.count)]
    solved = linprog(
        ws,
        A_eq=np.array([ks]),
        b_eq=[amount - inputs.amount],
        bounds=[(values.low, values.high)] * len(ks),
    )
    assert solved.status == 0
    return float(solved.fun + sign * inputs.ideal) / inputs.denominator


@pytest.mark.parametrize("seed", range(3))
def test_a_knapsack_is_the_optimum_of_its_linear_programme(seed: int) -> None:
    rng = random.Random(f"knapsack{seed}")
    for _ in range(12):
        inputs, sign = random_inputs(rng, 9), rng.choice([1, -1])
        values = Interval(low := rng.randint(-5, 3), low + rng.randint(1, 30))
        ends = sum_range(inputs, values)
        made = pixel_envelope(inputs, values, sign)
        for _ in range(4):
            amount = rng.randint(ends.low, ends.high)
            expected = linear_programme(inputs, values, sign, amount)
            assert float(made.at(amount)) == pytest.approx(expected, abs=1e-6)


def test_an_envelope_is_convex_and_has_the_ends_of_its_parts() -> None:
    rng = random.Random("convex")
    for _ in range(50):
        inputs, values = random_inputs(rng, 12), Interval(0, rng.randint(1, 255))
        made = pixel_envelope(inputs, values, 1)
        assert list(made.slopes) == sorted(set(made.slopes))
        ends = sum_range(inputs, values)
        assert (made.amounts[0], made.amounts[-1]) == (ends.low, ends.high)


def test_the_linear_piece_around_each_sum_gives_its_value() -> None:
    rng = random.Random("linear")
    for _ in range(30):
        inputs, values = random_inputs(rng, 6), Interval(-2, 7)
        made, ends = pixel_envelope(inputs, values, -1), sum_range(inputs, values)
        for n in range(ends.high - ends.low + 1):
            line = made.linear(ends.low, 1, n)
            assert line.first <= n <= line.last
            for at in {line.first, n, line.last}:
                value = Fraction(line.constant + line.slope * at, line.denominator)
                assert value == made.at(ends.low + at)


def test_where_a_cost_is_within_a_level() -> None:
    made = Envelope((0, 2, 6, 8), (6, 0, 2, 8), 2, 1)
    assert made.within(Fraction(-1)) is None
    assert made.within(Fraction(0)) == (Fraction(1), Fraction(1))
    assert made.within(Fraction(3)) == (Fraction(1, 2), Fraction(19, 6))
    assert made.within(Fraction(9)) == (Fraction(0), Fraction(4))


def corners(*pairs: tuple[int, int]) -> list[tuple[Fraction, Fraction]]:
    return [(Fraction(amount), Fraction(cost)) for amount, cost in pairs]


def test_clipping_and_hulls_by_hand() -> None:
    three = corners((0, 4), (2, 0), (6, 8))
    assert clipped_corners(three, Fraction(1), Fraction(3)) == corners((1, 2), (2, 0), (3, 2))
    assert clipped_corners(three, Fraction(7), Fraction(9)) == []
    assert clipped_corners(three, Fraction(2), Fraction(2)) == corners((2, 0))
    points = [*three, *corners((5, -3), (1, 9), (2, 3))]
    assert lower_hull(points) == corners((0, 4), (2, 0), (5, -3), (6, 8))
    assert lower_hull(points[2:]) == corners((1, 9), (2, 3), (5, -3), (6, 8))
    made = from_corners([(Fraction(1, 2), Fraction(1, 3)), (Fraction(2), Fraction(5, 6))])
    assert (made.at(Fraction(1, 2)), made.at(2)) == (Fraction(1, 3), Fraction(5, 6))
