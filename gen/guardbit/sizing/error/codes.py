"""Codes of many sums at once, in NumPy integers that cannot overflow."""

import numpy as np

from guardbit.arith.rounding import capped_ratio, round_ratio
from guardbit.arith.words import format_range
from guardbit.model.enums import Overflow
from guardbit.model.sizing import Interval
from guardbit.sizing.error.stairs import Stairs
from guardbit.sizing.error.table import Ints

_INT64 = 1 << 61


def codes_at(stairs: Stairs, numbers: Ints) -> Ints | None:
    """Return the codes of the sums with these numbers; None if these might leave int64."""
    r = stairs.requantiser
    ends = Interval(stairs.sum_of(0) + stairs.moved, stairs.sum_of(stairs.last) + stairs.moved)
    numerator, denominator = capped_ratio(r, ends)
    most = max(abs(ends.low), abs(ends.high), 1 << (stairs.word[0] if stairs.word else 0))
    if max(most * numerator, denominator) >= _INT64:
        return None
    sums: Ints = stairs.base + stairs.moved + stairs.step * numbers
    if stairs.word is not None:
        sums = _wrapped(sums, *stairs.word)
    if stairs.held is not None:
        sums = np.clip(sums, stairs.held.low, stairs.held.high)
    # arithmetic and comparisons alone, which NumPy carries out for each element
    codes: Ints = round_ratio(sums * numerator, denominator, stairs.mode)  # type: ignore[arg-type, assignment]
    codes = codes + r.to.pedestal
    if r.overflow is Overflow.WRAP:
        return _wrapped(codes, r.to.bits, r.to.signed)
    return np.clip(codes, r.to.low, r.to.high) if r.overflow is Overflow.SATURATE else codes


def _wrapped(values: Ints, bits: int, signed: bool) -> Ints:
    word = format_range(bits, signed)
    return (values - word.low) % (1 << bits) + word.low
