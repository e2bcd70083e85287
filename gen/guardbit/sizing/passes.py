"""The register problems of a filter: one for a single pass, two with an intermediate."""

from collections.abc import Sequence
from dataclasses import dataclass, replace

from guardbit.arith.intervals import clamp_to, contains, requantised_range, shift
from guardbit.arith.rounding import requantise, rounding_constant
from guardbit.model.enums import BorderMode, Preload
from guardbit.model.filter import Filter, Kernel, Pass, PixelFormat
from guardbit.model.sizing import Interval
from guardbit.sizing.clamping import END_WORK
from guardbit.sizing.lines import (
    COLUMN,
    ROW,
    Line,
    axis_lines,
    constant_value,
    crossing_lines,
)
from guardbit.sizing.place import Place
from guardbit.sizing.problem import Problem, Tap
from guardbit.sizing.register import Register
from guardbit.sizing.results import Results
from guardbit.sizing.survey import EXACT_WORK, REPORT_WORK, interior_class

ACCUMULATOR, FIRST_ACCUMULATOR = "accumulator", "intermediate.accumulator"
OUTPUT, INTERMEDIATE = "output", "intermediate"


def is_preloaded(p: Pass) -> bool:
    """Return whether the accumulator starts at the rounding constant."""
    return p.accumulator.preload is Preload.ROUNDING


def start_value(p: Pass) -> int:
    """Return what the accumulator of a pass starts at."""
    return rounding_constant(p.requantiser) if is_preloaded(p) else 0


def pixel_values(source: PixelFormat) -> Interval:
    """Return the legal codes less the pedestal."""
    return Interval(source.low - source.pedestal, source.high - source.pedestal)


def is_vertical_first(f: Filter) -> bool:
    """Return whether the first of two passes runs along columns."""
    return all(term.dx == 0 for term in f.passes[0].kernel.terms) and all(
        term.dy == 0 for term in f.passes[1].kernel.terms
    )


def taps_of(kernel: Kernel) -> tuple[Tap, ...]:
    """Return the taps that are not zero, in the contract's order."""
    return tuple(
        Tap(number, term.dy, term.dx, term.integer)
        for number, term in enumerate(kernel.terms, 1)
        if term.integer
    )


def _offsets(taps: Sequence[Tap], word: str) -> list[int]:
    """Return the distinct offsets on an axis; 0 for a kernel without taps."""
    return sorted({t.dy if word == ROW else t.dx for t in taps} or {0})


def is_nested(f: Filter) -> bool:
    """Return whether reads outside the image give nothing that a legal pixel could not."""
    return f.border.mode is not BorderMode.CONSTANT or (
        f.input.low <= f.border.value <= f.input.high
    )


def _problem(
    f: Filter, p: Pass, constant: int | None, rows: Sequence[Line], columns: Sequence[Line]
) -> Problem:
    return Problem(
        len(p.kernel.terms),
        taps_of(p.kernel),
        start_value(p),
        pixel_values(p.source),
        constant,
        rows,
        columns,
        is_nested(f),
        (rows, columns),
    )


def single_problem(f: Filter) -> Problem:
    """Return the problem of the only pass."""
    taps = taps_of(f.passes[0].kernel)
    rows = axis_lines(f, ROW, _offsets(taps, ROW))
    columns = axis_lines(f, COLUMN, _offsets(taps, COLUMN))
    return _problem(f, f.passes[0], constant_value(f), rows, columns)


@dataclass(frozen=True)
class Stages:
    """The axes of a filter of two passes, and the classes on each for the pass along it."""

    vertical: bool
    along_first: Sequence[Line]
    along_second: Sequence[Line]
    across_first: Sequence[Line]

    def placed(
        self, first: Sequence[Line], second: Sequence[Line]
    ) -> tuple[Sequence[Line], Sequence[Line]]:
        """Return (rows, columns) of lines along the first and along the second pass."""
        return (first, second) if self.vertical else (second, first)

    def placed_pair(self, first: Line, second: Line) -> tuple[Line, Line]:
        """Return (row, column) of a line along the first and one along the second pass."""
        return (first, second) if self.vertical else (second, first)


def stages(f: Filter) -> Stages:
    """Return the classes on both axes of a filter of two passes."""
    vertical = is_vertical_first(f)
    words = (ROW, COLUMN) if vertical else (COLUMN, ROW)
    taps = [taps_of(p.kernel) for p in f.passes]
    offsets = [_offsets(t, word) for t, word in zip(taps, words, strict=True)]
    first, second = (axis_lines(f, w, o) for w, o in zip(words, offsets, strict=True))
    # without taps the second pass reads nothing, and the first is never computed
    return Stages(vertical, first, second, crossing_lines(f, second, offsets[1] if taps[1] else []))


def first_problem(f: Filter, s: Stages) -> Problem:
    """Return the first pass's problem, over the positions that the second pass reads."""
    rows, columns = s.placed(s.along_first, s.across_first)
    return _problem(f, f.passes[0], constant_value(f), rows, columns)


