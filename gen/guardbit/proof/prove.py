"""The proof of one case: a size, a way to call, and which pixels are open."""

import time
from dataclasses import dataclass, replace

from guardbit.model.filter import Filter, holding, registers_of
from guardbit.model.proof import Assumption, Case, CaseResult, Codes, Counterexample, Place, Verdict
from guardbit.model.routine import Routine
from guardbit.model.sizing import Interval
from guardbit.proof.algebra.values import InexpressibleError, Value
from guardbit.proof.judge.breakpoints import breakpoint_difference
from guardbit.proof.judge.frames import Frames, Shown
from guardbit.proof.judge.runs import Difference, Pixels, Run, Tally
from guardbit.proof.judge.subject import Subject, container_ends, subject
from guardbit.proof.judge.wrong import wrong_calls
from guardbit.proof.machine.errors import BrokenError, BudgetError, RefusedError


def prove_case(f: Filter, routine: Routine, case: Case, strict: bool) -> CaseResult:
    """Return whether the routine computes the contract for every frame of a case.

    Open pixels are symbols, sizes are numbers. With `strict` code may rely on nothing that C
    leaves to the implementation. What was compiled is kept in the process.
    """
    started = time.perf_counter()
    result = _Case(f, routine, case, strict).result()
    return replace(result, seconds=time.perf_counter() - started)


