"""Choice of C integers for intervals."""

from collections.abc import Iterable

from guardbit.arith.intervals import contains, hull
from guardbit.arith.words import format_range
from guardbit.model.plan import Cell
from guardbit.model.sizing import Interval


class TooWideError(ValueError):
    """A number needs more than 64 bits; its one argument is the interval."""


INT16 = Cell(16, True)
INT32 = Cell(32, True)
INT64 = Cell(64, True)
UINT64 = Cell(64, False)


def cell_range(cell: Cell) -> Interval:
    """Return all numbers that a cell holds."""
    return format_range(cell.bits, cell.signed)


def fits(values: Interval, cell: Cell) -> bool:
    """Return whether a cell holds every number of an interval."""
    return contains(cell_range(cell), values)


def work_cell(values: Iterable[Interval]) -> Cell:
    """Return the first of int32, int64 and uint64 that holds all intervals.

    Arithmetic is done in no narrower type, so that C's promotions never change its meaning.
    Raises TooWideError.
    """
    whole = hull(values)
    for cell in (INT32, INT64, UINT64):
        if fits(whole, cell):
            return cell
    raise TooWideError(whole)


def storage_cell(values: Interval) -> Cell:
    """Return the smallest C integer that holds an interval, unsigned if there is a choice.

    Raises TooWideError.
    """
    for bits in (8, 16, 32, 64):
        for signed in (False, True):
            if fits(values, Cell(bits, signed)):
                return Cell(bits, signed)
    raise TooWideError(values)
