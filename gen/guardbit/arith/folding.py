"""Where mirrored and periodic borders let taps of one axis meet the same pixel.

On an image of length n, reads at x and y get the same pixel iff x = y modulo a period, or,
for a mirror, x + y = s modulo that period. With offsets d*k from position p these are
congruences in k: they have few solutions, and on long images none but those near one end.
"""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from math import gcd

from guardbit.arith.tracks import Example, Track, tracks
from guardbit.model.enums import BorderMode, Extent
from guardbit.model.filter import Axis, Border

_Ends = tuple[bool, bool]
_Key = tuple[int, int | None, bool, bool]


@dataclass(frozen=True)
class _Line:
    """A track at one length, and its positions first, first + step..last."""

    length: int
    first: int
    step: int
    last: int


def folded_examples(
    axis: Axis, extent: Extent, border: Border, offsets: Sequence[int]
) -> list[Example]:
    """Return a (length, position) for each pattern of a mirrored or periodic border."""
    found: dict[_Key, Example] = {}
    for track in tracks(axis, extent, border):
        points = tuple(o // track.spacing for o in offsets)
        unit = gcd(*points) or 1
        search = _Search.start(border.mode, unit, tuple(o // unit for o in points))
        for line in _lines(track, points):
            for key, position in search.patterns(line, found):
                found.setdefault(key, track.example(line.length, position))
    return list(found.values())


def _lines(track: Track, points: Sequence[int]) -> Iterator[_Line]:
    """Yield the lengths that matter: until positions near one end are far from the other.

    From there on a longer line only repeats; the position of its end among the kept ones
    has the period of the step.
    """
    reach = max(map(abs, (*points, track.reach, track.first)))
    enough = max(track.shortest, 4 * reach + 8) + track.step
    for length in range(track.shortest, min(track.longest, enough) + 1):
        if track.first <= track.last(length):
            yield _Line(length, track.first, track.step, track.last(length))


def _fold(mode: BorderMode, length: int) -> tuple[int, int | None]:
    """Return (period, s): equal pixels are equal modulo it, or sum to s (None: no mirror)."""
    match mode:
        case BorderMode.HALF_SAMPLE:
            return 2 * length, -1
        case BorderMode.WHOLE_SAMPLE if length > 1:
            return 2 * length - 2, 0
        case BorderMode.WHOLE_SAMPLE:
            return 1, None
        case _:
            return length, None


@dataclass(frozen=True)
class _Turn:
    """The congruences on one line for offsets unit * k.

    Taps k and k' read equal pixels iff k = k' modulo `cycle`; or mirrored, from position p,
    iff unit * (k + k') = mirror - 2p modulo `period`. `common` is gcd(period, unit).
    """

    period: int
    mirror: int | None
    unit: int
    common: int
    cycle: int

    @classmethod
    def of(cls, mode: BorderMode, unit: int, length: int) -> "_Turn":
        period, mirror = _fold(mode, length)
        common = gcd(period, unit)
        return cls(period, mirror, unit, common, period // common)

    def mirrored_sum(self, position: int) -> int | None:
        """Return the sum k + k', modulo the cycle, of taps that mirror each other there."""
        assert self.mirror is not None
        wanted, rest = divmod(self.mirror - 2 * position, self.common)
        return None if rest else wanted * pow(self.unit // self.common, -1, self.cycle) % self.cycle

    def position(self, line: _Line, total: int, least: int) -> int | None:
        """Return the first kept position from `least` on where sum `total` is mirrored."""
        assert self.mirror is not None
        twice, half = self.mirror - self.unit * total, self.period // 2
        common = gcd(line.step, half)
        if twice % 2 or (twice // 2 - line.first) % common:
            return None
        inverse = pow(line.step // common, -1, half // common)
        start = line.first + line.step * ((twice // 2 - line.first) // common * inverse)
        stride = line.step * (half // common)
        return least + (start - least) % stride


@dataclass(frozen=True)
class _Search:
    """The search for patterns of offsets unit * k, with k in `steps`, ascending.

    `sums` are the k + k' of two different taps: the mirrors that matter. `unseen` holds, per
    ends that reads cross, the sums not yet met where only one mirror acts.
    """

    mode: BorderMode
    unit: int
    steps: tuple[int, ...]
    sums: frozenset[int]
    unseen: dict[_Ends, set[int]]

    @classmethod
    def start(cls, mode: BorderMode, unit: int, steps: tuple[int, ...]) -> "_Search":
        sums = frozenset(a + b for i, a in enumerate(steps) for b in steps[:i])
        ends = ((False, True), (True, False), (True, True))
        return cls(mode, unit, steps, sums, {e: set(sums) for e in ends})

    @property
    def spread(self) -> int:
        return self.steps[-1] - self.steps[0]

    def patterns(self, line: _Line, found: dict[_Key, Example]) -> Iterator[tuple[_Key, int]]:
        """Yield (key, position) for the patterns on this line, not all that are in `found`."""
        turn = _Turn.of(self.mode, self.unit, line.length)
        for ends, kept in self._quarters(line):
            if kept and turn.mirror is not None and any(ends):
                yield from self._mirrored(turn, line, ends, kept)
            if kept:
                yield from self._unmirrored(turn, ends, kept, found)

    def _quarters(self, line: _Line) -> Iterator[tuple[_Ends, range]]:
        """Yield the positions whose reads cross no end, the first, the last, or both."""
        low, high = -self.unit * self.steps[0], line.length - 1 - self.unit * self.steps[-1]
        for before, after in ((False, False), (False, True), (True, False), (True, True)):
            least = max(
                line.first, line.first if before else low, high + 1 if after else line.first
            )
            last = min(line.last, low - 1 if before else line.last, line.last if after else high)
            first = line.first - (line.first - least) // line.step * line.step
            yield (before, after), range(first, max(first, last + 1), line.step)

    def _mirrored(
        self, turn: _Turn, line: _Line, ends: _Ends, kept: range
    ) -> Iterator[tuple[_Key, int]]:
        alone = turn.cycle > 2 * self.spread
        wanted = self.unseen[ends] if alone else {s % turn.cycle for s in self.sums}
        for total in sorted(wanted):
            position = turn.position(line, total, kept.start)
            if position is not None and position <= kept[-1]:
                if alone:
                    self.unseen[ends].discard(total)
                yield (0 if alone else turn.cycle, total, *ends), position

    def _unmirrored(
        self, turn: _Turn, ends: _Ends, kept: range, found: dict[_Key, Example]
    ) -> Iterator[tuple[_Key, int]]:
        key = (turn.cycle if turn.cycle <= self.spread else 0, None, *ends)
        if key in found:
            return
        for position in kept:
            if turn.mirror is None or not any(ends) or not self._meets(turn, position):
                yield key, position
                return

    def _meets(self, turn: _Turn, position: int) -> bool:
        """Return whether two different taps mirror each other at a position."""
        total = turn.mirrored_sum(position)
        if total is None:
            return False
        if turn.cycle <= 2 * self.spread:
            return any((s - total) % turn.cycle == 0 for s in self.sums)
        least = 2 * self.steps[0]
        return least + (total - least) % turn.cycle in self.sums
