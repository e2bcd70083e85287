"""Lower bounds of a choice's error and widths, by frames that a few numbers describe.

Where some image has a position that reads no border, its pixels there can be chosen freely:
p wherever the ideal tap is above zero and q elsewhere (of two passes: in the columns where
the second pass's tap is above zero, and the other way round in the rest). What registers and
output do with such a frame, they do: so the error that it shows is a lower bound of every
error bound, and its sums are a lower bound of every width. That holds while no register wraps
or clamps its sums; filters in which one may are not screened.
"""

from collections.abc import Sequence
from dataclasses import dataclass, replace
from fractions import Fraction
from functools import cached_property
from math import ceil, floor

from guardbit.arith.rounding import requantise, rounding_constant
from guardbit.arith.words import format_range
from guardbit.fit.coefficients import Fitted
from guardbit.model.enums import Overflow, Preload
from guardbit.model.filter import Filter, Pass, PixelFormat, Requantiser
from guardbit.model.goal import Words
from guardbit.sizing.lines import COLUMN, ROW, axis_lines
from guardbit.sizing.passes import is_vertical_first
from guardbit.study.goals.choices import Coefficients, Sums, ideal_sums

Pair = tuple[int, int]

PLACES = 40


@dataclass(frozen=True)
class Screen:
    """The frames (p, q), as codes less the pedestal, for filters that differ in words alone.

    `ideals` are the ideal codes of the frames, clamped to the legal ones, each between two
    neighbouring multiples of 2**-PLACES: exact ones may have hundreds of digits.
    """

    filter: Filter
    frames: tuple[Pair, ...]
    ideals: tuple[Pair, ...]

    def factors(self, choice: Coefficients) -> tuple[Fitted, ...]:
        """Return the factors of a choice in the order in which the passes use them."""
        return choice.factors if self._in_order else choice.factors[::-1]

    def sums(self, choice: Coefficients) -> tuple[Sums, ...]:
        """Return the sums of the integers of each factor, in that order."""
        return choice.sums if self._in_order else choice.sums[::-1]

    @cached_property
    def _in_order(self) -> bool:
        return len(self.filter.passes) == 1 or is_vertical_first(self.filter)

    def shown_error(self, choice: Coefficients, words: Words) -> Fraction:
        """Return an |error| that some frame shows: what no bound can be below."""
        codes = (self._code(choice, words, p, q) << PLACES for p, q in self.frames)
        pairs = zip(codes, self.ideals, strict=True)
        most = max(max(code - above, below - code) for code, (below, above) in pairs)
        return Fraction(max(most, 0), 1 << PLACES)

    def _code(self, choice: Coefficients, words: Words, p: int, q: int) -> int:
        factors, passes = self.factors(choice), self.filter.passes
        sums = self.sums(choice)
        if len(passes) == 1:
            frac = sum(each.frac for each in factors)
            unit = requantiser(passes[0], frac, product(factors), passes[0].requantiser.to)
            return _result(passes[0], unit, int(chained(sums, p, q)))
        middle = between(passes[0].requantiser.to, words)
        ends = (replace(passes[0]), replace(passes[1], source=middle))
        units = (
            requantiser(ends[0], factors[0].frac, factors[0].divisor, middle),
            requantiser(ends[1], factors[1].frac, factors[1].divisor, self.filter.output),
        )
        one, other = (
            _result(ends[0], units[0], int(sums[0].total(*pair))) - middle.pedestal
            for pair in ((p, q), (q, p))
        )
        return _result(ends[1], units[1], int(sums[1].total(one, other)))


def chained(sums: Sequence[Sums], p: int, q: int) -> int | Fraction:
    """Return the sum of products of one factor, or of column and row with nothing between."""
    first, *rest = sums
    one, other = first.total(p, q), first.total(q, p)
    return rest[0].total(one, other) if rest else one


def product(factors: Sequence[Fitted]) -> int:
    """Return what all factors together divide by."""
    found = 1
    for each in factors:
        found *= each.divisor
    return found


def between(form: PixelFormat, words: Words) -> PixelFormat:
    """Return the intermediate format with the words put in."""
    bits = form.bits if words.intermediate_bits is None else words.intermediate_bits
    frac = form.frac if words.intermediate_frac is None else words.intermediate_frac
    codes = format_range(bits, form.signed)
    return replace(form, bits=bits, frac=frac, low=codes.low, high=codes.high)


def requantiser(each: Pass, frac: int, divisor: int, to: PixelFormat) -> Requantiser:
    """Return the requantiser of a pass whose coefficients have `frac`."""
    exponent = to.frac - each.source.frac - frac
    return replace(each.requantiser, exponent=exponent, divisor=divisor, to=to)


def start(each: Pass, unit: Requantiser) -> int:
    """Return where a sum starts. Raises ValueError if there is no rounding constant."""
    preloaded = each.accumulator.preload is Preload.ROUNDING
    return rounding_constant(unit) if preloaded else 0


def _result(each: Pass, unit: Requantiser, total: int) -> int:
    begun = start(each, unit)
    return requantise(unit, each.accumulator.preload is Preload.ROUNDING, total + begun)


def screen_of(f: Filter, choice: Coefficients, count: int) -> Screen | None:
    """Return the screen of filters with the shape of `f`, of about 3 * `count` frames.

    `choice` tells the ideal taps.

    None where it would prove nothing: no image has a position that reads no border, or a
    register may act on its sums.
    """
    fixed = (Overflow.WRAP, Overflow.SATURATE)
    if any(p.accumulator.bits and p.accumulator.overflow in fixed for p in f.passes):
        return None
    if not _has_interior(f):
        return None
    frames = _frames(f.input, count)
    screen = Screen(f, frames, ())
    sums = [ideal_sums(each) for each in screen.factors(choice)]
    return replace(screen, ideals=tuple(_ideal(f, sums, *frame) for frame in frames))


def _ideal(f: Filter, sums: Sequence[Sums], p: int, q: int) -> Pair:
    to, unit = f.output, Fraction(2) ** (f.output.frac - f.input.frac)
    code = Fraction(chained(sums, p, q)) * unit + to.pedestal
    scaled = min(max(code, Fraction(to.low)), Fraction(to.high)) * (1 << PLACES)
    return floor(scaled), ceil(scaled)


def _has_interior(f: Filter) -> bool:
    terms = [term for p in f.passes for term in p.kernel.terms]
    down = sorted({term.dy for term in terms} or {0})
    across = sorted({term.dx for term in terms} or {0})
    lines = (axis_lines(f, ROW, down), axis_lines(f, COLUMN, across))
    return all(any(line.is_interior for line in axis) for axis in lines)


def _frames(source: PixelFormat, count: int) -> tuple[Pair, ...]:
    """Return pairs of pixels: the ends against each other, and values all over the range."""
    low, high = source.low - source.pedestal, source.high - source.pedestal
    spread = [low + (high - low) * k // max(count - 1, 1) for k in range(count)]
    pairs = [(low, high), (high, low), *((v, v) for v in spread)]
    pairs += [(v, low + high - v) for v in spread] + [(v, low) for v in spread]
    return tuple(dict.fromkeys(pairs))
