"""Sums that clamp at every add, where taps share pixels: exact ends and reachable sets.

The next sum grows with the sum before and with the amount added. So a pixel that one tap
reads acts through the ends of its amount alone; of sums with equal values of the pixels that
are still to be read again only the furthest counts; and the ends over all pixels come from
eliminating those pixels one by one (bucket elimination: Dechter, Artificial Intelligence
113, 1999). That the ends of shared pixels do not give the ends of the sum is why it is done:
taps 3, -1, 5, -4 on one pixel of 0..15 in 7 bits reach 27 at 9, but 3 at 15.
"""

from collections import Counter
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from guardbit.arith.words import clamp
from guardbit.model.sizing import Interval
from guardbit.sizing.reach import MOVES, Reach

# sums that are computed for all values of pending pixels
END_WORK = 1 << 25

_INT64 = 1 << 62

Pixel = tuple[int, int]


@dataclass(frozen=True)
class Add:
    """One add: coefficient times the pixel named, or a fixed amount where it is None."""

    coefficient: int
    pixel: Pixel | None
    amount: int = 0


@dataclass(frozen=True)
class Chain:
    """A register that starts at `start` and is clamped to `word` at every add.

    Each pixel takes any of `values`, of which `ends` are the ends; None: not known which.
    """

    start: int
    adds: tuple[Add, ...]
    word: Interval
    ends: Interval
    values: Reach | None

    @property
    def shares(self) -> bool:
        """Return whether two adds read one pixel."""
        return bool(self.shared)

    @cached_property
    def shared(self) -> frozenset[Pixel]:
        """Return the pixels that several adds read."""
        return frozenset(p for p, count in self.reads.items() if p is not None and count > 1)

    @property
    def reads(self) -> Counter[Pixel | None]:
        """Return how many adds read each pixel, and how many none."""
        return Counter(add.pixel for add in self.adds)

    def mirrored(self) -> "Chain":
        """Return the chain whose sums are the negatives of this one's."""
        adds = tuple(Add(-a.coefficient, a.pixel, -a.amount) for a in self.adds)
        word = Interval(-self.word.high, -self.word.low)
        return Chain(-self.start, adds, word, self.ends, self.values)


# an eliminated pixel, those still pending then, and its best value's place for each of theirs
_Gone = tuple[Pixel, tuple[Pixel, ...], NDArray[np.intp]]


@dataclass(frozen=True)
class Greatest:
    """The greatest final sum, and pixels that give it."""

    value: int
    pixels: Mapping[Pixel, int]


def loose_ends(chain: Chain) -> Interval:
    """Return the ends if each add had a pixel of its own: a bound for adds that share."""
    low = high = clamp(chain.start, chain.word.low, chain.word.high)
    for add in chain.adds:
        least, greatest = _amounts(add, chain.ends)
        low = clamp(low + least, chain.word.low, chain.word.high)
        high = clamp(high + greatest, chain.word.low, chain.word.high)
    return Interval(low, high)


def _amounts(add: Add, values: Interval) -> tuple[int, int]:
    if add.pixel is None:
        return add.amount, add.amount
    ends = (add.coefficient * values.low, add.coefficient * values.high)
    return min(ends), max(ends)


def greatest(chain: Chain, work: int = END_WORK) -> Greatest | None:
    """Return the greatest final sum with pixels that attain it; None if that is too much work."""
    if not _is_small(chain) or (chain.shares and _end_work(chain) > work):
        return None
    left, shared = chain.reads, chain.shared
    best = np.array(clamp(chain.start, chain.word.low, chain.word.high), dtype=np.int64)
    axes: list[Pixel] = []
    gone: list[_Gone] = []
    for add in chain.adds:
        left[add.pixel] -= 1
        if add.pixel is None or add.pixel not in shared:
            best = _clipped(chain, best + _amounts(add, chain.ends)[1])
            continue
        if add.pixel not in axes:
            axes.append(add.pixel)
            best = best[..., None]
        at = axes.index(add.pixel)
        best = _clipped(chain, best + _along(add, chain, len(axes) - 1 - at))
        if not left[add.pixel]:
            axes.remove(add.pixel)
            gone.append((add.pixel, tuple(axes), best.argmax(axis=at)))
            best = best.max(axis=at)
    return Greatest(int(best), _traced(chain, gone))


def _clipped(chain: Chain, sums: NDArray[np.int64]) -> NDArray[np.int64]:
    return np.clip(sums, chain.word.low, chain.word.high)


def _along(add: Add, chain: Chain, after: int) -> NDArray[np.int64]:
    """Return the amounts for all values of the add's pixel, with `after` axes behind."""
    assert chain.values is not None
    amounts: NDArray[np.int64] = add.coefficient * chain.values.members
    return amounts.reshape(-1, *[1] * after)


def _traced(chain: Chain, gone: Sequence[_Gone]) -> dict[Pixel, int]:
    """Return the pixels' values: of shared ones from the last eliminated to the first."""
    pixels = {
        add.pixel: chain.ends.high if add.coefficient > 0 else chain.ends.low
        for add in chain.adds
        if add.pixel is not None and add.pixel not in chain.shared
    }
    chosen: dict[Pixel, int] = {}
    for pixel, axes, furthest in reversed(gone):
        chosen[pixel] = int(furthest[tuple(chosen[axis] for axis in axes)])
    return pixels | {pixel: _member(chain, at) for pixel, at in chosen.items()}


def _member(chain: Chain, at: int) -> int:
    assert chain.values is not None
    return int(chain.values.members[at])


