"""How wide a requantiser is inside, and what can leave it."""

from guardbit.arith.intervals import contains, requantised_range, scale, shift, unlimited_range
from guardbit.arith.rounding import adding_constant, capped_ratio
from guardbit.arith.words import bits_needed, format_range
from guardbit.model.enums import Overflow
from guardbit.model.filter import PixelFormat, Requantiser
from guardbit.model.sizing import Interval, RequantiserSizing


def size_requantiser(
    name: str, r: Requantiser, preloaded: bool, argument: Interval
) -> RequantiserSizing:
    """Return the sizing of a requantiser whose accumulator holds `argument`.

    Its width holds the scaled sum, that with the constant which add-then-floor needs for the
    rounding mode, and the rounded value with the pedestal, all in one word: unsigned if none
    is negative, else two's complement. A shift beyond the width of the argument counts as
    one by two bits more, which rounds alike.
    """
    unlimited = unlimited_range(r, preloaded, argument)
    limits = output_limits(r)
    numerator, denominator = capped_ratio(r, argument)
    scaled = scale(argument, numerator)
    inside = (scaled, shift(scaled, adding_constant(r, preloaded, denominator)), unlimited)
    return RequantiserSizing(
        name=name,
        argument=argument,
        unlimited=unlimited,
        output=requantised_range(r, preloaded, argument),
        bits=max(_bits(inside), 1),
        can_overflow=not contains(limits, unlimited),
    )


def output_limits(r: Requantiser) -> Interval:
    """Return the values that the overflow policy leaves as they are."""
    if r.overflow is Overflow.WRAP:
        return format_range(r.to.bits, r.to.signed)
    return legal_codes(r.to)


def legal_codes(pixels: PixelFormat) -> Interval:
    """Return the legal codes of a format."""
    return Interval(pixels.low, pixels.high)


def _bits(values: tuple[Interval, ...]) -> int:
    low, high = min(v.low for v in values), max(v.high for v in values)
    needed = bits_needed(low, high, low < 0)
    assert needed is not None
    return needed
