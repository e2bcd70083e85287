"""The requantiser as C can carry it out: no shift of a negative number, no overflow.

Where the range of the sum is known, a multiple of the divisor that makes the dividend
non-negative is added before and taken off after the division. Floor division is then C's own
division (or a right shift), on every compiler, without a branch.
"""

from dataclasses import dataclass, replace

from guardbit.arith.intervals import clamp_to, contains, scale, shift, unlimited_range
from guardbit.arith.rounding import ratio, round_ratio
from guardbit.model.enums import Overflow, Preload, Rounding
from guardbit.model.filter import Pass, Requantiser
from guardbit.model.plan import (
    Exact,
    Floor,
    Quotient,
    Tail,
    Thresholds,
    TiesToAway,
    TiesToEven,
    Truncate,
    Value,
)
from guardbit.model.sizing import Interval
from guardbit.plan.cells import INT64, fits, work_cell

_LONGEST = 34
_LEAST = (-(1 << 31), -(1 << 63))


@dataclass(frozen=True)
class Division:
    """A rounded division by `divisor` of every integer in `numerators`."""

    numerators: Interval
    divisor: int
    mode: Rounding


def quotient(d: Division) -> Quotient:
    """Return the form in which C computes a rounded division."""
    if d.divisor == 1:
        return Exact()
    if max(-d.numerators.low, d.numerators.high) < d.divisor:
        return _thresholds(d)
    half = d.divisor // 2
    match d.mode:
        case Rounding.TOWARD_NEGATIVE:
            return _floor(d, 0)
        case Rounding.TOWARD_POSITIVE:
            return _floor(d, d.divisor - 1)
        case Rounding.TOWARD_ZERO:
            return _floor(d, 0) if d.numerators.low >= 0 else Truncate(d.divisor)
        case Rounding.TIES_TO_POSITIVE:
            return _floor(d, half)
        case Rounding.TIES_TO_AWAY:
            return _floor(d, half) if d.numerators.low >= 0 else TiesToAway(half, d.divisor)
        case Rounding.TIES_TO_EVEN:
            # an odd divisor has no ties
            return _ties_to_even(d, half) if d.divisor % 2 == 0 else _floor(d, half)


