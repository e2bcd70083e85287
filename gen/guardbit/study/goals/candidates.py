"""All choices of words that a search has to weigh, each with lower bounds of what it costs.

Choices run to a million where two passes leave everything open, so they are kept in arrays and
screened a whole first pass at a time, in floats whose error `_MARGIN` covers; what remains is
analysed exactly.
"""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from itertools import groupby

import numpy as np
from numpy.typing import NDArray

from guardbit.arith.rounding import ratio, unlimited
from guardbit.arith.words import bits_needed, format_range, wrap
from guardbit.model.enums import Overflow, Preload, Rounding, WordLength
from guardbit.model.filter import Accumulator, PixelFormat, Requantiser
from guardbit.model.finding import SpecError, finding
from guardbit.model.goal import Words
from guardbit.model.spec import Auto, Spec
from guardbit.sizing.register import LEAST_BITS
from guardbit.study.goals.choices import Coefficients
from guardbit.study.goals.screen import (
    PLACES,
    Screen,
    between,
    chained,
    product,
    requantiser,
    start,
)

Whole = NDArray[np.int64]
Floats = NDArray[np.float64]

MOST = 4_000_000
_BITS, _FRACS = range(2, 33), range(-64, 65)
_DIRECTED = (Rounding.TOWARD_NEGATIVE, Rounding.TOWARD_POSITIVE, Rounding.TOWARD_ZERO)
# far beyond every intermediate code, and exact as a float
_FAR = 1 << 40
# relative to the codes' size; float arithmetic on them is a thousand times as exact
_MARGIN = 1e-9


@dataclass(frozen=True)
class Candidates:
    """Choices as arrays of equal length.

    `choice` numbers the coefficients; `between_bits` and `between_frac` are the intermediate's
    (0 without one). `accumulators`, the bits of all together, and `error` are lower bounds.
    """

    choice: Whole
    between_bits: Whole
    between_frac: Whole
    accumulators: Whole
    coefficient: Whole
    error: Floats

    def __len__(self) -> int:
        return len(self.choice)

    def bits(self, word: WordLength) -> Whole:
        """Return the length, or its lower bound, that counts as that word's."""
        match word:
            case WordLength.ACCUMULATOR:
                return self.accumulators
            case WordLength.INTERMEDIATE:
                return self.between_bits
            case WordLength.COEFFICIENT:
                return self.coefficient

    def only(self, which: NDArray[np.bool_] | NDArray[np.intp]) -> "Candidates":
        """Return some of them, in the order of the indices."""
        return Candidates(
            self.choice[which],
            self.between_bits[which],
            self.between_frac[which],
            self.accumulators[which],
            self.coefficient[which],
            self.error[which],
        )


def candidates(spec: Spec, choices: Sequence[Coefficients], screen: Screen | None) -> Candidates:
    """Return every choice of coefficients and intermediate words that the spec leaves open.

    Choices are left out that a frame shows to be forbidden. Raises SpecError where nothing
    screens them and there are more than MOST.
    """
    bits, fracs = _open_between(spec)
    if screen is None:
        return _unscreened(spec, choices, bits, fracs)
    if spec.intermediate is None:
        return _joined(list(_one_pass(choices, screen)))
    return _joined(list(_two_passes(choices, screen, bits, fracs)))


def _open_between(spec: Spec) -> tuple[Sequence[int], Sequence[int]]:
    """Return the intermediate's bits and fracs to be tried; one of each without one."""
    table = spec.intermediate
    if table is None:
        return (0,), (0,)
    bits = _BITS if isinstance(table.bits, Auto) else (table.bits,)
    return bits, (table.frac,) if isinstance(table.frac, int) else _FRACS


def _unscreened(
    spec: Spec, choices: Sequence[Coefficients], bits: Sequence[int], fracs: Sequence[int]
) -> Candidates:
    count = len(choices) * len(bits) * len(fracs)
    if count > MOST:
        raise SpecError(finding("goal-too-many", None, count=count, most=MOST))
    which = [np.ravel(a) for a in np.meshgrid(range(len(choices)), bits, fracs, indexing="ij")]
    tables = [spec.accumulator]
    if spec.intermediate is not None:
        tables.append(spec.intermediate.accumulator)
    least = sum(LEAST_BITS if isinstance(t.bits, Auto) else t.bits for t in tables)
    widths = np.array([choice.width for choice in choices], dtype=np.int64)
    choice, at_bits, at_frac = which
    return Candidates(
        choice, at_bits, at_frac, np.full(count, least), widths[choice], np.zeros(count)
    )


