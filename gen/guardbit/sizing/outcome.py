"""What comes out at a witness's position, by scalar arithmetic: for any width and policy."""

from collections.abc import Iterator
from dataclasses import dataclass, replace

from guardbit.arith.borders import read_index
from guardbit.arith.rounding import requantise
from guardbit.arith.words import clamp, format_range, wrap
from guardbit.model.enums import Overflow
from guardbit.model.filter import Accumulator, Axis, Filter, Pass, holding
from guardbit.model.sizing import Witness
from guardbit.sizing.passes import is_preloaded, start_value


@dataclass(frozen=True)
class Outcome:
    """What a register ends at, and the code that its requantiser makes of it."""

    held: int
    code: int


def outcome(f: Filter, which: int, witness: Witness, overflow: Overflow) -> Outcome:
    """Return what pass number `which` makes of a witness's frame, at its position.

    Its accumulator has its width and the policy given; `forbid` stands for no limit. Registers
    of coefficients hold what the witness says.
    Registers of the filter have resolved widths.
    """
    f = holding(f, witness.taps)
    p = f.passes[which]
    accumulator = replace(p.accumulator, overflow=overflow)
    held = ended(accumulator, start_value(p), _amounts(f, which, witness))
    return Outcome(held, requantise(p.requantiser, is_preloaded(p), held))


def ended(accumulator: Accumulator, start: int, amounts: Iterator[int]) -> int:
    """Return what a register holds after adding the amounts in order."""
    if accumulator.overflow is Overflow.FORBID:
        return start + sum(amounts)
    assert accumulator.bits is not None
    if accumulator.overflow is Overflow.WRAP:
        return wrap(start + sum(amounts), accumulator.bits, accumulator.signed)
    word = format_range(accumulator.bits, accumulator.signed)
    total = clamp(start, word.low, word.high)
    for amount in amounts:
        total = clamp(total + amount, word.low, word.high)
    return total


def _amounts(f: Filter, which: int, witness: Witness) -> Iterator[int]:
    """Yield what each tap adds at the witness's position."""
    row, column = witness.position
    codes = {(y, x): code for y, x, code in witness.pixels}
    for term in f.passes[which].kernel.terms:
        if term.integer:
            at = (row + term.dy, column + term.dx)
            value = _pixel if which == 0 else _result
            yield term.integer * value(f, witness, codes, at)


_Codes = dict[tuple[int, int], int]


def _pixel(f: Filter, witness: Witness, codes: _Codes, at: tuple[int, int]) -> int:
    """Return the pixel read at a position, less the pedestal."""
    y = _index(f, f.geometry.rows, at[0], witness.height)
    x = _index(f, f.geometry.columns, at[1], witness.width)
    outside = y is None or x is None
    code = f.border.value if outside else codes.get((y or 0, x or 0), witness.fill)
    return code - f.input.pedestal


def _index(f: Filter, axis: Axis, position: int, length: int) -> int | None:
    return read_index(f.border, axis.spacing, position, length)


def _result(f: Filter, witness: Witness, codes: _Codes, at: tuple[int, int]) -> int:
    """Return the first pass's result at a position, less the pedestal."""
    p: Pass = f.passes[0]
    amounts = (
        t.integer * _pixel(f, witness, codes, (at[0] + t.dy, at[1] + t.dx))
        for t in p.kernel.terms
        if t.integer
    )
    held = ended(p.accumulator, start_value(p), amounts)
    return requantise(p.requantiser, is_preloaded(p), held) - p.requantiser.to.pedestal
