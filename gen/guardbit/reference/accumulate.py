"""The register that sums coefficient * (code - pedestal), over a block of outputs at once."""

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from itertools import groupby

import numpy as np

from guardbit.model.enums import BorderMode, Overflow, Preload
from guardbit.model.filter import Accumulator, Pass, Term
from guardbit.reference.borders import border_index
from guardbit.reference.words import Array, limits, wrapped


@dataclass(frozen=True, eq=False)
class Plane:
    """What a pass reads: codes less their pedestal, in a type that holds every sum.

    `cells` is (rows held, columns held, channels). Rows that are not in `rows` are found by
    the border's index map (`mode`, `pitch`; `rows` is then 0..height-1), whose index "height"
    is one more row of cells, the constant's. All columns that are read are held.
    """

    cells: Array
    rows: range
    columns: range
    mode: BorderMode = BorderMode.CONSTANT
    pitch: int = 1

    def lines(self, wanted: range) -> Array:
        """Return the rows at the positions wanted, all columns of them."""
        if wanted[0] >= self.rows.start and wanted[-1] < self.rows.stop:
            return self.cells[_places(self.rows, wanted)]
        return self.cells[border_index(wanted, len(self.rows), self.mode, self.pitch)]


def _places(held: range, wanted: range) -> slice:
    first, last = held.index(wanted[0]), held.index(wanted[-1])
    return slice(first, last + 1, wanted.step // held.step)


def moved(positions: range, offset: int) -> range:
    """Return the positions that a tap of that offset reads."""
    return range(positions.start + offset, positions.stop + offset, positions.step)


def start_value(which: Pass) -> int:
    """Return what the register holds before the first add: zero or the rounding constant."""
    if which.accumulator.preload is Preload.ZERO:
        return 0
    start = 1 << (-which.requantiser.exponent - 1)
    if which.accumulator.overflow is Overflow.SATURATE:
        start = min(start, register_limits(which.accumulator)[1])
    return start


def register_limits(accumulator: Accumulator) -> tuple[int, int]:
    """Return the numbers the register holds. Raises ValueError while its width is open."""
    if accumulator.bits is None:
        raise ValueError("the accumulator's width is not resolved")
    return limits(accumulator.bits, accumulator.signed)


def sum_bound(which: Pass, reach: int) -> int:
    """Return a bound on every product and partial sum for |code - pedestal| <= reach.

    Clamping never makes a sum larger, since every register holds zero.
    """
    weight = sum(abs(term.integer) for term in which.kernel.terms)
    return start_value(which) + weight * max(reach, 1)


def non_zero(which: Pass) -> list[Term]:
    """Return the taps that add something, in raster order of the pixel that they read."""
    taps = [term for term in which.kernel.terms if term.integer]
    return sorted(taps, key=lambda term: (term.dy, term.dx))


def accumulate(plane: Plane, which: Pass, rows: range, columns: range) -> Array:
    """Return the final accumulator values at rows x columns (neither empty), per channel.

    Sums that wrap are taken modulo 2**bits once, at the end: residues add, so that this is
    the same number as wrapping at every add.
    """
    shape = len(rows), len(columns), plane.cells.shape[2]
    total = np.full(shape, start_value(which), plane.cells.dtype)
    accumulator = which.accumulator
    clamp = accumulator.overflow is Overflow.SATURATE
    for product in _products(plane, non_zero(which), rows, columns):
        total += product
        if clamp:
            _clamp(total, accumulator)
    if accumulator.overflow is Overflow.WRAP:
        low, high = register_limits(accumulator)
        return wrapped(total, (high - low).bit_length(), accumulator.signed)
    return total


def _products(plane: Plane, taps: Sequence[Term], rows: range, columns: range) -> Iterable[Array]:
    """Yield coefficient * (code - pedestal), tap after tap, in one buffer that is reused."""
    product = np.empty((len(rows), len(columns), plane.cells.shape[2]), plane.cells.dtype)
    for dy, taps_of_row in groupby(taps, key=lambda term: term.dy):
        lines = plane.lines(moved(rows, dy))
        for tap in taps_of_row:
            read = lines[:, _places(plane.columns, moved(columns, tap.dx))]
            yield np.multiply(read, tap.integer, out=product)


def _clamp(total: Array, accumulator: Accumulator) -> None:
    low, high = register_limits(accumulator)
    word = np.iinfo(total.dtype) if total.dtype != object else None
    np.maximum(total, low if word is None else max(low, word.min), out=total)
    np.minimum(total, high if word is None else min(high, word.max), out=total)