def _thresholds(d: Division) -> Thresholds:
    """Return where the quotient of numerators smaller than the divisor becomes 1 and -1."""

    def rounded(n: int) -> int:
        return round_ratio(n, d.divisor, d.mode)

    low, high = d.numerators.low, d.numerators.high
    guesses = (1, d.divisor // 2, d.divisor // 2 + 1, (d.divisor + 1) // 2)
    up = next((n for n in sorted(guesses) if rounded(n) == 1), None)
    down = next((-n for n in sorted(guesses) if rounded(-n) == -1), None)
    return Thresholds(
        up if up is not None and up <= high else None,
        down if down is not None and low <= down else None,
    )


def _lift(d: Division, add: int, step: int) -> tuple[int, bool]:
    """Return (multiple of `step` that makes the dividend non-negative, whether it fits).

    Where it would not fit in 64 bits nothing is added.
    """
    lowest = d.numerators.low + add
    lift = 0 if lowest >= 0 else -(lowest // step) * step
    if lift == 0 or fits(shift(d.numerators, add + lift), INT64):
        return lift, True
    return 0, False


def _floor(d: Division, add: int) -> Floor:
    lift, natural = _lift(d, add, d.divisor)
    return Floor(add + lift, d.divisor, lift // d.divisor, natural)


def _ties_to_even(d: Division, half: int) -> TiesToEven:
    lift, natural = _lift(d, half, 2 * d.divisor)
    return TiesToEven(half + lift, d.divisor, lift // d.divisor, natural)


def _inside(d: Division, form: Quotient) -> tuple[Interval, ...]:
    """Return the intervals of the intermediate numbers of a form, constants included."""
    n = d.numerators
    match form:
        case Exact():
            return (n,)
        case Thresholds(up, down):
            return (n, *(Interval(t, t) for t in (up, down) if t is not None))
        case Floor(add, divisor, _, _) | TiesToEven(add, divisor, _, _):
            return (n, shift(n, add), Interval(0, divisor))
        case Truncate(divisor):
            return (n, Interval(0, divisor))
        case TiesToAway(half, divisor):
            return (n, Interval(n.low - half, n.high + half), Interval(0, divisor))


def tail(value: Value, argument: Interval, stage: Pass, remove: int) -> tuple[Tail, Interval]:
    """Return the tail of a pass for sums in `argument`, and the interval that it stores.

    Its `cell` is the work cell until the plan knows what scratch holds. Raises TooWideError.
    """
    r = _short(stage.requantiser)
    preloaded = stage.accumulator.preload is Preload.ROUNDING
    numerator, denominator = ratio(r)
    mode = Rounding.TOWARD_NEGATIVE if preloaded else r.rounding
    division = Division(scale(argument, numerator), denominator, mode)
    unlimited = unlimited_range(r, preloaded, argument)
    overflow = _overflow(r, unlimited)
    only = _only_code(r, unlimited, overflow)
    if only is not None:
        return _constant(value, argument, remove, only)
    form = quotient(division)
    early = 0 if overflow is Overflow.WRAP else remove
    less = form.less if isinstance(form, Floor | TiesToEven) else 0
    made = Tail(
        of=value,
        multiplier=numerator,
        quotient=form,
        offset=r.to.pedestal - less - early,
        overflow=overflow,
        limits=Interval(r.to.low - early, r.to.high - early),
        remove=remove,
        argument=argument,
        unlimited=shift(unlimited, -early),
        work=INT64,
        cell=INT64,
    )
    work = work_cell((argument, *_inside(division, form), *constants(made), made.unlimited))
    return replace(made, work=work, cell=work), stored(made)


def _only_code(r: Requantiser, unlimited: Interval, overflow: Overflow | None) -> int | None:
    """Return the limit that all codes are held to, if no code is within the limits."""
    if overflow is Overflow.SATURATE and unlimited.high <= r.to.low:
        return r.to.low
    if overflow is Overflow.SATURATE and unlimited.low >= r.to.high:
        return r.to.high
    return None


def _constant(value: Value, argument: Interval, remove: int, code: int) -> tuple[Tail, Interval]:
    """Return a tail that makes the same code of every sum."""
    only = Interval(code - remove, code - remove)
    work = work_cell((argument, only))
    nothing = Thresholds(None, None)
    made = Tail(value, 1, nothing, only.low, None, only, remove, argument, only, work, work)
    return made, only


def _short(r: Requantiser) -> Requantiser:
    """Return a requantiser that makes the same codes and shifts left by no more than it takes.

    No output has more than 32 bits: beyond 34 a shift leaves only 0 in reach of the limits,
    and a multiple of 2**32 when it wraps.
    """
    return replace(r, exponent=min(r.exponent, _LONGEST)) if r.divisor == 1 else r


def constants(tail: Tail) -> tuple[Interval, ...]:
    """Return the numbers that stand in the C of a tail, of which a dividend is none.

    A negative offset is subtracted, but for the least numbers, which have names in C.
    """
    offset = tail.offset if tail.offset in _LEAST else abs(tail.offset)
    made = [Interval(v, v) for v in (tail.multiplier, offset)]
    if tail.overflow is Overflow.SATURATE:
        if tail.unlimited.low < tail.limits.low:
            made.append(Interval(tail.limits.low, tail.limits.low))
        if tail.unlimited.high > tail.limits.high:
            made.append(Interval(tail.limits.high, tail.limits.high))
    return tuple(made)


def stored(tail: Tail) -> Interval:
    """Return what a tail stores."""
    if tail.overflow is Overflow.WRAP:
        return shift(tail.limits, -tail.remove)
    return clamp_to(tail.unlimited, tail.limits)


def _overflow(r: Requantiser, unlimited: Interval) -> Overflow | None:
    """Return the overflow action that is needed.

    Under `forbid` legal frames never leave the limits; codes outside the range still may,
    and clamping those is one of the values that the contract leaves open.
    """
    if contains(Interval(r.to.low, r.to.high), unlimited):
        return None
    return Overflow.WRAP if r.overflow is Overflow.WRAP else Overflow.SATURATE
