"""The `response` fit as a mixed-integer linear programme, and what its bound is worth.

Let v be the unknowns, x their targets, and D the response of v - x. The programme minimises t
subject to conditions that each follow from |D(w)| <= t at all frequencies:

- Re(D(w) exp(-i a)) <= t for chosen frequencies w and directions a. A response that is real
  (or imaginary) about the centre needs two directions only; else there are sixteen, which leave
  |D| <= t / cos(pi / 16), and where a solution peaks a direction is added that touches it.
- Parseval: the mean of |D|^2 is S = sum of squares of all differences, so S <= t^2. With S in
  S0..U^2, where U is a deviation already attained and S0 the least S of any integers, a chord
  lies below the root: t >= sqrt(S0) + (S - S0) / (sqrt(S0) + U). The squares are replaced by
  straight pieces between integers, where they are exact. Without this the linear relaxation
  knows nothing (v = x has no deviation), with it the search starts at sqrt(S0).

Only integers better than U are asked for, so each unknown is held to where its own square
leaves room for that. Every condition being necessary, the least t is a bound for all integers,
whatever frequencies were chosen.

For a bound over integers *without* the ideal's symmetry the unknowns are sums over orbits. The
average of such integers over the symmetry has no larger deviation (the deviation is convex,
and the moves do not change it), its values are whole multiples of 1 / (taps in the orbit), and
integers of a given sum have a least sum of squares. The same programme, with steps of that
size and those squares, bounds them.

What the bound assumes: HiGHS's dual bound is right to its tolerances of 1e-6 for integers and
conditions, each of which moves |D| by 1e-6 for each tap at most. Four times that is taken off.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from math import sqrt
from typing import Protocol

import numpy as np

from guardbit.study.response.quiet import quiet_output
from guardbit.study.response.tied import Tied
from guardbit.study.response.waves import Complexes, Floats, basis, grid

DIRECTIONS = 16
_TOLERANCE = 1e-6
_PIECES = 64

# Of scipy.optimize.milp.
_OPTIMAL, _INFEASIBLE = 0, 2


@dataclass(frozen=True, eq=False)
class Conditions:
    """Frequencies with a direction each: one condition on the response per entry."""

    places: Floats
    angles: Floats

    def joined(self, more: "Conditions") -> "Conditions":
        """Return these conditions and more."""
        places = np.concatenate([self.places, more.places])
        return Conditions(places, np.concatenate([self.angles, more.angles]))


class _Result(Protocol):
    """What is used of the answer of scipy.optimize.milp."""

    status: int
    x: Floats | None
    mip_dual_bound: float | None


@dataclass(frozen=True)
class Outcome:
    """`values` solve the programme (None: none were found), `level` is what the solver claims
    that no solution is below, `bound` that less its tolerances.

    `finished`: the solver did not run out of time.
    """

    values: tuple[int, ...] | None
    level: float
    bound: float
    finished: bool


def nothing() -> Conditions:
    """Return no conditions."""
    return Conditions(np.empty((0, 2)), np.empty(0))


def first_conditions(t: Tied, density: int = 2) -> Conditions:
    """Return every direction at each place of a coarse grid, doubles left out."""
    places, angles = grid(t.shape, density), directions(t)
    pairs = Conditions(np.repeat(places, len(angles), axis=0), np.tile(angles, len(places)))
    _, first = np.unique(np.round(_rows(t, pairs), 9), axis=0, return_index=True)
    first.sort()
    return Conditions(pairs.places[first], pairs.angles[first])


def directions(t: Tied) -> Floats:
    """Return the angles that a response about the centre of the box is held at."""
    if t.parity:
        start = 0 if t.parity == 1 else np.pi / 2
        return np.array([start, start + np.pi], dtype=np.float64)
    return np.linspace(0, 2 * np.pi, DIRECTIONS, endpoint=False, dtype=np.float64)


def _rows(t: Tied, conditions: Conditions) -> Floats:
    waves: Complexes = basis(t, conditions.places)
    rows: Floats = (waves * np.exp(-1j * conditions.angles)[:, None]).real
    return rows


@dataclass(frozen=True, eq=False)
class Ladder:
    """Values that one unknown may take, in steps from its target rounded, and what they cost.

    Unknown = (round(target) * parts + step) / parts. `squares` are the least sums of squares
    of the orbit's differences at the steps low..low + len - 1.
    """

    low: int
    squares: tuple[float, ...]
    parts: int
    rest: float

    @property
    def high(self) -> int:
        """Return the last step."""
        return self.low + len(self.squares) - 1


def ladders(t: Tied, most: float, *, average: bool) -> tuple[Ladder, ...]:
    """Return each unknown's steps that leave room for a deviation up to `most`.

    `average`: of the orbit's average, in parts; else of the value, whole.
    """
    found = [_ladder(t, j, most**2, average=average) for j in range(len(t.orbits))]
    least = sum(min(each.squares) for each in found)
    return tuple(_trimmed(each, most**2 - least) for each in found)


def _ladder(t: Tied, j: int, most: float, *, average: bool) -> Ladder:
    """Return the steps whose own square is at most `most`, and the nearest legal one."""
    weight, middle = t.weights[j], round(t.firsts[j])
    parts = weight if average else 1
    rest = float(t.firsts[j] - middle)
    ends = t.sum_limits(j) if average else t.limits(j)
    low, high = (end - parts * middle for end in ends)
    start = min(max(round(parts * rest), low), high)
    reach = int(parts * (sqrt(most / weight) + 1)) + 1
    steps = range(max(low, start - reach), min(high, start + reach) + 1)
    squares = [_square(step, parts, weight, rest) for step in steps]
    kept = [i for i, s in enumerate(squares) if s <= most] or [steps.index(start)]
    return Ladder(steps[kept[0]], tuple(squares[kept[0] : kept[-1] + 1]), parts, rest)


def _square(step: int, parts: int, weight: int, rest: float) -> float:
    """Return the least sum of squares of an orbit's differences, its average given.

    Integers of a given sum differ by one at most where their squares are least.
    """
    over = step % parts
    return weight * (step / parts - rest) ** 2 + over * (parts - over) / parts


def _trimmed(ladder: Ladder, room: float) -> Ladder:
    """Return the steps that cost at most `room` more than the cheapest (the costs are convex)."""
    least = min(ladder.squares)
    kept = [i for i, s in enumerate(ladder.squares) if s <= least + max(room, 0) + 1e-9]
    squares = ladder.squares[kept[0] : kept[-1] + 1]
    return Ladder(ladder.low + kept[0], squares, ladder.parts, ladder.rest)


def least_deviation(steps: Sequence[Ladder]) -> float:
    """Return sqrt(S0): no integers have a smaller deviation."""
    return sqrt(sum(min(each.squares) for each in steps))


def margin(t: Tied) -> float:
    """Return what is taken off the solver's bound for its tolerances, in integer steps."""
    return 4 * _TOLERANCE * (1 + sum(t.weights))


