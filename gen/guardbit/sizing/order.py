"""Which order of accumulation would need the narrowest register: advice for those who may choose.

Where every amount that a tap can add has zero between its ends, partial sums only spread out
and no order is better than another. Elsewhere (codes that keep away from the pedestal) taps of
both signs, interleaved, can keep the sums small. It is a shortest bottleneck path over the sets
of taps added so far (Bellman's recursion): exact where taps of equal coefficients leave few sets
to tell apart, else the best of a few greedy orders.
"""

from collections.abc import Iterator, Sequence
from dataclasses import replace
from itertools import product
from math import prod

from guardbit.arith.intervals import add, hull, scale
from guardbit.model.filter import Filter, registers_of
from guardbit.model.sizing import End, Interval, TapOrder
from guardbit.sizing.analyse import measured
from guardbit.sizing.lines import Line
from guardbit.sizing.place import toward
from guardbit.sizing.problem import Problem, Tap, class_ends, ends_interval
from guardbit.sizing.register import LEAST_BITS, Register, width
from guardbit.sizing.survey import interior_class

# sets of taps that are told apart, and taps of all classes that are walked for one order
MOST_SETS = 30_000
MOST_VISITS = 100_000

Class = tuple[Line, Line]
Taps = tuple[Tap, ...]


def tap_orders(f: Filter) -> tuple[TapOrder, ...]:
    """Return what the order of the taps costs each accumulator, in the order of the passes.

    Nothing where taps are loaded at run time: each loading has a best order of its own.
    """
    if registers_of(f) is not None:
        return ()
    return tuple(_tap_order(m.register) for m in measured(f))


def _tap_order(register: Register) -> TapOrder:
    problem, signed = register.problem, register.accumulator.signed
    contract = width(register.found.interval(True), signed)
    classes = _classes(problem)
    least = _floor(problem, classes, signed)
    orders = [problem.taps]
    if classes and least < contract:
        inner = interior_class(problem)
        exact = None if inner is None else _by_sets(problem, inner, signed)
        orders += [exact] if exact else list(_greedy(problem, classes[0], signed))
        if exact:
            least = _needed(problem, exact, classes, signed)
    needs = [contract, *(_needed(problem, order, classes, signed) for order in orders[1:])]
    best = orders[needs.index(min(needs))]
    return TapOrder(register.name, contract, min(needs), least, tuple(t.number for t in best))


def _classes(problem: Problem) -> list[Class]:
    """Return classes whose sums include all others' in any order; none if they are too many."""
    inner = interior_class(problem)
    if inner is not None:
        return [inner]
    if len(problem.rows) * len(problem.columns) * len(problem.taps) > MOST_VISITS:
        return []
    return list(product(problem.rows, problem.columns))


def _needed(problem: Problem, order: Taps, classes: Sequence[Class], signed: bool) -> int:
    """Return the width that an order needs."""
    ordered = replace(problem, taps=order)
    return width(hull(ends_interval(class_ends(ordered, *a), True) for a in classes), signed)


def _floor(problem: Problem, classes: Sequence[Class], signed: bool) -> int:
    """Return a width that every order needs."""
    finals = [ends_interval(class_ends(problem, *each), False) for each in classes]
    always = hull([Interval(problem.start, problem.start), *finals])
    pairs = zip(classes, finals, strict=True)
    floors = (_class_floor(problem, each, final, always, signed) for each, final in pairs)
    return max(floors, default=LEAST_BITS)


def _class_floor(
    problem: Problem, at: Class, final: Interval, always: Interval, signed: bool
) -> int:
    """Return a width that every order needs, which sums to all of `always`, for one class.

    Its sums include the start value and the final ones, those after some first tap and those
    before some last tap; and no tap takes a sum further than from one end of the word to the
    other.
    """
    start = Interval(problem.start, problem.start)
    amounts = [_amount(problem, at, tap) for tap in problem.taps]
    firsts = [hull([always, add(start, amount)]) for amount in amounts]
    lasts = [hull([always, before]) for before in _before_last(problem, at, final)]
    farthest = max((max(a.high, -a.low) for a in amounts), default=0)
    return max(
        width(always, signed),
        min((width(each, signed) for each in firsts), default=LEAST_BITS),
        min((width(each, signed) for each in lasts), default=LEAST_BITS),
        farthest.bit_length(),
    )


