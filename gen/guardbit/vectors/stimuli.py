"""Frames as data: structured, random, photographed; with sizes around every border class."""

from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from fractions import Fraction
from math import ceil, sqrt

import numpy as np

from guardbit.model.enums import Outside
from guardbit.model.filter import Axis, Filter, Pass
from guardbit.model.vectors import Codes, Purpose, Vector
from guardbit.reference.run import respond
from guardbit.vectors.classes import axis_of, offsets

_SEED = 20_000
_MANY_PIXELS = 1 << 16
_FEW = ("flat-high", "ramp", "checker", "corner-low")
"""Structures that are run where all legal images are large."""

_PHOTOGRAPH = 256

_LONG = 300
"""A length that 8 bits do not count."""


@dataclass(frozen=True, eq=False)
class Stimulus:
    """A named frame, (height, width, channels) of codes, without its response."""

    name: str
    purpose: Purpose
    frame: Codes


@dataclass(frozen=True)
class Level:
    """A code that centres the output, and how far around it outputs stay in the range."""

    code: int
    spread: int


def answered(filter: Filter, stimuli: Iterable[Stimulus]) -> tuple[Vector, ...]:
    """Return the stimuli with the reference's responses, in order."""
    return tuple(Vector(s.name, s.purpose, s.frame, respond(filter, s.frame)) for s in stimuli)


def stimuli(filter: Filter, photograph: Codes | None = None) -> tuple[Stimulus, ...]:
    """Return structured and random frames, and the photograph scaled to the input format.

    The same for the same filter: the random generator is seeded.
    """
    made = [*_structures(filter), *_randoms(filter), *_long(filter)]
    if photograph is not None:
        made.append(scaled_photograph(filter, photograph))
    return tuple(made)


def level(filter: Filter) -> Level:
    """Return the code around which random frames give outputs inside the output range."""
    source, to = filter.input, filter.output
    gain, energy = Fraction(1), Fraction(1)
    for which in filter.passes:
        scale = _scale(which)
        gain *= scale * sum(t.integer for t in which.kernel.terms)
        energy *= scale * scale * sum(t.integer**2 for t in which.kernel.terms)
    middle = Fraction(to.low + to.high, 2) - to.pedestal
    wanted = source.pedestal + (round(middle / gain) if gain else 0)
    if not gain:
        wanted = (source.low + source.high) // 2
    wanted = min(max(wanted, source.low), source.high)
    full = source.high - source.low
    half = Fraction(to.high - to.low, 2)
    deviation = sqrt(float(energy)) if energy else 0.0
    fits = ceil(min(float(half) / (1.4 * deviation), full)) if deviation else full
    return Level(wanted, max(1, min(fits, full)))


def _scale(which: Pass) -> Fraction:
    r = which.requantiser
    return Fraction(2) ** r.exponent / r.divisor


def random_frame(
    filter: Filter, shape: tuple[int, int], rng: np.random.Generator, around: Level | None = None
) -> Codes:
    """Return a random legal frame: over the whole range, or around a level."""
    source = filter.input
    low, high = source.low, source.high
    if around is not None:
        low, high = max(low, around.code - around.spread), min(high, around.code + around.spread)
    size = (*shape, filter.geometry.channels)
    return rng.integers(low, high, size, np.int64, endpoint=True)


