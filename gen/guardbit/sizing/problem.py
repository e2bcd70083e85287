"""The sums of one register, and their ends in one border class."""

from collections.abc import Sequence
from dataclasses import dataclass

from guardbit.arith.intervals import hull
from guardbit.model.sizing import End, Interval
from guardbit.sizing.lines import COLUMN, ROW, Line


@dataclass(frozen=True)
class Tap:
    """A coefficient that is not zero, and its number from 1 in the kernel's order."""

    number: int
    dy: int
    dx: int
    coefficient: int


@dataclass(frozen=True)
class Problem:
    """A sum of taps over pixels, in order, started at `start`, in every border class.

    `values` is the range of a pixel less its pedestal, `constant` the border's fixed one
    (None: the border repeats pixels). `count` is the number of taps, zero ones included.
    `nested`: what an interior class can do includes what any other can, since the border
    repeats pixels or its constant is a legal one. `listed` holds all rows and columns where
    `rows` and `columns` leave out such whose sums lie between another's ends; None: unknown.
    """

    count: int
    taps: tuple[Tap, ...]
    start: int
    values: Interval
    constant: int | None
    rows: Sequence[Line]
    columns: Sequence[Line]
    nested: bool
    listed: tuple[Sequence[Line], Sequence[Line]] | None

    def values_at(self, row: Line, column: Line) -> Interval:
        """Return the range of the pixels that are read in a class."""
        return row.values or column.values or self.values


Mark = tuple[bool, End]
MARKS: tuple[Mark, ...] = tuple((partial, end) for partial in (False, True) for end in End)


@dataclass(frozen=True)
class Extreme:
    """An end of the final or the partial sums, reached after `after` taps in a class.

    `row` and `column` are None where the end is a bound only.
    """

    value: int
    after: int
    row: Line | None
    column: Line | None


Ends = dict[Mark, Extreme]


def ends_interval(ends: Ends, partial: bool) -> Interval:
    """Return the range between both ends."""
    return Interval(ends[partial, End.LEAST].value, ends[partial, End.GREATEST].value)


def further(mark: Mark, a: Extreme, b: Extreme) -> Extreme:
    """Return the one that is further out; `a` of equal ones."""
    return b if (b.value > a.value if mark[1] is End.GREATEST else b.value < a.value) else a


def reads_of(problem: Problem, line: Line, word: str) -> list[int | None]:
    """Return what each tap reads along one axis in a class."""
    offsets = [tap.dy if word == ROW else tap.dx for tap in problem.taps]
    indices = {offset: line.read(offset) for offset in set(offsets)}
    return [indices[offset] for offset in offsets]


def class_ends(problem: Problem, row: Line, column: Line) -> Ends:
    """Return the exact ends in one class, where a border may let taps share a pixel."""
    return ends_of_reads(
        problem, row, column, reads_of(problem, row, ROW), reads_of(problem, column, COLUMN)
    )


def ends_of_reads(
    problem: Problem,
    row: Line,
    column: Line,
    ys: Sequence[int | None],
    xs: Sequence[int | None],
) -> Ends:
    """Return the exact ends in one class whose reads along both axes are known."""
    numbers = (0, *(tap.number for tap in problem.taps))
    sums = _sums(problem, problem.values_at(row, column), ys, xs)
    ends: Ends = {}
    for end, (final, partial, after) in zip(End, sums, strict=True):
        ends[False, end] = Extreme(problem.start + final, problem.count, row, column)
        ends[True, end] = Extreme(problem.start + partial, numbers[after], row, column)
    return ends


Sums = tuple[int, int, int]


def _sums(
    problem: Problem, values: Interval, ys: Sequence[int | None], xs: Sequence[int | None]
) -> tuple[Sums, Sums]:
    """Return for both ends the final sum, the furthest partial sum and the taps it takes."""
    lows, highs = [0], [0]
    low = high = 0
    weights: dict[tuple[int, int], int] = {}
    for tap, y, x in zip(problem.taps, ys, xs, strict=True):
        if y is None or x is None:
            assert problem.constant is not None
            low += tap.coefficient * problem.constant
            high += tap.coefficient * problem.constant
        else:
            # the taps so far that share a pixel act on it as one tap
            old = weights.get((y, x), 0)
            weights[y, x] = new = old + tap.coefficient
            low += _least(new, values) - _least(old, values)
            high -= _least(-new, values) - _least(-old, values)
        lows.append(low)
        highs.append(high)
    least, greatest = min(lows), max(highs)
    return (low, least, lows.index(least)), (high, greatest, highs.index(greatest))


def _least(weight: int, values: Interval) -> int:
    return weight * (values.low if weight > 0 else values.high)


def apart(values: Interval) -> tuple[Line, Line]:
    """Return a row and a column class in which every tap reads a pixel of its own."""
    line = Line("interior", 1, 0, 0, 0, lambda offset: offset, values)
    return line, line


def any_values(problem: Problem) -> Interval:
    """Return a range of everything that a tap can read, a constant included."""
    lines = (*problem.rows, *problem.columns)
    ranges = [a.values for a in lines if a.values is not None] or [problem.values]
    if problem.constant is not None:
        ranges.append(Interval(problem.constant, problem.constant))
    return hull(ranges)


def bound_ends(problem: Problem) -> Ends:
    """Return ends that no class exceeds: each tap takes its worst value for itself."""
    ends = class_ends(problem, *apart(any_values(problem)))
    return {mark: Extreme(e.value, e.after, None, None) for mark, e in ends.items()}