def _joined(parts: Sequence[Candidates]) -> Candidates:
    if not parts:
        none = np.zeros(0, dtype=np.int64)
        return Candidates(none, none, none, none, none, np.zeros(0))
    return Candidates(
        np.concatenate([part.choice for part in parts]),
        np.concatenate([part.between_bits for part in parts]),
        np.concatenate([part.between_frac for part in parts]),
        np.concatenate([part.accumulators for part in parts]),
        np.concatenate([part.coefficient for part in parts]),
        np.concatenate([part.error for part in parts]),
    )


def _one_pass(choices: Sequence[Coefficients], screen: Screen) -> Iterator[Candidates]:
    only = screen.filter.passes[0]
    for number, choice in enumerate(choices):
        frac = sum(each.frac for each in choice.factors)
        unit = requantiser(only, frac, product(choice.factors), only.requantiser.to)
        try:
            begun = start(only, unit)
        except ValueError:
            continue
        totals = [int(chained(choice.sums, p, q)) + begun for p, q in screen.frames]
        bits = register_bits(only.accumulator, min(totals), max(totals))
        if bits is None:
            continue
        error = float(screen.shown_error(choice, Words())) * (1 - _MARGIN)
        one, none = np.array([number]), np.zeros(1, dtype=np.int64)
        at, wide = np.array([bits]), np.array([choice.width])
        yield Candidates(one, none, none, at, wide, np.array([error]))


def register_bits(accumulator: Accumulator, low: int, high: int) -> int | None:
    """Return a lower bound of a register's bits that holds low..high; None: it must and cannot."""
    needed = max(bits_needed(low, high, accumulator.signed or low < 0) or 0, LEAST_BITS)
    if accumulator.bits is None:
        return needed
    return accumulator.bits if needed <= accumulator.bits else None


def _two_passes(
    choices: Sequence[Coefficients],
    screen: Screen,
    bits: Sequence[int],
    fracs: Sequence[int],
) -> Iterator[Candidates]:
    """Yield the candidates of one first pass and one intermediate frac after another."""
    ideals = np.array([below / (1 << PLACES) for below, _ in screen.ideals])
    numbered = sorted(enumerate(choices), key=lambda each: _first(screen, each[1]))
    for _, group in groupby(numbered, key=lambda each: _first(screen, each[1])):
        numbers, alike = zip(*group, strict=True)
        seconds = _Seconds.of(screen, numbers, alike, ideals)
        for frac in fracs:
            made = seconds.after(alike[0], frac, bits)
            if made is not None:
                yield made


def _first(screen: Screen, choice: Coefficients) -> tuple[object, ...]:
    made = screen.factors(choice)[0]
    return made.frac, made.integers


