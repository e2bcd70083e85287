"""Frames that put an accumulator at a rounding boundary or one below it, at one position."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from guardbit.model.enums import Preload
from guardbit.model.filter import Filter, PixelFormat, Requantiser
from guardbit.model.vectors import Codes
from guardbit.reference.accumulate import start_value
from guardbit.reference.requantise import requantise
from guardbit.vectors.changes import Tap, read_indices
from guardbit.vectors.classes import Site
from guardbit.vectors.stimuli import Level, random_frame


@dataclass(frozen=True, eq=False)
class Spot:
    """One output position of a frame size, and what the taps read there.

    `rows` and `columns` hold per tap the pixel it reads; `outside` where that is the border's
    constant. For a filter of one pass the sum there is
    `start` + sum of `weights` * (codes - pedestal).
    """

    row: Site
    column: Site
    rows: NDArray[np.int64]
    columns: NDArray[np.int64]
    outside: NDArray[np.bool_]
    start: int
    weights: NDArray[np.int64]

    @property
    def shape(self) -> tuple[int, int]:
        """Return the frame's (height, width)."""
        return self.row.length, self.column.length


def spot(filter: Filter, taps: Sequence[Tap], row: Site, column: Site) -> Spot:
    """Return what the taps read at the position that stands for a border class."""
    rows = _reads(filter, 0, row, [tap.term.dy for tap in taps])
    columns = _reads(filter, 1, column, [tap.term.dx for tap in taps])
    outside = (rows == row.length) | (columns == column.length)
    integers = np.array([tap.term.integer for tap in taps], np.int64)
    weights = np.zeros((row.length + 1, column.length + 1), np.int64)
    np.add.at(weights, (rows, columns), np.where(outside, 0, integers))
    constant = filter.border.value - filter.input.pedestal
    start = start_value(filter.passes[0]) + constant * int(integers[outside].sum())
    return Spot(row, column, rows, columns, outside, start, weights[:-1, :-1])


def _reads(filter: Filter, axis: int, site: Site, moves: list[int]) -> NDArray[np.int64]:
    found = {d: int(read_indices(filter, axis, site.length, d)[site.index]) for d in set(moves)}
    return np.array([found[d] for d in moves], np.int64)


def span(filter: Filter, total: Spot) -> tuple[int, int]:
    """Return the least and greatest value of the sum at a spot over all legal frames."""
    source = filter.input
    low, high = source.low - source.pedestal, source.high - source.pedestal
    positive = int(total.weights[total.weights > 0].sum())
    negative = int(total.weights[total.weights < 0].sum())
    least = positive * low + negative * high
    return total.start + least, total.start + positive * high + negative * low


def boundary_near(r: Requantiser, preload: Preload, acc: int) -> int | None:
    """Return the boundary nearest to `acc`: a sum whose code differs from the next lower's.

    Boundaries lie at multiples of half an output step, or one above; inside the output range.
    """
    up, down = 1 << max(r.exponent, 0), r.divisor << max(-r.exponent, 0)
    low, high = r.to.low - r.to.pedestal, r.to.high - r.to.pedestal
    inside = min(max(acc * up // down, low), high)
    halves = np.array([(2 * inside + k) * down // (2 * up) for k in range(-3, 5)], object)
    candidates = np.unique(np.concatenate([halves, halves + 1]))
    here = requantise(r, preload, candidates)
    below = requantise(r, preload, candidates - 1)
    real = candidates[here != below]
    return int(min(real, key=lambda b: abs(int(b) - acc))) if real.size else None


@dataclass(frozen=True)
class Aim:
    """Where a sum is to lie: with `sign` 1 just below a boundary, with -1 on one.

    A small step of that sign then crosses it. The frame is random around a level, or over
    the whole range; a `kept` pixel (row, column, code) is set and not adjusted.
    """

    sign: int
    around: Level | None = None
    kept: tuple[int, int, int] | None = None


def aimed(filter: Filter, total: Spot, aim: Aim, rng: np.random.Generator) -> Codes:
    """Return a legal frame, (height, width), whose sum is as near as can be to the aim."""
    source = filter.input
    plain = random_frame(filter, total.shape, rng, aim.around)[:, :, 0]
    weights = total.weights.copy()
    if aim.kept is not None:
        plain[aim.kept[:2]] = aim.kept[2]
        weights[aim.kept[:2]] = 0
    acc = total.start + int((total.weights * (plain - source.pedestal)).sum())
    which = filter.passes[0]
    boundary = boundary_near(which.requantiser, which.accumulator.preload, acc)
    if boundary is None:
        return plain
    wanted = boundary - (aim.sign > 0)
    rest = wanted - acc
    free = np.argwhere(weights != 0)
    order = np.argsort(-np.abs(weights[tuple(free.T)]), kind="stable")
    for row, column in free[order].tolist():
        if rest == 0:
            break
        rest -= _adjust(plain, (row, column), int(weights[row, column]), rest, source)
    if rest != 0 and len(free):
        _polish(filter, plain, weights, (wanted - rest, aim.sign), rng)
    return plain


def _polish(
    filter: Filter,
    plain: Codes,
    weights: NDArray[np.int64],
    state: tuple[int, int],
    rng: np.random.Generator,
) -> None:
    """Set two pixels so that the sum comes nearest to any boundary of the output range.

    `state` is the frame's sum now, and the sign of the step that is to cross. All pairs of
    (up to 256 chosen) codes are compared at once.
    """
    acc, sign = state
    which, source = filter.passes[0], filter.input
    r = which.requantiser
    boundary = boundary_near(r, which.accumulator.preload, acc)
    step = r.divisor << max(-r.exponent, 0)
    if boundary is None or r.exponent > 0 or step >= 1 << 31:
        return
    picked = [tuple(at) for at in rng.permutation(np.argwhere(weights))[:2].tolist()]
    codes = [_some_codes(source, rng) for _ in picked]
    sums = np.array(acc, np.int64)
    for at, values in zip(picked, codes, strict=True):
        sums = sums[..., None] + weights[at] * (values - plain[at])
    wanted = boundary - (sign > 0)
    away = (wanted - sums if sign > 0 else sums - wanted) % step
    low, high = ((code - r.to.pedestal) * step for code in (r.to.low, r.to.high))
    away = np.where((sums >= low) & (sums <= high), away, step)
    best = np.unravel_index(int(away.argmin()), away.shape)
    for at, values, index in zip(picked, codes, best, strict=True):
        plain[at] = values[index]


def _some_codes(source: PixelFormat, rng: np.random.Generator) -> NDArray[np.int64]:
    if source.high - source.low < 256:
        return np.arange(source.low, source.high + 1)
    return rng.integers(source.low, source.high, 256, np.int64, endpoint=True)


def _adjust(plain: Codes, at: tuple[int, int], weight: int, rest: int, source: PixelFormat) -> int:
    """Move one pixel so that the sum comes nearer by at most `rest`; return by how much."""
    steps = abs(rest) // abs(weight) * (1 if (rest > 0) == (weight > 0) else -1)
    code = int(plain[at])
    moved = min(max(code + steps, source.low), source.high)
    plain[at] = moved
    return (moved - code) * weight
