"""Pixels of great error with which a saturating register clamps nothing on the way.

A bound for such inputs looks at final sums alone. Which pixels keep every partial sum inside is
a question of order, to which random search gives an answer of its own: it starts from few and
small values, and goes on from the best in small random changes.
"""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from guardbit.arith.words import clamp
from guardbit.model.enums import Overflow
from guardbit.sizing.error.codes import codes_at
from guardbit.sizing.error.subject import Subject
from guardbit.sizing.error.table import Ints
from guardbit.sizing.lines import constant_value
from guardbit.sizing.passes import start_value
from guardbit.sizing.place import word_of

_SAMPLES = 1 << 12
_ROUNDS = 6
# cells of all samples of one round
_MOST_CELLS = 1 << 21
_INT64 = 1 << 61


def calm_pixels(s: Subject) -> Iterator[Mapping[tuple[int, int], int]]:
    """Yield pixels, less the pedestal, for a register that saturates in one pass."""
    chain = _Chain(s)
    if s.results is not None or not chain.matters or not s.case.last.places:
        return
    rng, best = np.random.default_rng(2), None
    for number in range(_ROUNDS):
        drawn = chain.spread(rng) if best is None else chain.near(rng, best)
        values = drawn if best is None else np.concatenate([best[None], drawn])
        values = values[chain.is_calm(values)]
        if len(values):
            best = values[int(np.argmax(chain.errors(values)))]
        elif number:
            return
    if best is not None:
        places = (at for at in s.case.last.places if isinstance(at, tuple))
        yield dict(zip(places, best.tolist(), strict=True))


@dataclass(frozen=True)
class _Chain:
    """The sums of a single pass in order, over many choices of its pixels at once."""

    s: Subject

    @property
    def matters(self) -> bool:
        """Return whether the register saturates, and all sums stay within int64."""
        p = self.s.filter.passes[0]
        widest = max(abs(self.s.case.values.low), abs(self.s.case.values.high), 1)
        largest = sum(abs(t.integer) for t in p.kernel.terms) * widest
        taps = max(len(p.kernel.terms), 1)
        saturates = p.accumulator.overflow is Overflow.SATURATE
        return saturates and largest < _INT64 and _SAMPLES * taps <= _MOST_CELLS

    @cached_property
    def _pairs(self) -> list[tuple[int, int]]:
        return list(self.s.case.last.places.values())

    def spread(self, rng: np.random.Generator) -> Ints:
        """Return random values, of some of the pixels alone."""
        values, count = self.s.case.values, len(self._pairs)
        still = clamp(0, values.low, values.high)
        shape = (_SAMPLES, count)
        drawn = rng.integers(values.low, values.high + 1, shape)
        kept = rng.random(shape) < rng.random((_SAMPLES, 1))
        small = still + (drawn - still) // 2 ** rng.integers(0, 8, (_SAMPLES, 1))
        return np.where(kept, small, still)

    def near(self, rng: np.random.Generator, best: Ints) -> Ints:
        """Return values a few small changes away."""
        values, shape = self.s.case.values, (_SAMPLES, len(self._pairs))
        stride = 2 ** rng.integers(0, 7, (_SAMPLES, 1))
        moves = rng.integers(-stride, stride + 1, shape)
        moves *= rng.random(shape) < min(1.0, 3 / len(self._pairs))
        changed: Ints = np.clip(best + moves, values.low, values.high)
        return changed

    def is_calm(self, values: Ints) -> NDArray[np.bool_]:
        """Return which choices let no partial sum leave the register."""
        f, case = self.s.filter, self.s.case
        p, word = f.passes[0], word_of(f.passes[0].accumulator)
        assert case.row is not None and case.column is not None
        at = {place: i for i, place in enumerate(case.last.places)}
        sums = np.full(len(values), start_value(p), dtype=np.int64)
        calm = (word.low <= sums) & (sums <= word.high)
        for term in p.kernel.terms:
            y, x = case.row.read(term.dy), case.column.read(term.dx)
            if y is None or x is None:
                sums = sums + term.integer * (constant_value(f) or 0)
            elif (y, x) in at:
                sums = sums + term.integer * values[:, at[y, x]]
            calm &= (word.low <= sums) & (sums <= word.high)
        return calm

    def errors(self, values: Ints) -> NDArray[np.float64]:
        """Return sign * error of each choice, to a double's precision."""
        s, last = self.s, self.s.case.last
        sums = last.amount + values @ np.array([amount for amount, _ in self._pairs])
        codes = codes_at(s.stairs, (sums - s.stairs.base) // (s.stairs.step or 1))
        if codes is None:
            return np.zeros(len(values))
        weights = np.array([ideal / last.denominator for _, ideal in self._pairs])
        ideal = last.ideal / last.denominator + values @ weights
        errors: NDArray[np.float64] = codes - np.clip(ideal, s.legal.low, s.legal.high)
        return s.sign * errors
