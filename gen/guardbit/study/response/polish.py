"""Better integers nearby: changes of one or two unknowns by one, and a walk made of those.

Deviations are taken on a grid, so they are a guide and no claim.
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from time import monotonic
from typing import TypeAlias

import numpy as np
from numpy.typing import NDArray

from guardbit.study.response.tied import Tied
from guardbit.study.response.waves import Complexes, Floats, basis, grid

_Whole: TypeAlias = NDArray[np.int64]

_DENSITY = 4
_MOST_NUMBERS = 2 * 10**6
_MOST_IN_PAIRS = 100
_ROUNDS = 200
_KICKED = 3
_SLACK = 0.02
_SEED = 2004


@dataclass(frozen=True, eq=False)
class _Ground:
    """Responses of the unknowns on a grid (rows), and the ends of each unknown."""

    waves: Complexes
    squares: Floats
    targets: Floats
    low: _Whole
    high: _Whole

    def response(self, values: _Whole) -> Complexes:
        found: Complexes = self.waves @ (values - self.targets)
        return found

    def square(self, values: _Whole) -> Floats:
        """Return |response|^2 as one column."""
        return np.abs(self.response(values)[:, None]) ** 2


def _ground(t: Tied) -> _Ground | None:
    """Return None where the grid would be too large to be of use."""
    places = grid(t.shape, _DENSITY)
    if len(places) * len(t.orbits) > _MOST_NUMBERS:
        return None
    waves = basis(t, places)
    low, high = np.array([t.limits(j) for j in range(len(t.orbits))], dtype=np.int64).T
    return _Ground(waves, np.abs(waves) ** 2, np.array(list(map(float, t.firsts))), low, high)


def polished(t: Tied, values: Sequence[int]) -> tuple[int, ...]:
    """Return legal values, at or near those given, that no change of one or two betters."""
    ground = _ground(t)
    if ground is None:
        return tuple(values)
    return tuple(map(int, _descended(ground, np.array(values, dtype=np.int64))))


def wandered(t: Tied, values: Sequence[int], seconds: float) -> tuple[int, ...]:
    """Return the best that a walk from the values finds in a time.

    A few unknowns are kicked at random, what follows descends, and the walk goes on from
    there if that is hardly worse (iterated local search). It descends by a mean of high
    powers, which has slopes where the largest of many values has terraces.
    """
    until, ground = monotonic() + seconds, _ground(t)
    if ground is None:
        return tuple(values)
    random = np.random.default_rng(_SEED)
    here = best = _descended(ground, np.array(values, dtype=np.int64))
    level, least = np.inf, _largest(ground.square(here))[0]
    while monotonic() < until:
        kicked = here.copy()
        kicked[random.integers(0, len(here), _KICKED)] += random.integers(0, 2, _KICKED) * 2 - 1
        found, mean = _slid(ground, np.clip(kicked, ground.low, ground.high))
        if mean <= level * (1 + random.exponential(_SLACK)):
            here, level = found, mean
        largest = _largest(ground.square(found))[0]
        if largest < least:
            best, least = found, largest
    return tuple(map(int, _descended(ground, best)))


def _largest(squares: Floats) -> Floats:
    """Return the largest of each column."""
    found: Floats = squares.max(axis=0)
    return found


def _powers(squares: Floats) -> Floats:
    """Return the mean of high powers of each column."""
    fourth = (squares * squares) ** 2
    found: Floats = (fourth * fourth).mean(axis=0)
    return found


def _slid(ground: _Ground, values: _Whole) -> tuple[_Whole, float]:
    """Return values that no change of one betters, by a mean of powers, and that mean."""
    values, response = values.copy(), ground.response(values)
    least = float(_powers(ground.square(values))[0])
    while True:
        mean, (j, step) = _single(ground, response, values, 0, _powers)
        if mean >= least * (1 - 1e-9):
            return values, least
        least = mean
        values[j] += step
        response = response + step * ground.waves[:, j]


def _descended(ground: _Ground, values: _Whole) -> _Whole:
    """Return values that no change of one or two betters."""
    for _ in range(_ROUNDS):
        least = float(_largest(ground.square(values))[0])
        steps, found = _best(ground, values)
        if found >= least * (1 - 1e-9):
            break
        values = values + steps
    return values


def _best(ground: _Ground, values: _Whole) -> tuple[_Whole, float]:
    """Return the best change of at most two unknowns by one, with the square it leads to."""
    response, none = ground.response(values), np.zeros_like(values)
    least, change = _single(ground, response, values, 0, _largest)
    best = _stepped(none, *change)
    for i in range(len(values) if len(values) <= _MOST_IN_PAIRS else 0):
        for step in (-1, 1):
            if not ground.low[i] <= values[i] + step <= ground.high[i]:
                continue
            moved = response + step * ground.waves[:, i]
            square, change = _single(ground, moved, values, i + 1, _largest)
            if square < least:
                least, best = square, _stepped(_stepped(none, i, step), *change)
    return best, least


def _single(
    ground: _Ground,
    response: Complexes,
    values: _Whole,
    start: int,
    norm: Callable[[Floats], Floats],
) -> tuple[float, tuple[int, int]]:
    """Return the least norm after one legal change at `start` or later, and the change."""
    waves = ground.waves[:, start:]
    if not waves.shape[1]:
        return np.inf, (0, 0)
    both = 2 * (response.real[:, None] * waves.real + response.imag[:, None] * waves.imag)
    whole = (np.abs(response) ** 2)[:, None] + ground.squares[:, start:]
    up = np.where(values[start:] < ground.high[start:], norm(whole + both), np.inf)
    down = np.where(values[start:] > ground.low[start:], norm(whole - both), np.inf)
    i, j = int(up.argmin()), int(down.argmin())
    if up[i] < down[j]:
        return float(up[i]), (start + i, 1)
    return float(down[j]), (start + j, -1)


def _stepped(steps: _Whole, j: int, step: int) -> _Whole:
    found = steps.copy()
    found[j] += step
    return found
