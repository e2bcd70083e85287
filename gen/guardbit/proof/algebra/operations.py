"""Operations on functions that are affine in pieces: each returns the pieces of its result."""

from collections.abc import Callable, Sequence

import numpy as np

from guardbit.proof.algebra.pieces import (
    LIMIT,
    MOST_DENSE,
    MOST_PIECES,
    Ints,
    Pieces,
    Row,
    TooManyPiecesError,
    check_product,
    dense,
    extremes,
)


def affine(first: int, last: int, slope: int, offset: int) -> Row:
    """Return slope * x + offset."""
    widest = max(abs(first), abs(last))
    if widest >= LIMIT or widest * abs(slope) + abs(offset) >= LIMIT:
        raise TooManyPiecesError
    return np.array([first]), np.array([slope]), np.array([offset]), last


def scaled(f: Pieces, factor: int, add: int) -> Row:
    """Return factor * f + add."""
    check_product(f, factor, add)
    return f.starts, f.slopes * factor, f.offsets * factor + add, f.last


def total(f: Pieces, g: Pieces) -> Row:
    """Return f + g."""
    check_product(f, 2, 0)
    check_product(g, 2, 0)
    starts, ((s, o), (t, p)) = _common(f, g)
    return starts, s + t, o + p, f.last


def chosen(mask: Pieces, f: Pieces, g: Pieces) -> Row:
    """Return f where the mask is 1, else g."""
    starts, ((ms, mo), (s, o), (t, p)) = _common(_flat(mask), f, g)
    holds = ms * starts + mo != 0
    return starts, np.where(holds, s, t), np.where(holds, o, p), f.last


