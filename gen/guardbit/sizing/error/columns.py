"""What an input of the second pass costs: the least ideal first pass behind each of its values.

A value of the second pass is a result of the first: rounded, saturated, and over pixels that no
other result of the same row reads. As a function of the result the least ideal value is bounded
below by a convex one, made of three things: the knapsack of the first pass over its sum, moved
by the residues that rounding can leave, and cut to the codes; and, at a code to which greater
sums are clamped, the least ideal value of all of these.
"""

from dataclasses import dataclass
from fractions import Fraction
from functools import cached_property
from math import gcd

from guardbit.arith.rounding import ratio, unlimited
from guardbit.model.enums import Rounding
from guardbit.model.filter import Filter, Pass
from guardbit.model.sizing import Interval
from guardbit.sizing.error.envelope import (
    Envelope,
    RealCorner,
    clipped_corners,
    lower_hull,
)
from guardbit.sizing.error.inputs import Case, Inputs
from guardbit.sizing.error.pixels import pixel_envelope, sum_range
from guardbit.sizing.error.stairs import Stairs
from guardbit.sizing.noise import NOTHING, Span, rounding_error
from guardbit.sizing.passes import is_preloaded, start_value


@dataclass(frozen=True)
class Side:
    """The least ideal value, or the least negative of it, by the result.

    `curve` has the corners for sums that are not clamped to the codes. `ends` are results to
    which sums are clamped, with their least ideal value, where it lies below the curve.
    """

    curve: tuple[RealCorner, ...]
    ends: tuple[RealCorner, ...]

    @cached_property
    def hull(self) -> tuple[RealCorner, ...]:
        """Return the corners of a convex function below both."""
        return tuple(lower_hull([*self.curve, *self.ends]))


@dataclass(frozen=True)
class Results:
    """The results of a first pass that neither wraps nor clamps a sum, less their pedestal.

    `sums` are the sums less their start value, from `sums.low` `step` apart.
    """

    values: Interval
    sums: Interval
    step: int
    least: Side
    most: Side

    def side(self, weight: int | Fraction) -> Side:
        """Return the side that a result of this weight is to be on for the least ideal code."""
        return self.least if weight >= 0 else self.most


def results(f: Filter, case: Case) -> Results | None:
    """Return the results of the first pass in a case; None if it wraps or clamps all sums."""
    assert case.first is not None
    p, first = f.passes[0], case.first
    stairs = first_stairs(p, first, case.values)
    span = stairs.quiet()
    if span is None:
        return None
    start = start_value(p)
    sums = Interval(stairs.sum_of(span[0]) - start, stairs.sum_of(span[1]) - start)
    codes = [stairs.code(n) - p.requantiser.to.pedestal for n in span]
    made = Interval(codes[0], codes[1])
    error = residues(p, first.common, first.amount, sums)
    least, most = (
        _side(p, pixel_envelope(first, case.values, sign), sums, made, error) for sign in (1, -1)
    )
    return Results(made, sums, stairs.step, least, most)


def first_stairs(p: Pass, first: Inputs, values: Interval) -> Stairs:
    """Return the codes of a first pass by its sum, start value included."""
    sums, step = sum_range(first, values), first.common
    last = (sums.high - sums.low) // step if step else 0
    word = (p.accumulator.bits or 64, p.accumulator.signed)
    return Stairs(p.requantiser, is_preloaded(p), sums.low + start_value(p), step, last, word)


def residues(p: Pass, common: int, amount: int, sums: Interval) -> Span:
    """Return the range of what rounding adds to any of `sums`.

    These leave out the start value, and are `amount` more than multiples of `common`. A
    rounding constant at the start and a floor round as ties-to-positive.
    """
    step = gcd(common, amount)
    if step == 0:
        return NOTHING
    mode = Rounding.TIES_TO_POSITIVE if is_preloaded(p) else p.requantiser.rounding
    unit = Fraction(*ratio(p.requantiser)) * step
    return rounding_error(mode, unit, -(-sums.low // step), sums.high // step)


def _side(p: Pass, ideal: Envelope, sums: Interval, values: Interval, error: Span) -> Side:
    cut = ideal.clipped(Fraction(sums.low), Fraction(sums.high))
    assert cut is not None
    unit = Fraction(*ratio(p.requantiser))
    least = cut.corner_below(Fraction(0))
    places = [cut.amount(i) * unit for i in range(len(cut.amounts))]
    costs = [Fraction(cost, cut.unit) for cost in cut.costs]
    corners = [(place + error.low, cost) for place, cost in zip(places, costs, strict=True)]
    raised = [(place + error.high, cost) for place, cost in zip(places, costs, strict=True)]
    # where the ideal falls the greatest sum of a result is best, where it rises the least
    made = [*corners[: least + 1], *raised[least:]]
    within = clipped_corners(made, Fraction(values.low), Fraction(values.high))
    limits = dict([within[0], within[-1]]) if within else {}
    ends = [
        (value, cost)
        for value, cost in _clamped(p, cut, sums, values, error)
        if value not in limits or cost < limits[value]
    ]
    return Side(tuple(within), tuple(ends))


def _clamped(
    p: Pass, ideal: Envelope, sums: Interval, values: Interval, error: Span
) -> list[RealCorner]:
    """Return the least ideal values of the sums that are clamped to an end of the codes."""
    r, least = p.requantiser, ideal.amount(ideal.corner_below(Fraction(0)))
    unit, start = Fraction(*ratio(r)), start_value(p)
    made = []
    if unlimited(r, is_preloaded(p), sums.high + start) > r.to.high:
        edge = (r.to.high + 1 - r.to.pedestal - error.high) / unit
        amount = min(max(least, edge, Fraction(sums.low)), Fraction(sums.high))
        made.append((Fraction(values.high), ideal.at(amount)))
    if unlimited(r, is_preloaded(p), sums.low + start) < r.to.low:
        edge = (r.to.low - 1 - r.to.pedestal - error.low) / unit
        amount = max(min(least, edge, Fraction(sums.high)), Fraction(sums.low))
        made.append((Fraction(values.low), ideal.at(amount)))
    return made
