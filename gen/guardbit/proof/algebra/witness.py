"""Inputs for which a mask holds, a value lies outside limits, or two values differ."""

import random
from collections.abc import Callable, Iterable, Iterator, Mapping, Sequence
from itertools import chain, islice
from typing import TYPE_CHECKING

from guardbit.proof.algebra.pieces import argument, stretches
from guardbit.proof.algebra.values import Base, Form, InexpressibleError, Table, Value
from guardbit.proof.algebra.variables import Evaluation

if TYPE_CHECKING:
    from guardbit.proof.algebra.space import Space

Pixels = dict[int, int]
Test = Callable[[Evaluation], bool]

_TRIES = 30
_MOST_SOLVED = 3_000
_RANDOM = 300
_MOST_ARGUMENTS = 400
_SEED = 31_415


class Solver:
    """Looks for inputs. What it returns is checked by evaluation; that it finds is not promised."""

    def __init__(self, space: "Space") -> None:
        self._space = space
        self._variables = space.variables
        self._random = random.Random(_SEED)
        self._left = _MOST_SOLVED

    def difference(self, a: Value, b: Value, mask: Value) -> Pixels | None:
        """Return pixels for which the mask holds and a differs from b."""
        at = self._space._at
        return self._first(
            (mask, a, b),
            self._target(lambda: (mask, self._space.compare("!=", a, b))),
            lambda e: at(mask, e) != 0 and at(a, e) != at(b, e),
        )

    def witness(
        self, mask: Value, a: Value | None, inside: tuple[int, int] | None
    ) -> Pixels | None:
        """Return pixels for which the mask holds and a, if given, lies not `inside`."""
        at, compare = self._space._at, self._space.compare
        if a is None or inside is None:
            return self._first((mask,), self._target(lambda: (mask, 1)), lambda e: at(mask, e) != 0)
        low, high = inside
        sides = (
            self._target(lambda: (mask, compare("<", a, low))),
            self._target(lambda: (mask, compare(">", a, high))),
        )
        return self._first(
            (mask, a),
            chain.from_iterable(sides),
            lambda e: at(mask, e) != 0 and not low <= at(a, e) <= high,
        )

    def pixels(self, values: Iterable[Value]) -> list[int]:
        """Return the pixels that values are made of, in order."""
        found: set[int] = set()
        seen: set[int] = set()
        left = [_terms(v) for v in values if not isinstance(v, int)]
        while left:
            for number in left.pop():
                if number in seen:
                    continue
                seen.add(number)
                atom = self._variables.atoms.get(number)
                if atom is None:
                    found.add(number)
                else:
                    left.append(atom.base.terms)
        return sorted(found)

    def _first(
        self, values: tuple[Value, ...], likely: Iterable[Pixels], wanted: Test
    ) -> Pixels | None:
        pixels = self.pixels(values)
        for guess in chain(likely, self._guesses(pixels, values)):
            evaluation = Evaluation(self._variables, guess)
            try:
                if wanted(evaluation):
                    lows = self._variables.lows
                    return {p: guess.get(p, lows[p]) for p in pixels}
            except InexpressibleError:
                return None
        return None

    def _target(self, masks: Callable[[], tuple[Value, Value]]) -> Iterator[Pixels]:
        """Yield pixels that bring about two masks at once, as far as that can be expressed."""
        try:
            mask = self._space.both(*masks())
            if isinstance(mask, int):
                return
            table = self._space.table(mask)
        except InexpressibleError:
            return
        for x in self._arguments(table):
            found = self.solve(table.base.terms, x)
            if found is not None:
                yield found

    def _arguments(self, mask: Table) -> Iterator[int]:
        """Yield arguments at which a mask holds: the ends of stretches, then some within."""
        base = mask.base
        runs = stretches(mask.function, base.low, base.high)
        if not runs:
            return
        few = runs[:: max(1, len(runs) // 50)]
        yield from dict.fromkeys(chain.from_iterable(few))
        for _ in range(_MOST_ARGUMENTS - 2 * len(few)):
            yield self._random.randint(*self._random.choice(runs))

    def _guesses(self, pixels: Sequence[int], values: tuple[Value, ...]) -> Iterator[Pixels]:
        """Yield pixels that are likely to show something: corners, ends of ranges, noise."""
        lows, highs = self._variables.lows, self._variables.highs
        yield {}
        yield {p: highs[p] for p in pixels}
        for value in values:
            yield from self._ends(value)
        for p in islice(pixels, _MOST_ARGUMENTS):
            yield {p: highs[p]}
            yield {q: highs[q] for q in pixels if q != p}
        for _ in range(_RANDOM):
            if self._random.random() < 0.5:
                yield {p: self._random.choice((lows[p], highs[p])) for p in pixels}
            else:
                yield {p: self._random.randint(lows[p], highs[p]) for p in pixels}

    def _ends(self, value: Value) -> Iterator[Pixels]:
        if isinstance(value, int):
            return
        base: Base | None = value.base if isinstance(value, Table) else None
        if isinstance(value, Form) and value.terms:
            base, _ = self._space.base_of(value)
        if base is None:
            return
        for x in (base.low, base.high):
            found = self.solve(base.terms, x)
            if found is not None:
                yield found

    def solve(self, terms: Mapping[int, int], target: int) -> Pixels | None:
        """Return pixels that give the terms this sum; None if none were found."""
        variables = self._variables
        low, high = variables.interval(terms)
        if not low <= target <= high:
            return None
        order = sorted(terms, key=lambda v: -abs(terms[v]))
        for attempt in range(_TRIES):
            if self._left <= 0:
                return None
            self._left -= 1
            if attempt:
                self._random.shuffle(order)
                order.sort(key=lambda v: -abs(terms[v]))
            values = self._steps(terms, order, target - low, attempt > 0)
            if values is not None:
                found = self._resolved(values)
                if found is not None:
                    return found
        return None

    def _steps(
        self, terms: Mapping[int, int], order: Sequence[int], left: int, free: bool
    ) -> Pixels | None:
        """Return values of variables by going `left` up from the least sum, largest term first."""
        lows, highs = self._variables.lows, self._variables.highs
        values: Pixels = {}
        for v in order:
            most = min(highs[v] - lows[v], left // abs(terms[v]))
            step = most - self._random.randint(0, min(most, 3)) if free else most
            values[v] = lows[v] + step if terms[v] > 0 else highs[v] - step
            left -= step * abs(terms[v])
        return None if left else values

    def _resolved(self, values: Mapping[int, int]) -> Pixels | None:
        """Return pixels that give variables these values, atoms among them."""
        made: Pixels = {}
        for number, value in values.items():
            part = self._pixels_for(number, value)
            if part is None or any(made.get(p, v) != v for p, v in part.items()):
                return None
            made.update(part)
        return made

    def _pixels_for(self, number: int, value: int) -> Pixels | None:
        atom = self._variables.atoms.get(number)
        if atom is None:
            return {number: value}
        base = atom.base
        if atom.function is None:
            assert atom.floor is not None
            g, q, m = atom.floor
            x: int | None = -((q - m * value) // g)
        else:
            x = argument(atom.function, value, base.low, base.high)
        return None if x is None else self.solve(base.terms, x)


def _terms(value: Form | Table) -> Mapping[int, int]:
    return value.base.terms if isinstance(value, Table) else value.terms
