"""Border classes: how many of the taps' rows and columns a position reads outside the image.

Along an axis the class of an output position is (before, after): how many of the offsets in
use read before the first pixel, and how many behind the last. Two positions of one class
treat the same taps as outside.
"""

from collections.abc import Iterable
from dataclasses import dataclass
from typing import TypeAlias

import numpy as np

from guardbit.model.filter import Axis, Filter
from guardbit.reference.borders import kept

AxisClass: TypeAlias = tuple[int, int]


@dataclass(frozen=True)
class Site:
    """A border class along one axis, and the least length and output index that has it."""

    label: AxisClass
    length: int
    index: int


def offsets(filter: Filter, axis: int) -> tuple[int, ...]:
    """Return the distinct offsets that the taps read along an axis (0: rows), ascending.

    Both passes count; the pass that does not move along the axis adds nothing.
    """
    found = {0} if len(filter.passes) > 1 else set()
    for which in filter.passes:
        found |= {(term.dy, term.dx)[axis] for term in which.kernel.terms}
    return tuple(sorted(found)) or (0,)


def axis_of(filter: Filter, axis: int) -> Axis:
    """Return the geometry of rows (0) or columns (1)."""
    return (filter.geometry.rows, filter.geometry.columns)[axis]


def labels(filter: Filter, axis: int, length: int) -> tuple[AxisClass, ...]:
    """Return the class of each output position along an axis of `length` pixels."""
    positions = kept(axis_of(filter, axis), filter.geometry.extent, length)
    reads = np.array(offsets(filter, axis))
    return tuple(
        (int((reads + at < 0).sum()), int((reads + at >= length).sum())) for at in positions
    )


def sites(filter: Filter, axis: int, lengths: Iterable[int]) -> tuple[Site, ...]:
    """Return every class that an axis of one of the lengths has, each where it comes first."""
    found: dict[AxisClass, Site] = {}
    for length in lengths:
        for index, label in enumerate(labels(filter, axis, length)):
            found.setdefault(label, Site(label, length, index))
    return tuple(found.values())


def lengths(filter: Filter, axis: int, most: int) -> tuple[int, ...]:
    """Return the lengths that together have every class, at most `most` of them, ascending.

    Beyond the kernel's span plus one turn of step and spacing no new class comes.
    """
    along = axis_of(filter, axis)
    reads = offsets(filter, axis)
    span = max(*reads, along.greatest, 0) - min(*reads, along.least, 0) + 1
    low, high = along.sizes
    last = max(low, min(high, span + along.step + along.spacing - 1))
    every = range(low, last + 1)
    if len(every) <= most:
        return tuple(every)
    near = (low, low + 1, low + 2, span - 1, span, span + 1, last - 1, last)
    spread = np.linspace(low, last, max(2, most - len(near))).astype(int).tolist()
    return tuple(sorted({n for n in (*near, *spread) if low <= n <= last}))


def named(label: tuple[AxisClass, AxisClass]) -> str:
    """Return a class in words: "interior", or what is read outside on which side."""
    (above, below), (left, right) = label
    parts = [
        f"{count} {unit}{'s' if count != 1 else ''} {where}"
        for count, unit, where in (
            (above, "row", "above"),
            (below, "row", "below"),
            (left, "column", "to the left"),
            (right, "column", "to the right"),
        )
        if count
    ]
    return "interior" if not parts else "reads outside: " + ", ".join(parts)
