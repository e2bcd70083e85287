"""The greatest error over all values of a sum, found piece by piece, best first.

For a given sum the code is known, and the error is greatest where the ideal code is least: a
convex function of the sum. Between two corners, two wraps and two clamps that is stairs minus a
linear function, whose greatest value lies next to a step at an end (`Stairs.corners`). Pieces
are looked at in order of a bound on them, until no other can win (branch and bound).

The least error is the greatest of the mirrored problem: `sign` -1 negates codes and ideals.
"""

from dataclasses import dataclass
from fractions import Fraction
from functools import cached_property
from heapq import heappop, heappush

from guardbit.model.sizing import Interval
from guardbit.sizing.error.envelope import Envelope, Linear
from guardbit.sizing.error.stairs import Stairs

# pieces that are looked at before what is left is only bounded
MOST_PIECES = 1500


@dataclass(frozen=True)
class Peak:
    """The greatest of sign * error, `value`; no sum has more.

    `attained` is what the sum of number `n` gives with real inputs.
    """

    value: Fraction
    attained: Fraction
    n: int


@dataclass(frozen=True)
class Scan:
    """sign * code less sign * ideal code, over the n of `span`.

    `ideal` is the least sign * ideal code of a sum, `legal` the codes the ideal is clamped to.
    """

    sign: int
    ideal: Envelope
    stairs: Stairs
    legal: Interval
    span: tuple[int, int]

    def value(self, n: int) -> Fraction:
        """Return the greatest sign * error of the sum number n."""
        return self.sign * self.stairs.code(n) - self._clamped(self._ideal(n))

    def _ideal(self, n: int) -> Fraction:
        return self.ideal.at(self.stairs.sum_of(n))

    @cached_property
    def _limits(self) -> tuple[int, int]:
        ends = (self.sign * self.legal.low, self.sign * self.legal.high)
        return min(ends), max(ends)

    def _clamped(self, ideal: Fraction) -> Fraction:
        low, high = self._limits
        return min(max(ideal, Fraction(low)), Fraction(high))

    def peak(self, beat: Fraction | None = None) -> Peak:
        """Return the greatest value over the span; `beat` as a bound if that is greater."""
        queue: list[tuple[Fraction, int, int]] = []
        self._push(queue, *self.span)
        best = max((self.value(n), n) for n in self.span)
        beyond = best[0] if beat is None else max(best[0], beat)
        for _ in range(MOST_PIECES):
            if not queue or -queue[0][0] <= max(best[0], beyond):
                return Peak(max(best[0], beyond), *best)
            _, first, last = heappop(queue)
            piece, found = self._solved(self._split(first, last), first, last)
            if found is None:
                beyond = max(beyond, self._bound(*piece))
            else:
                best = max(best, found)
            self._push(queue, first, piece[0] - 1)
            self._push(queue, piece[1] + 1, last)
        rest = [-bound for bound, _, _ in queue]
        return Peak(max(best[0], beyond, *rest), *best)

    def bound(self) -> Fraction:
        """Return what no value of the span exceeds, without a search."""
        return self._bound(*self.span)

    def _push(self, queue: list[tuple[Fraction, int, int]], first: int, last: int) -> None:
        if first <= last:
            heappush(queue, (-self._bound(first, last), first, last))

    def _solved(
        self, n: int, first: int, last: int
    ) -> tuple[tuple[int, int], tuple[Fraction, int] | None]:
        """Return the piece around n, and its greatest value with the n that has it."""
        run, line = self.stairs.run(n), self._line(n)
        first, last = max(first, run.first, line.first), min(last, run.last, line.last)
        places: set[int] | None = {first, last}
        if line.slope:
            places = self.stairs.corners(run, first, last)
        if places is None:
            return (first, last), None
        return (first, last), max((self.value(place), place) for place in places)

    def _line(self, n: int) -> Linear:
        """Return the clamped ideal around n: linear, or of slope 0 where it is constant."""
        line = self.ideal.linear(self.stairs.base, self.stairs.step, n)
        low, high = (limit * line.denominator for limit in self._limits)
        if not line.slope:
            return line
        first, last = _between(line, low, high)
        if n < first:
            return Linear(line.first, min(line.last, first - 1), 0, 0, 1)
        if n > last:
            return Linear(max(line.first, last + 1), line.last, 0, 0, 1)
        first, last = max(line.first, first), min(line.last, last)
        return Linear(first, last, line.constant, line.slope, line.denominator)

    @cached_property
    def _least(self) -> Fraction:
        """Return the sum at which the ideal is least."""
        return self.ideal.amount(self.ideal.corner_below(Fraction(0)))

    @cached_property
    def _unit(self) -> Fraction:
        numerator, denominator = self.stairs.ratio
        return Fraction(self.sign * numerator, denominator)

    @cached_property
    def _farthest(self) -> Fraction:
        """Return the sum at which sign * value, unrounded, exceeds the ideal most."""
        return self.ideal.amount(self.ideal.corner_below(self._unit))

    def _split(self, first: int, last: int) -> int:
        """Return the n, of first..last, near which the greatest value is to be expected."""
        if not self.stairs.step:
            return first
        amount = self._farthest if self.stairs.is_smooth(first, last) else self._least
        n = round((amount - self.stairs.base) / self.stairs.step)
        return min(max(n, first), last)

    def _bound(self, first: int, last: int) -> Fraction:
        """Return what no value on first..last exceeds."""
        least = self._clamped(self.ideal.at(self._nearest(self._least, first, last)))
        stairs = self.stairs
        if not stairs.is_smooth(first, last):
            limits = stairs.limits()
            return max(self.sign * limits.low, self.sign * limits.high) - least
        ends = [self.sign * stairs.code(n) for n in (first, last)]
        apart = max(ends) - least
        amount = self._nearest(self._farthest, first, last)
        # clamping takes a code and an ideal code no further apart
        value = self._unit * amount + self.sign * stairs.level(first)
        excess = value - self.ideal.at(amount) + stairs.slack(self.sign)
        return min(apart, max(excess, Fraction(0)))

    def _nearest(self, amount: Fraction, first: int, last: int) -> Fraction:
        """Return what of the sums from number first to last, and between, is nearest."""
        ends = self.stairs.sum_of(first), self.stairs.sum_of(last)
        return min(max(amount, Fraction(ends[0])), Fraction(ends[1]))


def _between(line: Linear, low: int, high: int) -> tuple[int, int]:
    """Return the first and last n with constant + slope * n in low..high."""
    if line.slope > 0:
        return -((line.constant - low) // line.slope), (high - line.constant) // line.slope
    return -((high - line.constant) // -line.slope), (line.constant - low) // -line.slope
