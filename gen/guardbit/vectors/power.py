"""Which changes of a tap by one the frames would show, for every tap and border class.

Random frames come first; then frames aimed at rounding boundaries where something is left.
Every statement is measured with the reference: a frame and its response against the response
with the changed tap.
"""

from collections import Counter
from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass, field
from itertools import product

import numpy as np
from numpy.typing import NDArray

from guardbit.model.filter import Filter
from guardbit.model.vectors import Codes, Purpose
from guardbit.reference.run import respond
from guardbit.vectors.aim import Aim, Spot, aimed, spot
from guardbit.vectors.changes import SIGNS, Tap, changes, is_linear, single_channels, taps
from guardbit.vectors.classes import AxisClass, Site, labels, lengths, named, sites
from guardbit.vectors.hidden import reasons_hidden
from guardbit.vectors.stimuli import Level, Stimulus, level, random_frame

_SEED = 31_415
_MOST_CHECKS = 120_000
_MOST_TAPS = 64
_MOST_LENGTHS = 12
_MOST_FRAMES = 16
_ROUNDS = 4
_WORK = 1 << 24
_ALL_WORK = 1 << 30
_POSITIONS = 3
_LISTED = 12
_AIMED_TAPS = 9

Class = tuple[Site, Site]


@dataclass(frozen=True, eq=False)
class Power:
    """Frames, and how many of the checks (tap, border class, +1 or -1) they show.

    `unobservable` checks no legal frame can show, by reason; `not_shown` are neither shown
    nor known to be unobservable. `notes` say what was sampled.
    """

    stimuli: tuple[Stimulus, ...]
    taps: int
    classes: int
    checks: int
    shown: int
    unobservable: tuple[tuple[str, int], ...]
    not_shown: tuple[str, ...]
    not_shown_count: int
    notes: tuple[str, ...]


@dataclass(eq=False)
class _Board:
    """What has been shown so far: [class, tap, sign]; and the frames that showed it."""

    filter: Filter
    classes: list[Class]
    taps: list[Tap]
    shown: NDArray[np.bool_]
    rng: np.random.Generator
    work: int = _ALL_WORK
    planes: list[Codes] = field(default_factory=list)
    spots: dict[int, Spot] = field(default_factory=dict)
    first: dict[tuple[int, int], Codes] = field(default_factory=dict)

    def spot(self, number: int) -> Spot:
        """Return what the taps read at a class."""
        if number not in self.spots:
            self.spots[number] = spot(self.filter, self.taps, *self.classes[number])
        return self.spots[number]

    @property
    def key(self) -> dict[tuple[AxisClass, AxisClass], int]:
        """Return the number of each class."""
        return {(row.label, column.label): i for i, (row, column) in enumerate(self.classes)}


def measure_power(filter: Filter) -> Power:
    """Return frames that show single-tap changes, and what they show. Accumulators resolved."""
    board, notes = _board(filter)
    centre = level(filter)
    for shape in _shapes(board.classes):
        _try(board, shape, _random_planes(board, shape, centre))
    hidden = _hidden(board)
    for attempt in range(_ROUNDS):
        left = ~board.shown & (hidden == "")
        if not left.any() or board.work <= 0:
            break
        for shape, planes in _aims(board, left, centre, attempt):
            _try(board, shape, planes)
    if board.work <= 0:
        notes.append("the search for frames was ended by its limit on work")
    if board.classes and not board.planes:
        # nothing shows, and the routine is to be run all the same
        board.planes += [board.first[shape] for shape in _shapes(board.classes)][:_MOST_FRAMES]
    return _summary(board, hidden, notes)


