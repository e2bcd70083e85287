"""Image sizes that stand for all others: by how reads fold at borders, and by the code's units."""

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from itertools import product

from guardbit.model.filter import Axis, Filter
from guardbit.model.routine import Routine
from guardbit.proof.contract.geometry import outputs

Size = tuple[int, int]
"""Height and width."""

# products of taps and outputs: in all sizes of a proof, and in one size that is run often
MOST_WORK = 12_000_000
MOST_WORK_SHORT = 250_000
_MOST_PAIRS = 5_000


@dataclass(frozen=True)
class Reach:
    """How far taps reach along an axis, towards smaller and greater indices."""

    before: int
    after: int

    @property
    def most(self) -> int:
        """Return the farther of both."""
        return max(self.before, self.after)

    @property
    def span(self) -> int:
        """Return how many rows or columns one output's reads lie across."""
        return self.before + self.after + 1

    @property
    def interior(self) -> int:
        """Return the least length at which an output's reads touch neither border."""
        return 2 * self.most + 1


def reach_of(f: Filter, axis: int) -> Reach:
    """Return the reach along rows (0) or columns (1), spacing and origin included."""
    first = last = 0
    for each in f.passes:
        own = [(t.dy, t.dx)[axis] for t in each.kernel.live] or [0]
        first, last = first + min(own), last + max(own)
    box = axis_of(f, axis)
    return Reach(max(-first, box.greatest, 0), max(last, -box.least, 0))


def axis_of(f: Filter, axis: int) -> Axis:
    """Return the geometry along rows (0) or columns (1)."""
    return (f.geometry.rows, f.geometry.columns)[axis]


def limits_of(routine: Routine, axis: int) -> tuple[int, int]:
    """Return the least and greatest legal height (0) or width (1)."""
    return (routine.heights, routine.widths)[axis]


def outputs_of(f: Filter, axis: int, length: int) -> range:
    """Return the positions of the outputs along an axis of an image of that length."""
    return outputs(axis_of(f, axis), f.geometry.extent, length)


def lengths(f: Filter, routine: Routine, axis: int) -> list[int]:
    """Return the lengths of an axis that are proved: all legal ones to 2 R + 2, and some more.

    R is the reach of the taps, spacing and origin included. More: about the ring of rows,
    about the units in which the code takes its steps, and with a step between outputs one for
    each distance, up to the reach, of the last output from the border.
    """
    reach, own = reach_of(f, axis), axis_of(f, axis)
    least, greatest = limits_of(routine, axis)
    first = max(least, 1)
    found = set(range(first, max(2 * reach.most + 2, first + 2) + 1))
    for unit in _units(f, routine, axis):
        found |= {n + d for n in (unit, 2 * unit) for d in (-1, 0, 1)}
    if own.step > 1:
        found |= set(after_last(own, reach))
    return sorted(n for n in found if first <= n <= greatest)


def _units(f: Filter, routine: Routine, axis: int) -> set[int]:
    own = axis_of(f, axis)
    units = {reach_of(f, axis).span, own.step, own.spacing}
    return {u for u in (units | set(routine.units) if axis == 1 else units) if u > 1}


def after_last(own: Axis, reach: Reach) -> range:
    """Return lengths of an image whose last output lies 0, 1, ... pixels from the border."""
    beyond = own.phase + own.step * -(-reach.most // own.step) + 1
    return range(beyond, beyond + min(own.step, reach.most + 1))


def work_of(f: Filter, size: Size) -> int:
    """Return how many products a run at that size takes, about."""
    rows, columns = (len(outputs_of(f, axis, size[axis])) for axis in (0, 1))
    taps = sum(len(each.kernel.live) for each in f.passes)
    return (rows * columns + size[1]) * f.geometry.channels * max(taps, 1)


def sizes(f: Filter, routine: Routine, *, thorough: bool) -> list[Size]:
    """Return the sizes that are proved: all pairs of lengths, or if these are too many a choice.

    Rows and columns fold apart from each other. So each height goes with a width in the reach
    of the taps and with one beyond it, and each width with such heights; if that is too much
    too, one length for each way to fold does, with the least of the other axis. A size whose
    work alone is beyond all bounds is left out.
    """
    budget = MOST_WORK if thorough else MOST_WORK_SHORT
    heights, widths = lengths(f, routine, 0), lengths(f, routine, 1)
    few = _few(f, heights, 0), _few(f, widths, 1)
    if len(heights) * len(widths) <= _MOST_PAIRS:
        chosen = {*product(heights, widths)}
        if _work(f, chosen) <= budget:
            return _ordered(chosen)
    if 3 * (len(heights) + len(widths)) <= _MOST_PAIRS:
        chosen = {*product(heights, few[1]), *product(few[0], widths)}
        if _work(f, chosen) <= budget:
            return _ordered(chosen)
    ordered = _ordered(_by_class(f, heights, widths, few))
    return [s for s in ordered if s == ordered[0] or work_of(f, s) <= 2 * budget]


def _work(f: Filter, chosen: Iterable[Size]) -> int:
    return sum(work_of(f, size) for size in chosen)


def _ordered(chosen: Iterable[Size]) -> list[Size]:
    return sorted(chosen, key=lambda size: (size[0] * size[1], size))


def _few(f: Filter, all_: Sequence[int], axis: int) -> list[int]:
    """Return the least length, the greatest in the taps' reach, and one that goes beyond it."""
    reach = reach_of(f, axis)
    small = [n for n in all_ if n <= reach.most + 1]
    large = [n for n in all_ if n >= reach.interior]
    return sorted({all_[0], *small[-1:], *(large[:1] or all_[-1:])})


def _by_class(
    f: Filter, heights: Sequence[int], widths: Sequence[int], few: tuple[list[int], list[int]]
) -> set[Size]:
    tall, wide = _classes(f, heights, 0), _classes(f, widths, 1)
    least = product(tall, few[1][:1]), product(few[0][:1], wide)
    return {*least[0], *least[1], *product(few[0][:2], few[1][:2]), (few[0][-1], few[1][-1])}


def _classes(f: Filter, all_: Sequence[int], axis: int) -> list[int]:
    """Return lengths one for each way to fold: about the reach, twice it, and the spacing."""
    reach, own = reach_of(f, axis), axis_of(f, axis)
    marks = {1, 2, own.spacing, reach.before, reach.after, reach.span, 2 * reach.most}
    near = {mark + d for mark in marks for d in (0, 1, 2)}
    near |= {*after_last(own, reach)[:3]} if own.step > 1 else set()
    return [n for n in all_ if n in near] or list(all_[:1])


def middle(f: Filter, routine: Routine, most: int) -> Size:
    """Return a size with an interior, or if its work is more than `most` one nearest to that."""
    heights, widths = lengths(f, routine, 0), lengths(f, routine, 1)
    tall, wide = beyond(f, heights, 0), beyond(f, widths, 1)
    for size in ((tall, wide), (heights[0], wide), (tall, widths[0])):
        if work_of(f, size) <= most:
            return size
    return heights[0], widths[0]


def beyond(f: Filter, all_: Sequence[int], axis: int) -> int:
    """Return the least length with an interior; the greatest if there is none."""
    least = max(reach_of(f, axis).interior, 3)
    return next((n for n in all_ if n >= least), all_[-1])


def with_outputs(f: Filter, routine: Routine, axis: int, count: int, first: int) -> int:
    """Return the least legal length, from `first` on, with so many outputs."""
    least, greatest = limits_of(routine, axis)
    length = min(max(least, first, 1), greatest)
    while len(outputs_of(f, axis, length)) < count and length < greatest:
        length += 1
    return length
