"""What one output of a frame is, against the ideal code, and whether anything wrapped there."""

from dataclasses import dataclass, replace
from fractions import Fraction

import numpy as np

from guardbit.arith.borders import positions, read_index
from guardbit.model.enums import Overflow
from guardbit.model.filter import Axis, Filter, Pass
from guardbit.model.vectors import Codes
from guardbit.reference.run import respond


@dataclass(frozen=True)
class Attempt:
    """The error at a position, in LSB; `calm` if no register or code there wraps or is clamped.

    Clamping to the legal output codes is no disturbance.
    """

    error: Fraction
    calm: bool


def attempt(f: Filter, frame: Codes, position: tuple[int, int]) -> Attempt:
    """Return what a frame of one channel, (height, width, 1), gives at an output position."""
    channels = replace(f.geometry, channels=1)
    single = replace(f, geometry=channels)
    axes = (f.geometry.rows, f.geometry.columns)
    y, x = (
        positions(axis, f.geometry.extent, length).index(at)
        for axis, length, at in zip(axes, frame.shape[:2], position, strict=True)
    )
    given, free = respond(single, frame), respond(_unlimited(single), frame)
    ideal = min(
        max(ideal_code(f, frame, position), Fraction(f.output.low)), Fraction(f.output.high)
    )
    *firsts, last = zip(given.accumulators, free.accumulators, strict=True)
    calm = (
        given.output[y, x, 0] == free.output[y, x, 0]
        and last[0][y, x, 0] == last[1][y, x, 0]
        and all(np.array_equal(*sums) for sums in firsts)
    )
    return Attempt(int(given.output[y, x, 0]) - ideal, bool(calm))


def ideal_code(f: Filter, frame: Codes, position: tuple[int, int]) -> Fraction:
    """Return the ideal code at a position of a frame of one channel, unclamped."""
    taps = [(0, 0, Fraction(2) ** (f.output.frac - f.input.frac))]
    for p in f.passes:
        taps = [(y + t.dy, x + t.dx, w * t.ideal) for y, x, w in taps for t in p.kernel.terms]
    total = Fraction(f.output.pedestal)
    for dy, dx, weight in taps:
        y = _index(f, f.geometry.rows, position[0] + dy, frame.shape[0])
        x = _index(f, f.geometry.columns, position[1] + dx, frame.shape[1])
        code = f.border.value if y is None or x is None else int(frame[y, x, 0])
        total += weight * (code - f.input.pedestal)
    return total


def _index(f: Filter, axis: Axis, at: int, length: int) -> int | None:
    return read_index(f.border, axis.spacing, at, length)


def _unlimited(f: Filter) -> Filter:
    """Return the filter whose registers have no ends, and whose codes do not wrap."""
    return replace(f, passes=tuple(_free(p) for p in f.passes))


def _free(p: Pass) -> Pass:
    wraps = p.requantiser.overflow is Overflow.WRAP
    overflow = Overflow.FORBID if wraps else p.requantiser.overflow
    return replace(
        p,
        accumulator=replace(p.accumulator, overflow=Overflow.FORBID),
        requantiser=replace(p.requantiser, overflow=overflow),
    )
