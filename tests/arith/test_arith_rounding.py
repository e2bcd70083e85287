"""Rounding and overflow of single numbers: tables first, then laws."""

import math
from fractions import Fraction

import pytest
from hypothesis import given
from hypothesis import strategies as st

from guardbit.arith.rounding import (
    adding_constant,
    capped_ratio,
    limit,
    ratio,
    requantise,
    round_ratio,
    rounding_constant,
    unlimited,
)
from guardbit.model.enums import Container, Overflow, Rounding
from guardbit.model.filter import PixelFormat, Requantiser
from guardbit.model.sizing import Interval

U8 = PixelFormat(8, False, 0, 0, 0, 255, Container.U8)
I8 = PixelFormat(8, True, 0, 5, -128, 127, Container.I8)
VALUES = range(-6, 7)
# x / 4 for x = -6..6: directions of IEEE 754-2019, 4.3.1 and 4.3.2; ties-to-positive is
# Round2 of the AV1 specification, 4.7, and ties-to-away its Round2Signed
QUARTERS = {
    Rounding.TOWARD_NEGATIVE: (-2, -2, -1, -1, -1, -1, 0, 0, 0, 0, 1, 1, 1),
    Rounding.TOWARD_POSITIVE: (-1, -1, -1, 0, 0, 0, 0, 1, 1, 1, 1, 2, 2),
    Rounding.TOWARD_ZERO: (-1, -1, -1, 0, 0, 0, 0, 0, 0, 0, 1, 1, 1),
    Rounding.TIES_TO_POSITIVE: (-1, -1, -1, -1, 0, 0, 0, 0, 1, 1, 1, 1, 2),
    Rounding.TIES_TO_AWAY: (-2, -1, -1, -1, -1, 0, 0, 0, 1, 1, 1, 1, 2),
    Rounding.TIES_TO_EVEN: (-2, -1, -1, -1, 0, 0, 0, 0, 0, 1, 1, 1, 2),
}
numerators = st.integers(-(2**80), 2**80)
denominators = st.integers(1, 2**40)
modes = st.sampled_from(list(Rounding))


def requantiser(
    exponent: int, mode: Rounding, divisor: int = 1, to: PixelFormat = U8,
    overflow: Overflow = Overflow.SATURATE,
) -> Requantiser:  # fmt: skip
    return Requantiser(exponent, divisor, mode, overflow, to)


@pytest.mark.parametrize("mode", list(Rounding))
def test_quarters(mode: Rounding) -> None:
    assert tuple(round_ratio(x, 4, mode) for x in VALUES) == QUARTERS[mode]
    r = requantiser(-2, mode, to=I8)
    assert tuple(unlimited(r, False, x) - 5 for x in VALUES) == QUARTERS[mode]


@given(numerators, denominators, modes)
def test_a_rounded_quotient_is_one_of_both_neighbours(n: int, d: int, mode: Rounding) -> None:
    value = Fraction(n, d)
    got = round_ratio(n, d, mode)
    assert got in (math.floor(value), math.ceil(value))
    if mode in (Rounding.TIES_TO_EVEN, Rounding.TIES_TO_AWAY, Rounding.TIES_TO_POSITIVE):
        assert abs(got - value) <= Fraction(1, 2)


@given(numerators, denominators)
def test_laws_between_modes(n: int, d: int) -> None:
    down, up = Rounding.TOWARD_NEGATIVE, Rounding.TOWARD_POSITIVE
    assert round_ratio(n, d, up) == -round_ratio(-n, d, down)
    for mode in (Rounding.TOWARD_ZERO, Rounding.TIES_TO_EVEN, Rounding.TIES_TO_AWAY):
        assert round_ratio(-n, d, mode) == -round_ratio(n, d, mode)
    assert round_ratio(n, d, Rounding.TIES_TO_EVEN) == round(Fraction(n, d))
    assert round_ratio(n, d, Rounding.TIES_TO_POSITIVE) == math.floor(
        Fraction(n, d) + Fraction(1, 2)
    )
    assert abs(round_ratio(n, d, Rounding.TOWARD_ZERO)) == abs(n) // d
    assert abs(round_ratio(n, d, Rounding.TIES_TO_AWAY)) == (2 * abs(n) + d) // (2 * d)


@given(numerators, numerators, denominators, modes)
def test_rounding_is_monotone_and_keeps_integers(a: int, b: int, d: int, mode: Rounding) -> None:
    low, high = sorted((a, b))
    assert round_ratio(low, d, mode) <= round_ratio(high, d, mode)
    assert round_ratio(a * d, d, mode) == a


@given(st.integers(-(2**30), 2**30), st.integers(1, 40))
def test_a_preloaded_constant_and_a_floor_round_ties_to_positive(acc: int, shift: int) -> None:
    r = requantiser(-shift, Rounding.TIES_TO_POSITIVE)
    start = rounding_constant(r)
    assert start == 2 ** (shift - 1)
    assert unlimited(r, True, acc + start) == unlimited(r, False, acc)


@pytest.mark.parametrize("r", [
    requantiser(0, Rounding.TIES_TO_POSITIVE), requantiser(2, Rounding.TIES_TO_POSITIVE),
    requantiser(-2, Rounding.TIES_TO_EVEN), requantiser(-2, Rounding.TIES_TO_POSITIVE, 3),
])  # fmt: skip
def test_no_rounding_constant(r: Requantiser) -> None:
    with pytest.raises(ValueError, match="ties-to-positive"):
        rounding_constant(r)


def test_overflow_policies() -> None:
    away = Rounding.TIES_TO_AWAY
    saturate = requantiser(-1, away)
    assert [requantise(saturate, False, a) for a in (-9, 3, 511, 9999)] == [0, 2, 255, 255]
    wraps = requantiser(0, away, to=I8, overflow=Overflow.WRAP)
    assert [limit(wraps, v) for v in (127, 128, -129, 256, -56)] == [127, -128, 127, 0, -56]
    assert requantise(requantiser(2, away, overflow=Overflow.FORBID), False, 100) == 400
    assert unlimited(requantiser(3, away, 5), False, 7) == 11  # 56 / 5


@given(st.integers(-(2**40), 2**40), st.integers(0, 2**20), st.integers(-200, 8),
       st.integers(1, 2**20), modes)  # fmt: skip
def test_a_capped_shift_rounds_alike(low: int, size: int, exponent: int, divisor: int,
                                     mode: Rounding) -> None:  # fmt: skip
    r = requantiser(exponent, mode, divisor)
    argument = Interval(low, low + size)
    numerator, denominator = capped_ratio(r, argument)
    assert denominator <= ratio(r)[1]
    for acc in (low, low + 1, low + size // 2, low + size, max(low, min(0, low + size))):
        if acc <= argument.high:
            exact = round_ratio(acc * ratio(r)[0], ratio(r)[1], mode)
            assert round_ratio(acc * numerator, denominator, mode) == exact


@given(st.integers(-(2**20), 2**20), st.integers(1, 2**10))
def test_adding_the_constant_then_flooring(acc: int, divisor: int) -> None:
    for mode in (Rounding.TOWARD_NEGATIVE, Rounding.TOWARD_POSITIVE, Rounding.TIES_TO_POSITIVE):
        r = requantiser(0, mode, divisor)
        constant = adding_constant(r, False, divisor)
        assert (acc + constant) // divisor == round_ratio(acc, divisor, mode)
        assert adding_constant(r, True, divisor) == 0
