"""A first bound on the distance between the output and the ideal filter's, by causes.

The ideal filter uses the ideal taps in real arithmetic with the same border. Clamping never
takes two numbers further apart, so that the causes before it add up to a bound after it.
"""

from collections.abc import Iterable, Sequence
from fractions import Fraction
from math import gcd, lcm

from guardbit.arith.intervals import contains, hull
from guardbit.arith.words import clamp
from guardbit.model.enums import BorderMode, Extent, Overflow, Rounding
from guardbit.model.filter import Filter, Pass, Requantiser
from guardbit.model.sizing import ErrorBound, ErrorPart, Interval, RequantiserSizing
from guardbit.sizing.held import word_of
from guardbit.sizing.noise import NOTHING, Span, rounding_error
from guardbit.sizing.passes import is_preloaded, pixel_values, start_value
from guardbit.sizing.register import Register
from guardbit.sizing.requantisers import legal_codes

FITTING = "coefficient fitting"
MIDDLE_ROUNDING = "intermediate rounding"
MIDDLE_SATURATION = "intermediate saturation"
FINAL_ROUNDING = "final rounding"


def error_bound(
    f: Filter, registers: Sequence[Register], requantisers: Sequence[RequantiserSizing]
) -> ErrorBound:
    """Return the bound of output code minus clamped ideal code, in LSB, with its causes.

    It holds for every legal input; if an accumulator can wrap or saturate, or a requantiser
    wrap, for every input with which none does, and `overall` then for all.
    """
    fitting, ideal = _fitting(f)
    causes = {FITTING: fitting}
    if len(f.passes) == 2:
        causes[MIDDLE_ROUNDING] = _middle(f, _rounding(f.passes[0], registers[0]))
        causes[MIDDLE_SATURATION] = _middle(f, _saturation(f.passes[0], requantisers[0]))
    causes[FINAL_ROUNDING] = _rounding(f.passes[-1], registers[-1])
    total = sum(causes.values(), NOTHING)
    codes = legal_codes(f.output)
    if requantisers[-1].can_overflow or ideal.low < codes.low or ideal.high > codes.high:
        total = total.joined(NOTHING)
    assumes = any(map(_acts, registers)) or any(
        r.can_overflow and p.requantiser.overflow is not Overflow.SATURATE
        for p, r in zip(f.passes, requantisers, strict=True)
    )
    parts = tuple(ErrorPart(cause, span.low, span.high) for cause, span in causes.items())
    overall = _overall(codes, requantisers[-1].output, ideal) if assumes else None
    return ErrorBound(total.low, total.high, parts, assumes, overall)


def _overall(codes: Interval, output: Interval, ideal: Span) -> tuple[Fraction, Fraction]:
    """Return the bound from both ranges alone."""
    low, high = (min(max(end, Fraction(codes.low)), Fraction(codes.high)) for end in
                 (ideal.low, ideal.high))  # fmt: skip
    return output.low - high, output.high - low


def _acts(register: Register) -> bool:
    """Return whether the register can wrap or clamp, or leave a width it must not leave."""
    wraps = register.accumulator.overflow is Overflow.WRAP
    return not contains(word_of(register.accumulator), register.found.interval(not wraps))


def _factor(r: Requantiser) -> Fraction:
    return Fraction(2) ** r.exponent / r.divisor


def _fitting(f: Filter) -> tuple[Span, Span]:
    """Return the ranges of (fitted - ideal) value and of the ideal code, in LSB.

    A constant border value outside the legal range counts as one that a pixel can take.
    """
    fitted, ideal = _common(f, fitted=True), _common(f, fitted=False)
    pixels = pixel_values(f.input)
    if f.border.mode is BorderMode.CONSTANT and f.geometry.extent is not Extent.VALID:
        constant = f.border.value - f.input.pedestal
        pixels = hull([pixels, Interval(constant, constant)])
    differences = [a * ideal[1] - b * fitted[1] for a, b in zip(fitted[0], ideal[0], strict=True)]
    fit = _sum(differences, pixels, fitted[1] * ideal[1])
    codes = _sum(ideal[0], pixels, ideal[1])
    pedestal = Fraction(f.output.pedestal)
    return fit, codes + Span(pedestal, pedestal)


def _sum(weights: Iterable[int], pixels: Interval, denominator: int) -> Span:
    """Return the range of the sum of weights times free pixels, over the denominator."""
    positive = negative = 0
    for weight in weights:
        positive += max(weight, 0)
        negative += min(weight, 0)
    low = positive * pixels.low + negative * pixels.high
    high = positive * pixels.high + negative * pixels.low
    return Span(Fraction(low, denominator), Fraction(high, denominator))


def _common(f: Filter, *, fitted: bool) -> tuple[list[int], int]:
    """Return the whole filter's taps, in LSB per step of a pixel, over one denominator."""
    scale = Fraction(2) ** (f.output.frac - f.input.frac)
    taps, denominator = [1], 1
    for p in f.passes:
        unit = _factor(p.requantiser)
        exact = [t.integer * unit if fitted else t.ideal for t in p.kernel.terms]
        common = lcm(*(tap.denominator for tap in exact))
        whole = [tap.numerator * (common // tap.denominator) for tap in exact]
        taps = [a * b for a in taps for b in whole]
        denominator *= common
    if fitted:
        return taps, denominator
    return [tap * scale.numerator for tap in taps], denominator * scale.denominator


def _rounding(p: Pass, register: Register) -> Span:
    """Return the range of what the requantiser's rounding adds, in its LSB.

    The sum less its start value is a multiple of the greatest common divisor of the taps. A
    rounding constant at the start and a floor round as ties-to-positive.
    """
    common = gcd(*(tap.coefficient for tap in register.problem.taps))
    if common == 0:
        return NOTHING
    final, start = register.found.interval(False), start_value(p)
    mode = Rounding.TIES_TO_POSITIVE if is_preloaded(p) else p.requantiser.rounding
    low, high = (final.low - start) // common, (final.high - start) // common
    return rounding_error(mode, _factor(p.requantiser) * common, low, high)


def _saturation(p: Pass, r: RequantiserSizing) -> Span:
    """Return the range of what clamping to the intermediate format adds, in its LSB."""
    if p.requantiser.overflow is not Overflow.SATURATE:
        return NOTHING
    codes = legal_codes(p.requantiser.to)
    ends = (clamp(v, codes.low, codes.high) - v for v in (r.unlimited.high, r.unlimited.low))
    low, high = ends
    return Span(Fraction(min(low, 0)), Fraction(max(high, 0)))


def _middle(f: Filter, error: Span) -> Span:
    """Return what an error of every intermediate value amounts to at the output."""
    second = f.passes[1]
    unit = _factor(second.requantiser)
    positive = sum(t.integer for t in second.kernel.terms if t.integer > 0)
    negative = sum(t.integer for t in second.kernel.terms if t.integer < 0)
    return error.scaled(positive * unit) + error.scaled(negative * unit)