@dataclass(frozen=True)
class _Seconds:
    """The second passes that can follow one first pass, as arrays."""

    screen: Screen
    ideals: Floats
    numbers: Whole
    widths: Whole
    above: Floats
    rest: Floats
    factor: Floats
    fracs: Whole

    @classmethod
    def of(
        cls,
        screen: Screen,
        numbers: Sequence[int],
        choices: Sequence[Coefficients],
        ideals: Floats,
    ) -> "_Seconds":
        made = [screen.factors(choice)[1] for choice in choices]
        sums = [screen.sums(choice)[1] for choice in choices]
        return cls(
            screen,
            ideals,
            np.array(numbers),
            np.array([choice.width for choice in choices]),
            np.array([float(each.above) for each in sums]),
            np.array([float(each.rest) for each in sums]),
            np.array([1 / each.divisor for each in made]),
            np.array([each.frac for each in made]),
        )

    def after(self, choice: Coefficients, frac: int, bits: Sequence[int]) -> Candidates | None:
        """Return the candidates with the choice's first pass and an intermediate of `frac`."""
        screen, first = self.screen, self.screen.filter.passes[0]
        made = screen.factors(choice)[0]
        middle = between(first.requantiser.to, Words(intermediate_frac=frac))
        unit = requantiser(first, made.frac, made.divisor, middle)
        try:
            begun = start(first, unit)
        except ValueError:
            return None
        sums = screen.sums(choice)[0]
        totals = [
            [int(sums.total(*pair)) + begun for pair in pairs]
            for pairs in (screen.frames, [(q, p) for p, q in screen.frames])
        ]
        flat = [*totals[0], *totals[1]]
        held = register_bits(first.accumulator, min(flat), max(flat))
        preloaded = first.accumulator.preload is Preload.ROUNDING
        codes = [[unlimited(unit, preloaded, total) for total in row] for row in totals]
        widths = [b for b in bits if len(bits) == 1 or b <= self._most(choice, unit, middle)]
        if unit.overflow is Overflow.FORBID:
            widths = [b for b in widths if _all_fit(codes, b, middle.signed)]
        if held is None or not widths:
            return None
        pixels = [_limited(row, middle, widths, unit) for row in codes]
        return self._candidates(frac, held, widths, pixels)

    def _most(self, choice: Coefficients, unit: Requantiser, middle: PixelFormat) -> int:
        """Return intermediate bits that hold every result; more would change nothing."""
        f = self.screen.filter
        codes = (f.input.low, f.input.high, f.border.value)
        largest = max(abs(code - f.input.pedestal) for code in codes)
        taps = sum(abs(tap) for row in self.screen.factors(choice)[0].integers for tap in row)
        above, below = ratio(unit)
        farthest = taps * largest * above // below + 2 + abs(middle.pedestal)
        return farthest.bit_length() + 1

    def _candidates(
        self, frac: int, held: int, widths: Sequence[int], pixels: Sequence[Floats]
    ) -> Candidates | None:
        """Return a candidate for each width and second pass; `pixels` are (width, frame)."""
        second, to = self.screen.filter.passes[1], self.screen.filter.output
        exponents = to.frac - frac - self.fracs
        begun, may_begin = np.zeros(len(self.numbers)), np.full(len(self.numbers), True)
        if second.accumulator.preload is Preload.ROUNDING:
            begun, may_begin = np.exp2(-exponents - 1.0), exponents < 0
        sums = self.above[:, None] * pixels[0][:, None, :] + self.rest[:, None] * pixels[1][:, None]
        values = sums * (np.exp2(exponents) * self.factor)[:, None] + to.pedestal
        bits = _least_bits(second.accumulator, sums + begun[:, None])
        error = self._shown(values, second.requantiser)
        fits = may_begin[None, :] & (bits > 0)
        at_width, at_second = np.nonzero(fits)
        if not len(at_width):
            return None
        return Candidates(
            self.numbers[at_second],
            np.array(widths)[at_width],
            np.full(len(at_width), frac),
            held + bits[fits],
            self.widths[at_second],
            error[fits],
        )

    def _shown(self, values: Floats, unit: Requantiser) -> Floats:
        """Return lower bounds of the errors that the frames show, by the unrounded values."""
        slack = 1.0 if unit.rounding in _DIRECTED else 0.5
        low, high = float(unit.to.low), float(unit.to.high)
        margin = _MARGIN * (1 + max(abs(low), abs(high)))
        shown = np.abs(np.clip(values, low, high) - self.ideals) - slack - margin
        if unit.overflow is Overflow.WRAP:
            # a code that wraps shows something else, which is not looked at
            shown = np.where((values < low - 1) | (values > high + 1), 0, shown)
        bounds: Floats = np.maximum(shown.max(axis=2), 0)
        return bounds


def _all_fit(codes: Sequence[Sequence[int]], bits: int, signed: bool) -> bool:
    word = format_range(bits, signed)
    return all(word.low <= code <= word.high for row in codes for code in row)


def _limited(
    row: Sequence[int], middle: PixelFormat, widths: Sequence[int], unit: Requantiser
) -> Floats:
    """Return what rounded values become in each width, less the pedestal: (width, frame)."""
    if unit.overflow is Overflow.WRAP:
        codes = [[wrap(code, bits, middle.signed) for code in row] for bits in widths]
        return np.array(codes, dtype=np.float64) - middle.pedestal
    near = np.array([min(max(code, -_FAR), _FAR) for code in row], dtype=np.float64)
    if unit.overflow is Overflow.FORBID:
        return np.broadcast_to(near - middle.pedestal, (len(widths), len(row)))
    words = [format_range(bits, middle.signed) for bits in widths]
    low, high = (np.array([[getattr(w, end)] for w in words]) for end in ("low", "high"))
    return np.clip(near, low, high) - middle.pedestal


def _least_bits(accumulator: Accumulator, sums: Floats) -> Whole:
    """Return lower bounds of a register's bits, 0 where it must hold the sums and cannot."""
    greatest, least = sums.max(axis=2), sums.min(axis=2)
    # 2**k needs a bit more than what is just below it: never too much is claimed
    magnitude = np.maximum(greatest, -least) * (1 - _MARGIN)
    exponents = np.frexp(np.maximum(magnitude, 0))[1]
    signed = (least < 0) | accumulator.signed
    needed: Whole = np.maximum(exponents + signed, LEAST_BITS).astype(np.int64)
    if accumulator.bits is None:
        return needed
    held: Whole = np.where(needed <= accumulator.bits, accumulator.bits, 0)
    return held


def as_words(spec: Spec, choice: Coefficients, bits: int, frac: int) -> Words:
    """Return the words of a candidate; None for those that the spec settles."""
    table = spec.intermediate
    open_bits = table is not None and isinstance(table.bits, Auto)
    open_frac = table is not None and not isinstance(table.frac, int)
    return Words(
        choice.bits, choice.fracs, bits if open_bits else None, frac if open_frac else None
    )