def _amount(problem: Problem, at: Class, tap: Tap) -> Interval:
    """Return what a tap can add in a class, taken alone."""
    if at[0].read(tap.dy) is None or at[1].read(tap.dx) is None:
        constant = problem.constant or 0
        return scale(Interval(constant, constant), tap.coefficient)
    return scale(problem.values_at(*at), tap.coefficient)


def _before_last(problem: Problem, at: Class, final: Interval) -> Iterator[Interval]:
    """Yield the range of the sum without each tap; others may read the same pixel."""
    values = problem.values_at(*at)
    weights: dict[tuple[int | None, int | None], int] = {}
    for tap in problem.taps:
        pixel = at[0].read(tap.dy), at[1].read(tap.dx)
        weights[pixel] = weights.get(pixel, 0) + tap.coefficient
    for tap in problem.taps:
        pixel = at[0].read(tap.dy), at[1].read(tap.dx)
        if None in pixel:
            amount = _amount(problem, at, tap)
            yield Interval(final.low - amount.low, final.high - amount.high)
            continue
        old, new = weights[pixel], weights[pixel] - tap.coefficient
        low, high = (toward(end, new, values) * new - toward(end, old, values) * old for end in End)
        yield Interval(final.low + low, final.high + high)


def _by_sets(problem: Problem, at: Class, signed: bool) -> Taps | None:
    """Return a best order of taps that read pixels of their own; None: too many sets.

    A set is how many taps of each coefficient have been added. The width that the way to a
    set needs is the greater of the set's own and the least of those one tap before it.
    """
    groups: dict[int, list[Tap]] = {}
    for tap in problem.taps:
        groups.setdefault(tap.coefficient, []).append(tap)
    sizes = [len(taps) + 1 for taps in groups.values()]
    if prod(sizes) > MOST_SETS:
        return None
    amounts = [scale(problem.values_at(*at), coefficient) for coefficient in groups]
    strides = [prod(sizes[i + 1 :]) for i in range(len(sizes))]
    best: list[int] = []
    last: list[int] = []
    for counts in product(*map(range, sizes)):
        low = problem.start + sum(n * a.low for n, a in zip(counts, amounts, strict=True))
        high = problem.start + sum(n * a.high for n, a in zip(counts, amounts, strict=True))
        ways = [
            (best[len(best) - stride], i)
            for i, (n, stride) in enumerate(zip(counts, strides, strict=True))
            if n
        ]
        before, group = min(ways, default=(LEAST_BITS, 0))
        best.append(max(before, width(Interval(low, high), signed)))
        last.append(group)
    return _traced(list(groups.values()), strides, last)


def _traced(groups: Sequence[Sequence[Tap]], strides: Sequence[int], last: Sequence[int]) -> Taps:
    """Return the taps in the order found, those of one coefficient as the contract has them."""
    at, left = len(last) - 1, [list(group) for group in groups]
    order = []
    while at:
        group = last[at]
        order.append(left[group].pop())
        at -= strides[group]
    return tuple(reversed(order))


def _greedy(problem: Problem, at: Class, signed: bool) -> Iterator[Taps]:
    """Yield orders that add, of the next taps of either sign, the one that leaves less to hold."""
    for falling in (True, False):
        queues = [
            sorted(
                (tap for tap in problem.taps if (tap.coefficient > 0) == positive),
                key=lambda tap: abs(tap.coefficient),
                reverse=not falling,
            )
            for positive in (True, False)
        ]
        reached, order = Interval(problem.start, problem.start), []
        while any(queues):
            heads = [(add(reached, _amount(problem, at, q[-1])), q) for q in queues if q]
            reached, queue = min(heads, key=lambda head: _reach(head[0], signed))
            order.append(queue.pop())
        yield tuple(order)


def _reach(values: Interval, signed: bool) -> tuple[int, int]:
    return width(values, signed), max(values.high, ~values.low)
