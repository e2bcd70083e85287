"""Frames with as large an error as can be found: how tight the bound on the error is.

The search starts from the sum and the real inputs at which the bound was found (sizing), rounds
these to legal codes and makes good by cheap changes what that moves. Every frame is one class'
smallest image, and its error is what the reference gives there against exact arithmetic.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction
from itertools import islice, product

import numpy as np

from guardbit.arith.words import clamp
from guardbit.model.filter import Filter
from guardbit.model.sizing import End, Sizing
from guardbit.model.vectors import Codes
from guardbit.sizing.error.inputs import Case, axis_classes, cases, class_case
from guardbit.sizing.error.peaks import Found, peak
from guardbit.sizing.error.subject import Subject, subject
from guardbit.study.adversary.attempt import attempt
from guardbit.study.adversary.pixels import Pixels, pixels_at

# classes that are tried, by their bounds
MOST_CLASSES = 4
# classes whose bounds are compared where the bound is one over none in particular
_MOST_PAIRS = 64


@dataclass(frozen=True, eq=False)
class Worst:
    """A frame of one channel with a great error at `position`, in image coordinates.

    `bound` is what the sizing says that no frame exceeds; `calm` as for `attempt`.
    """

    end: End
    frame: Codes
    position: tuple[int, int]
    error: Fraction
    bound: Fraction
    calm: bool

    @property
    def tightness(self) -> Fraction:
        """Return error / bound; 1 where the bound is attained, of whatever size."""
        if self.error == self.bound or not self.bound:
            return Fraction(int(self.error == self.bound))
        return self.error / self.bound


def adversary(sizing: Sizing) -> tuple[Worst, ...]:
    """Return the frames with the least and the greatest error found, in this order.

    They keep every register and code from wrapping, if any frame does, so that their bounds
    are `low` and `high`. Empty if no image has an output.
    """
    made = [_worst(sizing, sign) for sign in (-1, 1)]
    return tuple(worst for worst in made if worst is not None)


def _worst(sizing: Sizing, sign: int) -> Worst | None:
    f = sizing.filter
    end, bound = End.GREATEST if sign > 0 else End.LEAST, sizing.error.high
    if sign < 0:
        bound = sizing.error.low
    tried = [
        _tried(f, s, pixels, end, bound)
        for s, found in _subjects(f, sign)
        for pixels in pixels_at(s, found)
    ]
    return max(tried, key=lambda one: (one.calm, sign * one.error), default=None)


def _subjects(f: Filter, sign: int) -> list[tuple[Subject, Found]]:
    """Return classes with a great bound, the greatest first."""
    made = []
    for case in _classes(f):
        s = subject(f, case, sign)
        span = s.stairs.quiet() if s is not None else None
        found = peak(s, s.stairs, span) if s is not None and span is not None else None
        if s is not None and found is not None:
            made.append((s, found))
    return sorted(made, key=lambda one: one[1].value, reverse=True)[:MOST_CLASSES]


def _classes(f: Filter) -> Sequence[Case]:
    found = cases(f).items
    if all(case.row and case.column for case in found):
        return found
    rows, columns = axis_classes(f)
    return [class_case(f, *pair) for pair in islice(product(rows, columns), _MOST_PAIRS)]


def _tried(f: Filter, s: Subject, pixels: Pixels, end: End, bound: Fraction) -> Worst:
    row, column = s.case.row, s.case.column
    assert row is not None and column is not None
    fill = clamp(f.input.pedestal, f.input.low, f.input.high)
    frame = np.full((row.length, column.length, 1), fill, dtype=np.int64)
    for (y, x), value in pixels.items():
        frame[y, x, 0] = value + f.input.pedestal
    position = (row.position, column.position)
    made = attempt(f, frame, position)
    return Worst(end, frame, position, made.error, bound, made.calm)
