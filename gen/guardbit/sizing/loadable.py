"""The sizing of a filter whose coefficients are loaded at run time, with its evidence.

Every frame that attains an end comes with the taps that are loaded meanwhile. The error is that
of the kernel itself: only for it is there an ideal; of others rounding alone is told.
"""

from collections.abc import Iterable, Iterator
from dataclasses import dataclass, replace
from functools import cached_property

from guardbit.arith.intervals import shift
from guardbit.model.filter import Filter, TapSet
from guardbit.model.sizing import End, ErrorPart, RegisterSizing, RequantiserSizing, Sizing, Witness
from guardbit.sizing.error.bound import error_bound
from guardbit.sizing.error.columns import residues
from guardbit.sizing.held import hull_of
from guardbit.sizing.loadings import Loading, Loadings, loadings
from guardbit.sizing.outcome import outcome
from guardbit.sizing.passes import OUTPUT, start_value
from guardbit.sizing.place import Held
from guardbit.sizing.problem import MARKS, Mark
from guardbit.sizing.register import sized
from guardbit.sizing.requantisers import Requantised, size_requantiser
from guardbit.sizing.witness import code_witnesses, held_witnesses, plain_painter, witnesses

ANY_ROUNDING = "final rounding with any taps loaded"


def loadable_sizing(f: Filter, s: TapSet) -> Sizing:
    """Return the sizing over every loading and frame; `Sizing.filter` has resolved widths."""
    found = loadings(f, s)
    (only,) = f.passes
    resolved = replace(f, passes=(replace(only, accumulator=found.register.accumulator),))
    shown = tuple(map(_shown, found.some))
    row = _register(resolved, s, found, shown)
    requantiser = _requantiser(resolved, s, found, shown)
    error = error_bound(
        found.nominal.filter,
        (found.nominal.register,),
        (size_requantiser(OUTPUT, shown[0].requantised),),
    )
    parts = (*error.parts, _any_rounding(resolved, found))
    return Sizing(resolved, (row,), (requantiser,), replace(error, parts=parts))


@dataclass(frozen=True)
class _Shown:
    """A loading with the frames that attain the ends of its sums and of what is held."""

    loading: Loading
    sums: tuple[Witness, ...]
    held: tuple[Witness, ...]

    @cached_property
    def requantised(self) -> Requantised:
        """Return the codes that are made with this loading."""
        return Requantised(self.loading.filter.passes[0], self.loading.register, True)

    def of_sum(self, mark: Mark, value: int) -> Witness | None:
        """Return the frame in which a sum reaches an end."""
        partial, end = mark
        found = (w for w in self.sums if (w.partial, w.end, w.value) == (partial, end, value))
        return next(found, None)

    def of_held(self, end: End) -> Witness | None:
        """Return the frame in which the register ends at that end of what it then holds."""
        own = next((w for w in self.held if w.end is end), None)
        return own or next((w for w in self.sums if w.end is end and not w.partial), None)

    def of_code(self, end: End) -> Witness | None:
        """Return the frame in which that end of the codes leaves the requantiser."""
        made = self.requantised
        if not made.wraps:
            return self.of_held(end)
        f = self.loading.filter
        found = code_witnesses(f, OUTPUT, made, plain_painter(f))
        own = next((w for w in found if w.end is end), None)
        return own and replace(own, taps=self.loading.taps)


def _shown(loading: Loading) -> _Shown:
    f, register = loading.filter, loading.register
    paint = plain_painter(f)
    sums = witnesses(f, register, paint)
    held = held_witnesses(f, 0, register, sums, paint)
    return _Shown(loading, _with_taps(sums, loading), _with_taps(held, loading))


def _with_taps(found: Iterable[Witness], loading: Loading) -> tuple[Witness, ...]:
    return tuple(replace(witness, taps=loading.taps) for witness in found)


def _register(f: Filter, s: TapSet, found: Loadings, shown: tuple[_Shown, ...]) -> RegisterSizing:
    ends = found.register.found.ends
    sums = tuple(_first(each.of_sum(mark, ends[mark].value) for each in shown) for mark in MARKS)
    named = tuple(witness for witness in sums if witness is not None)
    held = tuple(_held(f, found, shown, named))
    return sized(found.register, True, named, held, found.weights)


def _first(found: Iterable[Witness | None]) -> Witness | None:
    return next((witness for witness in found if witness is not None), None)


def _held(
    f: Filter, found: Loadings, shown: tuple[_Shown, ...], sums: tuple[Witness, ...]
) -> Iterator[Witness]:
    """Yield a frame for each end of what is held that the frames of the sums do not show."""
    holding = found.register.holding
    if not (holding.acts and holding.held.exact):
        return
    policy = found.register.accumulator.overflow
    for end, value in zip(End, (holding.held.range.low, holding.held.range.high), strict=True):
        known = (w for w in sums if w.end is end and not w.partial)
        if any(outcome(f, 0, w, policy).held == value for w in known):
            continue
        frame = _first(
            each.of_held(end) for each in shown if _is_at(each.loading.register.held, end, value)
        )
        if frame is not None:
            yield replace(frame, value=value)


def _is_at(held: Held, end: End, value: int) -> bool:
    return held.exact and value == (held.range.low if end is End.LEAST else held.range.high)


def _requantiser(
    f: Filter, s: TapSet, found: Loadings, shown: tuple[_Shown, ...]
) -> RequantiserSizing:
    made = Requantised(f.passes[0], found.register, True)
    row = size_requantiser(OUTPUT, made)
    if not made.wraps:
        return row
    together = hull_of(each.requantised.codes for each in shown)
    codes = together if s.kernels else Held(row.output, together == Held(row.output, True))
    frames = tuple(_codes(shown, codes)) if codes.exact else ()
    return replace(row, output=codes.range, output_exact=codes.exact, witnesses=frames)


def _codes(shown: tuple[_Shown, ...], codes: Held) -> Iterator[Witness]:
    """Yield a frame for each end of the codes."""
    for end, value in zip(End, (codes.range.low, codes.range.high), strict=True):
        frame = _first(
            each.of_code(end) for each in shown if _is_at(each.requantised.codes, end, value)
        )
        if frame is not None:
            yield replace(frame, register=OUTPUT, value=value)


def _any_rounding(f: Filter, found: Loadings) -> ErrorPart:
    """Return the range of what rounding adds, over every sum there is room for in the ends."""
    (only,) = f.passes
    start = start_value(only)
    sums = shift(found.register.found.interval(False), -start)
    span = residues(only, 1, 0, sums)
    return ErrorPart(ANY_ROUNDING, span.low, span.high)
