"""The exact range of the error that rounding makes over a run of equally spaced values."""

from collections.abc import Iterator
from dataclasses import dataclass
from fractions import Fraction

from guardbit.arith.rounding import round_ratio
from guardbit.model.enums import Rounding

# Runs up to this length are gone through one by one.
SHORT = 256


@dataclass(frozen=True)
class Span:
    """The rationals low..high, both included."""

    low: Fraction
    high: Fraction

    def __add__(self, other: "Span") -> "Span":
        return Span(self.low + other.low, self.high + other.high)

    def scaled(self, factor: Fraction) -> "Span":
        """Return the range of factor times a member."""
        ends = (self.low * factor, self.high * factor)
        return Span(min(ends), max(ends))

    def joined(self, other: "Span") -> "Span":
        """Return the least span that contains both."""
        return Span(min(self.low, other.low), max(self.high, other.high))


NOTHING = Span(Fraction(0), Fraction(0))


def rounding_error(mode: Rounding, unit: Fraction, low: int, high: int) -> Span:
    """Return the range of round(n * unit) - n * unit over the integers n of low..high.

    `unit` > 0 and low <= high. Exact, except that a run which is too long to go through and
    shorter than two periods of a unit p/q with p > 1 gets the range of a whole period.
    """
    if unit.denominator == 1:
        return NOTHING
    parts = [
        _one_sign(mode, unit, first, last)
        for first, last in ((low, min(high, -1)), (max(low, 0), high))
        if first <= last
    ]
    total = parts[0]
    for part in parts[1:]:
        total = total.joined(part)
    return total


def _one_sign(mode: Rounding, unit: Fraction, low: int, high: int) -> Span:
    """Return the range for a run that does not cross zero."""
    if high - low >= 2 * unit.denominator or (high - low > SHORT and unit.numerator > 1):
        return _whole_period(mode, unit.denominator, low < 0)
    errors = [_error(mode, unit, n) for n in _candidates(unit, low, high)]
    return Span(min(errors), max(errors))


def _error(mode: Rounding, unit: Fraction, n: int) -> Fraction:
    value = n * unit
    return round_ratio(value.numerator, value.denominator, mode) - value


def _candidates(unit: Fraction, low: int, high: int) -> Iterator[int]:
    """Yield the values among which the ends are: all, or the ends and those next to a jump."""
    if high - low <= SHORT:
        yield from range(low, high + 1)
        return
    yield from (low, high)
    for half in range(2 * low // unit.denominator, 2 * high // unit.denominator + 2):
        jump = half * unit.denominator // 2
        yield from (n for n in range(jump - 1, jump + 3) if low <= n <= high)


def _whole_period(mode: Rounding, period: int, negative: bool) -> Span:
    """Return the range over all residues modulo `period`, on even and odd integers."""
    most = Fraction(period - 1, period)
    down, up = Span(-most, Fraction(0)), Span(Fraction(0), most)
    # the greatest distance from an integer, and the greatest that is not a tie
    half = Fraction(period // 2, period)
    under = Fraction((period - 1) // 2, period)
    match mode:
        case Rounding.TOWARD_NEGATIVE:
            return down
        case Rounding.TOWARD_POSITIVE:
            return up
        case Rounding.TOWARD_ZERO:
            return up if negative else down
        case Rounding.TIES_TO_EVEN:
            return Span(-half, half)
        case Rounding.TIES_TO_AWAY:
            return Span(-half, under) if negative else Span(-under, half)
        case Rounding.TIES_TO_POSITIVE:
            return Span(-under, half)