def _end_work(chain: Chain) -> int:
    """Return how many sums are computed in all."""
    left, count = chain.reads, chain.values.mask.bit_count() if chain.values else END_WORK
    pending: set[Pixel] = set()
    total = 0
    for add in chain.adds:
        if add.pixel is not None and add.pixel in chain.shared:
            pending.add(add.pixel)
        total += count ** len(pending)
        left[add.pixel] -= 1
        if add.pixel is not None and not left[add.pixel]:
            pending.discard(add.pixel)
    return total


def _is_small(chain: Chain) -> bool:
    """Return whether every sum stays in int64 before it is clamped."""
    most = max(abs(chain.ends.low), abs(chain.ends.high))
    amounts = [abs(a.amount) if a.pixel is None else abs(a.coefficient) * most for a in chain.adds]
    return max(*amounts, 0, -chain.word.low, chain.word.high) < _INT64


_Values = tuple[int, ...]


@dataclass(frozen=True)
class _Stage:
    """The register's sets after some adds, by the values of the pending pixels `axes`."""

    axes: tuple[Pixel, ...]
    sets: Mapping[_Values, Reach]


def reachable(chain: Chain, work: int = 2 * END_WORK) -> list[_Stage] | None:
    """Return what the register can hold after 0, 1, 2... adds; None if that is too much work."""
    if not _is_affordable(chain, work):
        return None
    left = chain.reads
    start = clamp(chain.start, chain.word.low, chain.word.high)
    stages = [_Stage((), {(): Reach(start, 1)})]
    for add in chain.adds:
        last = left[add.pixel] == 1
        left[add.pixel] -= 1
        stages.append(_next(stages[-1], add, last, chain))
    return stages


def whole(stages: Sequence[_Stage]) -> Reach:
    """Return everything that the register can hold at the end."""
    return stages[-1].sets[()]


def _members(chain: Chain) -> list[int]:
    assert chain.values is not None
    return [int(member) for member in chain.values.members]


def _is_affordable(chain: Chain, work: int) -> bool:
    width = chain.word.high - chain.word.low + 1
    if chain.values is None or width > work or _end_work(chain) * width > work:
        return False
    return len(chain.adds) * width * chain.values.copies <= MOVES * work


def _next(stage: _Stage, add: Add, last: bool, chain: Chain) -> _Stage:
    if add.pixel is None or (last and add.pixel not in stage.axes):
        values = chain.values if add.pixel is not None else Reach(add.amount, 1)
        assert values is not None
        weight = add.coefficient if add.pixel is not None else 1
        sets = {k: s.plus(weight, values).clamped(chain.word) for k, s in stage.sets.items()}
        return _Stage(stage.axes, sets)
    axes, sets = stage.axes, dict(stage.sets)
    if add.pixel not in axes:
        axes = (*axes, add.pixel)
        members = _members(chain)
        sets = {(*key, v): s for key, s in sets.items() for v in members}
    at = axes.index(add.pixel)
    sets = {k: s.moved(add.coefficient * k[at]).clamped(chain.word) for k, s in sets.items()}
    return _without(_Stage(axes, sets), at) if last else _Stage(axes, sets)


def _without(stage: _Stage, at: int) -> _Stage:
    merged: dict[_Values, Reach] = {}
    for key, reach in stage.sets.items():
        kept = key[:at] + key[at + 1 :]
        merged[kept] = merged[kept] | reach if kept in merged else reach
    return _Stage(stage.axes[:at] + stage.axes[at + 1 :], merged)


def pixels_of_end(chain: Chain, stages: Sequence[_Stage], target: int) -> dict[Pixel, int]:
    """Return pixels with which the register ends at `target`, one of the last stage's sums."""
    pixels: dict[Pixel, int] = {}
    for add, before in zip(chain.adds[::-1], stages[-2::-1], strict=True):
        choices: Iterable[dict[Pixel, int]] = [pixels]
        if add.pixel is not None and add.pixel not in pixels:
            values = _members(chain)
            if add.pixel not in before.axes:
                sums = before.sets[tuple(pixels[axis] for axis in before.axes)]
                values = _likely(add, sums, chain, target)
            choices = (pixels | {add.pixel: value} for value in values)
        pixels, target = _step_back(add, before, choices, target, chain.word)
    return pixels


def _likely(add: Add, sums: Reach, chain: Chain, target: int) -> list[int]:
    """Return values of an add's pixel, one of which takes one of `sums` to `target`.

    Without clamping one that does is looked for; with it, if any does, so does an extreme one.
    """
    assert chain.values is not None
    offsets = target - add.coefficient * chain.values.members - sums.low
    inside = np.flatnonzero((offsets >= 0) & (offsets < len(sums.cells)))
    direct = inside[sums.cells[offsets[inside].astype(np.int64)]][:1]
    return [*map(int, chain.values.members[direct]), chain.ends.low, chain.ends.high]


def _step_back(
    add: Add, before: _Stage, choices: Iterable[dict[Pixel, int]], target: int, word: Interval
) -> tuple[dict[Pixel, int], int]:
    """Return the choice of pixels, and a sum before, from which the add gives `target`."""
    for pixels in choices:
        sums = before.sets[tuple(pixels[axis] for axis in before.axes)]
        amount = add.amount if add.pixel is None else add.coefficient * pixels[add.pixel]
        for total in (target - amount, sums.ends.low, sums.ends.high):
            if total in sums and clamp(total + amount, word.low, word.high) == target:
                return pixels, total
    raise ValueError(f"no sum before gives {target}")
