"""Many calls as one job file, and what a mutant makes of them compared with the sound code."""

import struct
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from itertools import pairwise

from guardbit.build.job import encode, layout
from guardbit.build.processes import Ended
from guardbit.build.results import RESULT, decode
from guardbit.model.routine import Call, Outcome, Routine

_MOST_DEATHS = 6

Launch = Callable[[bytes], Ended]


@dataclass(frozen=True, eq=False)
class Job:
    """Calls, encoded once; `ends` is where the results of the first n of them end."""

    routine: Routine
    calls: tuple[Call, ...]
    parts: tuple[bytes, ...]
    ends: tuple[int, ...]

    def data(self, first: int = 0) -> bytes:
        """Return the job file of the calls from that one on."""
        rest = self.parts[first:]
        return struct.pack("=Q", len(rest)) + b"".join(rest)

    def outcome(self, index: int, segment: bytes) -> Outcome:
        """Return what one call's part of the results says."""
        (made,) = decode(segment, [(self.routine, self.calls[index])])
        return made


def job(routine: Routine, calls: Sequence[Call]) -> Job:
    """Return the job of these calls."""
    parts = tuple(encode([(0, routine, call)])[8:] for call in calls)
    ends = [0]
    for call in calls:
        size = RESULT.size + 2 * (8 * max(1, len(call.bands)) + layout(routine, call).dst_bytes)
        ends.append(ends[-1] + size)
    return Job(routine, tuple(calls), parts, tuple(ends))


@dataclass(frozen=True, eq=False)
class Answers:
    """The results of a job, one segment a call; complete."""

    data: bytes
    segments: tuple[bytes, ...]


def answers(of: Job, ended: Ended) -> Answers | None:
    """Return the results of a child that did all calls; None: it died on the way."""
    if len(ended.data) != of.ends[-1]:
        return None
    return Answers(ended.data, tuple(ended.data[a:b] for a, b in pairwise(of.ends)))


@dataclass(frozen=True, eq=False)
class Difference:
    """A call that a mutant answers differently; `segment` None: the child died of it."""

    index: int
    segment: bytes | None
    ended: Ended | None


def differences(
    of: Job, sound: Answers, launch: Launch, behind: Callable[[int], int] = lambda index: index + 1
) -> Iterator[Difference]:
    """Yield the calls that a mutant answers differently from the sound code, in order.

    A call that kills the child is one. A new child then makes the calls from `behind` that
    one on.
    """
    first, deaths, count = 0, 0, len(of.calls)
    while first < count and deaths < _MOST_DEATHS:
        ended = launch(of.data(first))
        if first == 0 and ended.data == sound.data:
            return
        base = of.ends[first]
        done = first
        while done < count and of.ends[done + 1] - base <= len(ended.data):
            segment = ended.data[of.ends[done] - base : of.ends[done + 1] - base]
            # the first word is the number of the call in its job file
            if segment[8:] != sound.segments[done][8:]:
                yield Difference(done, segment, None)
            done += 1
        if done < count:
            yield Difference(done, None, ended)
            deaths += 1
        first = behind(done) if done < count else count
