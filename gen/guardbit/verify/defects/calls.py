"""The referee's calls: all small sizes, extremes, boundaries, bands, gaps, wrong arguments."""

from collections.abc import Iterator
from dataclasses import dataclass, replace

import numpy as np

from guardbit.arith.borders import positions
from guardbit.arith.words import container_range
from guardbit.model.enums import Outside
from guardbit.model.filter import Filter
from guardbit.model.routine import Call, Codes, Role
from guardbit.model.sizing import Sizing
from guardbit.vectors.classes import axis_of, offsets
from guardbit.vectors.stimuli import level, random_frame
from guardbit.verify.bench import Bench
from guardbit.verify.defects.sweep import sweeps

_SEED = 22_360
_MOST_LENGTHS = 12
_FLAT = 64
_SWEPT = 1 << 13
_MOST_WIDE = 1 << 16
_LARGEST = 70


@dataclass(frozen=True, eq=False)
class Trial:
    """A call, and whether the contract leaves open what it gives, so that only harm counts."""

    name: str
    call: Call
    specified: bool = True


def shape_of(f: Filter, height: int, width: int) -> tuple[int, int]:
    """Return the rows and columns of the output for an image of that size."""
    rows, columns = (
        len(positions(axis_of(f, axis), f.geometry.extent, n))
        for axis, n in enumerate((height, width))
    )
    return rows, columns


