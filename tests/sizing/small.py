"""Small filters built by hand, and what every frame does in them, from the definitions.

Nothing here uses the package's arithmetic: borders are walked reflection by reflection,
roundings are taken on exact fractions, and all frames of a size are gone through at once.
"""

import itertools
import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from fractions import Fraction

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

Matrix = Sequence[Sequence[int | Fraction]]
Ints = NDArray[np.int64]
AUTO = Accumulator(None, True, Overflow.FORBID, Preload.ZERO)
PLAIN = Border(BorderMode.CONSTANT, 0, Grid.PIXEL)


def pixels(
    bits: int,
    signed: bool = False,
    pedestal: int = 0,
    legal: tuple[int, int] | None = None,
    frac: int = 0,
) -> PixelFormat:
    low, high = (-(2 ** (bits - 1)), 2 ** (bits - 1) - 1) if signed else (0, 2**bits - 1)
    low, high = legal or (low, high)
    return PixelFormat(bits, signed, frac, pedestal, low, high, Container.I32)


def to_output(
    shift: int = 0,
    to: PixelFormat | None = None,
    rounding: Rounding = Rounding.TIES_TO_POSITIVE,
    overflow: Overflow = Overflow.SATURATE,
    divisor: int = 1,
) -> Requantiser:
    return Requantiser(-shift, divisor, rounding, overflow, to or pixels(8))


