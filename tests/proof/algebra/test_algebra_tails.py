"""Tails of filters as tables, against z3's bit-vectors: another arithmetic, another proof.

A tail takes a sum to a stored code. It is written once over symbols and once over bit-vectors of
64 bits; z3 is asked for a sum at which the table's pieces and the bit-vectors differ.
"""

from collections.abc import Callable
from dataclasses import dataclass

import pytest
import z3

from guardbit.proof.algebra.space import Space
from guardbit.proof.algebra.values import Form, Table, Value

WIDTH = 64


@dataclass(frozen=True)
class Tail:
    """Half, shift and mode of rounding, or a divisor; and the ends of the output."""

    mode: str
    shift: int
    low: int
    high: int
    divisor: int = 0


def symbolic(space: Space, tail: Tail, acc: Value) -> Value:
    """Return the stored code as the algebra has it."""
    return _held(space, tail, _ROUNDED[tail.mode](space, tail, acc))


def _held(space: Space, tail: Tail, code: Value) -> Value:
    code = space.where(space.compare("<", code, tail.low), tail.low, code)
    return space.where(space.compare(">", code, tail.high), tail.high, code)


def _half_up(space: Space, tail: Tail, acc: Value) -> Value:
    return space.shift_down(space.add(acc, 1 << tail.shift - 1), tail.shift)


def _even(space: Space, tail: Tail, acc: Value) -> Value:
    t = space.add(acc, 1 << tail.shift - 1)
    q = space.shift_down(t, tail.shift)
    tie = space.compare("==", space.remainder(t, 1 << tail.shift), 0)
    odd = space.compare("!=", space.remainder(q, 2), 0)
    return space.subtract(q, space.both(tie, odd))


def _away(space: Space, tail: Tail, acc: Value) -> Value:
    half = 1 << tail.shift - 1
    below = space.compare("<", acc, 0)
    return space.quotient(
        space.where(below, space.subtract(acc, half), space.add(acc, half)), 1 << tail.shift
    )


def _toward_zero(space: Space, tail: Tail, acc: Value) -> Value:
    return space.quotient(acc, 1 << tail.shift)


def _branch_free(space: Space, tail: Tail, acc: Value) -> Value:
    """Return acc / 2**shift toward zero by adding the sign's bits before the shift."""
    sign = space.shift_down(acc, 63)
    bias = space.bits_and(sign, (1 << tail.shift) - 1)
    return space.shift_down(space.add(acc, bias), tail.shift)


def _exact(space: Space, tail: Tail, acc: Value) -> Value:
    return space.floor_divide(space.add(acc, tail.divisor // 2), tail.divisor)


def _reciprocal(space: Space, tail: Tail, acc: Value) -> Value:
    """Return (acc + d / 2) / d by a multiplication that suits 16 bits."""
    factor = (1 << tail.shift) // tail.divisor + 1
    return space.shift_down(space.multiply(space.add(acc, tail.divisor // 2), factor), tail.shift)


_ROUNDED: dict[str, Callable[[Space, Tail, Value], Value]] = {
    "half-up": _half_up,
    "even": _even,
    "away": _away,
    "toward-zero": _toward_zero,
    "branch-free": _branch_free,
    "exact": _exact,
    "reciprocal": _reciprocal,
}


def bit_vectors(tail: Tail, acc: z3.BitVecRef) -> z3.BitVecRef:
    """Return the stored code as the definition of the rounding has it."""
    code = _rounded(tail, acc)
    return z3.If(code < tail.low, tail.low, z3.If(code > tail.high, tail.high, code))


def _rounded(tail: Tail, acc: z3.BitVecRef) -> z3.BitVecRef:
    unit = z3.BitVecVal(tail.divisor or 1 << tail.shift, WIDTH)
    rest = z3.SRem(acc, unit)
    # the remainder of the floor is not negative
    rest = z3.If(rest < 0, rest + unit, rest)
    floor = (acc - rest) / unit
    one = z3.BitVecVal(1, WIDTH)
    if tail.mode in ("toward-zero", "branch-free"):
        return acc / unit
    above = rest + rest > unit
    tie = rest + rest == unit
    if tail.mode == "even":
        return floor + z3.If(z3.Or(above, z3.And(tie, floor & 1 == 1)), one, one - one)
    if tail.mode == "away":
        return floor + z3.If(z3.Or(above, z3.And(tie, acc >= 0)), one, one - one)
    return floor + z3.If(z3.Or(above, tie), one, one - one)


def pieces_of(value: Value, acc: z3.BitVecRef) -> z3.BitVecRef:
    """Return a table over the one pixel, piece by piece."""
    if isinstance(value, Form):
        return value.terms[0] * acc + value.constant
    assert isinstance(value, Table)
    assert value.base.terms == {0: 1}
    f = value.function
    rows = list(zip(f.starts.tolist(), f.slopes.tolist(), f.offsets.tolist(), strict=True))

    def between(low: int, high: int) -> z3.BitVecRef:
        if high - low == 1:
            _, slope, offset = rows[low]
            return z3.BitVecVal(slope, WIDTH) * acc + offset
        middle = (low + high) // 2
        return z3.If(acc < rows[middle][0], between(low, middle), between(middle, high))

    return between(0, len(rows))


def differing(tail: Tail, low: int, high: int, wrong: int = 0) -> int | None:
    """Return a sum for which table and bit-vectors differ; None: z3 shows that there is none."""
    space = Space()
    acc = z3.BitVec("acc", WIDTH)
    made = symbolic(space, tail, space.add(space.pixel(low, high), wrong))
    solver = z3.Solver()
    solver.add(acc >= low, acc <= high, pieces_of(made, acc) != bit_vectors(tail, acc))
    if solver.check() == z3.unsat:
        return None
    found = solver.model()[acc]
    assert found is not None
    return int(found.as_signed_long())


TAILS = [
    (Tail("half-up", 6, 0, 255), -2000, 21000),
    (Tail("half-up", 4, -128, 127), -3000, 2500),
    (Tail("even", 5, 0, 255), -900, 9000),
    (Tail("even", 3, -100, 100), -1000, 1000),
    (Tail("away", 2, 16, 235), -876, 1752),
    (Tail("away", 7, -128, 127), -32768, 32767),
    (Tail("toward-zero", 8, -128, 127), -32768, 32767),
    (Tail("branch-free", 5, -100, 100), -4000, 4000),
    (Tail("exact", 0, 0, 255, 25), 0, 6375),
    (Tail("reciprocal", 17, 0, 255, 25), 0, 6375),
    (Tail("exact", 0, -90, 90, 9), -1000, 1000),
]


@pytest.mark.parametrize(("tail", "low", "high"), TAILS)
def test_a_tail_is_what_its_rounding_says(tail: Tail, low: int, high: int) -> None:
    assert differing(tail, low, high) is None


@pytest.mark.parametrize(("tail", "low", "high"), TAILS)
def test_a_tail_that_is_one_off_is_found(tail: Tail, low: int, high: int) -> None:
    found = differing(tail, low, high, wrong=1)
    assert found is not None
    assert low <= found <= high


def test_a_reciprocal_that_is_too_short_is_found() -> None:
    """The bare n * 5243 >> 17 is n / 25 up to n = 43698."""
    space = Space()
    x = space.pixel(0, 43698)
    product = space.multiply(x, 5243)
    assert space.same(space.shift_down(product, 17), space.floor_divide(x, 25))
    y = space.pixel(0, 43699)
    short = space.shift_down(space.multiply(y, 5243), 17)
    assert space.difference(short, space.floor_divide(y, 25)) == {1: 43699}
