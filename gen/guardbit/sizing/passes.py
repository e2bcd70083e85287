"""The register problems of a filter: one for a single pass, two with an intermediate."""

from collections.abc import Sequence
from dataclasses import dataclass, replace

from guardbit.arith.intervals import contains, requantised_range, shift, unlimited_range
from guardbit.arith.rounding import requantise, rounding_constant
from guardbit.model.enums import Overflow, Preload
from guardbit.model.filter import Filter, Kernel, Pass, PixelFormat, Requantiser
from guardbit.model.sizing import Interval
from guardbit.sizing.held import held_in_class
from guardbit.sizing.lines import (
    COLUMN,
    ROW,
    Line,
    axis_lines,
    constant_value,
    crossing_lines,
)
from guardbit.sizing.problem import Problem, Tap
from guardbit.sizing.register import Register
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


def _problem(
    p: Pass, constant: int | None, rows: Sequence[Line], columns: Sequence[Line]
) -> Problem:
    kernel, values = p.kernel, pixel_values(p.source)
    taps = taps_of(kernel)
    return Problem(len(kernel.terms), taps, start_value(p), values, constant, rows, columns)


def single_problem(f: Filter) -> Problem:
    """Return the problem of the only pass."""
    taps = taps_of(f.passes[0].kernel)
    rows = axis_lines(f, ROW, _offsets(taps, ROW))
    columns = axis_lines(f, COLUMN, _offsets(taps, COLUMN))
    return _problem(f.passes[0], constant_value(f), rows, columns)


@dataclass(frozen=True)
class Stages:
    """The axes of a filter of two passes, and the classes on each for the pass along it."""

    vertical: bool
    along_first: Sequence[Line]
    along_second: Sequence[Line]
    across_first: Sequence[Line]

    def placed(self, first: Sequence[Line], second: Sequence[Line]) -> tuple[Sequence[Line], ...]:
        """Return (rows, columns) of lines along the first and along the second pass."""
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
    return _problem(f.passes[0], constant_value(f), rows, columns)


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
    rows, columns = s.placed(lines, s.along_second)
    problem = _problem(f.passes[1], constant, rows, columns)
    return SecondProblem(problem, exact)


def _result_lines(f: Filter, s: Stages, first: Register) -> tuple[list[Line], bool]:
    """Return the classes along the first pass with their results, and if these are exact."""
    across = next((a for a in s.across_first if a.is_interior), None) or next(
        iter(s.across_first), None
    )
    lines = _affordable(s, first)
    if across is None or not lines:
        values = _results(f, first.held.range)
        return [Line("interior", 1, 0, 0, 0, lambda _: 0, values)], False
    made, exact = [], True
    for line in lines:
        row, column = (line, across) if s.vertical else (across, line)
        held = held_in_class(first.accumulator, first.problem, row, column)
        exact = exact and held.exact and _is_monotone(f.passes[0], held.range)
        made.append(_result_line(line, _results(f, held.range)))
    return _undominated(made), exact


def _result_line(first: Line, values: Interval) -> Line:
    """Return the class as the second pass sees it: results, none of them outside."""
    return replace(first, before=0, after=0, read=lambda _: 0, values=values, first=first)


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


def _results(f: Filter, held: Interval) -> Interval:
    """Return the codes that the first pass makes of `held`, less their pedestal."""
    p = f.passes[0]
    codes = requantised_range(p.requantiser, is_preloaded(p), held)
    return shift(codes, -p.requantiser.to.pedestal)


def _is_monotone(p: Pass, argument: Interval) -> bool:
    """Return whether the requantiser keeps the order of all of `argument`."""
    r: Requantiser = p.requantiser
    if r.overflow is not Overflow.WRAP:
        return True
    values = unlimited_range(r, is_preloaded(p), argument)
    low = r.to.low
    return (values.low - low) >> r.to.bits == (values.high - low) >> r.to.bits


def _outside_result(f: Filter, s: Stages, first: Register) -> int:
    """Return the first pass's fixed result outside a constant border, less its pedestal."""
    outside = next((a for a in s.across_first if not a.is_interior), None)
    if outside is None or not s.along_first:
        return 0
    line = s.along_first[0]
    row, column = (line, outside) if s.vertical else (outside, line)
    value = held_in_class(first.accumulator, first.problem, row, column).range.low
    p = f.passes[0]
    return requantise(p.requantiser, is_preloaded(p), value) - p.requantiser.to.pedestal
