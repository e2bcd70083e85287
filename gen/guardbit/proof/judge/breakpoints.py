"""A second look at every tail: fractions and plain integers, where its course changes.

The symbolic run and the contract share one algebra. Here the functions that it found are held
to the contract evaluated with fractions, at and beside every break, so that the algebra has no
part in it; and fixed frames that put the sums there are run through the C on numbers.
"""

from collections.abc import Iterator, Mapping
from fractions import Fraction
from itertools import product
from math import ceil, floor

from guardbit.model.enums import Overflow, Preload, Rounding
from guardbit.model.filter import Pass
from guardbit.proof.algebra.values import Table, Value
from guardbit.proof.algebra.witness import Solver
from guardbit.proof.contract.expected import Expected
from guardbit.proof.judge.frames import Frame, Frames
from guardbit.proof.judge.runs import Difference, Run, Tally
from guardbit.proof.sizes import work_of

MOST_VALUES = 6_000
MOST_FRAMES = 150
_MOST_WORK = 120_000

Shown = tuple[Difference, Frame]


def breakpoint_difference(run: Run, tally: Tally) -> Shown | None:
    """Return the first output that is not the contract's in fractions, and a frame with it.

    Of more than MOST_VALUES breaks an even choice is looked at; through the C go frames for as
    many of these as do not take too long.
    """
    run.subject.program.begin()
    expected = run.expected()
    if not all(expected.shape):
        return None
    size = run.case.height, run.case.width
    most = max(8, min(MOST_FRAMES, _MOST_WORK // work_of(run.filter, size)))
    frames = Frames(run, run.filter.input.low, run.filter.input.high)
    for stage, y, x in _places(expected):
        shown = list(_at_breaks(run, expected, stage, y, x))
        for pixels in shown[:: max(1, -(-len(shown) // most))]:
            frame = frames.of(pixels)
            found = _through_the_code(run, frame, tally)
            if found is not None:
                return found, frame
        for pixels in shown:
            found = _in_fractions(run, expected, (stage, y, x), pixels)
            if found is not None:
                return found, frames.of(pixels)
    return None


def _places(expected: Expected) -> Iterator[tuple[int, int, int]]:
    """Yield a place of each pass, about the middle: where its sum has the most pixels."""
    y = expected.rows[len(expected.rows) // 2]
    x = expected.columns[len(expected.columns) // 2]
    *first, last = expected.filter.passes
    for _ in first:
        read = next(iter(last.kernel.live), None)
        if read is not None:
            yield 0, y + read.dy, x + read.dx
    yield len(first), y, x


def _at_breaks(
    run: Run, expected: Expected, stage: int, y: int, x: int
) -> Iterator[dict[int, int]]:
    """Yield pixels that put the sum of a pass at, before and after each break of its function."""
    space = run.subject.program.cx.space
    value = expected.code(stage, y, x, 0)
    found = space.breakpoints(value)
    if found is None or not isinstance(value, Table):
        return
    base, starts = found
    step = max(1, -(-len(starts) // (MOST_VALUES // 3)))
    near = {n for s in (*starts[::step], base.high) for n in (s - 1, s, s + 1)}
    for wanted in sorted(n for n in near if base.low <= n <= base.high):
        pixels = Solver(space).solve(base.terms, wanted)
        if pixels is not None:
            yield pixels


def _through_the_code(run: Run, frame: Frame, tally: Tally) -> Difference | None:
    """Return the first output of the C, run on numbers, that is not the contract's."""
    fixed = Run(run.filter, run.routine, run.subject, run.case, lambda y, x, c: frame[y, x, c])
    found = fixed.first_difference(tally)
    if found is not None:
        return found
    expected, last = fixed.expected(), len(run.filter.passes) - 1
    for row, column in product(*map(range, expected.shape)):
        y, x = expected.rows[row], expected.columns[column]
        total, code = expected.total(last, y, x, 0), expected.code(last, y, x, 0)
        assert isinstance(total, int)
        if plain(run.filter.passes[last], total) != code:
            return _disagrees(plain(run.filter.passes[last], total), code)
    return None


def _in_fractions(
    run: Run, expected: Expected, where: tuple[int, int, int], pixels: Mapping[int, int]
) -> Difference | None:
    """Return how the function that symbols gave differs from the contract in fractions."""
    space = run.subject.program.cx.space
    total, code = (space.at(each(*where, 0), pixels) for each in (expected.total, expected.code))
    wanted = plain(run.filter.passes[where[0]], total)
    return None if wanted == code else _disagrees(wanted, code)


def _disagrees(wanted: int, code: Value) -> Difference:
    return Difference("contract-in-fractions", None, None, wanted, code)


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
