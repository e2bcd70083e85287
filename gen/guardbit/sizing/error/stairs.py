"""The output code as a function of an equally spaced sum: stairs, exactly, at any width."""

from collections.abc import Iterator
from dataclasses import dataclass
from fractions import Fraction
from functools import cached_property
from math import gcd

from guardbit.arith.rounding import limit, ratio, requantise, round_ratio, unlimited
from guardbit.arith.words import clamp, format_range, wrap
from guardbit.model.enums import Overflow, Rounding
from guardbit.model.filter import Requantiser
from guardbit.model.sizing import Interval

_BY_SIGN = (Rounding.TOWARD_ZERO, Rounding.TIES_TO_AWAY)

# steps that are looked at, at each end of a run
MOST_STEPS = 512


@dataclass(frozen=True)
class Run:
    """The n of first..last with code round((constant + slope * n) / denominator) + offset.

    Or, where `code` is set, with that code alone.
    """

    first: int
    last: int
    constant: int = 0
    slope: int = 0
    offset: int = 0
    code: int | None = None


@dataclass(frozen=True)
class Stairs:
    """The codes of the sums base + step * n for n from 0 to `last`.

    `word` (bits, signed) is a register that wraps. `moved` is added to the sums before they
    are clamped to `held`: both for a bound on what a saturating register holds.
    """

    requantiser: Requantiser
    preloaded: bool
    base: int
    step: int
    last: int
    word: tuple[int, bool] | None = None
    moved: int = 0
    held: Interval | None = None

    @cached_property
    def mode(self) -> Rounding:
        """Return how sums are rounded, a rounding constant in them counted as theirs."""
        return Rounding.TOWARD_NEGATIVE if self.preloaded else self.requantiser.rounding

    @cached_property
    def ratio(self) -> tuple[int, int]:
        """Return (numerator, denominator) of what a sum is multiplied by."""
        return ratio(self.requantiser)

    def sum_of(self, n: int) -> int:
        """Return the sum number n."""
        return self.base + self.step * n

    def argument(self, n: int) -> int:
        """Return what the register holds."""
        held = self.sum_of(n) + self.moved
        if self.word is not None:
            held = wrap(held, *self.word)
        return held if self.held is None else clamp(held, self.held.low, self.held.high)

    def code(self, n: int) -> int:
        """Return the code."""
        return requantise(self.requantiser, self.preloaded, self.argument(n))

    def run(self, n: int) -> Run:
        """Return a run that has n."""
        first, last, origin = self._unwrapped(n)
        if self.held is not None and not self.held.low < self.sum_of(n) + self.moved < (
            self.held.high
        ):
            return self._beyond_held(n)
        numerator, _ = self.ratio
        constant, slope = numerator * origin, numerator * self.step
        return self._limited(Run(first, last, constant, slope, self.requantiser.to.pedestal), n)

    def _unwrapped(self, n: int) -> tuple[int, int, int]:
        """Return the ends of the n on the same turn of the register, and the base there."""
        base = self.base + self.moved
        first, last = 0, self.last
        if self.word is not None:
            bits, signed = self.word
            turn = base + self.step * n - wrap(base + self.step * n, bits, signed)
            word = format_range(bits, signed)
            first, last = self._between(word.low + turn, word.high + turn)
            base -= turn
        if self.held is not None:
            inside = self._between(self.held.low, self.held.high)
            first, last = max(first, inside[0]), min(last, inside[1])
        return first, last, base

    def _between(self, low: int, high: int) -> tuple[int, int]:
        """Return the first and last n whose sums, moved, lie in low..high."""
        base = self.base + self.moved
        if not self.step:
            return (0, 0) if low <= base <= high else (1, 0)
        return max(0, -((base - low) // self.step)), min(self.last, (high - base) // self.step)

    def _beyond_held(self, n: int) -> Run:
        """Return the run of sums that are clamped at the end next to n."""
        assert self.held is not None
        inside = self._between(self.held.low + 1, self.held.high - 1)
        below = self.sum_of(n) + self.moved <= self.held.low
        first, last = (0, inside[0] - 1) if below else (inside[1] + 1, self.last)
        return Run(max(first, 0), min(last, self.last), code=self.code(n))

    def _limited(self, run: Run, n: int) -> Run:
        """Return the part of a run around n on which the codes' overflow does the same."""
        r = self.requantiser
        value = self.rounded(run, n) + run.offset
        if r.overflow is Overflow.FORBID or not run.slope:
            code = None if run.slope else limit(r, value)
            return Run(run.first, run.last, run.constant, run.slope, run.offset, code)
        if r.overflow is Overflow.SATURATE:
            low, high, turn = r.to.low, r.to.high, 0
        else:
            turn = value - wrap(value, r.to.bits, r.to.signed)
            word = format_range(r.to.bits, r.to.signed)
            low, high = word.low + turn, word.high + turn
        first = max(run.first, self.step_to(run, low - run.offset))
        last = min(run.last, self.step_to(run, high + 1 - run.offset) - 1)
        if value < low:
            return Run(run.first, min(first - 1, run.last), code=low)
        if value > high:
            return Run(max(last + 1, run.first), run.last, code=high)
        return Run(first, last, run.constant, run.slope, run.offset - turn)

    def rounded(self, run: Run, n: int) -> int:
        """Return the rounded value of number n, without pedestal."""
        return round_ratio(run.constant + run.slope * n, self.ratio[1], self.mode)

    def step_to(self, run: Run, rounded: int) -> int:
        """Return the least n, of all integers, whose rounded value is at least `rounded`."""
        half, strict = self._threshold(rounded)
        excess = (2 * rounded - half) * self.ratio[1] - 2 * run.constant
        if strict:
            return excess // (2 * run.slope) + 1
        return -(-excess // (2 * run.slope))

    def _threshold(self, rounded: int) -> tuple[int, bool]:
        """Return by how many halves a value may fall short of what it is rounded to.

        And whether it must fall short by less than that.
        """
        match self.mode:
            case Rounding.TOWARD_NEGATIVE:
                return 0, False
            case Rounding.TOWARD_POSITIVE:
                return 2, True
            case Rounding.TOWARD_ZERO:
                return (0, False) if rounded > 0 else (2, True)
            case Rounding.TIES_TO_EVEN:
                return 1, rounded % 2 == 1
            case Rounding.TIES_TO_AWAY:
                return 1, rounded <= 0
            case Rounding.TIES_TO_POSITIVE:
                return 1, False

    def corners(self, run: Run, first: int, last: int) -> set[int] | None:
        """Return n among which code plus any linear function of n has its ends on first..last.

        None: too many. For one code these are the first and the last n that have it. Codes
        a period apart have them a period apart, so that of these the outermost count.
        """
        if run.code is not None or not run.slope:
            return {first, last}
        low, high = self.rounded(run, first), self.rounded(run, last)
        period = self._code_period(run.slope)
        if min(period, high - low) > MOST_STEPS:
            return self._by_residue(run, first, last)
        steps = {self.step_to(run, code) for code in self._outermost(low + 1, high, period)}
        inner = {n for step in steps for n in (step - 1, step)}
        return {n for n in inner if first <= n <= last} | {first, last}

    def _outermost(self, low: int, high: int, period: int) -> Iterator[int]:
        """Yield a period of codes at each end of low..high, and on both sides of zero."""
        if high - low < 4 * period:
            yield from range(low, high + 1)
            return
        yield from range(low, low + period)
        yield from range(high - period + 1, high + 1)
        if self.mode in _BY_SIGN:
            yield from range(max(low, -period), min(high, period + 1) + 1)

    def _code_period(self, slope: int) -> int:
        period = slope // gcd(slope, self.ratio[1])
        return 2 * period if self.mode is Rounding.TIES_TO_EVEN and period % 2 else period

    def _by_residue(self, run: Run, first: int, last: int) -> set[int] | None:
        period = 2 * self.ratio[1] // gcd(run.slope, self.ratio[1])
        if period > MOST_STEPS:
            return None
        found = {*range(first, first + period), *range(last - period + 1, last + 1)}
        if self.mode in _BY_SIGN:
            zero = -run.constant // run.slope
            found |= set(range(zero - period, zero + period + 1))
        return {n for n in found if first <= n <= last}

    def quiet(self) -> tuple[int, int] | None:
        """Return the first and last n whose sum does not leave the register, nor the code wraps.

        None if there is none. A register that saturates is not left by these sums either.
        """
        return self._quiet_codes(*self._between_word())

    def _between_word(self) -> tuple[int, int]:
        if self.word is None:
            return 0, self.last
        word = format_range(*self.word)
        return self._between(word.low, word.high)

    def _quiet_codes(self, first: int, last: int) -> tuple[int, int] | None:
        r = self.requantiser
        if first > last:
            return None
        numerator, _ = self.ratio
        base = numerator * (self.base + self.moved)
        run = Run(first, last, base, numerator * self.step, r.to.pedestal)
        if r.overflow is Overflow.SATURATE:
            return first, last
        low, high = r.to.low - r.to.pedestal, r.to.high - r.to.pedestal
        if r.overflow is Overflow.WRAP:
            word = format_range(r.to.bits, r.to.signed)
            low, high = word.low - r.to.pedestal, word.high - r.to.pedestal
        if not run.slope:
            return (first, last) if low <= self.rounded(run, 0) <= high else None
        first = max(first, self.step_to(run, low))
        last = min(last, self.step_to(run, high + 1) - 1)
        return (first, last) if first <= last else None

    def is_smooth(self, first: int, last: int) -> bool:
        """Return whether register and code wrap by the same all over first..last."""
        return self._turns(first) == self._turns(last)

    def _turns(self, n: int) -> tuple[int, int]:
        """Return what wrapping takes off the sum, and off the code."""
        total, r = self.sum_of(n), self.requantiser
        taken = total - wrap(total, *self.word) if self.word is not None else 0
        if r.overflow is not Overflow.WRAP:
            return taken, 0
        value = unlimited(r, self.preloaded, self.argument(n))
        return taken, value - wrap(value, r.to.bits, r.to.signed)

    def level(self, n: int) -> Fraction:
        """Return what a sum's code exceeds the sum times the ratio by, unrounded, around n."""
        taken, off = self._turns(n)
        return (self.moved - taken) * Fraction(*self.ratio) + self.requantiser.to.pedestal - off

    def limits(self) -> Interval:
        """Return codes that none leaves."""
        to = self.requantiser.to
        match self.requantiser.overflow:
            case Overflow.SATURATE:
                return Interval(to.low, to.high)
            case Overflow.WRAP:
                return format_range(to.bits, to.signed)
        ends = [self.argument(0), self.argument(self.last)]
        if self.word is not None:
            word = format_range(*self.word)
            ends += [word.low, word.high]
        codes = [requantise(self.requantiser, self.preloaded, end) for end in ends]
        return Interval(min(codes), max(codes))

    def slack(self, sign: int) -> Fraction:
        """Return the most by which rounding raises sign * value."""
        if self.ratio[1] == 1:
            return Fraction(0)
        match self.mode:
            case Rounding.TOWARD_NEGATIVE:
                return Fraction(int(sign < 0))
            case Rounding.TOWARD_POSITIVE:
                return Fraction(int(sign > 0))
            case Rounding.TOWARD_ZERO:
                return Fraction(1)
        return Fraction(1, 2)
