"""Frames that attain the ends of a register."""

from collections import defaultdict
from collections.abc import Callable, Hashable, Iterable
from typing import TypeVar

from guardbit.arith.words import clamp
from guardbit.model.filter import Filter
from guardbit.model.sizing import End, Witness
from guardbit.sizing.lines import Line
from guardbit.sizing.problem import MARKS, Extreme, Mark, Problem
from guardbit.sizing.register import Register

K = TypeVar("K", bound=Hashable)
Pixels = dict[tuple[int, int], int]
# Puts legal codes into a frame so that one pixel of the register reads its least or greatest
# value: (frame, row class, column class, row index, column index, end)
Painter = Callable[[Pixels, Line, Line, tuple[int, int], End], None]


def plain_painter(f: Filter) -> Painter:
    """Return the painter for a register that reads the input itself."""
    ends = {End.LEAST: f.input.low, End.GREATEST: f.input.high}

    def paint(frame: Pixels, row: Line, column: Line, at: tuple[int, int], end: End) -> None:
        frame[at] = ends[end]

    return paint


def first_pass_painter(f: Filter, first: Problem, vertical: bool) -> Painter:
    """Return the painter for a register that reads results of the first pass.

    A result depends on pixels of its own column (or row, for a horizontal first pass), so
    those of different columns are free of each other.
    """
    paint_input = plain_painter(f)

    def paint(frame: Pixels, row: Line, column: Line, at: tuple[int, int], end: End) -> None:
        line = (row if vertical else column).first
        assert line is not None
        weights = _weights((t.dy + t.dx, t.coefficient) for t in first.taps)
        pixels = _weights((line.read(o), w) for o, w in weights.items())
        for index, weight in pixels.items():
            if index is not None and weight:
                place = (index, at[1]) if vertical else (at[0], index)
                paint_input(frame, row, column, place, _toward(end, weight))

    return paint


def witnesses(f: Filter, register: Register, paint: Painter) -> tuple[Witness, ...]:
    """Return a frame for each end of the final and the partial sums that a class attains.

    Each is the smallest image of its class; pixels that nothing reads keep the fill.
    """
    made = []
    for mark in MARKS:
        extreme = register.found.ends[mark]
        if extreme.row is not None and extreme.column is not None:
            frame = _frame(register.problem, extreme, mark[1], paint)
            made.append(_witness(f, register.name, mark, extreme, frame))
    return tuple(made)


def _frame(problem: Problem, extreme: Extreme, end: End, paint: Painter) -> Pixels:
    row, column = extreme.row, extreme.column
    assert row is not None and column is not None
    taps = [tap for tap in problem.taps if tap.number <= extreme.after]
    weights = _weights(((row.read(t.dy), column.read(t.dx)), t.coefficient) for t in taps)
    frame: Pixels = {}
    for (y, x), weight in weights.items():
        if y is not None and x is not None and weight:
            paint(frame, row, column, (y, x), _toward(end, weight))
    return frame


def _witness(f: Filter, name: str, mark: Mark, extreme: Extreme, frame: Pixels) -> Witness:
    row, column = extreme.row, extreme.column
    assert row is not None and column is not None
    return Witness(
        register=name,
        end=mark[1],
        partial=mark[0],
        height=row.length,
        width=column.length,
        fill=clamp(f.input.pedestal, f.input.low, f.input.high),
        pixels=tuple((y, x, code) for (y, x), code in sorted(frame.items())),
        position=(row.position, column.position),
        after=extreme.after,
        value=extreme.value,
    )


def _weights(items: Iterable[tuple[K, int]]) -> dict[K, int]:
    sums: dict[K, int] = defaultdict(int)
    for key, weight in items:
        sums[key] += weight
    return sums


def _toward(end: End, weight: int) -> End:
    """Return the end of a value that takes weight * value toward `end`."""
    return end if weight > 0 else (End.LEAST if end is End.GREATEST else End.GREATEST)
