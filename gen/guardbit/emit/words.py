"""Sentences for the comments of emitted C: the contract of this one filter."""

from fractions import Fraction
from math import ceil, floor

from guardbit.emit.registers import tap_words
from guardbit.model.enums import (
    BorderMode,
    Extent,
    Grid,
    Operation,
    Outside,
    Overflow,
    Preload,
    Rounding,
)
from guardbit.model.filter import (
    Axis,
    Filter,
    Pass,
    PixelFormat,
    Requantiser,
    registers_of,
)
from guardbit.model.plan import Tail, Thresholds
from guardbit.model.sizing import ErrorBound, RegisterSizing, Sizing

MODES = {
    BorderMode.CONSTANT: "a constant",
    BorderMode.REPLICATE: "the nearest pixel of the edge",
    BorderMode.HALF_SAMPLE: "mirrored, with the pixel of the edge twice",
    BorderMode.WHOLE_SAMPLE: "mirrored, with the pixel of the edge once",
    BorderMode.PERIODIC: "the image again and again",
}
ROUNDINGS = {
    Rounding.TOWARD_NEGATIVE: "rounded toward minus infinity",
    Rounding.TOWARD_POSITIVE: "rounded toward plus infinity",
    Rounding.TOWARD_ZERO: "rounded toward zero",
    Rounding.TIES_TO_EVEN: "rounded to nearest, ties to even",
    Rounding.TIES_TO_AWAY: "rounded to nearest, ties away from zero",
    Rounding.TIES_TO_POSITIVE: "rounded to nearest, ties toward plus infinity",
}


def format_words(pixel: PixelFormat) -> str:
    """Return a pixel format in words."""
    sign = "signed" if pixel.signed else "unsigned"
    words = [f"{pixel.bits}-bit {sign}, codes {pixel.low} to {pixel.high}"]
    if pixel.pedestal:
        words.append(f"{pixel.pedestal} stands for zero")
    if pixel.frac:
        words.append(f"one step is 2^{-pixel.frac}")
    return ", ".join(words)


def scaling(r: Requantiser) -> str:
    """Return what a sum is multiplied or divided by, as a suffix."""
    up = f" * 2^{r.exponent}" if r.exponent > 0 else ""
    down = f" / 2^{-r.exponent}" if r.exponent < 0 else ""
    return up + down + (f" / {r.divisor}" if r.divisor > 1 else "")


def tail_words(stage: Pass) -> str:
    """Return what a requantiser does, without a full stop."""
    r = stage.requantiser
    text = f"acc{scaling(r)}"
    if r.exponent < 0 or r.divisor > 1:
        text += f", {ROUNDINGS[r.rounding]}"
    if stage.accumulator.preload is Preload.ROUNDING:
        text += " (acc started at one half)"
    if r.to.pedestal:
        text += f", plus the pedestal {r.to.pedestal}"
    match r.overflow:
        case Overflow.SATURATE:
            text += f", held to {r.to.low} to {r.to.high}"
        case Overflow.WRAP:
            text += f", modulo 2^{r.to.bits}"
        case Overflow.FORBID:
            text += f", which legal sources keep within {r.to.low} to {r.to.high}"
    return text


def tail_comment(stage: Pass, tail: Tail) -> str:
    """Return the comment of the function that requantises."""
    text = f"{tail_words(stage)}. acc is {tail.argument.low} to {tail.argument.high}"
    if tail.quotient == Thresholds(None, None):
        text += ", of which every sum gives the same code"
    elif tail.overflow is None and stage.requantiser.overflow is not Overflow.FORBID:
        text += ", so that no code leaves these limits"
    if tail.remove:
        text += f". The pedestal {tail.remove} is taken off again for the next pass"
    return f"{text}."


def step_words(name: str, *, vertical: bool, widens: bool) -> str:
    """Return what a row step does."""
    along = "down the columns" if vertical else "along the rows"
    purpose = {
        "row": "Compute one output row. `top` is the extended row that the uppermost tap reads.",
        "first": f"The first pass, {along}: one row of intermediate codes.",
        "second": f"The second pass, {along}: one output row.",
    }[name]
    return f"{purpose} Operands are widened first: int may have 16 bits." if widens else purpose


def ranges(register: RegisterSizing, stage: Pass) -> str:
    """Return what an accumulator reaches before wrapping or clamping, for legal codes."""
    final, partial = register.final, register.partial
    text = f"{final.low} to {final.high} at the end"
    if partial != final:
        text += f", {partial.low} to {partial.high} on the way"
    if register.held != final:
        text += f"; the register holds {register.held.low} to {register.held.high} of it"
    return f"{text}, for legal codes" + (" and taps" if stage.kernel.registers else "")


def register_words(register: RegisterSizing, stage: Pass) -> list[str]:
    """Return what is known of an accumulator, a sentence each."""
    kind = "two's complement" if register.signed else "unsigned"
    does = {
        Overflow.FORBID: "cannot overflow",
        Overflow.WRAP: f"wraps modulo 2^{register.bits} at every add",
        Overflow.SATURATE: "saturates at every add",
    }[stage.accumulator.overflow]
    fits = register.bits >= register.bits_forbid and (register.signed or register.partial.low >= 0)
    if fits and stage.accumulator.overflow is not Overflow.FORBID:
        does = "cannot overflow, so that no sum wraps or saturates"
    return [
        f"{register.bits} bits, {kind}, of which {register.bits_forbid} are needed; {does};",
        ranges(register, stage),
    ]


