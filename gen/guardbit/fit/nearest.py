"""The `nearest` fit, and the widths and fractions at which taps are exact or fit at all."""

from collections.abc import Iterable, Sequence
from fractions import Fraction
from typing import TypeAlias

from guardbit.model.spec import Matrix

Integers: TypeAlias = tuple[tuple[int, ...], ...]

FRACS = range(-64, 65)


def scaled(ideal: Matrix, frac: int) -> Matrix:
    """Return ideal * 2**frac, exactly."""
    factor = Fraction(2) ** frac
    return tuple(tuple(tap * factor for tap in row) for row in ideal)


def nearest(targets: Matrix) -> Integers:
    """Return each target rounded to the nearest integer, ties to even."""
    return tuple(tuple(round(tap) for tap in row) for row in targets)


def exact(targets: Matrix) -> Integers | None:
    """Return the targets as integers, or None if one of them is not an integer."""
    if any(tap.denominator != 1 for row in targets for tap in row):
        return None
    return tuple(tuple(tap.numerator for tap in row) for row in targets)


def register(bits: int, signed: bool) -> tuple[int, int]:
    """Return the least and the greatest number that a register holds."""
    if signed:
        return -(1 << bits - 1), (1 << bits - 1) - 1
    return 0, (1 << bits) - 1


def width(values: Iterable[int], signed: bool) -> int | None:
    """Return the fewest bits that hold the values; None for a negative one, unsigned."""
    values = tuple(values)
    if not signed and min(values, default=0) < 0:
        return None
    magnitude = max((v if v >= 0 else ~v for v in values), default=0)
    return max(magnitude.bit_length() + signed, 1)


def exact_frac(taps: Iterable[Fraction]) -> int | None:
    """Return the smallest frac in -64..64 at which every tap is an integer, if there is one.

    All taps zero: 0.
    """
    needed = [_least_frac(tap) for tap in taps if tap]
    if not needed:
        return 0
    fracs = [frac for frac in needed if frac is not None and frac <= FRACS[-1]]
    return max(FRACS[0], *fracs) if len(fracs) == len(needed) else None


def _least_frac(tap: Fraction) -> int | None:
    """Return the least frac, of any size, at which one non-zero tap is an integer."""
    if tap.denominator & (tap.denominator - 1):
        return None
    return _twos(tap.denominator) - _twos(abs(tap.numerator))


def _twos(value: int) -> int:
    return (value & -value).bit_length() - 1


def largest_nearest_frac(taps: Sequence[Fraction], bits: int, signed: bool) -> int | None:
    """Return the largest frac in -64..64 at which the rounded taps fit the register.

    Rounding is monotonic, so the least and the greatest tap decide.
    """
    least, greatest = min(taps), max(taps)
    low, high = register(bits, signed)
    for frac in reversed(FRACS):
        factor = Fraction(2) ** frac
        if low <= round(least * factor) and round(greatest * factor) <= high:
            return frac
    return None