@dataclass(frozen=True)
class _Case:
    filter: Filter
    routine: Routine
    case: Case
    strict: bool

    def result(self) -> CaseResult:
        try:
            made = subject(self.routine, self.case.model, self.strict)
        except RefusedError as error:
            return self._refused(error)
        ranges = self._ranges()
        outputs, found = 0, None
        assumptions: tuple[Assumption, ...] = ()
        for low, high in ranges:
            result = self._proved(made, low, high)
            outputs += result.outputs
            assumptions = tuple(dict.fromkeys((*assumptions, *result.assumptions)))
            found = replace(result, outputs=outputs, assumptions=assumptions)
            if result.verdict is not Verdict.PROVED:
                break
        assert found is not None
        return found

    def _ranges(self) -> tuple[tuple[int, int], ...]:
        """Return what the open pixels of ILLEGAL's one pixel, else of all, can be."""
        source = self.filter.input
        least, most = container_ends(source.container)
        if self.case.codes is Codes.ILLEGAL:
            sides = ((least, source.low - 1), (source.high + 1, most))
            return tuple(side for side in sides if side[0] <= side[1])
        if self.case.codes is Codes.ANY:
            return ((least, most),)
        return ((source.low, source.high),)

    def _loaded(self) -> Filter:
        s = registers_of(self.filter)
        if s is None or self.case.taps is None:
            return self.filter
        return holding(self.filter, tuple(self.case.taps[cell] for cell in s.cells))

    def _proved(self, made: Subject, low: int, high: int) -> CaseResult:
        f, case = self._loaded(), self.case
        compares = case.codes is not Codes.ANY or f.outside.value == "clamp"
        run = Run(f, self.routine, made, case, self._pixels(made, low, high), compares)
        tally = Tally()
        frames = Frames(
            run,
            f.input.low if case.codes is Codes.ILLEGAL else low,
            f.input.high if case.codes is Codes.ILLEGAL else high,
        )
        try:
            if case.codes is Codes.BREAKPOINTS:
                return self._at_breakpoints(run, frames, tally)
            found = self._first_difference(run, tally)
        except BrokenError as error:
            return self._broken(frames, error)
        except RefusedError as error:
            return self._refused(error)
        except InexpressibleError as error:
            return self._unknown(error.reason, None)
        except BudgetError:
            return self._unknown("no-end", None)
        if found is not None:
            return self._differs(frames, found)
        assumptions = made.program.cx.reliances()
        return CaseResult(case, Verdict.PROVED, outputs=tally.outputs, assumptions=assumptions)

    def _first_difference(self, run: Run, tally: Tally) -> Difference | None:
        if self.case.codes is Codes.WRONG:
            return wrong_calls(run)
        return run.first_difference(tally)

    def _at_breakpoints(self, run: Run, frames: Frames, tally: Tally) -> CaseResult:
        found = breakpoint_difference(run, tally)
        if found is None:
            return CaseResult(self.case, Verdict.PROVED, outputs=tally.outputs)
        difference, frame = found
        example = frames.example(frame, difference)
        verdict = Verdict.REFUTED if difference.reason in _OUTPUT_REASONS else Verdict.UNKNOWN
        return CaseResult(self.case, verdict, difference.reason, difference.place, None, example)

    def _pixels(self, made: Subject, low: int, high: int) -> Pixels:
        case, source = self.case, self.filter.input
        if case.codes in (Codes.CONCRETE, Codes.WRONG):
            span = source.high - source.low + 1
            return lambda y, x, c: source.low + _scattered(y, x, c) % span
        if case.codes is Codes.ILLEGAL:
            return lambda y, x, c: (
                made.pixel((y, x, c), low, high)
                if (y, x, c) == case.illegal
                else made.pixel((y, x, c), source.low, source.high)
            )
        return lambda y, x, c: made.pixel((y, x, c), low, high)

    def _broken(self, frames: Frames, error: BrokenError) -> CaseResult:
        ends = _ends(frames, error.value)
        if self.case.codes in _FIXED:
            example = self._fixed_example(frames, None)
            return CaseResult(self.case, Verdict.BROKEN, error.reason, error.place, ends, example)
        space = frames.run.subject.program.cx.space
        shown = None
        try:
            pixels = space.witness(error.mask, error.value, error.inside)
        except InexpressibleError:
            pixels = None
        if pixels is not None:
            shown = frames.simplest(frames.of(pixels), error.reason)
        if shown is None:
            shown = self._replayed(frames)
        if shown is None:
            return self._unknown(error.reason, error.place, ends)
        return self._shown(shown, ends)

    def _differs(self, frames: Frames, found: Difference) -> CaseResult:
        if self.case.codes in _FIXED:
            example = self._fixed_example(frames, found)
            return CaseResult(self.case, Verdict.REFUTED, found.reason, found.place, None, example)
        shown = None
        if found.wanted is not None and found.got is not None and found.position is not None:
            pixels = frames.run.subject.program.cx.space.difference(found.got, found.wanted)
            if pixels is not None:
                shown = frames.simplest(frames.of(pixels), found.reason)
        else:
            shown = frames.simplest(frames.of({}), found.reason)
        if shown is None:
            shown = self._replayed(frames)
        if shown is None:
            return self._unknown(found.reason, found.place)
        return self._shown(shown, None)

    def _fixed_example(self, frames: Frames, found: Difference | None) -> Counterexample | None:
        """Return the fixed frame, unless it is too large or not the frame is at fault."""
        case = self.case
        if case.codes is not Codes.CONCRETE or case.width * case.height > _MOST_SHOWN:
            return None
        frame = {}
        for cell in frames.cells():
            code = frames.run.pixels(*cell)
            assert isinstance(code, int)
            frame[cell] = code
        return frames.example(frame, found)

    def _replayed(self, frames: Frames) -> Shown | None:
        for frame in frames.replays():
            shown = frames.shown_by(frame)
            if shown is not None:
                return frames.simplest(frame, shown.reason)
        return None

    def _shown(self, shown: Shown, interval: Interval | None) -> CaseResult:
        verdict = Verdict.REFUTED if shown.reason in _OUTPUT_REASONS else Verdict.BROKEN
        return CaseResult(
            self.case, verdict, shown.reason, shown.place, interval, shown.counterexample
        )

    def _refused(self, error: RefusedError) -> CaseResult:
        return CaseResult(self.case, Verdict.REFUSED, error.reason, error.place)

    def _unknown(
        self, reason: str, place: Place | None, interval: Interval | None = None
    ) -> CaseResult:
        return CaseResult(self.case, Verdict.UNKNOWN, reason, place, interval)


# what these show was run on numbers already
_FIXED = (Codes.CONCRETE, Codes.WRONG, Codes.BREAKPOINTS)

_MOST_SHOWN = 4_096

_OUTPUT_REASONS = frozenset(
    {
        "output",
        "not-written",
        "not-always-written",
        "status",
        "written-though-refused",
        "written-between-rows",
        "output-size",
    }
)


def _scattered(y: int, x: int, c: int) -> int:
    """Return a number that looks drawn by chance, and repeats with no power of two."""
    mixed = (y * 0x9E3779B1 + x * 0x85EBCA77 + c * 0xC2B2AE3D + 1) & 0xFFFFFFFF
    mixed = (mixed ^ mixed >> 15) * 0x2C1B3C6D & 0xFFFFFFFF
    return mixed ^ mixed >> 13


def _ends(frames: Frames, value: Value | None) -> Interval | None:
    if value is None:
        return None
    return Interval(*frames.run.subject.program.cx.space.bounds(value))
