"""Sums of coefficients times pixels, over every legal loading of the coefficient registers.

With free pixels in low..high a tap k contributes at most k * high if k >= 0 and k * low if not.
So a sum over some of the taps depends on two numbers only, their positive part P and negative
part N: it is high * P - low * N. Which pairs can be had is a matter of which taps are negative:
for each N, the greatest P leaves to N the taps whose positive limits add up to least, a knapsack.
The other taps have to complete a legal loading, for which the fewest magnitudes are best: they
add up to a difference d with magnitudes |d - d0| beyond the forced ones, d0 being the forced
difference. Every condition is then an interval of P for each N.
"""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from guardbit.arith.intervals import scale
from guardbit.model.filter import TapSet
from guardbit.model.sizing import Interval

# Negative parts that are gone through one by one; and how often, for the first 1, 2, 3... of the
# taps, each a knapsack over all taps before if their limits differ.
MOST_PARTS = 1 << 21
MOST_WORK = 1 << 27

_NEVER = 1 << 62


class EmptySetError(ValueError):
    """No loading is legal."""


def is_member(s: TapSet, taps: Sequence[int]) -> bool:
    """Return whether the taps, in the terms' order, may be loaded."""
    limits = zip(s.least, taps, s.greatest, strict=True)
    return (
        all(low <= tap <= high for low, tap, high in limits)
        and (s.sum is None or sum(taps) == s.sum)
        and (s.magnitudes is None or sum(map(abs, taps)) <= s.magnitudes)
        and (not s.kernels or tuple(taps) in s.kernels)
    )


def range_of(s: TapSet, indices: Sequence[int], pixels: Interval) -> Interval:
    """Return the range of the sum over the terms `indices` of tap * pixel.

    Every pixel is free in `pixels` and every loading is legal. Exact where `is_exact`; else a
    bound, in which each tap has its limits for itself. Raises EmptySetError.
    """
    inside = sorted(set(indices))
    if s.kernels:
        return _of_kernels(s.kernels, inside, pixels)
    if not is_exact(s):
        return _apart(s, inside, pixels)
    mirrored = Interval(-pixels.high, -pixels.low)
    return Interval(-_greatest(s, inside, mirrored).value, _greatest(s, inside, pixels).value)


def extreme_loading(
    s: TapSet, indices: Sequence[int], pixels: Interval, *, greatest: bool
) -> tuple[int, ...]:
    """Return a legal loading that attains an end of `range_of`, where that is exact.

    Raises EmptySetError.
    """
    inside = sorted(set(indices))
    signal = pixels if greatest else Interval(-pixels.high, -pixels.low)
    if s.kernels:
        return max(s.kernels, key=lambda kernel: sum(scale(signal, kernel[i]).high for i in inside))
    return _loading(s, _greatest(s, inside, signal))


def is_exact(s: TapSet) -> bool:
    """Return whether ranges over the set are exact rather than bounds."""
    negative = sum(max(-low, 0) for low in s.least)
    mixed = {(low, high) for low, high in zip(s.least, s.greatest, strict=True) if low < 0 < high}
    work = negative * len(s.least) ** (2 if len(mixed) > 1 else 1)
    return bool(s.kernels) or (negative <= MOST_PARTS and work <= MOST_WORK)


def corner_loadings(s: TapSet) -> tuple[tuple[int, ...], ...]:
    """Return legal loadings at the ends of the set: all kernels, or those of extreme sums.

    They attain the ends of the sum of all taps for pixels of one sign and of both. Raises
    EmptySetError.
    """
    if s.kernels:
        return tuple(dict.fromkeys(s.kernels))
    if not is_exact(s):
        ends = (s.least, s.greatest)
        return tuple(dict.fromkeys(taps for taps in ends if is_member(s, taps)))
    everything = range(len(s.least))
    signals = (Interval(0, 1), Interval(-1, 1), Interval(-1, 0), Interval(1, 1), Interval(-1, -1))
    found = (_greatest(s, everything, pixels) for pixels in signals)
    return tuple(dict.fromkeys(_loading(s, best) for best in found))


def _of_kernels(
    kernels: Sequence[Sequence[int]], inside: Sequence[int], pixels: Interval
) -> Interval:
    lows, highs = [], []
    for kernel in kernels:
        ends = [scale(pixels, kernel[i]) for i in inside]
        lows.append(sum(e.low for e in ends))
        highs.append(sum(e.high for e in ends))
    return Interval(min(lows), max(highs))


def _apart(s: TapSet, inside: Sequence[int], pixels: Interval) -> Interval:
    ends = [scale(pixels, tap) for i in inside for tap in (s.least[i], s.greatest[i])]
    pairs = list(zip(ends[::2], ends[1::2], strict=True))
    return Interval(
        sum(min(a.low, b.low) for a, b in pairs), sum(max(a.high, b.high) for a, b in pairs)
    )


@dataclass(frozen=True)
class _Side:
    """Some of the taps: what is forced of them, and what may be added to either part.

    `positive`, `negative`: what their limits force. `more`, `less`: what taps of one sign can
    add to the positive and to the negative part. `mixed`: (greatest, -least) of the taps that
    may have either sign.
    """

    positive: int
    negative: int
    more: int
    less: int
    mixed: tuple[tuple[int, int], ...]

    @classmethod
    def of(cls, s: TapSet, indices: Sequence[int]) -> "_Side":
        limits = [(s.least[i], s.greatest[i]) for i in indices]
        return cls(
            positive=sum(max(low, 0) for low, _ in limits),
            negative=sum(max(-high, 0) for _, high in limits),
            more=sum(max(high, 0) - max(low, 0) for low, high in limits if low >= 0 or high <= 0),
            less=sum(max(-low, 0) - max(-high, 0) for low, high in limits if low >= 0 or high <= 0),
            mixed=tuple((high, -low) for low, high in limits if low < 0 < high),
        )

    @property
    def forced(self) -> int:
        """Return the difference of the forced parts."""
        return self.positive - self.negative

    @property
    def differences(self) -> Interval:
        """Return all differences that can be had."""
        most = self.more + sum(high for high, _ in self.mixed)
        least = self.less + sum(low for _, low in self.mixed)
        return Interval(self.forced - least, self.forced + most)

    def most_positive(self) -> NDArray[np.int64]:
        """Return what can be added to the positive part, by what is added to the negative."""
        total = self.more + sum(high for high, _ in self.mixed)
        cost = _costs(self.mixed)
        return total - np.concatenate([np.zeros(self.less, np.int64), cost])


