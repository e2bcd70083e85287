"""Finite sets of integers, and the sets that sums of independent pixels reach.

A set is one big integer with a bit for each number, so that adding a pixel's multiples to a
whole set is a few shifts and ors: the subset-sum technique with bitsets (common practice).
"""

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from functools import cached_property
from typing import Any, cast

import numpy as np
from numpy.typing import NDArray

from guardbit.arith.rounding import limit, unlimited
from guardbit.arith.words import wrap
from guardbit.model.enums import Overflow
from guardbit.model.filter import Requantiser
from guardbit.model.sizing import Interval

# bits of all the sets of one sum together; a set that is looked into takes eight times that
SET_BITS = 1 << 27
# how often each of these bits is moved
MOVES = 32
# values of one pixel, and sums that are requantised one by one
MOST_VALUES = 1 << 21
# bits of a number that is scaled, rounded or added to others in int64
_SAFE_BITS = 56

Ints = NDArray[Any]


@dataclass(frozen=True)
class Reach:
    """A set that is not empty: bit i of `mask` stands for low + i, and bit 0 is set."""

    low: int
    mask: int

    @classmethod
    def run(cls, values: Interval) -> "Reach":
        """Return all integers of an interval."""
        return cls(values.low, (1 << (values.high - values.low + 1)) - 1)

    @classmethod
    def of(cls, numbers: Iterable[int] | Ints) -> "Reach":
        """Return the set of some numbers. Raises ValueError if there are none."""
        array = np.asarray(numbers)
        low, high = int(array.min()), int(array.max())
        cells = np.zeros(high - low + 1, dtype=np.bool_)
        cells[(array - low).astype(np.int64)] = True
        packed = np.packbits(cells, bitorder="little").tobytes()
        return cls(low, int.from_bytes(packed, "little"))

    @property
    def ends(self) -> Interval:
        """Return the least and the greatest member."""
        return Interval(self.low, self.low + self.mask.bit_length() - 1)

    @property
    def is_run(self) -> bool:
        """Return whether all integers between the ends are members."""
        return self.mask & (self.mask + 1) == 0

    @property
    def copies(self) -> int:
        """Return how many copies of a set it takes to add a multiple of each member to it."""
        return self.mask.bit_length().bit_length() if self.is_run else self.mask.bit_count()

    @cached_property
    def cells(self) -> NDArray[np.bool_]:
        """Return for each number from `low` to the greatest whether it is a member."""
        size = self.mask.bit_length()
        packed = np.frombuffer(self.mask.to_bytes(-(-size // 8), "little"), np.uint8)
        return np.unpackbits(packed, count=size, bitorder="little").astype(np.bool_)

    @cached_property
    def members(self) -> Ints:
        """Return the members, ascending: int64, or Python's integers if they are large."""
        offsets = np.flatnonzero(self.cells)
        ends = self.ends
        if max(abs(ends.low), abs(ends.high)).bit_length() <= _SAFE_BITS:
            return offsets + self.low
        return np.array([self.low + int(offset) for offset in offsets], dtype=object)

    def __contains__(self, number: int) -> bool:
        return number >= self.low and self.mask >> (number - self.low) & 1 == 1

    def __or__(self, other: "Reach") -> "Reach":
        low = min(self.low, other.low)
        return Reach(low, self.mask << (self.low - low) | other.mask << (other.low - low))

    def moved(self, by: int) -> "Reach":
        """Return the members plus `by`."""
        return Reach(self.low + by, self.mask)

    def plus(self, weight: int, values: "Reach") -> "Reach":
        """Return the sums of a member and `weight` times one of `values`."""
        ends, size = values.ends, abs(weight)
        low = self.low + min(weight * ends.low, weight * ends.high)
        if values.is_run:
            return Reach(low, _repeated(self.mask, size, values.mask.bit_length()))
        mask = 0
        for offset in np.flatnonzero(values.cells if weight > 0 else values.cells[::-1]):
            mask |= self.mask << (size * int(offset))
        return Reach(low, mask)

    def modulo(self, bits: int, word: Interval) -> "Reach":
        """Return the members modulo 2**bits, as numbers of `word`."""
        mask = self.mask << (self.low - word.low) % (1 << bits)
        # a multiple of the period at a time, from the largest down
        for doublings in range(max(mask.bit_length() - 1, 0).bit_length() - bits, -1, -1):
            cut = 1 << (bits + doublings)
            mask = mask & ((1 << cut) - 1) | mask >> cut
        return _trimmed(word.low, mask)

    def clamped(self, word: Interval) -> "Reach":
        """Return the members, each moved to the nearest number of `word`."""
        below, above = self.low < word.low, self.ends.high > word.high
        if not (below or above):
            return self
        shift = self.low - word.low
        mask = self.mask << shift if shift >= 0 else self.mask >> -shift
        mask &= (1 << (word.high - word.low + 1)) - 1
        mask |= int(below) | (int(above) << (word.high - word.low))
        return _trimmed(word.low, mask)


def _trimmed(low: int, mask: int) -> Reach:
    """Return the set with bit 0 set; `mask` is not zero."""
    zeros = (mask & -mask).bit_length() - 1
    return Reach(low + zeros, mask >> zeros)


def _repeated(mask: int, step: int, count: int) -> int:
    """Return the union of `count` copies of the mask, each `step` beyond the one before."""
    covered = 1
    while covered < count:
        more = min(covered, count - covered)
        mask |= mask << (more * step)
        covered += more
    return mask


@dataclass(frozen=True)
class Modulus:
    """Sums are taken modulo 2**bits, as numbers of `word`."""

    bits: int
    word: Interval


def sum_sets(
    start: int,
    weights: Sequence[int],
    values: Reach,
    modulus: Modulus | None,
    most: int = SET_BITS,
) -> list[Reach] | None:
    """Return what the sums of the first 0, 1, 2... weighted pixels reach.

    Each pixel takes any of `values`, independent of the others. None: the sets would be of
    more than `most` bits together.
    """
    if abs(start) >= 1 << 62 or (modulus is not None and 1 << modulus.bits > most):
        return None
    sets, ends, moved = [_reduced(Reach(start, 1), modulus)], values.ends, MOVES * most
    for weight in weights:
        if modulus is not None and sets[-1].ends == modulus.word and sets[-1].is_run:
            # from the whole word only the whole word is reached
            sets.append(sets[-1])
            continue
        step = weight if modulus is None else weight % (1 << modulus.bits)
        size = sets[-1].mask.bit_length() + abs(step) * (ends.high - ends.low)
        most -= size
        moved -= size * values.copies
        if min(most, moved) < 0:
            return None
        sets.append(_reduced(sets[-1].plus(step, values), modulus))
    return sets


def _reduced(reach: Reach, modulus: Modulus | None) -> Reach:
    return reach if modulus is None else reach.modulo(modulus.bits, modulus.word)


def pixels_of_sum(
    sets: Sequence[Reach],
    weights: Sequence[int],
    values: Reach,
    modulus: Modulus | None,
    target: int,
) -> list[int]:
    """Return a value for each pixel, such that the sum is `target`, a member of the last set."""
    chosen = []
    for before, weight in zip(sets[-2::-1], weights[::-1], strict=True):
        candidates = target - weight * _exact(values.members, weight, target)
        if modulus is not None:
            candidates = (candidates - modulus.word.low) % (1 << modulus.bits) + modulus.word.low
        at = _first_member(before, candidates)
        target = int(candidates[at])
        chosen.append(int(values.members[at]))
    return chosen[::-1]


def _exact(values: Ints, weight: int, target: int) -> Ints:
    """Return the values in a type in which the weighted difference is exact."""
    widest = max(abs(int(values[0])), abs(int(values[-1]))) * abs(weight)
    return values if max(widest, abs(target)).bit_length() <= _SAFE_BITS else values.astype(object)


def _first_member(reach: Reach, numbers: Ints) -> int:
    """Return the place of the first number that is in the set; one is."""
    offsets = numbers - reach.low
    inside = np.flatnonzero((offsets >= 0) & (offsets < len(reach.cells)))
    found = reach.cells[offsets[inside].astype(np.int64)]
    return int(inside[int(np.argmax(found))])


def reaches_all(weights: Sequence[int], values: Interval) -> bool:
    """Return whether sums of weighted pixels reach every integer between their ends.

    Each pixel takes any of `values`. From the least weight up, none may exceed by more than
    one what the smaller ones span: then each fills the gaps that the next one leaves.
    """
    span = 0
    for weight in sorted(map(abs, weights)):
        if weight > span + 1:
            return False
        span += weight * (values.high - values.low)
    return True


def pixels_between(weights: Sequence[int], values: Interval, above: int) -> list[int]:
    """Return a value for each pixel, such that the sum is `above` over the least one.

    Sums reach all integers; the largest weights take as much of it as they can.
    """
    chosen = [0] * len(weights)
    for i in sorted(range(len(weights)), key=lambda i: -abs(weights[i])):
        size = abs(weights[i])
        steps = min(values.high - values.low, above // size)
        above -= steps * size
        chosen[i] = values.low + steps if weights[i] > 0 else values.high - steps
    return chosen


def codes_of(r: Requantiser, preloaded: bool, sums: Reach) -> Ints:
    """Return the code that the requantiser makes of each member of `sums`, in order."""
    ends = sums.ends
    widest = max(abs(ends.low), abs(ends.high), r.divisor).bit_length() + abs(r.exponent)
    if widest > _SAFE_BITS:
        one_by_one = [limit(r, unlimited(r, preloaded, int(sum_))) for sum_ in sums.members]
        return np.array(one_by_one, dtype=object)
    # both are arithmetic and comparisons alone, which NumPy carries out for each element
    values: Ints = cast(Any, unlimited)(r, preloaded, sums.members)
    if r.overflow is Overflow.WRAP:
        values = cast(Any, wrap)(values, r.to.bits, r.to.signed)
    return np.clip(values, r.to.low, r.to.high) if r.overflow is Overflow.SATURATE else values