def _operation(f: Filter) -> str:
    sign = "-" if f.operation is Operation.CONVOLUTION else "+"
    return f"y[n1, n2] = sum h[k1, k2] * x[n1 {sign} k1, n2 {sign} k2]"


def _extent(f: Filter) -> str:
    g = f.geometry
    words = {
        Extent.SAME: "one for each source pixel",
        Extent.FULL: "every position that a tap reaches",
        Extent.VALID: "positions whose every tap reads inside the image",
    }[g.extent]
    if (g.rows.step, g.columns.step) != (1, 1):
        words += f"; of these rows {_kept(g.rows)} and columns {_kept(g.columns)}"
    if g.channels > 1:
        words += f"; {g.channels} interleaved channels"
    return words


def _kept(axis: Axis) -> str:
    numbers = (axis.phase + count * axis.step for count in range(3))
    return ", ".join(map(str, numbers)) + ", ..."


def _source(f: Filter) -> list[str]:
    """Return the format of the source, and what its container may hold besides."""
    container, bits = f.input.container, (f.input.high - f.input.low + 1).bit_length() - 1
    words = format_words(f.input)
    if (bits, f.input.low < 0) == (container.bits, container.signed):
        return [words]
    return [f"{words};", f"other codes {_outside(f)}"]


def _outside(f: Filter) -> str:
    return {
        Outside.UNDEFINED: "give unspecified values, never undefined behaviour",
        Outside.CLAMP: "are clamped to the range before use",
        Outside.REJECT: "are refused before anything is written",
    }[f.outside]


def contract(sizing: Sizing) -> list[str]:
    """Return the arithmetic of a filter, line by line, for the header's reader."""
    f = sizing.filter
    lines = [
        f"{f.operation.value}: {_operation(f)}",
        "",
        *_entry("source", *_source(f)),
        *_entry("border", _border(f)),
    ]
    lines += _coefficients(f)
    for index, (register, stage) in enumerate(zip(sizing.registers, f.passes, strict=True)):
        number = f" {index + 1}" if len(f.passes) > 1 else ""
        lines += _entry(f"accumulator{number}", *register_words(register, stage))
        lines += _entry(f"requantiser{number}", tail_words(stage))
    lines += _entry("output", f"{format_words(f.output)};", _extent(f))
    lines += _entry("error", *_error(f, sizing.error))
    return [
        *lines,
        "",
        *_closing(f),
    ]


def _closing(f: Filter) -> tuple[str, ...]:
    """Return for what the bounds hold, and what they are worth."""
    if registers_of(f) is not None:
        return (
            "These bounds hold only for codes inside the declared range of the source, and all but",
            "that of the error for all legal taps. They are engineering evidence, not the work of",
            "a qualified tool: verifying the product stays with the engineer who is responsible",
            "for it.",
        )
    return _FIXED


_FIXED = (
    "These bounds hold only for codes inside the declared range of the source. They are",
    "engineering evidence, not the work of a qualified tool: verifying the product stays with",
    "the engineer who is responsible for it.",
)


def _coefficients(f: Filter) -> list[str]:
    """Return what is known of coefficients that are given at run time, in one entry."""
    registers = registers_of(f)
    return [] if registers is None else _entry("coefficients", *tap_words(f.name, registers))


_COLUMN = 16


def _entry(word: str, *texts: str) -> list[str]:
    """Return a word and what is said of it, in two columns."""
    first, *others = texts
    return [word.ljust(_COLUMN) + first, *(" " * _COLUMN + text for text in others)]


def _border(f: Filter) -> str:
    if f.geometry.extent is Extent.VALID:
        return "none is needed: every tap reads inside the image"
    if f.border.mode is BorderMode.CONSTANT:
        return f"outside the image: the code {f.border.value}"
    site = f.border.grid is Grid.SITE
    return f"outside the image: {MODES[f.border.mode]}" + (", each site of a mosaic alone" * site)


def _error(f: Filter, error: ErrorBound) -> list[str]:
    low, high = outward(error.low, up=False), outward(error.high, up=True)
    line = f"{low} to {high} LSB of the output code against the ideal filter"
    if registers_of(f) is not None:
        line += ", with the nominal taps"
    if not error.assumes_no_wrap:
        return [line]
    return [f"{line},", "for sources with which no sum leaves its register and no output wraps"]


_PLACES = 10**4


def outward(value: Fraction, *, up: bool) -> str:
    """Return a bound with at most four decimals, rounded away from what it bounds."""
    scaled = ceil(value * _PLACES) if up else floor(value * _PLACES)
    whole, rest = divmod(abs(scaled), _PLACES)
    text = f"{whole}.{rest:04}".rstrip("0").rstrip(".")
    return f"-{text}" if scaled < 0 else text
