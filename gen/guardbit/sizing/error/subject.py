"""One case of a filter, one sign, and everything that its error is looked for with."""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from fractions import Fraction
from functools import cached_property
from itertools import product
from math import ceil, floor, gcd, prod

from guardbit.model.filter import Filter
from guardbit.model.sizing import Interval
from guardbit.sizing.error.columns import Results, results
from guardbit.sizing.error.envelope import Envelope, Part, RealCorner, scale_of
from guardbit.sizing.error.inputs import Case
from guardbit.sizing.error.pixels import items_of, pixel_envelope, sum_range
from guardbit.sizing.error.scan import Scan
from guardbit.sizing.error.stairs import Stairs
from guardbit.sizing.passes import is_preloaded


@dataclass(frozen=True)
class Subject:
    """A case of a filter and the stairs of its last pass, on which errors are looked for.

    `clamped`, where set, says for each weight of the last pass how many of its inputs come of
    sums that are clamped at each of the ends of their side; the others then do not.
    """

    filter: Filter
    case: Case
    sign: int
    results: Results | None
    clamped: tuple[tuple[int, ...], ...] | None = None

    @cached_property
    def stairs(self) -> Stairs:
        """Return the codes by the last pass's sum, of a register that wraps."""
        p = self.filter.passes[-1]
        sums, step = self._sums, self.case.last.common
        last = (sums.high - sums.low) // step if step else 0
        word = (p.accumulator.bits or 64, p.accumulator.signed)
        return Stairs(p.requantiser, is_preloaded(p), sums.low, step, last, word)

    @cached_property
    def _sums(self) -> Interval:
        inputs = self.results.values if self.results else self.case.values
        return sum_range(self.case.last, inputs)

    @cached_property
    def legal(self) -> Interval:
        """Return the legal codes, to which the ideal code is clamped."""
        return Interval(self.filter.output.low, self.filter.output.high)

    @cached_property
    def ideal(self) -> Envelope:
        """Return the least sign * ideal code by the sum, over real inputs."""
        last = self.case.last
        if self.results is None:
            return pixel_envelope(last, self.case.values, self.sign)
        parts = list(self._parts())
        start = Fraction(self.sign * last.ideal, self.case.denominator)
        fine, unit = scale_of([(Fraction(0), start), *(c for part, _ in parts for c in part)])
        scaled = [Part(tuple((int(a * fine), int(c * unit)) for a, c in p), n) for p, n in parts]
        return Envelope.of(scaled, (last.amount * fine, int(start * unit)), fine, unit)

    def _parts(self) -> Iterator[tuple[tuple[RealCorner, ...], int]]:
        """Yield the least sign * ideal code of a result by what it adds, and of how many."""
        assert self.results is not None
        for i, weight in enumerate(self.case.last.weights):
            side = self.results.side(self.sign * weight.ideal)
            if self.clamped is None or not weight.amount:
                yield self.added(weight.amount, weight.ideal, side.hull), weight.count
                continue
            for end, count in zip(side.ends, self.clamped[i], strict=False):
                if count:
                    yield self.added(weight.amount, weight.ideal, (end,)), count
            if rest := weight.count - sum(self.clamped[i]):
                yield self.added(weight.amount, weight.ideal, side.curve), rest

    def added(
        self, amount: int, ideal: int, corners: tuple[RealCorner, ...]
    ) -> tuple[RealCorner, ...]:
        """Return the least sign * ideal code by what a result adds, from the results' corners."""
        weight = Fraction(abs(ideal), self.case.last.denominator)
        if not amount:
            return ((Fraction(0), weight * min(cost for _, cost in corners)),)
        made = tuple((amount * value, weight * cost) for value, cost in corners)
        return made if amount > 0 else made[::-1]

    def ideal_of(self, counts: Sequence[int]) -> Fraction:
        """Return the least sign * ideal code of a single pass whose items are taken so often."""
        _, items, cost = items_of(self.case.last, self.case.values, self.sign)
        total = sum(item.cost * count for item, count in zip(items, counts, strict=True))
        return Fraction(cost + total, self.case.denominator)

    def scan(self, stairs: Stairs, span: tuple[int, int]) -> Scan | None:
        """Return the scan over real inputs; None if these reach no sum of the span."""
        ends = (self.ideal.amount(0), self.ideal.amount(-1))
        first, last = span
        if stairs.step:
            first = max(first, ceil((ends[0] - stairs.base) / stairs.step))
            last = min(last, floor((ends[1] - stairs.base) / stairs.step))
        if first > last:
            return None
        return Scan(self.sign, self.ideal, stairs, self.legal, (first, last))

    def splits(self, most: int) -> list["Subject"]:
        """Return subjects that between them cover this one, by which results are clamped.

        Sums that are clamped make the ideal code of a result jump, which a convex function of
        it can only bound. One subject, if nothing jumps or more than `most` are needed.
        """
        if self.results is None:
            return [self]
        ways = [list(self._ways(w.amount, w.ideal, w.count)) for w in self.case.last.weights]
        if not 1 < prod(map(len, ways)) <= most:
            return [self]
        return [replace(self, clamped=chosen) for chosen in product(*ways)]

    def _ways(self, amount: int, ideal: int, count: int) -> Iterator[tuple[int, ...]]:
        """Yield how many of `count` alike results are clamped at each end."""
        assert self.results is not None
        side = self.results.side(self.sign * ideal)
        if not amount or not side.ends:
            # the least of all is known without a sum, or there is nothing but the curve
            yield (0,) * len(side.ends)
            return
        for ends in product(range(count + 1), repeat=len(side.ends)):
            if sum(ends) <= count and (side.curve or sum(ends) == count):
                yield ends


def subject(f: Filter, case: Case, sign: int) -> Subject | None:
    """Return what to look for the greatest sign * error on; None if a first pass always wraps."""
    made = None if case.first is None else results(f, case)
    return None if case.first is not None and made is None else Subject(f, case, sign, made)


def ideal_step(case: Case) -> int:
    """Return what all ideal codes of integer pixels are apart by multiples of, over denominator."""
    last = gcd(*(weight.ideal for weight in case.last.weights))
    first = gcd(*(weight.ideal for weight in case.first.weights)) if case.first else 1
    return last * first


def least_ideal(case: Case) -> int:
    """Return one ideal code of integer pixels, over the case's denominator."""
    pixel = case.values.low
    if case.first is None:
        return case.last.ideal + sum(w.ideal * w.count * pixel for w in case.last.weights)
    first = case.first.ideal + sum(w.ideal * w.count * pixel for w in case.first.weights)
    return case.last.ideal + sum(w.ideal * w.count * first for w in case.last.weights)
