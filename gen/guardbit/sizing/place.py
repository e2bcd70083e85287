"""One register in one border class: its ends, all that it can hold, and pixels that show it."""

from collections.abc import Mapping
from dataclasses import dataclass, replace
from functools import cached_property

from guardbit.arith.intervals import contains, shift, wrapped
from guardbit.arith.words import format_range, wrap
from guardbit.model.enums import Overflow
from guardbit.model.filter import Accumulator
from guardbit.model.sizing import End, Interval
from guardbit.sizing.clamping import (
    END_WORK,
    Add,
    Chain,
    Greatest,
    Pixel,
    greatest,
    loose_ends,
    pixels_of_end,
    reachable,
    whole,
)
from guardbit.sizing.lines import Line
from guardbit.sizing.problem import Ends, Problem, class_ends, ends_interval
from guardbit.sizing.reach import (
    MOST_VALUES,
    Modulus,
    Reach,
    pixels_between,
    pixels_of_sum,
    reaches_all,
    sum_sets,
)


@dataclass(frozen=True)
class Held:
    """A range; `exact` if both ends are attained."""

    range: Interval
    exact: bool


def word_of(accumulator: Accumulator) -> Interval:
    """Return all numbers that a register of resolved width holds."""
    assert accumulator.bits is not None
    return format_range(accumulator.bits, accumulator.signed)


