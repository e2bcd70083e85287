"""Results of a first pass that take the sum of the second near a value, with a great error.

Results that one output reads come from pixels of their own. So each gets the value that the
real optimum gives it, rounded and then moved a little where that makes the sum come out better.
"""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from fractions import Fraction
from itertools import pairwise

import numpy as np

from guardbit.sizing.error.choices import Made
from guardbit.sizing.error.envelope import RealCorner
from guardbit.sizing.error.subject import Subject
from guardbit.study.adversary.nudges import Option, Stage, Window

# how far a result is moved from where the real optimum has it, and the sum
_MOST_STEPS = 6
_REACH = 1 << 12
_FINE = 24

Sides = tuple[Made, Made]


def results_near(s: Subject, sides: Sides, n: int) -> Iterator[list[int]]:
    """Yield a result for each place that the last pass reads, for about its sum number n."""
    pairs = list(s.case.last.places.values())
    near = [
        _nearest(_side(s, sides, ideal), value)
        for (_, ideal), value in zip(pairs, _real_values(s, n), strict=True)
    ]
    stages = [
        _stage(s, _side(s, sides, pair[1]), i, pair, value)
        for i, (pair, value) in enumerate(zip(pairs, near, strict=True))
    ]
    window = Window.of([stage for stage in stages if stage.options], _REACH)
    change = _best_change(s, window, *_totals(s, sides, near))
    if change is not None:
        changes = window.changes(change)
        yield [value + changes.get(i, 0) for i, value in enumerate(near)]


def _side(s: Subject, sides: Sides, ideal: int) -> Made:
    return sides[0] if s.sign * ideal >= 0 else sides[1]


def _cost(side: Made, value: int) -> Fraction | None:
    """Return the least ideal of a result, with the side's sign; None if it is never made."""
    at = int(side.values.searchsorted(value))
    if at == len(side.values) or side.values[at] != value:
        return None
    return Fraction(int(side.costs[at]), side.choices.unit)


def _nearest(side: Made, value: Fraction) -> int:
    return min(map(int, side.values), key=lambda each: abs(each - value))


def _totals(s: Subject, sides: Sides, values: Sequence[int]) -> tuple[int, Fraction]:
    """Return the sum of results, and sign times their ideal code."""
    last = s.case.last
    total, ideal = last.amount, Fraction(s.sign * last.ideal, s.case.denominator)
    for (amount, weight), value in zip(last.places.values(), values, strict=True):
        cost = _cost(_side(s, sides, weight), value)
        assert cost is not None
        total += amount * value
        ideal += Fraction(abs(weight), last.denominator) * cost
    return total, ideal


def _real_values(s: Subject, n: int) -> list[Fraction]:
    """Return the result of each input of the last pass at the real optimum for a sum."""
    inputs = _inputs(s)
    left = Fraction(s.stairs.sum_of(n) - s.case.last.amount)
    left -= sum((each.corners[0][0] for each in inputs), Fraction(0))
    taken = [Fraction(0)] * len(inputs)
    for _, number, length in sorted(_pieces(inputs)):
        part = max(min(length, left), Fraction(0))
        taken[number] += part
        left -= part
    return [each.value(amount) for each, amount in zip(inputs, taken, strict=True)]


@dataclass(frozen=True)
class _Input:
    """The least sign * ideal code of one result by what it adds, `amount` times its value.

    `still` is the value of the least one, for an amount of 0.
    """

    amount: int
    corners: tuple[RealCorner, ...]
    still: Fraction

    def value(self, taken: Fraction) -> Fraction:
        """Return the result that adds `taken` more than the least."""
        return (self.corners[0][0] + taken) / self.amount if self.amount else self.still


def _inputs(s: Subject) -> list[_Input]:
    """Return what each place's result can be, clamped or not as the subject says."""
    assert s.results is not None
    left = {
        (weight.amount, weight.ideal): list(ends)
        for weight, ends in zip(s.case.last.weights, s.clamped or (), strict=False)
    }
    made = []
    for amount, ideal in s.case.last.places.values():
        side = s.results.side(s.sign * ideal)
        ends = left.get((amount, ideal), [])
        at = next((i for i, count in enumerate(ends) if count), None)
        corners = side.hull if s.clamped is None or not amount else side.curve
        if at is not None:
            ends[at] -= 1
            corners = (side.ends[at],)
        still = min(corners, key=lambda corner: corner[1])[0]
        made.append(_Input(amount, s.added(amount, ideal, corners), still))
    return made


def _pieces(inputs: Sequence[_Input]) -> Iterator[tuple[Fraction, int, Fraction]]:
    """Yield (slope, number of the input, length) of each linear piece."""
    for number, each in enumerate(inputs):
        for (a, c), (b, d) in pairwise(each.corners):
            if a < b:
                yield (d - c) / (b - a), number, b - a


def _stage(s: Subject, side: Made, number: int, pair: tuple[int, int], value: int) -> Stage:
    amount, ideal = pair
    weight, base = Fraction(abs(ideal), s.case.last.denominator), _cost(side, value)
    assert base is not None
    options = []
    for step in range(-_MOST_STEPS, _MOST_STEPS + 1):
        cost = _cost(side, value + step)
        scaled = 0 if cost is None else int(weight * (cost - base) * (1 << _FINE))
        if step and cost is not None and abs(scaled) < 1 << 50:
            options.append(Option(step, amount * step // (s.stairs.step or 1), scaled))
    return Stage(number, tuple(options))


def _best_change(s: Subject, window: Window, total: int, ideal: Fraction) -> int | None:
    """Return by how many steps of the sum to move for the greatest error."""
    stairs, span = s.stairs, s.stairs.quiet()
    at = (total - stairs.base) // stairs.step if stairs.step else 0
    if span is None:
        return None
    low, high = sorted((s.sign * s.legal.low, s.sign * s.legal.high))
    tried = []
    for offset in np.flatnonzero(window.costs < 1 << 60).tolist():
        change = offset - window.reach
        if span[0] <= at + change <= span[1]:
            cost = ideal + Fraction(int(window.costs[offset]), 1 << _FINE)
            clamped = min(max(cost, Fraction(low)), Fraction(high))
            tried.append((s.sign * stairs.code(at + change) - clamped, change))
    return max(tried)[1] if tried else None
