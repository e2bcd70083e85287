"""How far the output can be from the ideal filter's: the error budget.

The ideal filter uses the ideal taps in real arithmetic with the same border; its code is clamped
to the legal codes. The bound is the maximum, over all values of the last sum, of the code of that
value less the least ideal code that goes with it, and so takes fitting, residues of rounding,
saturation and clamping together. The contributions (`parts`) are maxima of their own: they
do not add up to it.
"""

from collections.abc import Callable, Sequence
from dataclasses import replace
from fractions import Fraction

from guardbit.arith.intervals import contains
from guardbit.model.enums import Overflow
from guardbit.model.filter import Filter
from guardbit.model.sizing import ErrorBound, Interval, RequantiserSizing
from guardbit.sizing.error.choices import Work
from guardbit.sizing.error.inputs import Cases, cases
from guardbit.sizing.error.parts import ideal_range, parts
from guardbit.sizing.error.peaks import WORK, Found, peak
from guardbit.sizing.error.stairs import Stairs
from guardbit.sizing.error.statistics import dc_gain, rounding_statistics
from guardbit.sizing.error.subject import Subject, subject
from guardbit.sizing.place import word_of
from guardbit.sizing.register import Register

Span = tuple[int, int]


def error_bound(
    f: Filter, registers: Sequence[Register], requantisers: Sequence[RequantiserSizing]
) -> ErrorBound:
    """Return the bound of output code minus clamped ideal code, in LSB, with its causes.

    It holds for every legal input; if an accumulator can wrap or saturate, or a requantiser
    wrap, for every input with which none does, and `overall` then for all.
    """
    resolved = _resolved(f, registers)
    found = cases(resolved)
    acts = any(map(_acts, registers)) or any(
        r.can_overflow and p.requantiser.overflow is not Overflow.SATURATE
        for p, r in zip(f.passes, requantisers, strict=True)
    )
    overall = _overall(resolved, found, registers, requantisers) if acts else None
    ends = [_furthest(resolved, found, sign, _quiet) for sign in (-1, 1)]
    low, high = (end.value if end else None for end in ends)
    bounds = overall or (Fraction(0), Fraction(0))
    clamps = any(r.accumulator.overflow is Overflow.SATURATE and _acts(r) for r in registers)
    return ErrorBound(
        low=bounds[0] if low is None else -low,
        high=bounds[1] if high is None else high,
        parts=parts(resolved, found),
        assumes_no_wrap=acts,
        overall=overall,
        exact=found.exact and not clamps and all(end is not None and end.exact for end in ends),
        rounding=rounding_statistics(resolved, registers),
        gain=dc_gain(resolved),
    )


def _resolved(f: Filter, registers: Sequence[Register]) -> Filter:
    passes = (
        replace(p, accumulator=r.accumulator) for p, r in zip(f.passes, registers, strict=True)
    )
    return replace(f, passes=tuple(passes))


def _acts(register: Register) -> bool:
    """Return whether the register can wrap or clamp, or leave a width it must not leave."""
    wraps = register.accumulator.overflow is Overflow.WRAP
    return not contains(word_of(register.accumulator), register.found.interval(not wraps))


Choice = Callable[[Subject], tuple[Stairs, Span] | None]


def _quiet(s: Subject) -> tuple[Stairs, Span] | None:
    """Return the stairs, and the sums with which neither register nor code wraps or clamps."""
    span = s.stairs.quiet()
    return None if span is None else (s.stairs, span)


def _furthest(f: Filter, found: Cases, sign: int, choose: Choice) -> Found | None:
    """Return the greatest sign * error over all cases; None if there is nothing to choose."""
    count = len(found.items)
    work, best = Work(WORK.list // count, WORK.table // count), None
    for case in found.items:
        s = subject(f, case, sign)
        chosen = choose(s) if s is not None else None
        if s is not None and chosen is not None:
            one = peak(s, *chosen, work, best.value if best else None)
            best = max(filter(None, (best, one)), key=_rank, default=None)
    return best


def _rank(found: Found) -> tuple[Fraction, bool]:
    return found.value, found.exact


def _overall(
    f: Filter,
    found: Cases,
    registers: Sequence[Register],
    requantisers: Sequence[RequantiserSizing],
) -> tuple[Fraction, Fraction]:
    """Return the bound for all legal inputs: from both ranges alone, or by a search if closer."""
    alone = _apart(f, found, requantisers[-1].output)
    choose = _unquiet(f, registers, requantisers)
    if choose is None:
        return alone
    least, greatest = (_furthest(f, found, sign, choose) for sign in (-1, 1))
    if least is None or greatest is None:
        return alone
    return max(alone[0], -least.value), min(alone[1], greatest.value)


def _apart(f: Filter, found: Cases, codes: Interval) -> tuple[Fraction, Fraction]:
    """Return the bound from both ranges alone."""
    ideal = ideal_range(f, found)
    low, high = (
        min(max(end, Fraction(f.output.low)), Fraction(f.output.high))
        for end in (ideal.low, ideal.high)
    )
    return codes.low - high, codes.high - low


def _unquiet(
    f: Filter, registers: Sequence[Register], requantisers: Sequence[RequantiserSizing]
) -> Choice | None:
    """Return how to search over all inputs; None where results are not a function of the sum."""
    inner = zip(f.passes, registers, requantisers, strict=True)
    for p, register, requantiser in list(inner)[:-1]:
        clamps = p.requantiser.overflow is Overflow.SATURATE
        if _acts(register) or (requantiser.can_overflow and not clamps):
            return None
    last, output = registers[-1], f.passes[-1].requantiser.overflow
    broken = requantisers[-1].can_overflow and output is Overflow.FORBID
    match last.accumulator.overflow:
        case _ if broken:
            return None
        case _ if not _acts(last):
            return _everything
        case Overflow.WRAP:
            return _everything
        case Overflow.SATURATE if output is not Overflow.WRAP:
            return _clamping(last)
    return None


def _everything(s: Subject) -> tuple[Stairs, Span]:
    return s.stairs, (0, s.stairs.last)


def _clamping(register: Register) -> Choice:
    """Return how to search where the register clamps sums.

    What it holds exceeds the sum by no more than partial sums fall below its word, since a
    clamp at the upper end only lowers it and one at the lower end only makes good what is
    missing there (the reflection map of A. V. Skorokhod, Theory of Probability and its
    Applications 6, 1961); the other way round likewise.
    """
    word, partial, held = (
        word_of(register.accumulator),
        register.found.interval(True),
        register.held,
    )

    def choose(s: Subject) -> tuple[Stairs, Span]:
        if s.sign > 0:
            moved = max(0, word.low - partial.low)
            limits = Interval(min(partial.low, word.low), held.range.high)
        else:
            moved = -max(0, partial.high - word.high)
            limits = Interval(held.range.low, max(partial.high, word.high))
        return replace(s.stairs, word=None, moved=moved, held=limits), (0, s.stairs.last)

    return choose
