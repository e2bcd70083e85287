"""Frames on which the accumulator goes through its values: every boundary of the tail."""

from collections.abc import Iterator
from dataclasses import dataclass
from math import ceil

import numpy as np

from guardbit.arith.borders import positions
from guardbit.arith.rounding import ratio
from guardbit.model.filter import Axis, Filter
from guardbit.model.sizing import Sizing
from guardbit.model.vectors import Codes
from guardbit.vectors.classes import axis_of, offsets
from guardbit.verify.typing import Array

_SEED = 17_320
_LONGEST = 256


@dataclass(frozen=True)
class Tiling:
    """Windows of pixels beside each other, each with one output that reads it alone.

    Along each axis: the pitch of the windows, the length that an image needs, how many windows
    fit, and the position in a window of the output.
    """

    pitch: tuple[int, int]
    shape: tuple[int, int]
    count: tuple[int, int]
    at: tuple[int, int]


def sweeps(sizing: Sizing, most: int, seed: int = _SEED) -> Iterator[Codes]:
    """Yield frames whose windows make the sum near each boundary of the last requantiser.

    At most `most` sums are aimed at. A filter of two passes is aimed at as if it were one.
    """
    f = sizing.filter
    tiling = _tiling(f)
    if tiling is None:
        return
    rng = np.random.default_rng(seed)
    targets = _targets(sizing, most, rng)
    room = tiling.count[0] * tiling.count[1]
    for first in range(0, targets.size, room):
        some = targets[first : first + room]
        yield _frame(f, tiling, np.resize(some, room), rng)


def _targets(sizing: Sizing, most: int, rng: np.random.Generator) -> Array:
    """Return sums about every multiple of half an output step, as many as are wanted."""
    r = sizing.requantisers[-1].argument
    up, down = ratio(sizing.filter.passes[-1].requantiser)
    step = max(1, down // (2 * up))
    near = range(-2, 3) if step > 4 else range(1)
    count = (r.high - r.low) // step + 1
    wanted = max(1, most // len(near))
    chosen = np.arange(count, dtype=np.int64)
    if count > wanted:
        chosen = rng.integers(0, count, wanted, np.int64)
    # multiples of half a step, counted from 0, and the ends of the range
    centres = (r.low // step + chosen) * step
    sums = np.add.outer(np.array(near, np.int64), centres).ravel()
    return np.unique(np.clip(np.append(sums, (r.low, r.high)), r.low, r.high))


def _tiling(f: Filter) -> Tiling | None:
    a, b = (_along(f, axis) for axis in (0, 1))
    if a is None or b is None:
        return None
    return Tiling((a[0], b[0]), (a[1], b[1]), (a[2], b[2]), (a[3], b[3]))


def _along(f: Filter, axis: int) -> tuple[int, int, int, int] | None:
    along, reads = axis_of(f, axis), offsets(f, axis)
    length = _length(along)
    at = next((p for p in positions(along, f.geometry.extent, length) if p + reads[0] >= 0), None)
    if at is None:
        return None
    pitch = ceil((at + reads[-1] + 1) / along.step) * along.step
    count = length // pitch
    return (pitch, length, count, at) if count else None


def _length(along: Axis) -> int:
    return min(max(_LONGEST, along.sizes[0]), along.sizes[1])


def weights(f: Filter) -> dict[tuple[int, int], int]:
    """Return the integer taps by offset; of two passes, their outer product."""
    found = {(0, 0): 1}
    for which in f.passes:
        made: dict[tuple[int, int], int] = {}
        for (dy, dx), weight in found.items():
            for term in which.kernel.terms:
                place = dy + term.dy, dx + term.dx
                made[place] = made.get(place, 0) + weight * term.integer
        found = made
    return found


def _frame(f: Filter, tiling: Tiling, targets: Array, rng: np.random.Generator) -> Codes:
    low, high = f.input.low, f.input.high
    size = (*tiling.shape, f.geometry.channels)
    frame = rng.integers(low, high, size, np.int64, endpoint=True)
    for channel in range(f.geometry.channels):
        aimed = np.roll(targets, 7 * channel)
        for (dy, dx), codes in _solved(f, aimed).items():
            rows = np.arange(tiling.count[0]) * tiling.pitch[0] + tiling.at[0] + dy
            columns = np.arange(tiling.count[1]) * tiling.pitch[1] + tiling.at[1] + dx
            frame[np.ix_(rows, columns, np.array([channel]))] = codes.reshape(*tiling.count, 1)
    return frame


def _solved(f: Filter, targets: Array) -> dict[tuple[int, int], Array]:
    """Return a code for each tap's pixel so that the sum is each target, as near as can be."""
    source = f.input
    taps = sorted(weights(f).items(), key=lambda tap: -abs(tap[1]))
    scale = _gain_of_first(f)
    # start from the least sum; each tap then raises it as far as it may
    ends = {place: source.low if w > 0 else source.high for place, w in taps}
    least = sum(w * (ends[place] - source.pedestal) for place, w in taps)
    rest = np.maximum(targets * scale - least, 0)
    codes: dict[tuple[int, int], Array] = {}
    for place, weight in taps:
        if weight == 0:
            codes[place] = np.full(targets.shape, source.low)
            continue
        raised = np.minimum(rest // abs(weight), source.high - source.low)
        rest = rest - raised * abs(weight)
        codes[place] = ends[place] + np.sign(weight) * raised
    return codes


def _gain_of_first(f: Filter) -> int:
    """Return what a sum of two passes' product is divided by before the second sum."""
    if len(f.passes) == 1:
        return 1
    up, down = ratio(f.passes[0].requantiser)
    return max(1, down // up)
