"""One accumulator sized: its width resolved, its ranges, what they need and what is spare."""

from collections.abc import Sequence
from dataclasses import dataclass, replace
from fractions import Fraction

from guardbit.arith.words import bits_needed, format_range
from guardbit.model.enums import Overflow
from guardbit.model.filter import Accumulator
from guardbit.model.sizing import Interval, RegisterSizing, Witness
from guardbit.sizing.held import Holding
from guardbit.sizing.place import Held
from guardbit.sizing.problem import Problem, any_values
from guardbit.sizing.survey import Survey, class_ranges, survey

LEAST_BITS = 2


@dataclass(frozen=True)
class Register:
    """An accumulator of resolved width with the survey of its sums."""

    name: str
    accumulator: Accumulator
    problem: Problem
    found: Survey
    holding: Holding

    @property
    def held(self) -> Held:
        """Return the range of what it holds at the end."""
        return self.holding.held


def measure(name: str, accumulator: Accumulator, problem: Problem) -> Register:
    """Return the register with its width resolved and its ranges found."""
    found = survey(problem)
    bits = accumulator.bits or width(found.interval(True), accumulator.signed)
    resolved = replace(accumulator, bits=bits)
    return Register(name, resolved, problem, found, Holding(resolved, problem, found))


def width(values: Interval, signed: bool) -> int:
    """Return the least legal width for sums in `values`.

    No unsigned register holds negative sums: for these it is the width of a signed one.
    """
    needed = bits_needed(values.low, values.high, signed or values.low < 0)
    assert needed is not None
    return max(needed, LEAST_BITS)


@dataclass(frozen=True)
class Weights:
    """Of the taps of a register: the sum of their magnitudes, the greatest, and how many."""

    total: int
    greatest: int
    count: int


def sized(
    register: Register,
    exact: bool,
    witnesses: Sequence[Witness],
    held_witnesses: Sequence[Witness],
    weights: Weights | None = None,
) -> RegisterSizing:
    """Return the sizing of a register; `exact` says whether its pixels' range is.

    `weights` are those of its taps; None: of the problem's.
    """
    final, partial = register.found.interval(False), register.found.interval(True)
    accumulator = register.accumulator
    assert accumulator.bits is not None
    forbid, wrap = width(partial, accumulator.signed), width(final, accumulator.signed)
    wraps = accumulator.overflow is Overflow.WRAP
    rule_l1, rule_count = textbook_rules(register, weights or _weights(register.problem))
    never_safe = not accumulator.signed and partial.low < 0
    return RegisterSizing(
        name=register.name,
        bits=accumulator.bits,
        signed=accumulator.signed,
        final=final,
        partial=partial,
        held=register.held.range,
        exact=exact and register.found.exact,
        bits_forbid=forbid,
        bits_wrap=wrap,
        spare=None if never_safe else accumulator.bits - (wrap if wraps else forbid),
        headroom=_headroom(accumulator, final if wraps else partial),
        rule_l1=rule_l1,
        rule_count=rule_count,
        classes=class_ranges(register.found),
        witnesses=tuple(witnesses),
        held_exact=exact and register.held.exact,
        held_witnesses=tuple(held_witnesses),
    )


def _headroom(accumulator: Accumulator, worst: Interval) -> Fraction | None:
    assert accumulator.bits is not None
    word = format_range(accumulator.bits, accumulator.signed)
    ratios = [Fraction(word.high, worst.high)] if worst.high > 0 else []
    if worst.low < 0:
        ratios.append(Fraction(word.low, worst.low))
    return min(ratios, default=None)


def _weights(problem: Problem) -> Weights:
    taps = [abs(tap.coefficient) for tap in problem.taps]
    return Weights(sum(taps), max(taps, default=0), len(taps))


def textbook_rules(register: Register, weights: Weights) -> tuple[int, int]:
    """Return the widths that two rules of thumb give, which never fall short.

    The first is pixel bits + ceil(log2(sum of |coefficients|)), the second coefficient bits
    + pixel bits + ceil(log2(number of taps)). Pixel and coefficient bits are those of the
    greatest magnitude (of the code less its pedestal, a constant border included); one bit
    is added for the sign. A rounding constant at the start counts as one more tap.
    """
    problem = register.problem
    values = any_values(problem)
    pixel = max(abs(values.low), abs(values.high), 1)
    total, greatest, count = weights.total, weights.greatest, weights.count
    sign = int(register.accumulator.signed or register.found.interval(True).low < 0)
    if problem.start:
        start = -(-problem.start // pixel)
        total, greatest, count = total + start, max(greatest, start), count + 1
    by_sum = pixel.bit_length() + log2_up(total) + sign
    by_count = pixel.bit_length() + greatest.bit_length() + log2_up(count) + sign
    return max(by_sum, LEAST_BITS), max(by_count, LEAST_BITS)


def log2_up(value: int) -> int:
    """Return the least k with 2**k >= value; 0 for 0."""
    return max(value - 1, 0).bit_length()
