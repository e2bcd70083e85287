"""Frames that show a fault: from symbols to codes, confirmed, and made simple."""

import random
from collections.abc import Iterator, Mapping
from dataclasses import dataclass

from guardbit.model.proof import Counterexample, Place
from guardbit.proof.judge.runs import Difference, Run, Tally
from guardbit.proof.judge.subject import Cell, container_ends
from guardbit.proof.machine.errors import BrokenError, BudgetError, RefusedError
from guardbit.proof.machine.memory import Guard, Pointer

Frame = dict[Cell, int]

_SEED = 20_011
_REPLAYS = 24
_SIMPLER = 160


@dataclass(frozen=True)
class Shown:
    """What a frame shows: a reason, a place, and the output that differs if one does."""

    reason: str
    place: Place | None
    counterexample: Counterexample


@dataclass(frozen=True)
class Frames:
    """Fixed frames for a run whose pixels are open in `low`..`high`."""

    run: Run
    low: int
    high: int

    def cells(self) -> list[Cell]:
        """Return every source pixel, in raster order."""
        case, channels = self.run.case, self.run.filter.geometry.channels
        return [
            (y, x, c)
            for y in range(case.height)
            for x in range(case.width)
            for c in range(channels)
        ]

    def of(self, pixels: Mapping[int, int]) -> Frame:
        """Return the frame in which open pixels, by number, have these codes."""
        frame = dict.fromkeys(self.cells(), self._plain())
        for number, code in pixels.items():
            frame[self.run.subject.places[number]] = code
        if self.run.case.illegal is not None and self.run.case.illegal not in {
            self.run.subject.places[n] for n in pixels
        }:
            frame[self.run.case.illegal] = self._illegal()
        return frame

    def _plain(self) -> int:
        return min(max(self.low, 0), self.high)

    def _illegal(self) -> int:
        least, most = container_ends(self.run.filter.input.container)
        f = self.run.filter.input
        return f.low - 1 if f.low > least else min(f.high + 1, most)

    def shown_by(self, frame: Frame) -> Shown | None:
        """Return what is wrong for one frame, found by running it on numbers."""
        run = self.run
        fixed = Run(
            run.filter,
            run.routine,
            run.subject,
            run.case,
            lambda y, x, c: frame[y, x, c],
            run.compares,
        )
        try:
            found = fixed.first_difference(Tally())
        except BrokenError as error:
            return Shown(error.reason, error.place, self.example(frame, None))
        except (RefusedError, BudgetError):
            return None
        if found is None:
            return None
        return Shown(found.reason, found.place, self.example(frame, found))

    def example(self, frame: Frame, found: Difference | None) -> Counterexample:
        """Return a frame as a counterexample, with the output that differs."""
        case, channels = self.run.case, self.run.filter.geometry.channels
        rows = tuple(
            tuple(tuple(frame[y, x, c] for c in range(channels)) for x in range(case.width))
            for y in range(case.height)
        )
        wanted = found.wanted if found is not None else None
        got = found.got if found is not None else None
        return Counterexample(
            rows,
            case.taps,
            None if found is None else found.position,
            wanted if isinstance(wanted, int) else None,
            got if isinstance(got, int) and not isinstance(got, Guard | Pointer) else None,
        )

    def simplest(self, frame: Frame, reason: str) -> Shown | None:
        """Return what a frame shows after its pixels were made as plain as it allows."""
        best = self.shown_by(frame)
        if best is None or best.reason != reason:
            return best
        plain, tries = self._plain(), 0
        for cell in self.cells():
            if frame[cell] == plain or cell == self.run.case.illegal:
                continue
            tries += 1
            if tries > _SIMPLER:
                break
            simpler = {**frame, cell: plain}
            shown = self.shown_by(simpler)
            if shown is not None and shown.reason == reason:
                frame, best = simpler, shown
        return best

    def replays(self) -> Iterator[Frame]:
        """Yield frames that are likely to show a fault: ends, mixed ends, and any codes."""
        rng = random.Random(_SEED)
        cells = self.cells()
        for code in (self.low, self.high):
            yield self._legalised(dict.fromkeys(cells, code))
        for number in range(_REPLAYS):
            if number % 2:
                frame = {cell: rng.choice((self.low, self.high)) for cell in cells}
            else:
                frame = {cell: rng.randint(self.low, self.high) for cell in cells}
            yield self._legalised(frame)

    def _legalised(self, frame: Frame) -> Frame:
        if self.run.case.illegal is not None:
            frame[self.run.case.illegal] = self._illegal()
        return frame
