"""Whole counts of inputs near a real optimum, with as great an error as is found."""

from collections.abc import Iterator, Mapping, Sequence
from fractions import Fraction

import numpy as np
from numpy.typing import NDArray

from guardbit.sizing.error.codes import codes_at
from guardbit.sizing.error.pixels import items_of
from guardbit.sizing.error.subject import Subject
from guardbit.sizing.error.table import Ints, Item
from guardbit.study.adversary.nudges import Stage, Window, repeated

# entries of all tables of a window, and how far it reaches at least
WINDOW_WORK = 1 << 22
LEAST_REACH = 1 << 10
# random changes, how many inputs take part in them, and how far these go
SAMPLES = 1 << 14
_MOST_SAMPLED = 48
_STRIDE = 8
_ROUNDS = 3
_MOST_ITEMS = 250
_FINE = 32
_INT64 = 1 << 61


def near_counts(s: Subject, n: int) -> Iterator[Sequence[int]]:
    """Yield choices of great error among those near the real one for sum number n."""
    _, items, _ = items_of(s.case.last, s.case.values, s.sign)
    if not items:
        yield []
        return
    start = filled(items, n)
    yield from _windowed(s, items, start)
    yield from _sampled(s, items, start)


def filled(items: Sequence[Item], n: int) -> list[int]:
    """Return whole counts at the real optimum for a sum of n steps, the last one rounded down."""
    counts, left = [0] * len(items), n
    for i in sorted(range(len(items)), key=lambda i: Fraction(items[i].cost, items[i].size)):
        counts[i] = min(items[i].most, left // items[i].size)
        left -= counts[i] * items[i].size
        if counts[i] < items[i].most:
            break
    return counts


def _total(items: Sequence[Item], counts: Sequence[int]) -> int:
    return sum(count * item.size for count, item in zip(counts, items, strict=True))


def _fine(s: Subject, items: Sequence[Item]) -> int:
    """Return how many fraction bits the costs of changes have."""
    widest = max(abs(item.cost) * item.most for item in items) // s.case.denominator
    return max(0, min(_FINE, 50 - widest.bit_length()))


def _errors(
    s: Subject, counts: Sequence[int], numbers: Ints, costs: Ints, fine: int
) -> NDArray[np.object_]:
    """Return the errors, in 2**-fine LSB, of sums by number, `costs` beyond those of counts."""
    low, high = sorted((s.sign * s.legal.low << fine, s.sign * s.legal.high << fine))
    # Python's integers: an ideal code that is not clamped yet has any size
    ideal = costs.astype(object) + int(s.ideal_of(counts) * (1 << fine))
    codes = codes_at(s.stairs, numbers)
    if codes is None:
        codes = np.array([s.stairs.code(int(n)) for n in numbers], dtype=np.int64)
    scaled = s.sign * codes.astype(object) * (1 << fine)
    errors: NDArray[np.object_] = scaled - np.minimum(np.maximum(ideal, low), high)
    return errors


def _windowed(s: Subject, items: Sequence[Item], start: Sequence[int]) -> Iterator[Sequence[int]]:
    """Yield the best choice among those that move the sum by no more than a window."""
    fine, at = _fine(s, items), _total(items, start)
    window = _window(items, start, s.case.denominator, fine)
    span = s.stairs.quiet() or (0, s.stairs.last)
    numbers = np.flatnonzero(window.costs < 1 << 60) + (at - window.reach)
    numbers = numbers[(numbers >= span[0]) & (numbers <= span[1])]
    if len(numbers):
        costs = window.costs[numbers - (at - window.reach)]
        best = int(numbers[int(np.argmax(_errors(s, start, numbers, costs, fine)))])
        yield _changed(start, window.changes(best - at))


def _window(items: Sequence[Item], counts: Sequence[int], unit: int, fine: int) -> Window:
    """Return the cheapest changes of counts, costs in 2**-fine LSB, in a window of the sum."""
    reach = max(LEAST_REACH, 2 * max(item.size for item in items))
    stages: list[Stage] = []
    for i in _cheapest(items, counts)[:_MOST_ITEMS]:
        item, most = items[i], max(reach // items[i].size, 1)
        cost = (item.cost << fine) // unit
        stages += repeated(i, item.size, cost, min(item.most - counts[i], most))
        stages += repeated(i, item.size, cost, -min(counts[i], most))
    return Window.of(stages, min(reach, max(WINDOW_WORK // max(len(stages), 1), 64)))


def _cheapest(items: Sequence[Item], counts: Sequence[int]) -> list[int]:
    """Return the items, those first whose change costs least beside the real optimum's slope."""
    slopes = [Fraction(item.cost, item.size) for item in items]
    partial = [s for s, c, i in zip(slopes, counts, items, strict=True) if 0 < c < i.most]
    full = [s for s, c in zip(slopes, counts, strict=True) if c]
    slope = partial[0] if partial else max(full) if full else min(slopes)
    costs = [abs(item.cost - slope * item.size) for item in items]
    return sorted(range(len(items)), key=costs.__getitem__)


def _changed(counts: Sequence[int], changes: Mapping[int, int]) -> list[int]:
    return [count + changes.get(i, 0) for i, count in enumerate(counts)]


def _sampled(s: Subject, items: Sequence[Item], start: Sequence[int]) -> Iterator[Sequence[int]]:
    """Yield what random changes of a few inputs make of a choice, in rounds.

    Where sums are far apart, so that few lie in any window, their residues are as good as
    random: then the best of many is near the best there is.
    """
    if max(item.size * item.most for item in items) * len(items) >= _INT64:
        return
    rng, fine, counts = np.random.default_rng(1), _fine(s, items), list(start)
    chosen = _cheapest(items, start)[:_MOST_SAMPLED]
    span = s.stairs.quiet() or (0, s.stairs.last)
    costs = np.array([(items[i].cost << fine) // s.case.denominator for i in chosen])
    sizes = np.array([items[i].size for i in chosen])
    most = np.array([items[i].most for i in chosen])
    for _ in range(_ROUNDS):
        old = np.array([counts[i] for i in chosen])
        moves = rng.integers(-_STRIDE, _STRIDE + 1, (SAMPLES, len(chosen)))
        moves *= rng.random(moves.shape) < min(1.0, 4 / len(chosen))
        moves = np.clip(old + moves, 0, most) - old
        numbers = _total(items, counts) + moves @ sizes
        inside = np.flatnonzero((numbers >= span[0]) & (numbers <= span[1]))
        if not len(inside):
            return
        errors = _errors(s, counts, numbers[inside], (moves @ costs)[inside], fine)
        best = moves[inside[int(np.argmax(errors))]]
        counts = _changed(counts, dict(zip(chosen, best.tolist(), strict=True)))
    yield counts
