"""The least ideal code by the value of the sum: a fractional knapsack, solved for all sums.

Over real inputs, the least of a linear form for a given value of another is a convex function
of that value, linear between corners: inputs are taken in order of ideal per amount (G. B.
Dantzig, "Discrete-variable extremum problems", Operations Research 5, 1957). What several
independent inputs do together has all their linear pieces, sorted by slope.
"""

from bisect import bisect_left, bisect_right
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from fractions import Fraction
from functools import cached_property
from itertools import groupby, pairwise
from math import lcm
from operator import itemgetter

Corner = tuple[int, int]
RealCorner = tuple[Fraction, Fraction]


@dataclass(frozen=True)
class Part:
    """The least cost of one input by its amount: convex, by corners of ascending amount.

    `count` inputs are alike.
    """

    corners: tuple[Corner, ...]
    count: int


@dataclass(frozen=True)
class Linear:
    """(constant + slope * n) / denominator for the integers n of first..last."""

    first: int
    last: int
    constant: int
    slope: int
    denominator: int


@dataclass(frozen=True)
class Envelope:
    """A convex function by its corners: amounts in 1/`fine`, costs in 1/`unit`, both ascending."""

    amounts: tuple[int, ...]
    costs: tuple[int, ...]
    fine: int
    unit: int

    @classmethod
    def of(cls, parts: Iterable[Part], start: Corner, fine: int, unit: int) -> "Envelope":
        """Return the least cost of all parts together and of what `start` adds."""
        amount, cost = start
        pieces: list[Corner] = []
        for part in parts:
            amount += part.corners[0][0] * part.count
            cost += part.corners[0][1] * part.count
            for (a, c), (b, d) in pairwise(part.corners):
                pieces.append(((b - a) * part.count, (d - c) * part.count))
        amounts, costs = [amount], [cost]
        for _, alike in groupby(_by_slope(pieces), key=itemgetter(0)):
            lengths, rises = zip(*((length, rise) for _, length, rise in alike), strict=True)
            amounts.append(amounts[-1] + sum(lengths))
            costs.append(costs[-1] + sum(rises))
        return cls(tuple(amounts), tuple(costs), fine, unit)

    @cached_property
    def slopes(self) -> tuple[Fraction, ...]:
        """Return the slope of each piece, cost per amount, ascending."""
        return tuple(
            Fraction((d - c) * self.fine, (b - a) * self.unit)
            for (a, c), (b, d) in pairwise(zip(self.amounts, self.costs, strict=True))
        )

    def corner_below(self, slope: Fraction) -> int:
        """Return the number of the corner at which the function less slope * amount is least."""
        return bisect_left(self.slopes, slope)

    def amount(self, corner: int) -> Fraction:
        """Return the amount at a corner."""
        return Fraction(self.amounts[corner], self.fine)

    def at(self, amount: Fraction | int) -> Fraction:
        """Return the least cost of an amount within the ends."""
        scaled = amount * self.fine
        i = self._piece(scaled)
        if i + 1 == len(self.amounts):
            return Fraction(self.costs[i], self.unit)
        length, rise = self.amounts[i + 1] - self.amounts[i], self.costs[i + 1] - self.costs[i]
        return (self.costs[i] + Fraction(scaled - self.amounts[i]) * rise / length) / self.unit

    def _piece(self, scaled: Fraction | int) -> int:
        found = bisect_right(self.amounts, scaled) - 1
        return max(min(found, len(self.amounts) - 2), 0)

    def within(self, level: Fraction) -> tuple[Fraction, Fraction] | None:
        """Return the ends of the amounts whose cost is at most `level`; None if there are none."""
        wanted = level * self.unit
        if min(self.costs) > wanted:
            return None
        inside = [i for i, cost in enumerate(self.costs) if cost <= wanted]
        ends = []
        for i, beyond in ((inside[0], inside[0] - 1), (inside[-1], inside[-1] + 1)):
            amount = Fraction(self.amounts[i])
            if 0 <= beyond < len(self.amounts):
                run, rise = (
                    self.amounts[beyond] - self.amounts[i],
                    self.costs[beyond] - self.costs[i],
                )
                amount += Fraction(wanted - self.costs[i]) * run / rise
            ends.append(amount / self.fine)
        return ends[0], ends[1]

    def linear(self, base: int, step: int, n: int) -> Linear:
        """Return the function of n at the amounts base + step * n, on the piece that has n."""
        i = self._piece((base + step * n) * self.fine)
        if i + 1 == len(self.amounts) or not step:
            value = self.at(base + step * n)
            return Linear(n, n, value.numerator, 0, value.denominator)
        a, b = self.amounts[i], self.amounts[i + 1]
        length, rise = b - a, self.costs[i + 1] - self.costs[i]
        origin, pitch = base * self.fine, step * self.fine
        constant = self.costs[i] * length + (origin - a) * rise
        first, last = -((origin - a) // pitch), (b - origin) // pitch
        return Linear(first, last, constant, pitch * rise, self.unit * length)

    def clipped(self, low: Fraction, high: Fraction) -> "Envelope | None":
        """Return the function on the amounts of low..high alone; None if there are none."""
        corners = [
            (self.amount(i), Fraction(self.costs[i], self.unit)) for i in range(len(self.amounts))
        ]
        cut = clipped_corners(corners, low, high)
        return from_corners(cut) if cut else None


def _by_slope(pieces: Sequence[Corner]) -> list[tuple[int, int, int]]:
    """Return (key, length, rise) by ascending slope; keys are equal where slopes are.

    Ratios with denominators below 2**b differ by at least 4**-b, if they do.
    """
    widest = max((length for length, _ in pieces), default=1).bit_length()
    made = [((rise << 2 * widest) // length, length, rise) for length, rise in pieces if length]
    return sorted(made)


def from_corners(corners: Sequence[RealCorner]) -> Envelope:
    """Return the envelope with given corners, convex and ascending."""
    fine, unit = scale_of(corners)
    amounts = tuple(int(amount * fine) for amount, _ in corners)
    return Envelope(amounts, tuple(int(cost * unit) for _, cost in corners), fine, unit)


def scale_of(corners: Iterable[RealCorner]) -> tuple[int, int]:
    """Return the least common denominators of the amounts and of the costs."""
    fine = unit = 1
    for amount, cost in corners:
        fine, unit = lcm(fine, amount.denominator), lcm(unit, cost.denominator)
    return fine, unit


def clipped_corners(
    corners: Sequence[RealCorner], low: Fraction, high: Fraction
) -> list[RealCorner]:
    """Return the corners of a function by corners on low..high; none if it is not defined there."""
    low, high = max(low, corners[0][0]), min(high, corners[-1][0])
    if low > high:
        return []
    inner = [corner for corner in corners if low < corner[0] < high]
    ends = [(low, _between(corners, low))]
    if high > low:
        ends.append((high, _between(corners, high)))
    return [ends[0], *inner, *ends[1:]]


def _between(corners: Sequence[RealCorner], amount: Fraction) -> Fraction:
    for (a, c), (b, d) in pairwise(corners):
        if a <= amount <= b and a < b:
            return c + (d - c) * (amount - a) / (b - a)
    return next(cost for a, cost in corners if a == amount)


def lower_hull(points: Iterable[RealCorner]) -> list[RealCorner]:
    """Return the corners of the greatest convex function that no point lies below.

    A. M. Andrew's monotone chain (Information Processing Letters 9, 1979).
    """
    hull: list[RealCorner] = []
    for point in sorted(points):
        if hull and hull[-1][0] == point[0]:
            continue
        while len(hull) > 1 and _turns_down(hull[-2], hull[-1], point):
            hull.pop()
        hull.append(point)
    return hull


def _turns_down(a: RealCorner, b: RealCorner, c: RealCorner) -> bool:
    return (b[1] - a[1]) * (c[0] - b[0]) >= (c[1] - b[1]) * (b[0] - a[0])
