"""Filters written out by hand, and slow statements of the contract to compare with."""

from collections.abc import Sequence
from dataclasses import dataclass, replace
from fractions import Fraction
from typing import Any

import numpy as np
from numpy.typing import NDArray

from guardbit.model.enums import (
    BorderMode,
    Container,
    Extent,
    FitRule,
    Grid,
    Operation,
    Outside,
    Overflow,
    Preload,
    Rounding,
    Scale,
)
from guardbit.model.filter import (
    Accumulator,
    Axis,
    Border,
    Filter,
    Geometry,
    Kernel,
    Pass,
    PixelFormat,
    Requantiser,
    Term,
)
from guardbit.reference.run import respond

Array = NDArray[Any]
Taps = Sequence[Sequence[int]]
Image = Sequence[Sequence[int]]

PAD = {
    BorderMode.REPLICATE: "edge",
    BorderMode.HALF_SAMPLE: "symmetric",
    BorderMode.WHOLE_SAMPLE: "reflect",
    BorderMode.PERIODIC: "wrap",
}
MODES = tuple(BorderMode)


def pixels(bits: int, signed: bool = False, pedestal: int = 0) -> PixelFormat:
    low, high = number_range(bits, signed)
    return PixelFormat(bits, signed, 0, pedestal, low, high, Container.I32)


def number_range(bits: int, signed: bool) -> tuple[int, int]:
    return (-(2 ** (bits - 1)), 2 ** (bits - 1) - 1) if signed else (0, 2**bits - 1)


U8 = pixels(8)
S32 = pixels(32, signed=True)


@dataclass(frozen=True)
class Wanted:
    """The knobs of a one-pass filter; the defaults leave the accumulator as the output."""

    operation: Operation = Operation.CONVOLUTION
    origin: tuple[int, int] | None = None
    source: PixelFormat = U8
    to: PixelFormat = S32
    exponent: int = 0
    divisor: int = 1
    rounding: Rounding = Rounding.TIES_TO_POSITIVE
    limit: Overflow = Overflow.SATURATE
    bits: int | None = 64
    signed: bool = True
    overflow: Overflow = Overflow.FORBID
    preload: Preload = Preload.ZERO
    mode: BorderMode = BorderMode.CONSTANT
    value: int = 0
    grid: Grid = Grid.PIXEL
    extent: Extent = Extent.SAME
    step: tuple[int, int] = (1, 1)
    phase: tuple[int, int] = (0, 0)
    spacing: tuple[int, int] = (1, 1)
    channels: int = 1
    outside: Outside = Outside.UNDEFINED


def make(taps: Taps, wanted: Wanted | None = None, /, **knobs: Any) -> Filter:  # noqa: ANN401
    """Return the one-pass filter of integer taps with some knobs turned."""
    w = replace(wanted or Wanted(), **knobs)
    shape = len(taps), len(taps[0])
    origin = w.origin or ((shape[0] - 1) // 2, (shape[1] - 1) // 2)
    one = Pass(
        w.source,
        kernel(taps, w, origin),
        Accumulator(w.bits, w.signed, w.overflow, w.preload),
        Requantiser(w.exponent, w.divisor, w.rounding, w.limit, w.to),
    )
    rows, columns = (axis(i, shape[i], origin[i], w) for i in (0, 1))
    return Filter(
        name="trial",
        summary="",
        operation=w.operation,
        outside=w.outside,
        passes=(one,),
        border=Border(w.mode, w.value, w.grid),
        geometry=Geometry(w.extent, rows, columns, w.channels),
        spec_digest="",
    )


def kernel(taps: Taps, w: Wanted, origin: tuple[int, int]) -> Kernel:
    sign = -1 if w.operation is Operation.CONVOLUTION else 1
    terms = [
        Term(
            sign * (row - origin[0]) * w.spacing[0],
            sign * (column - origin[1]) * w.spacing[1],
            Fraction(tap),
            int(tap),
        )
        for row, line in enumerate(taps)
        for column, tap in enumerate(line)
        if tap
    ]
    terms.sort(key=lambda term: (term.dy, term.dx))
    scale = Scale.BINARY if w.divisor == 1 else Scale.EXACT
    return Kernel(tuple(terms), scale, 0, w.divisor, 32, True, FitRule.NEAREST, Fraction(0))


def axis(which: int, count: int, origin: int, w: Wanted) -> Axis:
    ends = [-origin * w.spacing[which], (count - 1 - origin) * w.spacing[which]]
    if w.operation is Operation.CORRELATION:
        ends = [-end for end in ends]
    return Axis(min(ends), max(ends), (1, 65535), w.step[which], w.phase[which], w.spacing[which])


def two_passes(first: Filter, second: Filter) -> Filter:
    """Return the filter that requantises `first` before `second`; one is a column, one a row.

    Border and pixels are the first's, step and phase the second's.
    """
    a, b = first.geometry, second.geometry
    geometry = replace(b, rows=_wider(a.rows, b.rows), columns=_wider(a.columns, b.columns))
    return replace(first, passes=first.passes + second.passes, geometry=geometry)


def _wider(first: Axis, last: Axis) -> Axis:
    wide = first if first.least or first.greatest else last
    return replace(wide, step=last.step, phase=last.phase)


def frame_of(image: Image | Array) -> Array:
    """Return a (rows, columns, 1) frame of int64."""
    return np.asarray(image, np.int64)[:, :, None]


def output(filter: Filter, image: Image | Array) -> Any:  # noqa: ANN401
    """Return the output of a one-channel image as lists of rows."""
    return respond(filter, frame_of(image)).output[:, :, 0].tolist()


def sums(filter: Filter, image: Image | Array) -> Array:
    """Return the last accumulator of a one-channel image."""
    return respond(filter, frame_of(image)).accumulators[-1][:, :, 0]


def extended(image: Array, pad: tuple[int, int], mode: BorderMode, value: int = 0) -> Array:
    """Return the image with pad rows and columns on every side, by numpy.pad."""
    widths = ((pad[0], pad[0]), (pad[1], pad[1]))
    if mode is BorderMode.CONSTANT:
        return np.pad(image, widths, mode="constant", constant_values=value)
    return np.pad(image, widths, mode=PAD[mode])  # type: ignore[call-overload,no-any-return]