def _board(filter: Filter) -> tuple[_Board, list[str]]:
    rng = np.random.default_rng(_SEED)
    notes: list[str] = []
    chosen = list(taps(filter))
    if not is_linear(filter) and len(chosen) > _MOST_TAPS:
        notes.append(f"{_MOST_TAPS} of {len(chosen)} taps, at random")
        picked = sorted(rng.choice(len(chosen), _MOST_TAPS, replace=False))
        chosen = [chosen[i] for i in picked]
    rows, columns = (sites(filter, axis, lengths(filter, axis, _MOST_LENGTHS)) for axis in (0, 1))
    every = list(product(rows, columns))
    most = max(16, _MOST_CHECKS // max(1, 2 * len(chosen)))
    classes = every
    if len(every) > most:
        notes.append(f"{most} of {len(every)} border classes: the outermost, the rest at random")
        classes = _sampled(rows, columns, most, rng)
    shown = np.zeros((len(classes), len(chosen), len(SIGNS)), bool)
    return _Board(filter, classes, chosen, shown, rng), notes


def _sampled(
    rows: Sequence[Site], columns: Sequence[Site], most: int, rng: np.random.Generator
) -> list[Class]:
    """Return the classes of outermost and interior positions, and others at random."""
    first = list(product(_outermost(rows), _outermost(columns)))
    others = [pair for pair in product(rows, columns) if pair not in set(first)]
    count = max(0, min(most - len(first), len(others)))
    picked = rng.permutation(len(others))[:count].tolist()
    return first[:most] + [others[i] for i in picked]


def _outermost(along: Sequence[Site]) -> list[Site]:
    ends = [
        min(along, key=lambda s: sum(s.label)),
        max((s for s in along), key=lambda s: s.label[0] - s.label[1]),
        max((s for s in along), key=lambda s: s.label[1] - s.label[0]),
    ]
    return list(dict.fromkeys(ends))


def _shapes(classes: Iterable[Class]) -> list[tuple[int, int]]:
    """Return the sizes at which the classes come first, small ones first."""
    return sorted({(row.length, column.length) for row, column in classes}, key=np.prod)


def _frame_count(board: _Board, shape: tuple[int, int]) -> int:
    cost = shape[0] * shape[1] * len(board.taps)
    return int(min(max(_WORK // max(1, cost), 2), _MOST_FRAMES))


def _random_planes(board: _Board, shape: tuple[int, int], centre: Level) -> list[Codes]:
    plain = single_channels(board.filter, 1)
    return [
        random_frame(plain, shape, board.rng, centre if number % 2 else None)[:, :, 0]
        for number in range(_frame_count(board, shape))
    ]


def _aims(
    board: _Board, left: NDArray[np.bool_], centre: Level, attempt: int
) -> Iterator[tuple[tuple[int, int], list[Codes]]]:
    """Yield frames for what is left, by size; other than the linear case only random ones."""
    wanted: dict[tuple[int, int], list[Codes]] = {}
    for number in np.flatnonzero(left.any(axis=(1, 2))):
        row, column = board.classes[number]
        shape = (row.length, column.length)
        planes = wanted.setdefault(shape, [])
        if is_linear(board.filter):
            planes += _aim(board, int(number), left[number], centre, attempt)
        elif not planes:
            planes += _random_planes(board, shape, centre)
    yield from wanted.items()


def _aim(
    board: _Board, number: int, left: NDArray[np.bool_], centre: Level, attempt: int
) -> Iterator[Codes]:
    """Yield frames aimed at one class: one a sign first, then one a tap that is left."""
    there = board.spot(number)
    plain = single_channels(board.filter, 1)
    source = board.filter.input
    around = centre if attempt % 2 == 0 else None
    extreme = (source.low, source.high)[attempt % 2]
    for i, sign in enumerate(SIGNS):
        waiting = np.flatnonzero(left[:, i] & ~there.outside) if attempt else np.array([], int)
        pixels = [None, *((int(there.rows[t]), int(there.columns[t]), extreme) for t in waiting)]
        for kept in pixels[:_AIMED_TAPS] if left[:, i].any() else ():
            # a code below the pedestal turns the step round: aim at both sides of a boundary
            for aim in (sign, -sign):
                yield aimed(plain, there, Aim(aim, around, kept), board.rng)


def _try(board: _Board, shape: tuple[int, int], planes: Sequence[Codes]) -> None:
    """Measure what the planes show, and keep those that show something new."""
    at, numbers = _positions(board, shape)
    if not planes or not numbers.size or board.work <= 0:
        return
    board.first.setdefault(shape, planes[0])
    if not board.taps:
        return
    stack = np.stack(planes, axis=2)
    wide = single_channels(board.filter, stack.shape[2])
    response = respond(wide, stack)
    changed = np.stack(list(changes(wide, stack, response, board.taps, at)))
    classes, starts = np.unique(numbers, return_index=True)
    # (tap, sign, class, frame) -> (frame, class, tap, sign)
    found = np.logical_or.reduceat(changed, starts, axis=2).transpose(3, 2, 0, 1)
    board.work -= stack.size * len(board.taps)
    shown = board.shown[classes]
    for plane, shows in zip(planes, found, strict=True):
        if (shows & ~shown).any():
            shown |= shows
            board.planes.append(plane)
    board.shown[classes] = shown


def _positions(
    board: _Board, shape: tuple[int, int]
) -> tuple[tuple[NDArray[np.intp], NDArray[np.intp]], NDArray[np.intp]]:
    """Return output positions to look at, at most a few a class, and their classes' numbers.

    The numbers ascend.
    """
    rows, columns = (_few(labels(board.filter, axis, shape[axis])) for axis in (0, 1))
    key = board.key
    found = {
        (key[row, column], r, c)
        for row, some_rows in rows.items()
        for column, some_columns in columns.items()
        if (row, column) in key
        for r, c in zip(some_rows, some_columns, strict=True)
    }
    table = np.array(sorted(found), np.intp).reshape(-1, 3)
    return (table[:, 1], table[:, 2]), table[:, 0]


def _few(along: Sequence[AxisClass]) -> dict[AxisClass, list[int]]:
    """Return a few indices of each class, cyclically the same number of each."""
    every: dict[AxisClass, list[int]] = {}
    for index, label in enumerate(along):
        every.setdefault(label, []).append(index)
    return {
        label: [have[i * len(have) // _POSITIONS % len(have)] for i in range(_POSITIONS)]
        for label, have in every.items()
    }


def _hidden(board: _Board) -> NDArray[np.object_]:
    """Return per check why no legal frame can show it; "": no reason is known."""
    reasons = np.full(board.shown.shape, "", object)
    for number in np.flatnonzero(~board.shown.all(axis=(1, 2))).tolist():
        there, left = board.spot(number), ~board.shown[number]
        reasons[number] = reasons_hidden(board.filter, board.taps, there, left)
    return reasons


def _summary(board: _Board, hidden: NDArray[np.object_], notes: list[str]) -> Power:
    reasons = hidden[~board.shown]
    left = np.argwhere(~board.shown & (hidden == ""))
    return Power(
        stimuli=_packed(board.filter, board.planes),
        taps=len(board.taps),
        classes=len(board.classes),
        checks=board.shown.size,
        shown=int(board.shown.sum()),
        unobservable=tuple(sorted(Counter(str(r) for r in reasons if r).items())),
        not_shown=tuple(_check_name(board, *map(int, one)) for one in left[:_LISTED]),
        not_shown_count=len(left),
        notes=tuple(notes),
    )


def _check_name(board: _Board, number: int, tap: int, sign: int) -> str:
    row, column = board.classes[number]
    chosen = board.taps[tap]
    which = f" of pass {chosen.pass_index + 1}" if len(board.filter.passes) > 1 else ""
    term = chosen.term
    place = named((row.label, column.label))
    return f"tap reading ({term.dy}, {term.dx}){which} by {SIGNS[sign]:+d}, {place}"


def _packed(filter: Filter, planes: Sequence[Codes]) -> tuple[Stimulus, ...]:
    """Return the planes as frames of the filter's channels, planes of one size together."""
    channels = filter.geometry.channels
    sized: dict[tuple[int, ...], list[Codes]] = {}
    for plane in planes:
        sized.setdefault(plane.shape, []).append(plane)
    found: list[Stimulus] = []
    for shape, same in sized.items():
        for first in range(0, len(same), channels):
            some = [same[(first + c) % len(same)] for c in range(channels)]
            name = f"probe-{shape[0]}x{shape[1]}-{first // channels}"
            found.append(Stimulus(name, Purpose.IMPULSE, np.stack(some, axis=2)))
    return tuple(found)
