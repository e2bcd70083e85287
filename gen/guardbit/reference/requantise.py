"""The unit after the accumulator: scale, round, add the pedestal, limit."""

import numpy as np

from guardbit.model.enums import Overflow, Preload, Rounding
from guardbit.model.filter import Requantiser
from guardbit.reference.words import Array, magnitude, stored, word_for, wrapped


def requantise(requantiser: Requantiser, preload: Preload, acc: Array) -> Array:
    """Return the codes that final accumulator values become: int64, or object if beyond.

    With `preload` rounding the accumulator already holds the rounding constant. Codes beyond
    int64 need an overflow of `forbid` that nobody proved. Any shape; exact for any exponent.
    """
    up, down = max(requantiser.exponent, 0), max(-requantiser.exponent, 0)
    word = word_for(_widest(requantiser, magnitude(acc)))
    rounding = Rounding.TOWARD_NEGATIVE if preload is Preload.ROUNDING else requantiser.rounding
    scaled = acc.astype(word) << up
    codes = _rounded(scaled, down, requantiser.divisor, rounding) + requantiser.to.pedestal
    return stored(_limited(codes, requantiser))


def _widest(requantiser: Requantiser, bound: int) -> int:
    """Return a bound on every integer below, for accumulators within -bound..bound."""
    up, down = max(requantiser.exponent, 0), max(-requantiser.exponent, 0)
    to = requantiser.to
    inside = (bound << up) + 2 * (requantiser.divisor << down) + abs(to.pedestal)
    return max(inside, abs(to.low), abs(to.high))


def _rounded(numerator: Array, shift: int, divisor: int, rounding: Rounding) -> Array:
    """Return numerator / (2**shift * divisor) as integers, rounded.

    floor(floor(x / 2**shift) / divisor) is floor of the whole quotient; the remainder then
    says how far above it the exact value lies.
    """
    floor = numerator >> shift
    if divisor != 1:
        floor = floor // divisor
    if rounding is Rounding.TOWARD_NEGATIVE or (shift == 0 and divisor == 1):
        return floor
    denominator = divisor << shift
    return floor + _goes_up(floor, numerator - floor * denominator, denominator, rounding)


def _goes_up(floor: Array, remainder: Array, denominator: int, rounding: Rounding) -> Array:
    """Return where floor + remainder / denominator is rounded to floor + 1."""
    up: Array
    match rounding:
        case Rounding.TOWARD_POSITIVE:
            up = remainder != 0
        case Rounding.TOWARD_ZERO:
            up = (remainder != 0) & (floor < 0)
        case Rounding.TIES_TO_POSITIVE:
            up = 2 * remainder >= denominator
        case Rounding.TIES_TO_EVEN:
            up = 2 * remainder + (floor & 1) > denominator
        case Rounding.TIES_TO_AWAY:
            up = 2 * remainder + (floor >= 0) > denominator
        case _:
            raise ValueError(f"{rounding} has no remainder to look at")
    return up


def _limited(codes: Array, requantiser: Requantiser) -> Array:
    to = requantiser.to
    match requantiser.overflow:
        case Overflow.SATURATE:
            return np.minimum(np.maximum(codes, to.low), to.high)
        case Overflow.WRAP:
            return wrapped(codes, to.bits, to.signed)
    return codes
