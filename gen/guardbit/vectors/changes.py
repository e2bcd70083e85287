"""What each tap changed by one does to the outputs of a stack of frames, by the reference."""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from guardbit.model.enums import Grid, Outside, Overflow
from guardbit.model.filter import Filter, Pass, Term
from guardbit.model.vectors import Codes, Response
from guardbit.reference.accumulate import register_limits, sum_bound
from guardbit.reference.borders import border_index, kept
from guardbit.reference.requantise import requantise
from guardbit.reference.run import respond
from guardbit.reference.words import Array, magnitude, wrapped
from guardbit.vectors.classes import axis_of

_CHUNK = 1 << 19
_NEAR_THE_END = 1 << 62
SIGNS = (1, -1)


@dataclass(frozen=True)
class Tap:
    """The tap `term` of pass `pass_index`."""

    pass_index: int
    term: Term


def taps(filter: Filter) -> tuple[Tap, ...]:
    """Return every tap of every pass, in the order of accumulation."""
    return tuple(Tap(i, t) for i, which in enumerate(filter.passes) for t in which.kernel.terms)


def single_channels(filter: Filter, count: int) -> Filter:
    """Return the filter for `count` channels: each channel is then a frame of its own."""
    return replace(filter, geometry=replace(filter.geometry, channels=count))


def with_tap(filter: Filter, tap: Tap, integer: int) -> Filter:
    """Return the filter with one tap set to `integer`."""
    which = filter.passes[tap.pass_index]
    terms = tuple(
        replace(t, integer=integer) if (t.dy, t.dx) == (tap.term.dy, tap.term.dx) else t
        for t in which.kernel.terms
    )
    changed = replace(which, kernel=replace(which.kernel, terms=terms))
    passes = (*filter.passes[: tap.pass_index], changed, *filter.passes[tap.pass_index + 1 :])
    return replace(filter, passes=passes)


def is_linear(filter: Filter) -> bool:
    """Return whether a tap's change moves the final sum by exactly what the tap reads.

    So it does in one pass, unless the accumulator clamps for some legal frame.
    """
    which, source = filter.passes[0], filter.input
    if len(filter.passes) > 1 or which.accumulator.overflow is not Overflow.SATURATE:
        return len(filter.passes) == 1
    codes = (source.low, source.high, filter.border.value)
    reach = max(abs(code - source.pedestal) for code in codes)
    low, high = register_limits(which.accumulator)
    bound = sum_bound(which, reach) + reach
    return low <= -bound and bound <= high


def extended(filter: Filter, stack: Codes) -> Codes:
    """Return (height, width, frames) of codes less their pedestal, with the constant behind.

    Row number `height` and column number `width` hold the border's constant.
    """
    source = filter.input
    height, width, count = stack.shape
    cells = np.full((height + 1, width + 1, count), filter.border.value, np.int64)
    cells[:height, :width] = stack
    if filter.outside is Outside.CLAMP:
        np.clip(cells[:height, :width], source.low, source.high, cells[:height, :width])
    return cells - source.pedestal


def read_indices(filter: Filter, axis: int, length: int, offset: int) -> Array:
    """Return the index that a tap reads for each output position; `length`: the constant."""
    along = axis_of(filter, axis)
    at = kept(along, filter.geometry.extent, length)
    moved = range(at.start + offset, at.stop + offset, at.step)
    pitch = along.spacing if filter.border.grid is Grid.SITE else 1
    return border_index(moved, length, filter.border.mode, pitch)


def in_register(which: Pass, acc: Array) -> Array:
    """Return a final sum as the requantiser reads it."""
    if which.accumulator.overflow is not Overflow.WRAP:
        return acc
    low, high = register_limits(which.accumulator)
    return wrapped(acc, (high - low).bit_length(), which.accumulator.signed)


def changes(
    filter: Filter,
    stack: Codes,
    response: Response,
    chosen: Sequence[Tap],
    at: tuple[Array, Array],
) -> Iterator[NDArray[np.bool_]]:
    """Yield per tap where +1 and where -1 changes the output: (2, positions, frames).

    `filter` is for as many channels as the stack has frames, `response` its answer to it,
    `at` the output rows and columns of the positions to look at.
    """
    if is_linear(filter):
        yield from _linear(filter, stack, response, chosen, at)
        return
    for tap in chosen:
        runs = (with_tap(filter, tap, tap.term.integer + sign) for sign in SIGNS)
        yield np.stack([(respond(run, stack).output != response.output)[at] for run in runs])


def _linear(
    filter: Filter,
    stack: Codes,
    response: Response,
    chosen: Sequence[Tap],
    at: tuple[Array, Array],
) -> Iterator[NDArray[np.bool_]]:
    which = filter.passes[0]
    acc, codes = response.accumulators[0][at], response.output[at]
    cells = extended(filter, stack)
    height, width, _ = stack.shape
    if magnitude(acc) > _NEAR_THE_END:
        acc = acc.astype(object)
    rows = {d: read_indices(filter, 0, height, d)[at[0]] for d in {t.term.dy for t in chosen}}
    columns = {d: read_indices(filter, 1, width, d)[at[1]] for d in {t.term.dx for t in chosen}}
    group = max(1, _CHUNK // max(1, 2 * acc.size))
    for first in range(0, len(chosen), group):
        some = [tap.term for tap in chosen[first : first + group]]
        moves = cells[np.stack([rows[t.dy] for t in some]), np.stack([columns[t.dx] for t in some])]
        sums = in_register(which, np.stack([acc + moves, acc - moves], axis=1))
        changed = requantise(which.requantiser, which.accumulator.preload, sums)
        yield from changed != codes
