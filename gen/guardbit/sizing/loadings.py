"""An accumulator whose coefficients are loaded at run time: its ends over set and pixels.

Where every tap reads a pixel of its own the ends over the whole set are known, with a loading
that attains each (arith.tapset). A border that repeats pixels only narrows the choice of each
loading, and so does a constant that is a legal value: all of that lies within the interior.
Elsewhere pixels of everything that a tap can read give a bound. With one of the loadings the
coefficients are constants again, and the analysis of these tells which ends are attained, by
what frame. Of a list of kernels each is analysed, and what they reach together is exact.
"""

from collections.abc import Iterable, Iterator
from dataclasses import dataclass, replace
from functools import cached_property

from guardbit.arith.intervals import add, clamp_to, hull, scale, shift, wrapped
from guardbit.arith.tapset import corner_loadings, extreme_loading, is_exact, range_of
from guardbit.model.filter import Accumulator, Filter, TapSet, loaded
from guardbit.model.sizing import End, Interval
from guardbit.sizing.held import Holding, hull_of
from guardbit.sizing.passes import ACCUMULATOR, single_problem
from guardbit.sizing.place import Held, Place, word_of
from guardbit.sizing.problem import MARKS, Ends, Extreme, Mark, Problem, any_values, further
from guardbit.sizing.register import Register, Weights, width
from guardbit.sizing.survey import Survey, interior_class, survey
from guardbit.sizing.windows import Labels

Taps = tuple[int, ...]


@dataclass(frozen=True)
class Loading:
    """What the registers hold, in the order of the terms, and the filter with these taps."""

    taps: Taps
    filter: Filter
    register: Register


@dataclass(frozen=True)
class Loadings:
    """The accumulator over all legal loadings, and some of them, the nominal one first.

    The ends that `register` has are those of one of `some` where it is known.
    """

    register: Register
    some: tuple[Loading, ...]
    weights: Weights

    @property
    def nominal(self) -> Loading:
        """Return the kernel's own loading."""
        return self.some[0]


def loadings(f: Filter, s: TapSet) -> Loadings:
    """Return the accumulator of a single pass, of resolved width, over all that may be loaded."""
    accumulator = f.passes[0].accumulator
    problem = single_problem(fixed(f, (1,) * len(s.cells)))
    pixels = _pixels(problem)
    bounds = None if s.kernels else _bounds(s, pixels, problem.start)
    chosen = dict.fromkeys((nominal_taps(f), *_chosen(s, pixels, bounds)))
    surveys = {taps: survey(single_problem(fixed(f, taps))) for taps in chosen}
    found = _together(problem, bounds, list(surveys.values()))
    bits = accumulator.bits or width(found.interval(True), accumulator.signed)
    resolved = replace(accumulator, bits=bits)
    some = tuple(_loading(f, taps, resolved, its) for taps, its in surveys.items())
    held = SetHolding(resolved, problem, found, s, tuple(one.register.holding for one in some))
    register = Register(ACCUMULATOR, resolved, problem, found, held)
    return Loadings(register, some, _weights(s))


def nominal_taps(f: Filter) -> Taps:
    """Return the integers of the kernel itself."""
    return tuple(term.integer for term in f.passes[0].kernel.terms)


def fixed(f: Filter, taps: Taps) -> Filter:
    """Return the filter whose coefficients are these constants."""
    made = loaded(f, taps)
    (only,) = made.passes
    return replace(made, passes=(replace(only, kernel=replace(only.kernel, registers=None)),))


def _loading(f: Filter, taps: Taps, accumulator: Accumulator, found: Survey) -> Loading:
    made = fixed(f, taps)
    made = replace(made, passes=(replace(made.passes[0], accumulator=accumulator),))
    problem = single_problem(made)
    holding = Holding(accumulator, problem, found)
    return Loading(taps, made, Register(ACCUMULATOR, accumulator, problem, found, holding))


