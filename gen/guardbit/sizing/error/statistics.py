"""Mean and variance of the error of rounding, and the error of the gain at DC: exact rationals."""

from collections.abc import Sequence
from fractions import Fraction
from math import gcd

from guardbit.arith.rounding import ratio
from guardbit.model.enums import Rounding
from guardbit.model.filter import Filter, Pass
from guardbit.model.sizing import DcGain, Interval, RoundingStatistics
from guardbit.sizing.passes import INTERMEDIATE, OUTPUT, is_preloaded, start_value
from guardbit.sizing.register import Register


def rounding_statistics(f: Filter, registers: Sequence[Register]) -> tuple[RoundingStatistics, ...]:
    """Return what each requantiser's rounding adds on average, in LSB of its own codes."""
    names = (OUTPUT,) if len(f.passes) == 1 else (INTERMEDIATE, OUTPUT)
    return tuple(
        _of_pass(name, p, register)
        for name, p, register in zip(names, f.passes, registers, strict=True)
    )


def _of_pass(name: str, p: Pass, register: Register) -> RoundingStatistics:
    step = gcd(*(term.integer for term in p.kernel.terms))
    numerator, denominator = ratio(p.requantiser)
    residues = denominator // gcd(denominator, numerator * step)
    final, start = register.found.interval(False), start_value(p)
    sums = Interval(final.low - start, final.high - start)
    mode = Rounding.TIES_TO_POSITIVE if is_preloaded(p) else p.requantiser.rounding
    return RoundingStatistics(name, residues, *moments(mode, residues, sums.low < 0, sums.high > 0))


def moments(
    mode: Rounding, residues: int, negative: bool = True, positive: bool = True
) -> tuple[Fraction, Fraction]:
    """Return (mean, variance) of round(v) - v where every residue of v is equally frequent.

    v is a multiple of 1/residues; even and odd integers are equally frequent as well. Where a
    mode tells signs apart and values of both occur, each sign is taken as equally frequent.
    For residues = 2**n these are the formulas of an n-bit shift: (1 - 4**-n) / 12, and so on
    (G. A. Constantinides, P. Y. K. Cheung, W. Luk, Electronics Letters 35(23), 1999).
    """
    n = residues
    spread = Fraction(n * n - 1, 12 * n * n)
    # ties, of which there is one in n if n is even, pull the mean by half a residue
    tie = Fraction(1 - n % 2, 2 * n)
    drop = Fraction(n - 1, 2 * n)
    match mode:
        case Rounding.TOWARD_NEGATIVE:
            return -drop, spread
        case Rounding.TOWARD_POSITIVE:
            return drop, spread
        case Rounding.TIES_TO_POSITIVE:
            return tie, spread
        case Rounding.TIES_TO_EVEN:
            return Fraction(0), spread + tie * tie
        case Rounding.TOWARD_ZERO:
            return _by_sign(-drop, spread, negative, positive)
        case Rounding.TIES_TO_AWAY:
            return _by_sign(tie, spread, negative, positive)


def _by_sign(
    mean: Fraction, variance: Fraction, negative: bool, positive: bool
) -> tuple[Fraction, Fraction]:
    """Return the moments where `mean` is that of positive values, mirrored for negative ones."""
    if negative and positive:
        return Fraction(0), variance + mean * mean
    return (-mean if negative else mean), variance


def dc_gain(f: Filter) -> DcGain:
    """Return the gains of a constant image, ideal and fitted, in output value per input value."""
    ideal = fitted = Fraction(1)
    for p in f.passes:
        ideal *= sum(t.ideal for t in p.kernel.terms)
        fitted *= sum(t.integer for t in p.kernel.terms) * Fraction(*ratio(p.requantiser))
    scale = Fraction(2) ** (f.output.frac - f.input.frac)
    ends = (f.input.low - f.input.pedestal, f.input.high - f.input.pedestal)
    full = max(ends, key=abs)
    return DcGain(ideal, fitted / scale, (fitted - ideal * scale) * full)