def negative(f: Pieces) -> Row:
    """Return 1 where f < 0, else 0."""
    # a rising piece is negative before ceil(-offset / slope), a falling one after -offset / slope
    rising, falling = f.slopes > 0, f.slopes < 0
    slope = np.where(f.slopes == 0, 1, f.slopes)
    turn = np.where(rising, -(f.offsets // slope), 0)
    turn = np.where(falling, f.offsets // -slope + 1, turn)
    inner = (rising | falling) & (turn > f.starts) & (turn <= f.ends)
    starts = np.unique(np.concatenate((f.starts, turn[inner])))
    at = np.searchsorted(f.starts, starts, side="right") - 1
    signs = (f.slopes[at] * starts + f.offsets[at] < 0).astype(np.int64)
    return starts, np.zeros_like(signs), signs, f.last


def floor_divided(f: Pieces, n: int) -> Row:
    """Return floor(f / n), n > 0."""
    if n >= LIMIT:
        raise TooManyPiecesError
    whole = (f.slopes + n // 2) // n
    rest = f.slopes - n * whole
    if not rest.any():
        return f.starts, whole, f.offsets // n, f.last
    if n * max(abs(f.first), abs(f.last)) + int(np.abs(f.offsets).max()) >= LIMIT:
        raise TooManyPiecesError
    # each piece falls into steps of the remainder's floor, up or down
    begin, end = (rest * f.starts + f.offsets) // n, (rest * f.ends + f.offsets) // n
    counts = np.abs(end - begin) + 1
    # the sum in floats cannot wrap
    if float(counts.sum(dtype=np.float64)) > MOST_PIECES:
        raise TooManyPiecesError
    piece = np.repeat(np.arange(len(counts)), counts)
    nth = np.arange(len(piece)) - np.repeat(np.cumsum(counts) - counts, counts)
    r, c = rest[piece], f.offsets[piece]
    values = begin[piece] + np.where(r < 0, -nth, nth)
    size = np.where(r == 0, 1, np.abs(r))
    # the first argument at which r x + c reaches n * value, or falls below the value before
    rising, falling = -((c - n * values) // size), (c - n * (values + 1)) // size + 1
    starts = np.where(nth == 0, f.starts[piece], np.where(r < 0, falling, rising))
    return starts, whole[piece], values, f.last


def product(f: Pieces, g: Pieces) -> Row:
    """Return f * g; where both have a slope, argument by argument."""
    starts, ((s, o), (t, p)) = _common(f, g)
    if ((s != 0) & (t != 0)).any():
        return pointwise(f, g, lambda a, b: a * b)
    for one, other in ((f, g), (g, f)):
        check_product(one, max(map(abs, extremes(other))), 0)
    return starts, s * p + t * o, o * p, f.last


def pointwise(f: Pieces, g: Pieces, of: Callable[[int, int], int]) -> Row:
    """Return of(f, g), once where both are constant, else argument by argument."""
    starts, ((s, o), (t, p)) = _common(f, g)
    ends = np.append(starts[1:] - 1, f.last)
    counts = np.where((s == 0) & (t == 0), 1, ends - starts + 1)
    if float(counts.sum(dtype=np.float64)) > MOST_DENSE:
        raise TooManyPiecesError
    piece = np.repeat(np.arange(len(counts)), counts)
    nth = np.arange(len(piece)) - np.repeat(np.cumsum(counts) - counts, counts)
    x = starts[piece] + nth
    left, right = (s[piece] * x + o[piece]).tolist(), (t[piece] * x + p[piece]).tolist()
    values = [of(a, b) for a, b in zip(left, right, strict=True)]
    return _constants(x, values, f.last)


def looked_up(entries: Sequence[int], f: Pieces) -> Row:
    """Return entries[f]; arguments that no input has may lie beyond the entries."""
    if f.last - f.first >= MOST_PIECES:
        raise TooManyPiecesError
    clipped = np.clip(np.array(dense(f)), 0, len(entries) - 1)
    values = [entries[i] for i in clipped.tolist()]
    return _constants(np.arange(f.first, f.last + 1), values, f.last)


def restricted(f: Pieces, first: int, last: int) -> Row:
    """Return f on a part of its domain."""
    at = slice(
        int(np.searchsorted(f.starts, first, side="right")) - 1,
        int(np.searchsorted(f.starts, last, side="right")),
    )
    starts = f.starts[at].copy()
    starts[0] = first
    return starts, f.slopes[at], f.offsets[at], last


def canonical(starts: Ints, slopes: Ints, offsets: Ints, last: int) -> Row:
    """Return the pieces that every function with these values has.

    The differences of neighbouring values fall into runs of equal ones. A run of at least two, or
    of zeros, is a piece; an argument between two such runs belongs to the left one; arguments of
    no such run are pieces of their own, as constants. One run alone is one piece.
    """
    if len(starts) == 1:
        if int(starts[0]) < last:
            return starts, slopes, offsets, last
        return starts, np.zeros_like(slopes), slopes * starts + offsets, last
    ends = np.append(starts[1:] - 1, last)
    values = slopes * starts + offsets
    step = np.empty(2 * len(starts) - 1, np.int64)
    count = np.ones_like(step)
    step[::2], count[::2] = slopes, ends - starts
    step[1::2] = values[1:] - (slopes * ends + offsets)[:-1]
    step, count = step[count > 0], count[count > 0]
    begins = np.append(True, step[1:] != step[:-1])
    at = np.flatnonzero(begins)
    run, counts = step[at], np.add.reduceat(count, at)
    if len(run) == 1:
        return starts[:1], run, values[:1] - run * starts[0], last
    first = np.append(starts[0], starts[0] + np.cumsum(counts)[:-1])
    value = np.append(values[0], values[0] + np.cumsum(run * counts)[:-1])
    owns = (counts > 1) | (run == 0)
    before = np.append(False, owns[:-1])
    kept = owns | ~before
    made = (first + (owns & before))[kept]
    if int(np.abs(run[owns]).max(initial=0)) * max(abs(int(starts[0])), abs(last)) >= LIMIT:
        raise TooManyPiecesError
    slope = np.where(owns, run, 0)[kept]
    offset = np.where(owns, value - run * first, value)[kept]
    if owns[-1]:
        return made, slope, offset, last
    end = value[-1] + run[-1]
    return np.append(made, last), np.append(slope, 0), np.append(offset, end), last


def _flat(mask: Pieces) -> Pieces:
    """Return a function of values 0 and 1 in pieces on each of which it is constant."""
    if not mask.slopes.any():
        return mask
    # such a piece has no more than two arguments
    starts = np.unique(np.concatenate((mask.starts, mask.ends[mask.slopes != 0])))
    at = np.searchsorted(mask.starts, starts, side="right") - 1
    values = mask.slopes[at] * starts + mask.offsets[at]
    return Pieces(-1, starts, np.zeros_like(values), values, mask.last)


def _common(*functions: Pieces) -> tuple[Ints, list[tuple[Ints, Ints]]]:
    """Return the starts of common pieces, and slopes and offsets of each function on them."""
    starts = functions[0].starts
    for f in functions[1:]:
        if len(f.starts) > 1:
            starts = np.union1d(starts, f.starts)
    if len(starts) > MOST_PIECES:
        raise TooManyPiecesError
    rows = []
    for f in functions:
        at = np.searchsorted(f.starts, starts, side="right") - 1
        rows.append((f.slopes[at], f.offsets[at]))
    return starts, rows


def _constants(starts: Ints, values: Sequence[int], last: int) -> Row:
    if max(map(abs, values)) >= LIMIT:
        raise TooManyPiecesError
    return starts, np.zeros(len(values), np.int64), np.array(values, np.int64), last
