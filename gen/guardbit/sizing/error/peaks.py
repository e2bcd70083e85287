"""The greatest error of a case, by all choices of integer inputs or a scan over real ones.

Where the choices of integer inputs can be gone through, the error that is found is attained by
pixels. Elsewhere inputs are taken as real numbers: what is found then is never exceeded, and
seldom missed by much.
"""

from dataclasses import dataclass, replace
from fractions import Fraction
from math import gcd

import numpy as np

from guardbit.sizing.error.choices import Work, choices
from guardbit.sizing.error.codes import codes_at
from guardbit.sizing.error.pixels import items_of
from guardbit.sizing.error.stairs import Stairs
from guardbit.sizing.error.subject import Subject, ideal_step, least_ideal
from guardbit.sizing.error.table import Choices, Ints

# for all the searches of one bound: milliseconds
WORK = Work(list=1 << 16, table=1 << 21)
# ways in which results can be clamped that are told apart
MOST_SPLITS = 128


@dataclass(frozen=True)
class Found:
    """The greatest sign * error of a case; `exact` if integer inputs attain it.

    `n` numbers the sum that has it, and `clamped` is the subject's there.
    """

    value: Fraction
    n: int
    exact: bool
    clamped: tuple[tuple[int, ...], ...] | None = None


def peak(
    s: Subject,
    stairs: Stairs,
    span: tuple[int, int],
    work: Work = WORK,
    beat: Fraction | None = None,
) -> Found | None:
    """Return the greatest sign * error over the sums numbered `span`, or a bound on it.

    None if it is known that integer inputs reach none of them, or exceed `beat` nowhere.
    """
    if is_one_sided(s) and (plain := s.scan(stairs, span)) is not None:
        real = plain.peak()
        if real.value == real.attained:
            return Found(real.value, real.n, True)
    found = choices(s, work)
    codes = None if found is None else codes_at(stairs, found.numbers)
    if found is None or codes is None:
        return _scanned(s, stairs, span, beat)
    best = _best(s, found, codes, span)
    if best is None or best.exact:
        return best
    # costs were rounded down, by a little that may be much beside a tiny error
    bound = _scanned(s, stairs, span, None)
    return best if bound is None else replace(best, value=min(best.value, bound.value))


def _scanned(
    s: Subject, stairs: Stairs, span: tuple[int, int], beat: Fraction | None
) -> Found | None:
    """Return the greatest over real inputs, split by which results are clamped."""
    parts = [(part, part.scan(stairs, span)) for part in s.splits(MOST_SPLITS)]
    scans = [(scan.bound(), part, scan) for part, scan in parts if scan is not None]
    best: Found | None = None
    for bound, part, scan in sorted(scans, key=lambda one: one[0], reverse=True):
        if beat is not None and bound <= beat:
            break
        real = scan.peak(beat)
        if beat is None or real.value > beat:
            beat = real.value
            best = Found(_on_grid(s, beat), real.n, False, part.clamped)
    return best


def is_one_sided(s: Subject) -> bool:
    """Return whether the ideal code depends on the sum alone, and every sum can be.

    All sums up to the greatest can be if no size is more than one beyond what the smaller ones
    make together.
    """
    if s.results is not None or len(s.ideal.amounts) > 2 or _has_free(s):
        return False
    reach = 0
    for item in sorted(items_of(s.case.last, s.case.values, s.sign)[1], key=lambda i: i.size):
        if item.size > reach + 1:
            return False
        reach += item.size * item.most
    return True


def _has_free(s: Subject) -> bool:
    """Return whether an input changes the ideal code alone."""
    return any(weight.ideal and not weight.amount for weight in s.case.last.weights)


def _best(s: Subject, found: Choices, codes: Ints, span: tuple[int, int]) -> Found | None:
    inside = np.flatnonzero((found.numbers >= span[0]) & (found.numbers <= span[1]))
    if not len(inside):
        return None
    low, high = sorted((s.sign * s.legal.low, s.sign * s.legal.high))
    ideal = np.clip(found.costs[inside], low * found.unit, high * found.unit)
    errors = s.sign * codes[inside] * found.unit - ideal
    at = int(np.argmax(errors))
    value = Fraction(int(errors[at]), found.unit)
    n = int(found.numbers[inside[at]])
    return Found(value if found.exact else _on_grid(s, value), n, found.exact)


def _on_grid(s: Subject, bound: Fraction) -> Fraction:
    """Return the greatest possible error up to `bound`.

    Integer pixels give ideal codes some step apart, and codes are integers, as is an ideal
    code that is clamped.
    """
    unit = s.case.denominator
    step = Fraction(gcd(ideal_step(s.case), unit), unit)
    offset = -s.sign * Fraction(least_ideal(s.case), unit)
    clamped = Fraction(bound.numerator // bound.denominator)
    return max(clamped, offset + (bound - offset) // step * step)
