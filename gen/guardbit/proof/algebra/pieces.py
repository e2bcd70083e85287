"""Functions of one integer that are affine in pieces, and what can be asked of them."""

from math import gcd
from typing import TypeAlias

import numpy as np
from numpy.typing import NDArray

Ints: TypeAlias = NDArray[np.int64]

Row: TypeAlias = tuple[Ints, Ints, Ints, int]
"""Starts, slopes and offsets of pieces, and the last argument of all."""

Floor: TypeAlias = tuple[int, int, int]
"""(g, q, m) stands for floor((g * x + q) / m)."""

MOST_PIECES = 1 << 20
MOST_DENSE = 1 << 17
LIMIT = 1 << 61
"""Slopes times arguments, offsets and values stay below: NumPy's 64 bits would wrap silently."""


class TooManyPiecesError(Exception):
    """A function has more pieces, or larger numbers, than can be worked with."""


class Pieces:
    """f(x) = slopes[i] * x + offsets[i] for x from starts[i] to before starts[i + 1] or to `last`.

    `domain` is the least and the greatest argument; `floors` are floors that f is known to equal.
    """

    __slots__ = ("domain", "ends", "floors", "last", "number", "offsets", "slopes", "starts")

    def __init__(self, number: int, starts: Ints, slopes: Ints, offsets: Ints, last: int) -> None:
        self.number = number
        self.starts = starts
        self.slopes = slopes
        self.offsets = offsets
        self.last = last
        self.ends = np.append(starts[1:] - 1, last)
        self.domain = int(starts[0]), last
        self.floors: tuple[Floor, ...] = ()

    @property
    def first(self) -> int:
        """Return the least argument."""
        return self.domain[0]

    def at(self, x: int) -> int:
        """Return the value at x."""
        i = int(np.searchsorted(self.starts, x, side="right")) - 1
        return int(self.slopes[i]) * x + int(self.offsets[i])

    def is_affine(self) -> bool:
        """Return whether one piece is all."""
        return len(self.starts) == 1


def values_at_ends(f: Pieces) -> tuple[Ints, Ints]:
    """Return the values at the first and the last argument of each piece."""
    return f.slopes * f.starts + f.offsets, f.slopes * f.ends + f.offsets


def extremes(f: Pieces) -> tuple[int, int]:
    """Return the least and the greatest value."""
    at_starts, at_ends = values_at_ends(f)
    return (
        int(min(at_starts.min(), at_ends.min())),
        int(max(at_starts.max(), at_ends.max())),
    )


def common_divisor(f: Pieces) -> int:
    """Return the greatest common divisor of all differences of values."""
    found = 0
    long = f.ends > f.starts
    moves = f.slopes * f.starts + f.offsets - f.at(f.first)
    for numbers in (f.slopes[long], moves):
        for number in np.unique(numbers).tolist():
            found = gcd(found, number)
            if found == 1:
                return 1
    return found


def argument(f: Pieces, value: int, first: int, last: int) -> int | None:
    """Return an argument in first..last at which f has the value; None if it has it nowhere."""
    starts, ends = np.maximum(f.starts, first), np.minimum(f.ends, last)
    inside = starts <= ends
    flat = inside & (f.slopes == 0) & (f.offsets == value)
    if flat.any():
        return int(starts[flat][0])
    slope = np.where(f.slopes == 0, 1, f.slopes)
    at, rest = np.divmod(value - f.offsets, slope)
    hit = inside & (f.slopes != 0) & (rest == 0) & (starts <= at) & (at <= ends)
    return int(at[hit][0]) if hit.any() else None


def stretches(f: Pieces, first: int, last: int) -> list[tuple[int, int]]:
    """Return where a function of values 0 and 1 in first..last is 1, as ranges of arguments."""
    starts, ends = np.maximum(f.starts, first), np.minimum(f.ends, last)
    inside = starts <= ends
    starts, ends, slopes, offsets = (x[inside] for x in (starts, ends, f.slopes, f.offsets))
    at_start, at_end = slopes * starts + offsets == 1, slopes * ends + offsets == 1
    hit = at_start | at_end
    # a piece that is not flat has two arguments
    starts, ends = np.where(at_start, starts, ends), np.where(at_end, ends, starts)
    return list(zip(starts[hit].tolist(), ends[hit].tolist(), strict=True))


def dense(f: Pieces) -> list[int]:
    """Return the value at each argument."""
    x = np.arange(f.first, f.last + 1)
    at = np.searchsorted(f.starts, x, side="right") - 1
    values: list[int] = (f.slopes[at] * x + f.offsets[at]).tolist()
    return values


def check_product(f: Pieces, factor: int, add: int) -> None:
    """Refuse what 64 bits might not hold. Raises TooManyPiecesError."""
    slope, offset = int(np.abs(f.slopes).max()), int(np.abs(f.offsets).max())
    widest = max(abs(f.first), abs(f.last))
    if (slope * widest + offset) * abs(factor) + abs(add) >= LIMIT:
        raise TooManyPiecesError
