"""A second look at every tail: plain integers, at each place where its course changes.

The symbolic run and the contract share one algebra. Here each sum is put at and beside every
break of the functions found, by a fixed frame; C runs on numbers, and the contract is evaluated
with fractions, so that the algebra has no part in it.
"""

from fractions import Fraction
from itertools import product
from math import ceil, floor

from guardbit.model.enums import Overflow, Preload, Rounding
from guardbit.model.filter import Pass
from guardbit.proof.algebra.values import Table, Value
from guardbit.proof.algebra.witness import Solver
from guardbit.proof.judge.frames import Frame, Frames
from guardbit.proof.judge.runs import Difference, Run, Tally

MOST_FRAMES = 150


def breakpoint_difference(run: Run, tally: Tally) -> Difference | None:
    """Return the first output of a frame at a break that is not the contract's in fractions.

    Of more than MOST_FRAMES breaks an even choice is looked at.
    """
    space = run.subject.program.cx.space
    run.subject.program.begin()
    expected = run.expected()
    if not all(expected.shape):
        return None
    row, column = expected.shape[0] // 2, expected.shape[1] // 2
    value = expected.at(row, column, 0)
    found = space.breakpoints(value)
    if found is None or not isinstance(value, Table):
        return None
    base, starts = found
    wanted = sorted({x for s in starts for x in (s - 1, s, s + 1) if base.low <= x <= base.high})
    step = -(-len(wanted) // MOST_FRAMES)
    frames = Frames(run, run.filter.input.low, run.filter.input.high)
    for x in wanted[::step]:
        pixels = Solver(space).solve(base.terms, x)
        if pixels is None:
            continue
        difference = _at(run, frames.of(pixels), tally)
        if difference is not None:
            return difference
    return None


def _at(run: Run, frame: Frame, tally: Tally) -> Difference | None:
    def pixels(y: int, x: int, c: int) -> int:
        return frame[y, x, c]

    fixed = Run(run.filter, run.routine, run.subject, run.case, pixels)
    found = fixed.first_difference(tally)
    if found is not None:
        return found
    expected = fixed.expected()
    last = run.filter.passes[-1]
    for row, column in product(*map(range, expected.shape)):
        total = expected.total(row, column, 0)
        wanted, got = expected.at(row, column, 0), plain(last, _number(total))
        if wanted != got:
            return Difference("contract-in-fractions", None, (row, column, 0), wanted, got)
    return None


def _number(value: Value) -> int:
    assert isinstance(value, int)
    return value


def plain(each: Pass, total: int) -> int:
    """Return the code that a pass makes of a total, by fractions."""
    q = each.requantiser
    exact = Fraction(total) * Fraction(2) ** q.exponent / q.divisor
    if each.accumulator.preload is Preload.ROUNDING:
        code = floor(exact)
    else:
        code = _rounded(q.rounding, exact)
    code += q.to.pedestal
    if q.overflow is Overflow.SATURATE:
        return max(q.to.low, min(code, q.to.high))
    if q.overflow is Overflow.WRAP:
        least = -(1 << q.to.bits - 1) if q.to.signed else 0
        return (code - least) % (1 << q.to.bits) + least
    return code


def _rounded(rounding: Rounding, exact: Fraction) -> int:
    down, half = floor(exact), Fraction(1, 2)
    match rounding:
        case Rounding.TOWARD_NEGATIVE:
            return down
        case Rounding.TOWARD_POSITIVE:
            return ceil(exact)
        case Rounding.TOWARD_ZERO:
            return int(exact)
        case Rounding.TIES_TO_POSITIVE:
            return floor(exact + half)
        case Rounding.TIES_TO_AWAY:
            return floor(exact + half) if exact >= 0 else ceil(exact - half)
        case Rounding.TIES_TO_EVEN:
            return round(exact)
