"""Integers of a given weighted sum that lie nearest to given rationals.

Choose integers v[j] within low..high with sum w[j] v[j] = total. Of all such vectors take the
one of least sum w[j] |v[j] - x[j]|, then of least sum w[j] (v[j] - x[j])^2, then the
lexicographically smallest. The weights are powers of two (sizes of orbits: 1, 2, 4, 8).

Why a small window around a threshold holds the answer (the argument is ours):

1. Start with all v at low. A *step* raises one v[j] by one: the sum grows by w[j], and both
   costs grow by w[j] times a slope that depends on t = v[j] - x[j] alone:
   clamp(2t + 1, -1, 1) and 2t + 1. As a pair in lexicographic order the slope increases
   strictly with t. So the steps of one item get dearer one by one.
2. Let tau be the least t such that all steps with t <= tau together reach the total. Call
   steps with t < tau *cheap*, with t = tau *critical* (at most one per item), with t > tau
   *dear*.
3. Let W be the largest weight. Powers of two up to W whose sum is at least W have a subset
   of sum exactly W: taken in descending order, each divides what is still missing.
4. In an optimal vector let D be the weight of cheap steps left out, C of critical steps
   taken, E of critical steps left out, U of dear steps taken. If D >= W and C + U >= W,
   putting in cheap steps of weight W and taking out others of weight W would keep the sum
   and lower the cost; so D < W or C + U < W. With R = total - (weight of all cheap steps)
   - (sum at the start) we have C + U - D = R >= 0, so D <= C + U: in both cases D < W. In
   the same way U < W or D + E < W, and U = D + E - (C + E - R) <= D + E: so U < W.
5. So an optimum leaves out cheap steps of weight below W and takes dear steps of weight
   below W. Steps may be chosen one by one without regard to their order: a dear step in
   place of a cheaper one of the same item has the same weight and costs more.

Critical steps cost nothing more or less than the threshold, so only their weight counts, and
a weight is a sum of some of them exactly if taking the largest first reaches it (3). What is
left is a table over suffixes with 2W - 1 sums, and a walk that takes the smallest value from
which the optimum can still be reached.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TypeAlias

_Cost: TypeAlias = tuple[int, int]
_Table: TypeAlias = dict[int, _Cost]

_ZERO: _Cost = (0, 0)
_WEIGHTS = (8, 4, 2, 1)


@dataclass(frozen=True)
class Slots:
    """Integers to choose within low..high: the j-th is to be near targets[j] / unit and
    counts weights[j] (1, 2, 4 or 8) times."""

    targets: tuple[int, ...]
    weights: tuple[int, ...]
    unit: int
    low: int
    high: int


@dataclass(frozen=True)
class _Start:
    """All cheap steps taken. `critical[j]` is 1 where item j has a critical step.

    `level` is tau times the unit; `missing` is what the sum still lacks.
    """

    values: tuple[int, ...]
    critical: tuple[int, ...]
    level: int
    missing: int


def apportion(slots: Slots, total: int) -> tuple[int, ...] | None:
    """Return the integers that the module describes, or None if no vector has that sum."""
    base = slots.low * sum(slots.weights)
    if not _reachable(total - base, _steps(slots)):
        return None
    if total == base:
        return (slots.low,) * len(slots.weights)
    start = _start(slots, total)
    window = max(slots.weights) - 1
    choices = [_choices(slots, start, j, window) for j in range(len(slots.weights))]
    return _walk(slots, start, choices, window)


def _steps(slots: Slots) -> tuple[int, ...]:
    """Return how many steps there are of each weight, over the whole range."""
    span = slots.high - slots.low
    return tuple(span * slots.weights.count(weight) for weight in _WEIGHTS)


def _reachable(amount: int, counts: Sequence[int]) -> bool:
    """Return whether some of `counts` steps of each weight, largest first, sum to amount."""
    for weight, count in zip(_WEIGHTS, counts, strict=True):
        amount -= weight * min(count, max(amount, 0) // weight)
    return amount == 0


def _weigh(slots: Slots, values: Sequence[int]) -> int:
    return sum(w * v for w, v in zip(slots.weights, values, strict=True))


def _below(slots: Slots, whole: int) -> list[int]:
    """Return the values once every step with t < whole is taken."""
    tops = (-(-x // slots.unit) + whole for x in slots.targets)
    return [min(max(top, slots.low), slots.high) for top in tops]


def _whole(slots: Slots, total: int) -> int:
    """Return the integer part of tau: the last whole number whose steps fall short."""
    tops = [-(-x // slots.unit) for x in slots.targets]
    short, enough = slots.low - max(tops), slots.high - min(tops)
    while enough - short > 1:
        middle = (short + enough) // 2
        if _weigh(slots, _below(slots, middle)) < total:
            short = middle
        else:
            enough = middle
    return short


def _start(slots: Slots, total: int) -> _Start:
    whole = _whole(slots, total)
    values = _below(slots, whole)
    rises = {
        j: value * slots.unit - slots.targets[j]
        for j, value in enumerate(values)
        if value < slots.high and value == -(-slots.targets[j] // slots.unit) + whole
    }
    level = _level(slots, rises, total - _weigh(slots, values))
    values = [v + (j in rises and rises[j] < level) for j, v in enumerate(values)]
    critical = tuple(int(rises.get(j) == level) for j in range(len(values)))
    return _Start(tuple(values), critical, level, total - _weigh(slots, values))


def _level(slots: Slots, rises: dict[int, int], missing: int) -> int:
    """Return the least t (times the unit) up to which the steps make up what is missing."""
    for j in sorted(rises, key=rises.__getitem__):
        missing -= slots.weights[j]
        if missing <= 0:
            return rises[j]
    raise AssertionError("the next whole number's steps reach the total")


def _slope(t: int, unit: int) -> _Cost:
    return min(max(2 * t + unit, -unit), unit), 2 * t + unit


def _plus(one: _Cost, other: _Cost) -> _Cost:
    return one[0] + other[0], one[1] + other[1]


def _choices(slots: Slots, start: _Start, j: int, window: int) -> _Table:
    """Return the cost above the threshold of steps off the start: {steps: cost}.

    Positive: dear steps taken, after the critical one; negative: cheap steps left out.
    """
    weight, unit = slots.weights[j], slots.unit
    bar = _slope(start.level, unit)
    found = {0: _ZERO}
    for sign, first in ((1, start.values[j] + start.critical[j]), (-1, start.values[j] - 1)):
        for k in range(window // weight):
            value = first + sign * k
            if not slots.low <= value < slots.high:
                break
            slope = _slope(value * unit - slots.targets[j], unit)
            step = (sign * weight * (slope[0] - bar[0]), sign * weight * (slope[1] - bar[1]))
            found[sign * (k + 1)] = _plus(found[sign * k], step)
    return found


def _suffixes(slots: Slots, choices: Sequence[_Table], window: int) -> list[_Table]:
    """Return, for items j and later, the least cost of each sum of non-critical steps."""
    tables: list[_Table] = [{0: _ZERO}]
    for weight, options in zip(reversed(slots.weights), reversed(choices), strict=True):
        table: _Table = {}
        for rest, cost in tables[-1].items():
            for steps, extra in options.items():
                amount = rest + weight * steps
                offer = _plus(cost, extra)
                if abs(amount) <= window and offer < table.get(amount, (offer[0] + 1, 0)):
                    table[amount] = offer
        tables.append(table)
    return tables[::-1]


def _criticals(slots: Slots, start: _Start) -> list[tuple[int, ...]]:
    """Return, for items j and later, how many critical steps there are of each weight."""
    counts = [(0,) * len(_WEIGHTS)]
    for weight, critical in zip(reversed(slots.weights), reversed(start.critical), strict=True):
        added = (critical * (weight == each) for each in _WEIGHTS)
        counts.append(tuple(a + b for a, b in zip(counts[-1], added, strict=True)))
    return counts[::-1]


def _best(missing: int, table: _Table, counts: tuple[int, ...]) -> _Cost | None:
    """Return the least cost at which the items of a suffix make up what is missing."""
    offers = [cost for amount, cost in table.items() if _reachable(missing - amount, counts)]
    return min(offers, default=None)


def _walk(slots: Slots, start: _Start, choices: Sequence[_Table], window: int) -> tuple[int, ...]:
    """Return the lexicographically smallest of the vectors of least cost."""
    tables, counts = _suffixes(slots, choices, window), _criticals(slots, start)
    missing, left = start.missing, _best(start.missing, tables[0], counts[0])
    values = []
    for j, weight in enumerate(slots.weights):
        for rise, cost in _rises(choices[j], start.critical[j]):
            rest = missing - weight * rise
            best = _best(rest, tables[j + 1], counts[j + 1])
            if best is not None and _plus(cost, best) == left:
                break
        else:
            raise AssertionError("the optimum can be reached from every prefix of it")
        values.append(start.values[j] + rise)
        missing, left = rest, best
    return tuple(values)


def _rises(options: _Table, critical: int) -> list[tuple[int, _Cost]]:
    """Return the rises of one item above its start, with their costs, the smallest first."""
    rises = {steps + critical * (steps > 0): cost for steps, cost in options.items()}
    if critical:
        rises[1] = _ZERO
    return sorted(rises.items())