def small_lengths(f: Filter, axis: int) -> list[int]:
    """Return the least lengths, to beyond twice the reach, and some around the blocks of a plan."""
    along, reads = axis_of(f, axis), offsets(f, axis)
    low, high = along.sizes
    span = max(reads[-1], 0) - min(reads[0], 0) + 1
    last = max(span + along.step + 1, 2 * span + 1)
    every = range(low, min(high, low + last) + 1)
    picked = every if len(every) <= _MOST_LENGTHS else every[:: -(-len(every) // _MOST_LENGTHS)]
    return sorted({*picked, every[-1]})


class _Maker:
    """Makes calls of one filter's routine, with a random source of its own."""

    def __init__(self, bench: Bench, seed: int) -> None:
        self.f = bench.filter
        self.routine = bench.routine
        self.loads = [None, *(load.cells for load in bench.loads)]
        self.rng = np.random.default_rng(seed)
        self.centre = level(self.f)
        self.count = 0

    def trial(self, name: str, frame: Codes, specified: bool = True, **more: object) -> Trial:
        """Return the call on a frame, with the next of the loadings and of the gaps."""
        self.count += 1
        gaps = ((0, 0), (2, 3), (0, 1))[self.count % 3]
        shape = shape_of(self.f, frame.shape[0], frame.shape[1])
        taps = self.loads[self.count % len(self.loads)]
        call = Call(frame, shape, src_gap=gaps[0], dst_gap=gaps[1], taps=taps)
        return Trial(name, replace(call, **more), specified)  # type: ignore[arg-type]

    def frame(self, kind: int, height: int, width: int) -> Codes:
        """Return a frame: random, of extremes, near the middle, or one that is nearly flat."""
        source, shape = self.f.input, (height, width)
        if kind == 0:
            return random_frame(self.f, shape, self.rng)
        if kind == 1:
            bits = self.rng.integers(0, 2, (*shape, self.f.geometry.channels))
            return np.where(bits == 1, source.high, source.low).astype(np.int64)
        if kind == 2:
            return random_frame(self.f, shape, self.rng, self.centre)
        flat = np.full((*shape, self.f.geometry.channels), self._code(), np.int64)
        spots = self.rng.random(flat.shape) < 0.1
        return np.where(spots, random_frame(self.f, shape, self.rng), flat)

    def _code(self) -> int:
        return int(self.rng.integers(self.f.input.low, self.f.input.high, endpoint=True))


def quick(bench: Bench) -> list[Trial]:
    """Return the calls that every mutant is given."""
    maker = _Maker(bench, _SEED)
    heights, widths = small_lengths(bench.filter, 0), small_lengths(bench.filter, 1)
    made = [
        maker.trial(f"size-{h}x{w}-{kind}", maker.frame(kind, h, w))
        for h in heights
        for w in widths
        for kind in (0, 1)
        if (h * len(widths) + w + kind) % 2 == 0 or h == heights[-1] or w == widths[-1]
    ]
    made += _swept(maker, bench.sizing, _SWEPT, _SEED)
    made += list(_flat(maker, _FLAT))
    made += list(_bands(maker, heights, widths))
    return made


def thorough(bench: Bench, seed: int) -> list[Trial]:
    """Return many more calls, for mutants that the quick ones do not tell from the sound code."""
    maker = _Maker(bench, _SEED + seed)
    heights, widths = small_lengths(bench.filter, 0), small_lengths(bench.filter, 1)
    made = [
        maker.trial(f"more-{h}x{w}-{kind}", maker.frame(kind, h, w))
        for h in heights
        for w in widths
        for kind in (0, 1, 2, 3)
    ]
    for number in range(24):
        h, w = (_some_length(maker, axis) for axis in (0, 1))
        made.append(maker.trial(f"medium-{h}x{w}", maker.frame(number % 4, h, w)))
    made += list(_wide(maker))
    made += _swept(maker, bench.sizing, 4 * _SWEPT, seed)
    made += list(_flat(maker, 1 << 10))
    made += [one for _ in range(3) for one in _bands(maker, heights, widths)]
    made += list(_beyond(maker, heights, widths))
    return made


def _some_length(maker: _Maker, axis: int) -> int:
    low, high = axis_of(maker.f, axis).sizes
    return int(maker.rng.integers(low, min(high, low + _LARGEST), endpoint=True))


def _swept(maker: _Maker, sizing: Sizing, most: int, seed: int) -> list[Trial]:
    return [
        maker.trial(f"sweep-{number}", frame, taps=None)
        for number, frame in enumerate(sweeps(sizing, most, seed))
    ]


def _flat(maker: _Maker, most: int) -> Iterator[Trial]:
    """Yield the least image in every code; if there are too many codes, in some of them."""
    f = maker.f
    low, high = f.input.low, f.input.high
    shape = (f.geometry.rows.sizes[0], f.geometry.columns.sizes[0], f.geometry.channels)
    step = -(-(high - low + 1) // most)
    for code in sorted({*range(low, high + 1, step), high}):
        yield maker.trial(f"flat-{code}", np.full(shape, code, np.int64))


def _bands(maker: _Maker, heights: list[int], widths: list[int]) -> Iterator[Trial]:
    if maker.routine.band is None:
        return
    for h in heights[-2:]:
        frame = maker.frame(0, h, widths[-1])
        rows = shape_of(maker.f, h, widths[-1])[0]
        for a in range(rows):
            for b in range(a + 1, rows + 1, 2):
                yield maker.trial(f"band-{a}-{b}", frame, bands=((a, b),))
        order = maker.rng.permutation(rows).tolist()
        yield maker.trial("bands-mixed", frame, bands=tuple((r, r + 1) for r in order))


def _wide(maker: _Maker) -> Iterator[Trial]:
    """Yield the widest and the highest image, each as small as it can be the other way."""
    rows, columns = maker.f.geometry.rows, maker.f.geometry.columns
    for h, w in ((rows.sizes[0], columns.sizes[1]), (rows.sizes[1], columns.sizes[0])):
        if h * w <= _MOST_WIDE:
            yield maker.trial(f"wide-{h}x{w}", maker.frame(0, h, w))


def _beyond(maker: _Maker, heights: list[int], widths: list[int]) -> Iterator[Trial]:
    """Yield frames with one code outside the range, at each place, and with many."""
    f = maker.f
    stored = container_range(f.input.container)
    codes = [
        code
        for code in (stored.low, f.input.low - 1, f.input.high + 1, stored.high)
        if stored.low <= code <= stored.high and not f.input.low <= code <= f.input.high
    ]
    specified = f.outside is not Outside.UNDEFINED
    for code in codes:
        for h, w in ((heights[0], widths[-1]), (heights[len(heights) // 2], widths[0])):
            for place in range(min(h * w, 64)):
                frame = maker.frame(0, h, w)
                frame[place % h, (place // h) % w, place % f.geometry.channels] = code
                yield maker.trial(f"beyond-{code}-{place}", frame, specified)
    if codes:
        frame = maker.rng.integers(
            stored.low, stored.high, (heights[-1], widths[-1], f.geometry.channels), np.int64, True
        )
        yield maker.trial("beyond-all", frame, specified)


def wrong(bench: Bench) -> list[Trial]:
    """Return calls with wrong arguments at the least size, beyond those of the rung `calls`."""
    f, routine = bench.filter, bench.routine
    maker = _Maker(bench, _SEED)
    h, w = f.geometry.rows.sizes[0], f.geometry.columns.sizes[0]
    frame = maker.frame(0, h, w)
    length = max(1, routine.scratch_per_column * w + routine.scratch_fixed)
    made = []
    for role, value in (
        (Role.SRC, None),
        (Role.DST, None),
        (Role.SCRATCH, None),
        (Role.SCRATCH_LEN, length - 1),
        (Role.SRC_STRIDE, w * f.geometry.channels - 1),
        (Role.DST_STRIDE, max(0, shape_of(f, h, w)[1] * f.geometry.channels - 1)),
        (Role.WIDTH, f.geometry.columns.sizes[0] - 1),
        (Role.HEIGHT, f.geometry.rows.sizes[0] - 1),
    ):
        if role in routine.frame.roles and routine.frame.status:
            # the stride of a single row is not used: the contract leaves open what comes of it
            open_ = role in (Role.SRC_STRIDE, Role.DST_STRIDE) and 1 in (h, shape_of(f, h, w)[0])
            made.append(maker.trial(f"wrong-{role}", frame, not open_, faults=((role, value),)))
    return made