@dataclass(frozen=True)
class SecondProblem:
    """`exact`: the ranges of its pixels are attained, each by a frame of its own column."""

    problem: Problem
    exact: bool


def second_problem(f: Filter, s: Stages, first: Register) -> SecondProblem:
    """Return the second pass's problem: its pixels are the results of the first.

    Their range differs between the classes along the first pass.
    """
    lines, exact = _result_lines(f, s, first)
    constant = None if constant_value(f) is None else _outside_result(f, s, first)
    rows, columns = s.placed(_undominated(lines), s.along_second)
    problem = _problem(f, f.passes[1], constant, rows, columns)
    listed = s.placed(lines, s.along_second) if len(lines) == len(s.along_first) else None
    return SecondProblem(replace(problem, listed=listed), exact)


def _result_lines(f: Filter, s: Stages, first: Register) -> tuple[list[Line], bool]:
    """Return the classes along the first pass with their results, and if these are exact."""
    across = next((a for a in s.across_first if a.is_interior), None) or next(
        iter(s.across_first), None
    )
    lines = _affordable(s, first)
    if across is None or not lines:
        values = _codes(f, first.held.range)
        return [Line("interior", 1, 0, 0, 0, lambda _: 0, values)], False
    results = _searched(f, s, first, lines, across)
    inner = next((r for line, r in zip(lines, results, strict=True) if line.is_interior), None)
    if inner is not None and is_nested(f):
        # what is only a bound elsewhere cannot leave what the interior's results are
        limits = inner.held.range
        made = [_result_line(a, r, limits) for a, r in zip(lines, results, strict=True)]
        return made, inner.held.exact
    made = [_result_line(a, r, r.held.range) for a, r in zip(lines, results, strict=True)]
    sure = [r.held.range for r in results if r.held.exact]
    return made, all(any(contains(a, r.held.range) for a in sure) for r in results)


def _searched(
    f: Filter, s: Stages, first: Register, lines: Sequence[Line], across: Line
) -> list[Results]:
    """Return the results in each class; a search for them gets its share of the work.

    Where the interior decides, the others are for the report only.
    """
    nested = is_nested(f) and any(line.is_interior for line in lines)
    share = END_WORK // (8 * len(lines)) if nested else END_WORK // len(lines)
    works = [END_WORK if nested and line.is_interior else share for line in lines]
    return [
        _results(f, first, *s.placed_pair(line, across), work)
        for line, work in zip(lines, works, strict=True)
    ]


def _results(f: Filter, first: Register, row: Line, column: Line, work: int) -> Results:
    p = f.passes[0]
    place = Place(first.accumulator, first.problem, row, column, work)
    return Results(place, p.requantiser, is_preloaded(p))


def _result_line(first: Line, results: Results, limits: Interval) -> Line:
    """Return the class as the second pass sees it: results, none of them outside."""
    values = clamp_to(results.held.range, limits)
    return replace(first, before=0, after=0, read=lambda _: 0, values=values, results=results)


def _affordable(s: Stages, first: Register) -> Sequence[Line]:
    """Return the classes to walk; those left out lie within the interior's range."""
    taps = len(first.problem.taps)
    inner = interior_class(first.problem)
    if len(s.along_first) * taps <= (EXACT_WORK if inner is None else REPORT_WORK):
        return s.along_first
    if inner is None:
        return []
    simple = [line for line in s.along_first if not line.at_both_ends]
    if len(simple) * taps <= REPORT_WORK:
        return simple
    return [inner[0] if s.vertical else inner[1]]


def _undominated(lines: Sequence[Line]) -> list[Line]:
    """Return the lines whose values lie within no other line's of the same label."""
    kept: list[Line] = []
    for line in lines:
        same = [a for a in kept if a.label == line.label]
        if not any(_within(line, other) for other in same):
            kept = [a for a in kept if a.label != line.label or not _within(a, line)]
            kept.append(line)
    return kept


def _within(inner: Line, outer: Line) -> bool:
    assert inner.values is not None and outer.values is not None
    return contains(outer.values, inner.values)


def _codes(f: Filter, held: Interval) -> Interval:
    """Return the codes that the first pass makes of `held`, less their pedestal."""
    p = f.passes[0]
    codes = requantised_range(p.requantiser, is_preloaded(p), held)
    return shift(codes, -p.requantiser.to.pedestal)


def _outside_result(f: Filter, s: Stages, first: Register) -> int:
    """Return the first pass's fixed result outside a constant border, less its pedestal."""
    outside = next((a for a in s.across_first if not a.is_interior), None)
    if outside is None or not s.along_first:
        return 0
    row, column = s.placed_pair(s.along_first[0], outside)
    value = Place(first.accumulator, first.problem, row, column).held.range.low
    p = f.passes[0]
    return requantise(p.requantiser, is_preloaded(p), value) - p.requantiser.to.pedestal