@dataclass(frozen=True)
class Place:
    """A register of resolved width at the positions of one class; `work` bounds a search."""

    accumulator: Accumulator
    problem: Problem
    row: Line
    column: Line
    work: int = END_WORK

    @cached_property
    def ends(self) -> Ends:
        """Return the exact ends of the unlimited sums."""
        return class_ends(self.problem, self.row, self.column)

    @cached_property
    def clamps(self) -> bool:
        """Return whether the register saturates, and a sum can leave its width."""
        saturates = self.accumulator.overflow is Overflow.SATURATE
        return saturates and not contains(word_of(self.accumulator), ends_interval(self.ends, True))

    @cached_property
    def held(self) -> Held:
        """Return the range of what the register holds at the end.

        A bound only where the sets of reachable sums are too large to list.
        """
        if self.clamps:
            return self._clamped
        final = ends_interval(self.ends, False)
        if self.turn is not None:
            return Held(shift(final, -self.turn), True)
        if self._reaches_all:
            return Held(word_of(self.accumulator), True)
        if self.reach is not None:
            return Held(self.reach.ends, True)
        assert self.accumulator.bits is not None
        return Held(wrapped(final, self.accumulator.bits, self.accumulator.signed), False)

    @cached_property
    def turn(self) -> int | None:
        """Return what the register takes off every final sum; None: not the same of all."""
        return common_turn(self.accumulator, ends_interval(self.ends, False))

    @cached_property
    def reach(self) -> Reach | None:
        """Return everything that the register can hold at the end; None: too much to list."""
        if self.clamps:
            stages = reachable(replace(self._chain, values=self._values), 2 * self.work)
            return None if stages is None else whole(stages)
        sets = self._sets
        return None if sets is None else sets[-1]

    def pixels(self, value: int) -> Mapping[Pixel, int] | None:
        """Return pixels (less their pedestal) with which the register ends at `value`.

        `value` is an exact end of what is held, or a member of `reach`. A pixel that is
        left out may take any value. None: not searched, for the work.
        """
        if self.clamps:
            return self._clamped_pixels(value)
        final = ends_interval(self.ends, False)
        if self.turn is not None and value + self.turn in (final.low, final.high):
            end = End.LEAST if value + self.turn == final.low else End.GREATEST
            return {p: toward(end, w, self._ends_of_pixels) for p, w in self._weights.items()}
        chosen = self._chosen(value - final.low, value)
        return None if chosen is None else dict(zip(self._weights, chosen, strict=True))

    def _chosen(self, above: int, value: int) -> list[int] | None:
        """Return values of the weighted pixels for a register that ends at `value`.

        It is `above` over the least sum, or that less what wrapping takes off.
        """
        weights, bits = list(self._weights.values()), self.accumulator.bits
        if self._reaches_all:
            least = above if self._modulus is None or bits is None else above % (1 << bits)
            return pixels_between(weights, self._ends_of_pixels, least)
        if self._sets is None or self._values is None:
            return None
        return pixels_of_sum(self._sets, weights, self._values, self._modulus, value)

    @cached_property
    def _ends_of_pixels(self) -> Interval:
        return self.problem.values_at(self.row, self.column)

    @cached_property
    def _values(self) -> Reach | None:
        """Return which values a pixel takes; None where that is not known, or too many."""
        results = self.row.results or self.column.results
        if results is not None:
            return results.reach
        ends = self._ends_of_pixels
        return Reach.run(ends) if ends.high - ends.low < MOST_VALUES else None

    @cached_property
    def _reaches_all(self) -> bool:
        """Return whether every integer between the ends of the unlimited sums is one of them."""
        known = self.row.results is None and self.column.results is None
        whole_run = known or (self._values is not None and self._values.is_run)
        return whole_run and reaches_all(list(self._weights.values()), self._ends_of_pixels)

    @cached_property
    def _adds(self) -> tuple[Add, ...]:
        made = []
        for tap in self.problem.taps:
            y, x = self.row.read(tap.dy), self.column.read(tap.dx)
            if y is None or x is None:
                assert self.problem.constant is not None
                made.append(Add(0, None, tap.coefficient * self.problem.constant))
            else:
                made.append(Add(tap.coefficient, (y, x)))
        return tuple(made)

    @cached_property
    def _weights(self) -> dict[Pixel, int]:
        """Return the taps on each pixel added up, of those that do not cancel."""
        sums: dict[Pixel, int] = {}
        for add in self._adds:
            if add.pixel is not None:
                sums[add.pixel] = sums.get(add.pixel, 0) + add.coefficient
        return {pixel: weight for pixel, weight in sums.items() if weight}

    @property
    def _modulus(self) -> Modulus | None:
        a = self.accumulator
        wraps = a.overflow is Overflow.WRAP and a.bits is not None
        return Modulus(a.bits, word_of(a)) if wraps and a.bits is not None else None

    @cached_property
    def _sets(self) -> list[Reach] | None:
        if self._values is None:
            return None
        start = self.problem.start + sum(add.amount for add in self._adds)
        weights = list(self._weights.values())
        return sum_sets(start, weights, self._values, self._modulus, 4 * self.work)

    @cached_property
    def _chain(self) -> Chain:
        ends, word = self._ends_of_pixels, word_of(self.accumulator)
        # without shared pixels the ends of their values are all that matters
        counts = Chain(self.problem.start, self._adds, word, ends, None)
        return replace(counts, values=self._values) if counts.shares else counts

    @cached_property
    def _clamped(self) -> Held:
        if not self._chain.shares:
            return Held(loose_ends(self._chain), True)
        both = self._furthest
        if both is None:
            return Held(loose_ends(self._chain), False)
        return Held(Interval(-both[0].value, both[1].value), True)

    @cached_property
    def _furthest(self) -> tuple[Greatest, Greatest] | None:
        """Return the greatest sum of the mirrored chain and of the chain."""
        least = greatest(self._chain.mirrored(), self.work)
        most = greatest(self._chain, self.work)
        return None if least is None or most is None else (least, most)

    def _clamped_pixels(self, value: int) -> Mapping[Pixel, int] | None:
        for sign, found in zip((-1, 1), self._furthest or (), strict=False):
            if found.value == sign * value:
                return found.pixels
        chain = replace(self._chain, values=self._values)
        stages = reachable(chain, 2 * self.work)
        return None if stages is None else pixels_of_end(chain, stages, value)


def common_turn(accumulator: Accumulator, final: Interval) -> int | None:
    """Return what a register takes off every sum of `final`, 0 if it does not wrap.

    None: it wraps, and takes off more of some sums than of others.
    """
    if accumulator.overflow is not Overflow.WRAP:
        return 0
    assert accumulator.bits is not None
    low, high = (wrap(v, accumulator.bits, accumulator.signed) for v in (final.low, final.high))
    return final.low - low if final.low - low == final.high - high else None


def toward(end: End, weight: int, values: Interval) -> int:
    """Return the value of a pixel that takes weight * value toward `end`."""
    return values.high if (weight > 0) == (end is End.GREATEST) else values.low
