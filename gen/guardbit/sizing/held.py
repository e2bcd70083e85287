"""What an accumulator holds at the end, by its width and policy."""

from collections.abc import Iterable
from dataclasses import dataclass

from guardbit.arith.intervals import contains, hull, scale, wrapped
from guardbit.arith.words import clamp, format_range
from guardbit.model.enums import Overflow
from guardbit.model.filter import Accumulator
from guardbit.model.sizing import Interval
from guardbit.sizing.lines import Line
from guardbit.sizing.problem import Problem, any_values, apart, class_ends
from guardbit.sizing.survey import EXACT_WORK, Survey, ends_interval, interior_class


@dataclass(frozen=True)
class Held:
    """A range; `exact` if both ends are attained, by the frames that attain the sum's ends."""

    range: Interval
    exact: bool


def word_of(accumulator: Accumulator) -> Interval:
    """Return all numbers that a register of resolved width holds."""
    assert accumulator.bits is not None
    return format_range(accumulator.bits, accumulator.signed)


def held(accumulator: Accumulator, problem: Problem, found: Survey) -> Held:
    """Return what a register holds at the end over all classes."""
    final, partial = found.interval(False), found.interval(True)
    if accumulator.overflow is Overflow.SATURATE and not contains(word_of(accumulator), partial):
        return _saturated(accumulator, problem)
    return _unclamped(accumulator, final, found.exact)


def held_in_class(accumulator: Accumulator, problem: Problem, row: Line, column: Line) -> Held:
    """Return what a register holds at the end in one class."""
    ends = class_ends(problem, row, column)
    word = word_of(accumulator)
    if accumulator.overflow is Overflow.SATURATE and not contains(word, ends_interval(ends, True)):
        return _saturated_class(accumulator, problem, row, column)
    return _unclamped(accumulator, ends_interval(ends, False), True)


def _unclamped(accumulator: Accumulator, final: Interval, exact: bool) -> Held:
    if accumulator.overflow is not Overflow.WRAP:
        return Held(final, exact)
    assert accumulator.bits is not None
    low, high = word_of(accumulator).low, final.high
    one_turn = (final.low - low) >> accumulator.bits == (high - low) >> accumulator.bits
    return Held(wrapped(final, accumulator.bits, accumulator.signed), exact and one_turn)


def _saturated(accumulator: Accumulator, problem: Problem) -> Held:
    inner = interior_class(problem)
    if inner is not None:
        return _saturated_class(accumulator, problem, *inner)
    pairs = [(row, column) for row in problem.rows for column in problem.columns]
    if pairs and len(pairs) * len(problem.taps) <= EXACT_WORK:
        return _hull(_saturated_class(accumulator, problem, *pair) for pair in pairs)
    bound = _saturated_class(accumulator, problem, *apart(any_values(problem)))
    return Held(bound.range, False)


def _hull(parts: Iterable[Held]) -> Held:
    items = list(parts)
    return Held(hull(h.range for h in items), all(h.exact for h in items))


def _saturated_class(accumulator: Accumulator, problem: Problem, row: Line, column: Line) -> Held:
    """Return the ends of a sum that clamps at every add.

    Such a sum grows with each amount added, so with a pixel for each tap the ends are those
    of the amounts. Taps that share a pixel make it a bound.
    """
    word, values = word_of(accumulator), problem.values_at(row, column)
    low = high = clamp(problem.start, word.low, word.high)
    pixels: set[object] = set()
    reads = 0
    for tap in problem.taps:
        pixel = (row.read(tap.dy), column.read(tap.dx))
        amount = _amount(tap.coefficient, pixel, values, problem.constant)
        low = clamp(low + amount.low, word.low, word.high)
        high = clamp(high + amount.high, word.low, word.high)
        if None not in pixel:
            reads += 1
            pixels.add(pixel)
    return Held(Interval(low, high), len(pixels) == reads)


def _amount(
    coefficient: int, pixel: tuple[int | None, int | None], values: Interval, constant: int | None
) -> Interval:
    if None in pixel:
        assert constant is not None
        return scale(Interval(constant, constant), coefficient)
    return scale(values, coefficient)
