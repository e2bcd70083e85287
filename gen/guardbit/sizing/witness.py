"""Frames that attain the ends of a register."""

from collections import defaultdict
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass

from guardbit.arith.words import clamp
from guardbit.model.filter import Filter
from guardbit.model.sizing import End, Witness
from guardbit.sizing.lines import Line
from guardbit.sizing.outcome import outcome
from guardbit.sizing.place import toward
from guardbit.sizing.problem import MARKS, Extreme, Problem
from guardbit.sizing.register import Register
from guardbit.sizing.requantisers import Requantised

Pixels = dict[tuple[int, int], int]
# Puts legal codes into a frame so that one pixel of the register reads a value: (frame, row
# class, column class, (row, column) of the pixel, value less its pedestal); False: not searched
Painter = Callable[[Pixels, Line, Line, tuple[int, int], int], bool]


def plain_painter(f: Filter) -> Painter:
    """Return the painter for a register that reads the input itself."""

    def paint(frame: Pixels, row: Line, column: Line, at: tuple[int, int], value: int) -> bool:
        frame[at] = value + f.input.pedestal
        return True

    return paint


def result_painter(f: Filter, vertical: bool) -> Painter:
    """Return the painter for a register that reads results of the first pass.

    A result depends on pixels of its own column (or row, for a horizontal first pass), so
    those of different columns are free of each other.
    """

    known: dict[tuple[str, int, int, int], Mapping[tuple[int, int], int] | None] = {}

    def paint(frame: Pixels, row: Line, column: Line, at: tuple[int, int], value: int) -> bool:
        line = row if vertical else column
        key = (line.label, line.length, line.position, value)
        if key not in known:
            known[key] = None if line.results is None else line.results.pixels(value)
        pixels = known[key]
        for (y, x), pixel in (pixels or {}).items():
            frame[(y, at[1]) if vertical else (at[0], x)] = pixel + f.input.pedestal
        return pixels is not None

    return paint


@dataclass(frozen=True)
class Shown:
    """What a frame shows: that the register or requantiser reaches `value` after `after` taps."""

    name: str
    end: End
    partial: bool
    after: int
    value: int


def witnesses(f: Filter, register: Register, paint: Painter) -> tuple[Witness, ...]:
    """Return a frame for each end of the final and the partial sums that a class attains.

    Each is the smallest image of its class; pixels that nothing reads keep the fill.
    """
    made = []
    for mark in MARKS:
        extreme = register.found.ends[mark]
        if extreme.row is not None and extreme.column is not None:
            wanted = _wanted(register.problem, extreme, mark[1])
            frame = _painted(wanted, extreme.row, extreme.column, paint)
            if frame is not None:
                shown = Shown(register.name, mark[1], mark[0], extreme.after, extreme.value)
                made.append(_witness(f, shown, extreme.row, extreme.column, frame))
    return tuple(made)


def held_witnesses(
    f: Filter, index: int, register: Register, sums: Sequence[Witness], paint: Painter
) -> tuple[Witness, ...]:
    """Return a frame for each end of what the register holds that the sums' ends do not show.

    `f` has resolved widths, `sums` are the witnesses of pass number `index`.
    """
    holding = register.holding
    if not (holding.acts and holding.held.exact):
        return ()
    ends = {End.LEAST: holding.held.range.low, End.GREATEST: holding.held.range.high}
    policy = register.accumulator.overflow
    for witness in sums:
        if not witness.partial and outcome(f, index, witness, policy).held == ends[witness.end]:
            del ends[witness.end]
    made = []
    for end, value in ends.items():
        shown = Shown(register.name, end, False, register.problem.count, value)
        made += _held_witness(f, register, shown, paint)
    return tuple(made)


def code_witnesses(f: Filter, name: str, made: Requantised, paint: Painter) -> tuple[Witness, ...]:
    """Return a frame for each end of the codes, if the register's ends do not show it."""
    codes = made.codes
    if not (codes.exact and made.wraps):
        return ()
    found = []
    for end, code in zip(End, (codes.range.low, codes.range.high), strict=True):
        shown = Shown(name, end, False, made.register.problem.count, code)
        found += _code_witness(f, made, shown, paint)
    return tuple(found)


def _code_witness(f: Filter, made: Requantised, shown: Shown, paint: Painter) -> list[Witness]:
    value = shown.value - made.its_pass.requantiser.to.pedestal
    for results in made.results:
        place = results.place
        if results.reach is not None and value in results.reach:
            pixels = results.pixels(value)
            frame = None if pixels is None else _painted(pixels, place.row, place.column, paint)
            if frame is not None:
                return [_witness(f, shown, place.row, place.column, frame)]
    return []


def _held_witness(f: Filter, register: Register, shown: Shown, paint: Painter) -> list[Witness]:
    """Return a frame in which the register ends at the value shown, if one is found."""
    for place in register.holding.showing:
        ends = place.held.range
        if place.held.exact and shown.value in (ends.low, ends.high):
            pixels = place.pixels(shown.value)
            frame = None if pixels is None else _painted(pixels, place.row, place.column, paint)
            if frame is not None:
                return [_witness(f, shown, place.row, place.column, frame)]
    return []


def _wanted(problem: Problem, extreme: Extreme, end: End) -> Pixels:
    """Return the pixels' values that take the taps so far furthest toward `end`."""
    row, column = extreme.row, extreme.column
    assert row is not None and column is not None
    weights: dict[tuple[int, int], int] = defaultdict(int)
    for tap in problem.taps:
        y, x = row.read(tap.dy), column.read(tap.dx)
        if tap.number <= extreme.after and y is not None and x is not None:
            weights[y, x] += tap.coefficient
    values = problem.values_at(row, column)
    return {at: toward(end, weight, values) for at, weight in weights.items() if weight}


def _painted(
    values: Mapping[tuple[int, int], int], row: Line, column: Line, paint: Painter
) -> Pixels | None:
    frame: Pixels = {}
    found = [paint(frame, row, column, at, value) for at, value in values.items()]
    return frame if all(found) else None


def _witness(f: Filter, shown: Shown, row: Line, column: Line, frame: Pixels) -> Witness:
    return Witness(
        register=shown.name,
        end=shown.end,
        partial=shown.partial,
        height=row.length,
        width=column.length,
        fill=clamp(f.input.pedestal, f.input.low, f.input.high),
        pixels=tuple((y, x, code) for (y, x), code in sorted(frame.items())),
        position=(row.position, column.position),
        after=shown.after,
        value=shown.value,
    )
