"""Operations on non-empty intervals of integers."""

from collections.abc import Iterable

from guardbit.arith.rounding import limit, unlimited
from guardbit.arith.words import clamp, format_range
from guardbit.model.enums import Overflow
from guardbit.model.filter import Requantiser
from guardbit.model.sizing import Interval


def add(a: Interval, b: Interval) -> Interval:
    """Return the sums of a member of `a` and a member of `b`."""
    return Interval(a.low + b.low, a.high + b.high)


def shift(a: Interval, by: int) -> Interval:
    """Return `a` moved up by `by`."""
    return Interval(a.low + by, a.high + by)


def scale(a: Interval, factor: int) -> Interval:
    """Return the hull of `factor` times the members of `a`."""
    ends = (a.low * factor, a.high * factor)
    return Interval(min(ends), max(ends))


def hull(intervals: Iterable[Interval]) -> Interval:
    """Return the least interval that contains all. Raises ValueError if there are none."""
    items = tuple(intervals)
    return Interval(min(i.low for i in items), max(i.high for i in items))


def contains(outer: Interval, inner: Interval) -> bool:
    """Return whether every member of `inner` is one of `outer`."""
    return outer.low <= inner.low and inner.high <= outer.high


def clamp_to(a: Interval, limits: Interval) -> Interval:
    """Return what clamping to `limits` makes of `a`."""
    return Interval(clamp(a.low, limits.low, limits.high), clamp(a.high, limits.low, limits.high))


def wrapped(a: Interval, bits: int, signed: bool) -> Interval:
    """Return the hull of `a` modulo 2**bits: `a` itself if it fits, else exact or the word.

    Exact when all of `a` lies in one period of the word; otherwise both ends of the word
    are the images of two neighbours in `a`.
    """
    word = format_range(bits, signed)
    turn = (a.low - word.low) >> bits
    if turn == (a.high - word.low) >> bits:
        return shift(a, -(turn << bits))
    return word


def unlimited_range(r: Requantiser, preloaded: bool, argument: Interval) -> Interval:
    """Return the rounded values with the pedestal added; rounding is monotone."""
    return Interval(unlimited(r, preloaded, argument.low), unlimited(r, preloaded, argument.high))


def requantised_range(r: Requantiser, preloaded: bool, argument: Interval) -> Interval:
    """Return the hull of the codes that a requantiser makes of `argument`.

    With `overflow = "wrap"` and values of more than one period this is the whole format.
    """
    values = unlimited_range(r, preloaded, argument)
    if r.overflow is Overflow.WRAP:
        return wrapped(values, r.to.bits, r.to.signed)
    return Interval(limit(r, values.low), limit(r, values.high))
