"""The functions at the end of a row step: the register's own, and the requantiser."""

from dataclasses import dataclass

from guardbit.emit import expressions as c
from guardbit.model.enums import Overflow
from guardbit.model.plan import Field, SaturatingSum, Sum, Tail, Thresholds
from guardbit.model.sizing import Interval


@dataclass(frozen=True)
class WrapText:
    """Reduce to the lowest bits, of type `unsigned`, then read them as a number."""

    unsigned: str
    low: str
    result: str


@dataclass(frozen=True)
class TailText:
    """The function that ends a pass; `subject` is what is limited and returned."""

    function: str
    result: str
    work: str
    purpose: str
    multiplier: str | None
    variables: tuple[tuple[str, str], ...]
    code: str | None
    subject: str
    clamp_low: str | None
    clamp_high: str | None
    wrap: WrapText | None
    returned: str
    ignores: bool


@dataclass(frozen=True)
class SaturationText:
    """The function that adds to a register which saturates.

    `low` and `high` are None where no sum can pass them. When `guarded` the room left is
    compared, and `falls` says whether a product can be negative at all.
    """

    function: str
    type: str
    limits: Interval
    low: str | None
    high: str | None
    guarded: bool
    falls: bool


@dataclass(frozen=True)
class RegisterText:
    """The function that reduces a sum to a register which wraps."""

    function: str
    bits: int
    limits: Interval
    argument: str
    result: str
    wrap: WrapText


def tail_text(function: str, purpose: str, tail: Tail, result: str) -> TailText:
    """Return the text of a requantiser; `result` names the type of its cell."""
    variables, expression = c.quotient(tail.quotient, "acc" if tail.multiplier == 1 else "n")
    code = c.with_offset(tail.quotient, expression, tail.offset, tail.work)
    subject = "acc" if code == "acc" else "code"
    low, high = _crossed(tail)
    ignores = tail.quotient == Thresholds(None, None)
    return TailText(
        function=function,
        result=result,
        work=c.cell_type(tail.work),
        purpose=purpose,
        multiplier=c.number(tail.multiplier) if tail.multiplier > 1 and not ignores else None,
        variables=variables,
        code=None if subject == "acc" else code,
        subject=subject,
        clamp_low=low,
        clamp_high=high,
        wrap=_tail_wrap(tail, subject, result) if tail.overflow is Overflow.WRAP else None,
        returned=subject if tail.cell == tail.work else c.cast(result, subject, ""),
        ignores=ignores,
    )


def _crossed(tail: Tail) -> tuple[str | None, str | None]:
    """Return the limits that have to be compared."""
    if tail.overflow is not Overflow.SATURATE:
        return None, None
    return (
        c.number(tail.limits.low) if tail.unlimited.low < tail.limits.low else None,
        c.number(tail.limits.high) if tail.unlimited.high > tail.limits.high else None,
    )


def _tail_wrap(tail: Tail, subject: str, result: str) -> WrapText:
    """Return how a code wraps; limits are the whole format, since a range forbids wrapping."""
    unsigned = f"uint{max(tail.work.bits, 32)}_t"
    limits = tail.limits
    bits, signed = (limits.high - limits.low).bit_length(), limits.low < 0
    low = c.low_bits(subject, bits, unsigned)
    if not tail.remove:
        return WrapText(unsigned, low, c.from_low_bits(bits, signed, result, unsigned))
    ends = (limits.low, limits.high, limits.low - tail.remove, limits.high - tail.remove)
    wide = c.holder(min(ends), max(ends))
    number = c.grouped(c.from_low_bits(bits, signed, wide, unsigned))
    return WrapText(unsigned, low, c.cast(result, c.plus(number, -tail.remove), wide))


def saturation_text(function: str, value: SaturatingSum) -> SaturationText:
    """Return the text of a register that saturates."""
    low, high = value.limits.low, value.limits.high
    return SaturationText(
        function=function,
        type=c.cell_type(value.cell),
        limits=value.limits,
        low=c.number(low) if value.acts[0] else None,
        high=c.number(high) if value.acts[1] else None,
        guarded=value.guarded,
        falls=value.cell.signed,
    )


def register_text(function: str, value: Field) -> RegisterText:
    """Return the text of a register that wraps."""
    inner, result = value.of.cell, c.cell_type(value.cell)
    unsigned = f"uint{max(inner.bits, value.cell.bits)}_t"
    half = 1 << (value.bits - 1)
    return RegisterText(
        function=function,
        bits=value.bits,
        limits=Interval(-half, half - 1) if value.signed else Interval(0, 2 * half - 1),
        argument=c.cell_type(inner),
        result=result,
        wrap=WrapText(
            unsigned,
            _low_of_sum(value.of, value.bits, unsigned),
            c.from_low_bits(value.bits, value.signed, result, unsigned),
        ),
    )


def _low_of_sum(value: Sum, bits: int, unsigned: str) -> str:
    """Return the lowest bits of `sum`, which needs no conversion if it is unsigned already."""
    if c.cell_type(value.cell) == unsigned:
        return "sum" if bits == value.cell.bits else f"sum & {2**bits - 1:#x}"
    return c.low_bits("sum", bits, unsigned)
