"""Rounding of exact quotients, and the requantiser, for one integer at a time."""

from guardbit.arith.words import clamp, wrap
from guardbit.model.enums import Overflow, Rounding
from guardbit.model.filter import Requantiser
from guardbit.model.sizing import Interval


def round_ratio(numerator: int, denominator: int, mode: Rounding) -> int:
    """Return numerator / denominator (denominator > 0) rounded to an integer by `mode`.

    Directions as in IEEE 754-2019, 4.3.1 and 4.3.2; `ties-to-positive` is the floor of the
    quotient plus one half.
    """
    floor = numerator // denominator
    rest = numerator - floor * denominator
    match mode:
        case Rounding.TOWARD_NEGATIVE:
            return floor
        case Rounding.TOWARD_POSITIVE:
            return floor + (rest > 0)
        case Rounding.TOWARD_ZERO:
            return floor + ((rest > 0) & (numerator < 0))
        case Rounding.TIES_TO_EVEN:
            return floor + (2 * rest + floor % 2 > denominator)
        case Rounding.TIES_TO_AWAY:
            return floor + (2 * rest + (numerator > 0) > denominator)
        case Rounding.TIES_TO_POSITIVE:
            return floor + (2 * rest >= denominator)


def ratio(r: Requantiser) -> tuple[int, int]:
    """Return (numerator, denominator), both positive: the factor 2**exponent / divisor."""
    return (1 << max(r.exponent, 0), r.divisor << max(-r.exponent, 0))


def capped_ratio(r: Requantiser, argument: Interval) -> tuple[int, int]:
    """Return (numerator, denominator) that round all of `argument` as the true ones do.

    Where every quotient lies within +-1/4 only its sign matters: then the denominator is the
    least power of two that still keeps it there. No shift need be longer.
    """
    numerator, denominator = ratio(r)
    largest = max(abs(argument.low), abs(argument.high)) * numerator
    return numerator, min(denominator, 4 << max(largest - 1, 0).bit_length())


def adding_constant(r: Requantiser, preloaded: bool, denominator: int) -> int:
    """Return the most that is added before a floor division to round in the requantiser's mode."""
    if preloaded or r.rounding is Rounding.TOWARD_NEGATIVE:
        return 0
    if r.rounding in (Rounding.TOWARD_POSITIVE, Rounding.TOWARD_ZERO):
        return denominator - 1
    return denominator // 2


def rounding_constant(r: Requantiser) -> int:
    """Return the start value of an accumulator with `preload = "rounding"`.

    Raises ValueError unless the requantiser rounds ties-to-positive after a right shift.
    """
    if r.rounding is not Rounding.TIES_TO_POSITIVE or r.divisor != 1 or r.exponent >= 0:
        raise ValueError("only ties-to-positive after a right shift has a rounding constant")
    return 1 << (-r.exponent - 1)


def unlimited(r: Requantiser, preloaded: bool, acc: int) -> int:
    """Return the rounded value of `acc` with the pedestal added, before overflow.

    When `preloaded`, `acc` holds the rounding constant already and is only floored.
    """
    numerator, denominator = ratio(r)
    mode = Rounding.TOWARD_NEGATIVE if preloaded else r.rounding
    return round_ratio(acc * numerator, denominator, mode) + r.to.pedestal


def limit(r: Requantiser, value: int) -> int:
    """Return the code that the requantiser's overflow policy makes of an unlimited value.

    Under `forbid` the value is returned as it is: sizing proves that it is a legal code.
    """
    match r.overflow:
        case Overflow.SATURATE:
            return clamp(value, r.to.low, r.to.high)
        case Overflow.WRAP:
            return wrap(value, r.to.bits, r.to.signed)
        case Overflow.FORBID:
            return value


def requantise(r: Requantiser, preloaded: bool, acc: int) -> int:
    """Return the final code that the requantiser makes of accumulator value `acc`."""
    return limit(r, unlimited(r, preloaded, acc))
