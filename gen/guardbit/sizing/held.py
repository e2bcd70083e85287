"""What an accumulator holds at the end over all classes, by its width and policy."""

from collections.abc import Iterable
from dataclasses import dataclass
from functools import cached_property

from guardbit.arith.intervals import contains, hull, shift, wrapped
from guardbit.model.enums import Overflow
from guardbit.model.filter import Accumulator
from guardbit.sizing.clamping import END_WORK
from guardbit.sizing.lines import Line
from guardbit.sizing.place import Held, Place, common_turn, word_of
from guardbit.sizing.problem import Problem, any_values, apart
from guardbit.sizing.survey import EXACT_WORK, Survey, interior_class

# pixels times taps of all the classes whose reachable sums are listed
LIST_WORK = 20_000


@dataclass(frozen=True)
class Holding:
    """Everything that a register of resolved width can hold at the end, over all classes."""

    accumulator: Accumulator
    problem: Problem
    found: Survey

    @cached_property
    def held(self) -> Held:
        """Return the range; exact where both ends are attained."""
        if self.clamps:
            return self._clamped
        if self.turn is not None:
            return Held(shift(self.found.interval(False), -self.turn), self.found.exact)
        if self.showing and all(place.held.exact for place in self.showing):
            return hull_of(place.held for place in self.showing)
        bits, final = self.accumulator.bits, self.found.interval(False)
        assert bits is not None
        return Held(wrapped(final, bits, self.accumulator.signed), False)

    @property
    def acts(self) -> bool:
        """Return whether the ends of what is held may be other frames' than the sum's ends."""
        return self.clamps or self.turn is None

    @cached_property
    def clamps(self) -> bool:
        """Return whether the register saturates, and a sum can leave its width."""
        saturates = self.accumulator.overflow is Overflow.SATURATE
        return saturates and not contains(word_of(self.accumulator), self.found.interval(True))

    @cached_property
    def turn(self) -> int | None:
        """Return what the register takes off every final sum; None: not the same of all."""
        return common_turn(self.accumulator, self.found.interval(False))

    @cached_property
    def places(self) -> tuple[Place, ...]:
        """Return classes that hold all there is between them; none if they are too many."""
        inner = interior_class(self.problem)
        if inner is not None and self.problem.nested and all(map(_is_whole, inner)):
            return (self._place(*inner),)
        return self._listed(LIST_WORK)

    @cached_property
    def showing(self) -> tuple[Place, ...]:
        """Return classes among which both ends of what is held are attained."""
        inner = interior_class(self.problem)
        if inner is not None and self.accumulator.overflow is Overflow.SATURATE:
            # no pixel is shared there: the ends grow with those of the pixels' range
            return (self._place(*inner),)
        if any(place.held == Held(word_of(self.accumulator), True) for place in self.sample):
            return self.sample
        return self.places or (self._listed(EXACT_WORK) if self.clamps else ())

    @cached_property
    def sample(self) -> tuple[Place, ...]:
        """Return a class that reads only inside: what fills a word there needs no other class."""
        row = next((a for a in self.problem.rows if a.is_interior and _is_whole(a)), None)
        column = next((a for a in self.problem.columns if a.is_interior and _is_whole(a)), None)
        return () if row is None or column is None else (self._place(row, column),)

    def _listed(self, work: int) -> tuple[Place, ...]:
        """Return all classes; none if their taps are more than `work`."""
        rows, columns = self.problem.listed or ((), ())
        pairs = len(rows) * len(columns)
        if pairs * max(len(self.problem.taps), 1) > work:
            return ()
        share = END_WORK // max(pairs, 1)
        return tuple(self._place(row, column, share) for row in rows for column in columns)

    def _place(self, row: Line, column: Line, work: int = END_WORK) -> Place:
        return Place(self.accumulator, self.problem, row, column, work)

    @cached_property
    def _clamped(self) -> Held:
        if self.showing:
            return hull_of(place.held for place in self.showing)
        row, column = apart(any_values(self.problem))
        return Held(self._place(row, column).held.range, False)


def _is_whole(line: Line) -> bool:
    """Return whether pixels that are results of a first pass come from an interior class."""
    return line.results is None or line.results.is_interior


def hull_of(parts: Iterable[Held]) -> Held:
    """Return the range of all; exact if exact parts have both its ends."""
    items = list(parts)
    whole = hull(h.range for h in items)
    exact = [h.range for h in items if h.exact]
    attained = bool(exact) and hull(exact) == whole
    return Held(whole, attained)
