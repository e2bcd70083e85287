"""Loadings of coefficient registers: legal ones at the ends and at random, and illegal ones."""

import itertools
from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from guardbit.arith.borders import positions
from guardbit.arith.tapset import corner_loadings, is_member
from guardbit.arith.words import format_range
from guardbit.model.filter import Filter, TapSet, raster, registers_of
from guardbit.model.vectors import Purpose
from guardbit.vectors.classes import axis_of
from guardbit.vectors.stimuli import Stimulus, main_shape

_SEED = 14_142
_MOST_CORNERS = 8
_RANDOM = 4
_MOST_ILLEGAL = 24

Taps = tuple[int, ...]


@dataclass(frozen=True)
class Illegal:
    """All cells of a box that may not be loaded so, and what is wrong with them."""

    name: str
    cells: Taps


def nominal(f: Filter) -> Taps:
    """Return the integers of the only pass, in the order of its terms."""
    return tuple(term.integer for term in f.passes[0].kernel.terms)


def legal_loadings(f: Filter) -> tuple[Taps, ...]:
    """Return loadings other than the nominal one, in the order of the terms; none if fixed.

    First those at the ends of what may be loaded, then some at random; the same each time.
    """
    s = registers_of(f)
    if s is None:
        return ()
    own = nominal(f)
    corners = (*corner_loadings(s), *s.kernels)[:_MOST_CORNERS]
    made = (*corners, *_random(s, (own, *corners)))
    return tuple(taps for taps in dict.fromkeys(made) if taps != own)


def _random(s: TapSet, known: tuple[Taps, ...]) -> Iterator[Taps]:
    """Yield legal loadings, each a walk from a known one that stays among legal ones.

    A step moves one tap, or two by as much in opposite ways, so that a sum can be kept.
    """
    rng = np.random.default_rng(_SEED)
    count = len(s.cells)
    for number in range(0 if s.kernels else _RANDOM):
        taps = known[number % len(known)]
        for _ in range(4 * count):
            a, b = rng.integers(0, count, 2).tolist()
            # steps of all sizes: near a limit, or with a sum to keep, only small ones are legal
            wide = (s.greatest[a] - s.least[a]) >> int(rng.integers(0, 32))
            by = int(rng.integers(-max(wide, 1), max(wide, 1), endpoint=True))
            for other in (0, -by):
                moved = _moved(_moved(taps, a, by), b, other)
                if is_member(s, moved):
                    taps = moved
                    break
        yield taps


def _moved(taps: Taps, index: int, by: int) -> Taps:
    return (*taps[:index], taps[index] + by, *taps[index + 1 :])


def extremes(f: Filter) -> Iterator[Stimulus]:
    """Yield two frames in whose middle the sum is as large, and as small, as these taps give.

    Where the frame is too small for a tap the border reads some other pixel.
    """
    low, high = f.input.low, f.input.high
    height, width = main_shape(f)
    middle = []
    for axis, length in enumerate((height, width)):
        at = positions(axis_of(f, axis), f.geometry.extent, length)
        if not at:
            return
        middle.append(at[len(at) // 2])
    for name, ends in (("greatest", (low, high)), ("least", (high, low))):
        frame = np.full((height, width, f.geometry.channels), ends[0], np.int64)
        for term in f.passes[0].kernel.terms:
            row, column = middle[0] + term.dy, middle[1] + term.dx
            if 0 <= row < height and 0 <= column < width:
                frame[row, column] = ends[term.integer > 0]
        yield Stimulus(f"{name}-sum", Purpose.WITNESS, frame)


def illegal_loadings(f: Filter, word: tuple[int, bool]) -> tuple[Illegal, ...]:
    """Return loadings, as cells of type `word` (bits, signed), that have to be refused."""
    s = registers_of(f)
    if s is None:
        return ()
    held = format_range(*word)

    def refused(candidates: Iterator[tuple[str, Taps]]) -> list[Illegal]:
        return [
            Illegal(name, cells)
            for name, cells in candidates
            if min(cells) >= held.low and max(cells) <= held.high and not _is_legal(s, cells)
        ]

    by_cell = refused(_cell_candidates(f, s))
    # spread over all kinds, of which there are four a tap
    step = -(-len(by_cell) // _MOST_ILLEGAL) | 1
    return (*refused(_whole_candidates(f, s)), *by_cell[::step])


def _whole_candidates(f: Filter, s: TapSet) -> Iterator[tuple[str, Taps]]:
    """Yield loadings that may be illegal for all their taps together, by name."""
    yield "all-least", raster(s, s.least)
    yield "all-greatest", raster(s, s.greatest)
    yield "spread", raster(s, _spread(s, nominal(f)))
    yield "all-zero", (0,) * s.count


def _cell_candidates(f: Filter, s: TapSet) -> Iterator[tuple[str, Taps]]:
    """Yield loadings that may be illegal for one tap, by name."""
    own = nominal(f)
    for cell in sorted({*range(s.count)} - {*s.cells}):
        yield f"outside-{cell}", _put(raster(s, own), cell, 1)
    for number, cell in enumerate(s.cells):
        yield f"above-{cell}", raster(s, _put(own, number, s.greatest[number] + 1))
        yield f"below-{cell}", raster(s, _put(own, number, s.least[number] - 1))
        yield f"more-{cell}", raster(s, _moved(own, number, 1))
        yield f"less-{cell}", raster(s, _moved(own, number, -1))


def _spread(s: TapSet, taps: Taps) -> Taps:
    """Return taps of the same sum, and large magnitudes: a few rise far, all others fall."""
    rise = sorted(range(len(taps)), key=lambda k: taps[k] - s.greatest[k])
    fall = sorted(range(len(taps)), key=lambda k: s.least[k] - taps[k])
    for a, b in itertools.product(rise, fall):
        # what has risen does not fall again
        if rise.index(a) < rise.index(b):
            by = min(s.greatest[a] - taps[a], taps[b] - s.least[b])
            taps = _moved(_moved(taps, a, by), b, -by)
    return taps


def _put(taps: Taps, index: int, value: int) -> Taps:
    return (*taps[:index], value, *taps[index + 1 :])


def _is_legal(s: TapSet, cells: Taps) -> bool:
    taps = tuple(cells[cell] for cell in s.cells)
    return raster(s, taps) == cells and is_member(s, taps)