@dataclass(frozen=True)
class SetHolding(Holding):
    """Everything that the register can hold at the end; `some` are what it does with loadings.

    These are all that there are where the set is a list of kernels.
    """

    registers: TapSet
    some: tuple[Holding, ...]

    @cached_property
    def held(self) -> Held:
        """Return the range: that of a list of kernels, or a bound and whether it is attained."""
        together = hull_of(each.held for each in self.some)
        if self.registers.kernels:
            return together
        return Held(self._limits, together == Held(self._limits, True))

    @cached_property
    def _limits(self) -> Interval:
        final = self.found.interval(False)
        if self.clamps:
            return self._clamped_limits
        if self.turn is not None:
            return shift(final, -self.turn)
        assert self.accumulator.bits is not None
        return wrapped(final, self.accumulator.bits, self.accumulator.signed)

    @cached_property
    def _clamped_limits(self) -> Interval:
        """Return what sums clamped at every add do not leave, each tap having its own limits."""
        word, pixels = word_of(self.accumulator), any_values(self.problem)
        total = clamp_to(Interval(self.problem.start, self.problem.start), word)
        for ends in zip(self.registers.least, self.registers.greatest, strict=True):
            total = clamp_to(add(total, hull(scale(pixels, tap) for tap in ends)), word)
        return total

    @cached_property
    def places(self) -> tuple[Place, ...]:
        """Return nothing: classes of one loading do not show what others do."""
        return ()

    @cached_property
    def showing(self) -> tuple[Place, ...]:
        """Return nothing, as `places`."""
        return ()

    @cached_property
    def sample(self) -> tuple[Place, ...]:
        """Return nothing, as `places`."""
        return ()


@dataclass(frozen=True)
class _Bounds:
    """The ranges of the sums of the first 0, 1, 2... taps, start value included."""

    ranges: tuple[Interval, ...]

    def value(self, mark: Mark) -> int:
        """Return an end of the final sum, or of all partial sums."""
        partial, end = mark
        whole = hull(self.ranges) if partial else self.ranges[-1]
        return whole.low if end is End.LEAST else whole.high

    def after(self, mark: Mark) -> int:
        """Return after how many taps it is reached first."""
        partial, end = mark
        ends = [r.low if end is End.LEAST else r.high for r in self.ranges]
        return ends.index(self.value(mark)) if partial else len(ends) - 1


def _pixels(problem: Problem) -> Interval:
    """Return what a tap can read: in the interior, or wherever there is an output."""
    inner = interior_class(problem)
    return any_values(problem) if inner is None else problem.values_at(*inner)


def _bounds(s: TapSet, pixels: Interval, start: int) -> _Bounds:
    sums = (range_of(s, range(count), pixels) for count in range(len(s.cells) + 1))
    return _Bounds(tuple(shift(r, start) for r in sums))


def _chosen(s: TapSet, pixels: Interval, bounds: _Bounds | None) -> Iterator[Taps]:
    """Yield the loadings that are looked at: all of a list, else those that attain an end."""
    if bounds is None or not is_exact(s):
        yield from corner_loadings(s)
        return
    for mark in MARKS:
        taps = range(bounds.after(mark))
        yield extreme_loading(s, taps, pixels, greatest=mark[1] is End.GREATEST)


def _together(problem: Problem, bounds: _Bounds | None, found: list[Survey]) -> Survey:
    """Return the ends over the set: `bounds`, attained or not, or those of all that is found."""
    ends: Ends = {}
    for mark in MARKS:
        best = found[0].ends[mark]
        for each in found[1:]:
            best = further(mark, best, each.ends[mark])
        if bounds is not None and best.value != bounds.value(mark):
            best = Extreme(bounds.value(mark), bounds.after(mark), None, None)
        ends[mark] = best
    exact = all(end.row is not None for end in ends.values())
    if bounds is None:
        return Survey(ends, exact and all(each.exact for each in found), _classes(found))
    inner = interior_class(problem)
    labels = {} if inner is None else {(inner[0].label, inner[1].label): ends}
    return Survey(ends, exact, labels)


def _classes(found: Iterable[Survey]) -> dict[Labels, Ends]:
    """Return the ends over all kernels of a list, by label."""
    made: dict[Labels, Ends] = {}
    for each in found:
        for labels, ends in each.classes.items():
            old = made.get(labels, ends)
            made[labels] = {mark: further(mark, old[mark], ends[mark]) for mark in MARKS}
    return made


def _weights(s: TapSet) -> Weights:
    """Return the most that magnitudes add up to, the greatest of them, and how many there are."""
    total = range_of(s, range(len(s.cells)), Interval(-1, 1)).high
    greatest = max((abs(tap) for tap in (*s.least, *s.greatest)), default=0)
    return Weights(total, greatest, len(s.cells))