def solve(
    t: Tied, conditions: Conditions, most: float, seconds: float, *, average: bool = False
) -> Outcome:
    """Return integers of least t, better than a deviation of `most`, and a bound for all.

    The bound is at most `most`. `average`: over integers without the symmetry; the values are
    then sums over the orbits.
    """
    from scipy.optimize import Bounds, LinearConstraint, milp

    steps = ladders(t, most * (1 + 1e-9), average=average)
    count, root = len(steps), least_deviation(steps)
    ends = [(each.low, each.high) for each in steps]
    matrix, limits = _programme(t, conditions, steps, most)
    bounds = Bounds(
        np.array([low for low, _ in ends] + [0] * count + [min(root, most)]),
        np.array([high for _, high in ends] + [np.inf] * count + [most * (1 + 1e-6)]),
    )
    with quiet_output():
        result = milp(
            c=np.eye(2 * count + 1)[-1],
            integrality=np.repeat([1, 0], [count, count + 1]),
            bounds=bounds,
            constraints=LinearConstraint(matrix, -np.inf, limits),
            options={"time_limit": max(seconds, 0.1), "mip_rel_gap": 1e-5},
        )
    return _outcome(t, result, steps, (root, most))


def _outcome(
    t: Tied, result: _Result, steps: Sequence[Ladder], known: tuple[float, float]
) -> Outcome:
    """Return what the solver found; a programme without solution bounds all by `most`."""
    root, most = known
    dual = result.mip_dual_bound
    found = root if dual is None or not np.isfinite(dual) else max(dual, root)
    level = most if result.status == _INFEASIBLE else min(found, most)
    values = None
    if result.x is not None:
        values = tuple(
            round(step) + each.parts * round(x)
            for step, each, x in zip(result.x[: len(steps)], steps, t.firsts, strict=True)
        )
    finished = result.status in (_OPTIMAL, _INFEASIBLE)
    return Outcome(values, level, level - margin(t), finished)


def _programme(
    t: Tied, conditions: Conditions, steps: Sequence[Ladder], most: float
) -> tuple[Floats, Floats]:
    """Return matrix and limits of "matrix @ (steps, squares, t) <= limits"."""
    count = len(steps)
    rows = _rows(t, conditions)
    parts, rest = np.array([s.parts for s in steps]), np.array([s.rest for s in steps])
    level = np.hstack([rows / parts, np.zeros_like(rows), np.full((len(rows), 1), -1.0)])
    below, below_limits = _squares(steps)
    root = least_deviation(steps)
    slope = 1 / (root + most)
    ones = np.r_[np.zeros(count), np.ones(count)]
    chord = np.r_[slope * ones, -1.0]
    sphere = np.r_[ones, 0.0]
    matrix = np.vstack([level, below, chord, sphere])
    limits = [rows @ rest, below_limits, [root * root * slope - root], [most**2 * (1 + 1e-6)]]
    return matrix, np.concatenate(limits)


def _squares(steps: Sequence[Ladder]) -> tuple[Floats, Floats]:
    """Return the straight pieces that hold each square up from below."""
    count, rows, limits = len(steps), [], []
    for j, each in enumerate(steps):
        for i in _pieces(each):
            rise = each.squares[i + 1] - each.squares[i] if len(each.squares) > 1 else 0.0
            row = np.zeros(2 * count + 1)
            row[j], row[count + j] = rise, -1.0
            rows.append(row)
            limits.append(rise * (each.low + i) - each.squares[i])
    return np.array(rows), np.array(limits)


def _pieces(ladder: Ladder) -> range:
    """Return the pieces to be used, those about the cheapest step if there are many."""
    last = max(len(ladder.squares) - 1, 1)
    middle = int(np.argmin(ladder.squares))
    start = min(max(middle - _PIECES // 2, 0), max(last - _PIECES, 0))
    return range(start, min(start + _PIECES, last))