def _costs(mixed: Sequence[tuple[int, int]]) -> NDArray[np.int64]:
    """Return, by negative part, the least positive limits of taps that can make it together."""
    parts = np.arange(sum(low for _, low in mixed) + 1)
    if len(set(mixed)) <= 1:
        high, low = mixed[0] if mixed else (0, 1)
        return -(-parts // low) * high
    cost = np.where(parts == 0, 0, _NEVER)
    for high, low in mixed:
        cost = np.minimum(cost, cost[np.maximum(parts - low, 0)] + high)
    return cost


@dataclass(frozen=True)
class _Best:
    """A greatest sum, with what is added to both parts of the taps in it."""

    value: int
    inside: tuple[int, ...]
    positive: int
    negative: int


def _greatest(s: TapSet, indices: Sequence[int], pixels: Interval) -> _Best:
    inside, outside = tuple(indices), [i for i in range(len(s.least)) if i not in set(indices)]
    here, there = _Side.of(s, inside), _Side.of(s, outside)
    top = here.most_positive()
    parts = np.arange(len(top))
    bottom = np.zeros_like(top)
    rest = _NEVER if s.magnitudes is None else s.magnitudes
    for side in (here, there):
        rest -= side.positive + side.negative
    if s.sum is None:
        top = np.minimum(top, rest - parts)
    else:
        # what the others are to make, less p, if p is added to the positive part
        wanted = s.sum - here.forced + parts
        away = wanted - there.forced
        bottom = np.maximum(bottom, wanted - there.differences.high)
        top = np.minimum(top, wanted - there.differences.low)
        if s.magnitudes is not None:
            # p + |away - p| <= rest - parts
            top = np.where(away <= rest - parts, np.minimum(top, (rest - parts + away) // 2), -1)
    legal = bottom <= top
    if not legal.any():
        raise EmptySetError
    added = top if pixels.high >= 0 else bottom
    choices = np.flatnonzero(legal)
    value = _values(pixels, added[choices], parts[choices])
    best = int(np.argmax(value))
    at = int(choices[best])
    fixed = pixels.high * here.positive - pixels.low * here.negative
    return _Best(int(value[best]) + fixed, inside, int(added[at]), int(parts[at]))


def _values(
    pixels: Interval, positive: NDArray[np.int64], negative: NDArray[np.int64]
) -> NDArray[Any]:
    """Return the sums that the parts make with pixels at the ends that suit them."""
    widest = max(abs(pixels.low), abs(pixels.high))
    safe = widest * (int(positive.max()) + int(negative.max())) < _NEVER
    kind = np.dtype(np.int64 if safe else object)
    both: NDArray[Any] = pixels.high * positive.astype(kind) - pixels.low * negative.astype(kind)
    return both


def _loading(s: TapSet, best: _Best) -> tuple[int, ...]:
    """Return a legal loading whose taps inside have the parts of `best`."""
    negative = _negative_taps(s, best)
    inside = set(best.inside)
    room = {True: [best.positive, best.negative], False: _completion(s, best)}
    taps = []
    for i, (low, high) in enumerate(zip(s.least, s.greatest, strict=True)):
        left, tap = room[i in inside], min(max(low, 0), high)
        down_only = i in negative
        up = 0 if down_only else min(high - tap, left[0])
        may_sink = down_only or high <= 0 or i not in inside
        down = min(tap - low, left[1]) if may_sink else 0
        left[0], left[1] = left[0] - up, left[1] - down
        taps.append(tap + up - down)
    return tuple(taps)


def _completion(s: TapSet, best: _Best) -> list[int]:
    """Return what the taps that are not inside add to both parts, one of them nothing."""
    if s.sum is None:
        return [0, 0]
    here = _Side.of(s, best.inside)
    there = _Side.of(s, [i for i in range(len(s.least)) if i not in set(best.inside)])
    away = s.sum - (here.forced + best.positive - best.negative) - there.forced
    return [max(away, 0), max(-away, 0)]


def _negative_taps(s: TapSet, best: _Best) -> set[int]:
    """Return the taps of either sign that make the negative part, at least cost."""
    mixed = [i for i in best.inside if s.least[i] < 0 < s.greatest[i]]
    pairs = [(s.greatest[i], -s.least[i]) for i in mixed]
    left = best.negative - _Side.of(s, best.inside).less
    chosen = set()
    for i, cost in zip(reversed(mixed), _costs_before(pairs), strict=True):
        if left <= 0:
            break
        # taken where doing without it costs more, or cannot be
        if left >= len(cost) or cost[left] > cost[max(left + s.least[i], 0)] + s.greatest[i]:
            chosen.add(i)
            left += s.least[i]
    return chosen


def _costs_before(pairs: Sequence[tuple[int, int]]) -> Iterator[NDArray[np.int64]]:
    """Yield the costs with all pairs but the last, but the last two, and so on."""
    for count in range(len(pairs) - 1, -1, -1):
        yield _costs(pairs[:count])
