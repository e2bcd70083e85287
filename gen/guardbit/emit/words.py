"""Sentences for the comments of emitted C: the contract of this one filter."""

from guardbit.model.enums import (
    BorderMode,
    Extent,
    Operation,
    Outside,
    Overflow,
    Preload,
    Rounding,
)
from guardbit.model.filter import Filter, Pass, PixelFormat, Requantiser
from guardbit.model.plan import Tail
from guardbit.model.sizing import RegisterSizing, Sizing

MODES = {
    BorderMode.CONSTANT: "a constant",
    BorderMode.REPLICATE: "the nearest edge pixel",
    BorderMode.HALF_SAMPLE: "mirrored between the edge samples, which repeat",
    BorderMode.WHOLE_SAMPLE: "mirrored on the edge samples",
    BorderMode.PERIODIC: "the image repeats",
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
    if tail.overflow is None and stage.requantiser.overflow is not Overflow.FORBID:
        text += ", so that no code leaves these limits"
    if tail.remove:
        text += f". The pedestal {tail.remove} is taken off again for the next pass"
    return f"{text}."


def register_words(register: RegisterSizing) -> list[str]:
    """Return what is known of an accumulator, line by line."""
    kind = "two's complement" if register.signed else "unsigned"
    sums = f"sums {register.final.low} to {register.final.high}"
    partial = f"partial sums {register.partial.low} to {register.partial.high}"
    needs = f"needs {register.bits_forbid}, has {register.bits} bits, {kind}"
    return [f"{register.name}: {needs}", f"  {sums}; {partial}"]


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
    steps = (g.rows.step, g.columns.step)
    if steps != (1, 1):
        phases = (g.rows.phase, g.columns.phase)
        words += f", of these every {steps} from {phases} on"
    if g.channels > 1:
        words += f"; {g.channels} interleaved channels"
    return words


def _outside(f: Filter) -> str:
    return {
        Outside.UNDEFINED: "give unspecified values, never undefined behaviour",
        Outside.CLAMP: "are clamped to the range before use",
        Outside.REJECT: "are refused before anything is written",
    }[f.outside]


def contract(sizing: Sizing) -> list[str]:
    """Return the arithmetic of a filter, line by line, for the header's reader."""
    f = sizing.filter
    border = MODES[f.border.mode]
    if f.border.mode is BorderMode.CONSTANT:
        border = f"the constant {f.border.value}"
    lines = [
        f"{f.operation.value}: {_operation(f)}",
        "",
        f"source:  {format_words(f.input)};",
        f"         other codes {_outside(f)}",
        f"output:  {format_words(f.output)};",
        f"         {_extent(f)}",
        f"border:  {border}",
        "",
    ]
    for register, stage in zip(sizing.registers, f.passes, strict=True):
        lines += register_words(register)
        lines += [f"  then {tail_words(stage)}."]
    low, high = (f"{float(v):.4g}" for v in (sizing.error.low, sizing.error.high))
    lines += ["", f"Error against the ideal filter: {low} to {high} steps of the output code"]
    lines += [
        "for legal sources"
        + (" that do not make a register overflow." if sizing.error.assumes_no_wrap else ".")
    ]
    return lines