def kernel(
    taps: Matrix,
    integers: Matrix | None = None,
    spacing: tuple[int, int] = (1, 1),
    origin: tuple[int, int] | None = None,
    frac: int = 0,
) -> Kernel:
    """Return a kernel in correlation order: taps[i][j] reads (i, j) - origin, times spacing."""
    cy, cx = origin or ((len(taps) - 1) // 2, (len(taps[0]) - 1) // 2)
    whole = integers or taps
    terms = tuple(
        Term((i - cy) * spacing[0], (j - cx) * spacing[1], Fraction(tap), int(whole[i][j]))
        for i, row in enumerate(taps)
        for j, tap in enumerate(row)
        if tap or whole[i][j]
    )
    return Kernel(terms, Scale.BINARY, frac, 1, 32, True, FitRule.NEAREST, Fraction(0))


def axis(
    size: int,
    sizes: tuple[int, int] = (1, 65535),
    origin: int | None = None,
    spacing: int = 1,
    step: int = 1,
    phase: int = 0,
) -> Axis:
    """Return the axis of a correlation box of `size` taps."""
    centre = (size - 1) // 2 if origin is None else origin
    ends = (-(0 - centre) * spacing, -(size - 1 - centre) * spacing)
    return Axis(min(ends), max(ends), sizes, step, phase, spacing)


def single(
    taps: Kernel,
    source: PixelFormat,
    rows: Axis,
    columns: Axis,
    border: Border = PLAIN,
    extent: Extent = Extent.SAME,
    accumulator: Accumulator = AUTO,
    requantiser: Requantiser | None = None,
) -> Filter:
    one = Pass(source, taps, accumulator, requantiser or to_output())
    return _filter((one,), border, Geometry(extent, rows, columns, 1))


def double(
    first: Pass, second: Pass, rows: Axis, columns: Axis, border: Border, extent: Extent
) -> Filter:
    return _filter((first, second), border, Geometry(extent, rows, columns, 1))


def _filter(passes: tuple[Pass, ...], border: Border, geometry: Geometry) -> Filter:
    return Filter(
        "small", "", Operation.CORRELATION, Outside.UNDEFINED, passes, border, geometry, ""
    )


def plain(
    taps: Matrix,
    source: PixelFormat,
    accumulator: Accumulator = AUTO,
    requantiser: Requantiser | None = None,
    mode: BorderMode = BorderMode.REPLICATE,
) -> Filter:
    """Return a filter of one pass with any image size."""
    rows, columns = axis(len(taps)), axis(len(taps[0]))
    border = Border(mode, source.pedestal, Grid.PIXEL)
    return single(
        kernel(taps), source, rows, columns, border, Extent.SAME, accumulator, requantiser
    )


def column_then_row(
    first: tuple[Sequence[int], PixelFormat, Requantiser],
    second: tuple[Sequence[int], Requantiser],
    mode: BorderMode = BorderMode.REPLICATE,
    horizontal_first: bool = False,
    accumulators: tuple[Accumulator, Accumulator] = (AUTO, AUTO),
) -> Filter:
    """Return a filter of two passes with any image size."""
    taps, source, middle = first
    more, last = second
    shapes = ([[t] for t in taps], [list(more)])
    if horizontal_first:
        shapes = ([list(taps)], [[t] for t in more])
    one = Pass(source, kernel(shapes[0]), accumulators[0], middle)
    two = Pass(middle.to, kernel(shapes[1]), accumulators[1], last)
    sizes = (len(more), len(taps)) if horizontal_first else (len(taps), len(more))
    border = Border(mode, source.pedestal, Grid.PIXEL)
    return double(one, two, axis(sizes[0]), axis(sizes[1]), border, Extent.SAME)


# --- what the contract says, from the definitions -------------------------------------------


def mapped(mode: BorderMode, i: int, n: int) -> int | None:
    while not 0 <= i < n:
        match mode:
            case BorderMode.CONSTANT:
                return None
            case BorderMode.REPLICATE:
                i = 0 if i < 0 else n - 1
            case BorderMode.HALF_SAMPLE:
                i = -1 - i if i < 0 else 2 * n - 1 - i
            case BorderMode.WHOLE_SAMPLE:
                i = 0 if n == 1 else -i if i < 0 else 2 * n - 2 - i
            case BorderMode.PERIODIC:
                i = i + n if i < 0 else i - n
    return i


def read(f: Filter, along: Axis, i: int, n: int) -> int | None:
    if f.border.grid is Grid.PIXEL:
        return mapped(f.border.mode, i, n)
    d = along.spacing
    sublattice = [p for p in range(n) if p % d == i % d]
    at = mapped(f.border.mode, (i - i % d) // d, len(sublattice))
    return None if at is None else sublattice[at]


def kept(f: Filter, along: Axis, n: int) -> list[int]:
    match f.geometry.extent:
        case Extent.SAME:
            every = list(range(n))
        case Extent.FULL:
            every = list(range(along.least, n + along.greatest))
        case Extent.VALID:
            every = list(range(along.greatest, n + along.least))
    return every[along.phase :: along.step]


def rounded(value: Fraction, mode: Rounding) -> int:
    floor, ceiling, half = math.floor(value), math.ceil(value), Fraction(1, 2)
    match mode:
        case Rounding.TOWARD_NEGATIVE:
            return floor
        case Rounding.TOWARD_POSITIVE:
            return ceiling
        case Rounding.TOWARD_ZERO:
            return ceiling if value < 0 else floor
        case Rounding.TIES_TO_POSITIVE:
            return math.floor(value + half)
        case Rounding.TIES_TO_AWAY:
            return math.floor(value + half) if value > 0 else math.ceil(value - half)
        case Rounding.TIES_TO_EVEN:
            return round(value)


def quotient(p: Pass, acc: int) -> Fraction:
    return acc * Fraction(2) ** p.requantiser.exponent / p.requantiser.divisor


def unlimited(p: Pass, acc: int) -> int:
    preloaded = p.accumulator.preload is Preload.ROUNDING
    mode = Rounding.TOWARD_NEGATIVE if preloaded else p.requantiser.rounding
    return rounded(quotient(p, acc), mode) + p.requantiser.to.pedestal


def code(p: Pass, acc: int) -> int:
    to, value = p.requantiser.to, unlimited(p, acc)
    match p.requantiser.overflow:
        case Overflow.SATURATE:
            return min(max(value, to.low), to.high)
        case Overflow.WRAP:
            return modulo(value, to.bits, to.signed)
        case Overflow.FORBID:
            return value


def modulo(value: int, bits: int, signed: bool) -> int:
    low = -(2 ** (bits - 1)) if signed else 0
    return int((value - low) % 2**bits) + low


def start(p: Pass) -> int:
    if p.accumulator.preload is Preload.ROUNDING:
        return int(1 << (-p.requantiser.exponent - 1))
    return 0


def register(p: Pass, amounts: Ints) -> tuple[Ints, Ints]:
    """Return the unlimited partial sums, and what the register holds at the end."""
    begin = np.full((len(amounts), 1), start(p), dtype=np.int64)
    sums = np.cumsum(np.concatenate([begin, amounts], axis=1), axis=1)
    a = p.accumulator
    if a.overflow is Overflow.FORBID or a.bits is None:
        return sums, sums[:, -1]
    low = -(2 ** (a.bits - 1)) if a.signed else 0
    high = low + 2**a.bits - 1
    if a.overflow is Overflow.WRAP:
        return sums, (sums[:, -1] - low) % 2**a.bits + low
    held = np.clip(begin[:, 0], low, high)
    for column in amounts.T:
        held = np.clip(held + column, low, high)
    return sums, held


def each(values: Ints, function: object) -> Ints:
    assert callable(function)
    unique, inverse = np.unique(values, return_inverse=True)
    made = np.array([function(int(v)) for v in unique], dtype=np.int64)
    return made[inverse.reshape(values.shape)]


@dataclass(frozen=True)
class Seen:
    """All frames (rows) at one place of one register: partial sums, final, what is held."""

    place: tuple[int, int]
    sums: Ints
    held: Ints


@dataclass(frozen=True)
class Run:
    """What all the given frames of one size do."""

    registers: tuple[tuple[Seen, ...], ...]
    outputs: Ints


def cell(f: Filter, size: tuple[int, int], y: int, x: int) -> int | None:
    i, j = read(f, f.geometry.rows, y, size[0]), read(f, f.geometry.columns, x, size[1])
    return None if i is None or j is None else i * size[1] + j


def source_values(f: Filter, frames: Ints, size: tuple[int, int], y: int, x: int) -> Ints:
    at = cell(f, size, y, x)
    column = np.full(len(frames), f.border.value) if at is None else frames[:, at]
    return column.astype(np.int64) - f.input.pedestal


def products(p: Pass, columns: Sequence[Ints], count: int) -> Ints:
    made = [t.integer * c for t, c in zip(p.kernel.terms, columns, strict=True)]
    return np.stack(made, axis=1) if made else np.zeros((count, 0), dtype=np.int64)


def run(f: Filter, frames: Ints, size: tuple[int, int]) -> Run:
    """Return what the contract makes of frames, each flattened to height * width codes."""
    places = [
        (y, x)
        for y in kept(f, f.geometry.rows, size[0])
        for x in kept(f, f.geometry.columns, size[1])
    ]
    firsts: dict[tuple[int, int], Seen] = {}
    lasts = []
    for y, x in places:
        if len(f.passes) == 1:
            columns = [
                source_values(f, frames, size, y + t.dy, x + t.dx) for t in f.passes[0].kernel.terms
            ]
        else:
            # a tap of zero adds nothing, so nothing is computed for it
            columns = [
                middle_values(f, frames, size, (y + t.dy, x + t.dx), firsts)
                if t.integer
                else np.zeros(len(frames), dtype=np.int64)
                for t in f.passes[1].kernel.terms
            ]
        sums, held = register(f.passes[-1], products(f.passes[-1], columns, len(frames)))
        lasts.append(Seen((y, x), sums, held))
    outputs = [each(s.held, lambda v: code(f.passes[-1], v)) for s in lasts]
    stacked = np.stack(outputs, axis=1) if outputs else np.zeros((len(frames), 0), np.int64)
    registers = (tuple(lasts),) if len(f.passes) == 1 else (tuple(firsts.values()), tuple(lasts))
    return Run(registers, stacked)


def middle_values(
    f: Filter,
    frames: Ints,
    size: tuple[int, int],
    place: tuple[int, int],
    firsts: dict[tuple[int, int], Seen],
) -> Ints:
    p = f.passes[0]
    if place not in firsts:
        columns = [
            source_values(f, frames, size, place[0] + t.dy, place[1] + t.dx) for t in p.kernel.terms
        ]
        firsts[place] = Seen(place, *register(p, products(p, columns, len(frames))))
    codes = each(firsts[place].held, lambda v: code(p, v))
    return codes - p.requantiser.to.pedestal


def ideal_codes(f: Filter, frames: Ints, size: tuple[int, int]) -> list[list[Fraction]]:
    """Return the ideal codes per place: real arithmetic on the ideal taps."""
    scale = Fraction(2) ** (f.output.frac - f.input.frac)
    taps = [(0, 0, scale)]
    for p in f.passes:
        taps = [(y + t.dy, x + t.dx, w * t.ideal) for y, x, w in taps for t in p.kernel.terms]
    made = []
    for y in kept(f, f.geometry.rows, size[0]):
        for x in kept(f, f.geometry.columns, size[1]):
            total = np.full(len(frames), Fraction(f.output.pedestal), dtype=object)
            for dy, dx, weight in taps:
                values = source_values(f, frames, size, y + dy, x + dx).astype(object)
                total = total + values * weight
            made.append(list(total))
    return made


def sizes(f: Filter) -> Iterator[tuple[int, int]]:
    rows, columns = f.geometry.rows.sizes, f.geometry.columns.sizes
    return itertools.product(range(rows[0], rows[1] + 1), range(columns[0], columns[1] + 1))


def all_frames(f: Filter, size: tuple[int, int]) -> Ints:
    codes = range(f.input.low, f.input.high + 1)
    return np.array(list(itertools.product(codes, repeat=size[0] * size[1])), dtype=np.int64)