def axis_lengths(filter: Filter, axis: int) -> tuple[int, ...]:
    """Return image lengths around every border class, and smaller than the kernel."""
    along, reads = axis_of(filter, axis), offsets(filter, axis)
    span = max(reads) - min(reads) + 1
    wanted = {1, 2, 3, span // 2, span - 1, span, span + 1, 2 * span + 1, span + 16}
    wanted |= {along.spacing, along.spacing + 1, along.step + span}
    return _legal(along, wanted)


def _legal(along: Axis, wanted: Iterable[int]) -> tuple[int, ...]:
    low, high = along.sizes
    return tuple(sorted({min(max(length, low), high) for length in wanted}))


def shapes(filter: Filter, most: int = 40) -> tuple[tuple[int, int], ...]:
    """Return (height, width) pairs of those lengths: at most `most`, all lengths among them."""
    heights, widths = axis_lengths(filter, 0), axis_lengths(filter, 1)
    thin = [(h, widths[-1]) for h in heights[:2]] + [(heights[-1], w) for w in widths[:2]]
    longest = max(len(heights), len(widths))
    diagonal = [(heights[i % len(heights)], widths[i % len(widths)]) for i in range(longest)]
    rest = [(h, w) for h in heights for w in widths]
    step = -(-len(rest) // most)
    pairs = dict.fromkeys([*diagonal, *thin, *rest[::step]])
    return tuple(list(pairs)[:most])


def main_shape(filter: Filter) -> tuple[int, int]:
    """Return a size with all border classes of large images, and not much more."""
    sides = []
    for axis in (0, 1):
        along, reads = axis_of(filter, axis), offsets(filter, axis)
        span = max(reads) - min(reads) + 1
        sides += list(_legal(along, [max(24, span + 8 * along.step + 3)]))
    return sides[0], sides[1]


def _structures(filter: Filter) -> Iterator[Stimulus]:
    low, high = filter.input.low, filter.input.high
    height, width = main_shape(filter)
    y, x = np.mgrid[0:height, 0:width]
    ramp = low + (y * width + x) % (high - low + 1)
    plain = {
        "flat-low": np.full((height, width), low),
        "flat-high": np.full((height, width), high),
        "flat-level": np.full((height, width), level(filter).code),
        "ramp": ramp,
        "checker": np.where((y + x) % 2, high, low),
        "rows": np.where(y % 2, high, low),
        "columns": np.where(x % 2, high, low),
        "impulse-high": np.where((y == height // 2) & (x == width // 2), high, low),
        "impulse-low": np.where((y == height // 2) & (x == width // 2), low, high),
        "corner-high": np.where((y == 0) & (x == 0), high, low),
        "corner-low": np.where((y == height - 1) & (x == width - 1), low, high),
    }
    few = height * width > _MANY_PIXELS
    for name, plane in plain.items():
        if few and name not in _FEW:
            continue
        yield Stimulus(name, Purpose.STRUCTURE, _in_channels(filter, plane))


def _in_channels(filter: Filter, plane: Codes) -> Codes:
    """Return the plane in every channel, each moved a little, so that channels differ."""
    moved = [np.roll(plane, c, axis=1) for c in range(filter.geometry.channels)]
    return np.stack(moved, axis=2).astype(np.int64)


def _randoms(filter: Filter) -> Iterator[Stimulus]:
    rng = np.random.default_rng(_SEED)
    centre = level(filter)
    sized = [*[main_shape(filter)] * 4, *shapes(filter)]
    for number, (height, width) in enumerate(sized):
        if height * width > _MANY_PIXELS and number > 1:
            continue
        around = centre if number % 2 == 0 else None
        frame = random_frame(filter, (height, width), rng, around)
        kind = "narrow" if around else "wide"
        yield Stimulus(f"{kind}-{height}x{width}-{number}", Purpose.RANDOM, frame)
    if filter.outside is Outside.CLAMP:
        yield from _beyond(filter, rng)


def _long(filter: Filter) -> Iterator[Stimulus]:
    """Yield a wide and a high frame, where such are legal and small enough."""
    rng = np.random.default_rng(_SEED)
    heights, widths = axis_lengths(filter, 0), axis_lengths(filter, 1)
    (long_height,), (long_width,) = (_legal(axis_of(filter, axis), [_LONG]) for axis in (0, 1))
    middle = heights[len(heights) // 2], widths[len(widths) // 2]
    for height, width in ((middle[0], long_width), (long_height, middle[1])):
        if height * width <= _MANY_PIXELS:
            frame = random_frame(filter, (height, width), rng)
            yield Stimulus(f"long-{height}x{width}", Purpose.RANDOM, frame)


def _beyond(filter: Filter, rng: np.random.Generator) -> Iterator[Stimulus]:
    """Yield a frame with codes of the whole format, for a filter that clamps them."""
    source = filter.input
    low = -(1 << (source.bits - 1)) if source.signed else 0
    size = (*main_shape(filter), filter.geometry.channels)
    frame = rng.integers(low, low + (1 << source.bits), size, np.int64)
    yield Stimulus("beyond-the-range", Purpose.RANDOM, frame)


def scaled_photograph(filter: Filter, photograph: Codes) -> Stimulus:
    """Return a photograph's middle part with its span of values mapped onto the input range.

    `photograph` is (height, width) or (height, width, channels) of numbers; one with too
    few channels gives them in turn. The part has a legal size, 256 pixels a side if it can.
    """
    planes = photograph[:, :, None] if photograph.ndim == 2 else photograph
    height, width = (
        _legal(axis_of(filter, axis), [min(planes.shape[axis], _PHOTOGRAPH)])[0] for axis in (0, 1)
    )
    rows = (planes.shape[0] - height) // 2 + np.arange(height)
    columns = (planes.shape[1] - width) // 2 + np.arange(width)
    turns = np.arange(filter.geometry.channels) % planes.shape[2]
    part = planes[rows % planes.shape[0]][:, columns % planes.shape[1]][:, :, turns]
    least, span = int(photograph.min()), max(1, int(photograph.max() - photograph.min()))
    low, high = filter.input.low, filter.input.high
    codes = low + (part.astype(np.int64) - least) * (high - low) // span
    return Stimulus("photograph", Purpose.PHOTOGRAPH, codes)
