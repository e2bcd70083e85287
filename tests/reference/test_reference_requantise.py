"""The requantiser alone: rounding, division, overflow."""

from dataclasses import replace
from fractions import Fraction
from math import ceil, floor
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from guardbit.model.enums import Overflow, Preload, Rounding
from guardbit.model.filter import Requantiser
from guardbit.reference.requantise import requantise
from tools import examples

from .builders import S32, number_range, pixels

BASE = Requantiser(0, 1, Rounding.TIES_TO_POSITIVE, Overflow.SATURATE, S32)


def unit(
    exponent: int,
    rounding: Rounding = Rounding.TIES_TO_POSITIVE,
    **knobs: Any,  # noqa: ANN401
) -> Requantiser:
    return replace(BASE, exponent=exponent, rounding=rounding, **knobs)


def codes(requantiser: Requantiser, values: list[int], preload: Preload = Preload.ZERO) -> Any:  # noqa: ANN401
    return requantise(requantiser, preload, np.array(values)).tolist()


# IEEE 754-2019 4.3.1 and 4.3.2; RFC 6386 and the AV1 specification 4.7 for ties-to-positive.
QUARTERS = {
    Rounding.TOWARD_NEGATIVE: [-2, -2, -1, -1, -1, -1, 0, 0, 0, 0, 1, 1, 1],
    Rounding.TOWARD_POSITIVE: [-1, -1, -1, 0, 0, 0, 0, 1, 1, 1, 1, 2, 2],
    Rounding.TOWARD_ZERO: [-1, -1, -1, 0, 0, 0, 0, 0, 0, 0, 1, 1, 1],
    Rounding.TIES_TO_POSITIVE: [-1, -1, -1, -1, 0, 0, 0, 0, 1, 1, 1, 1, 2],
    Rounding.TIES_TO_AWAY: [-2, -1, -1, -1, -1, 0, 0, 0, 1, 1, 1, 1, 2],
    Rounding.TIES_TO_EVEN: [-2, -1, -1, -1, 0, 0, 0, 0, 0, 1, 1, 1, 2],
}


@pytest.mark.parametrize("rounding", Rounding)
@pytest.mark.parametrize("way", [{"exponent": -2}, {"exponent": 0, "divisor": 4}])
def test_quarters(rounding: Rounding, way: dict[str, int]) -> None:
    requantiser = unit(**way, rounding=rounding)
    assert codes(requantiser, list(range(-6, 7))) == QUARTERS[rounding]


def rounded(value: Fraction, rounding: Rounding) -> int:
    """Return the rounded value by the definition: the nearer neighbour, and ties by rule."""
    below, above = floor(value), ceil(value)
    directed = {
        Rounding.TOWARD_NEGATIVE: below,
        Rounding.TOWARD_POSITIVE: above,
        Rounding.TOWARD_ZERO: below if value > 0 else above,
    }
    if rounding in directed:
        return directed[rounding]
    if value - below != above - value:
        return min((below, above), key=lambda whole: abs(whole - value))
    ties = {
        Rounding.TIES_TO_EVEN: below if below % 2 == 0 else above,
        Rounding.TIES_TO_AWAY: above if value > 0 else below,
        Rounding.TIES_TO_POSITIVE: above,
    }
    return ties[rounding]


accumulators = st.one_of(st.integers(-300, 300), st.integers(-(2**63), 2**64 - 1))


@settings(max_examples=examples(300), deadline=None)
@given(
    st.lists(accumulators, min_size=1, max_size=8),
    st.one_of(st.integers(-9, 4), st.integers(-192, 192)),
    st.one_of(st.integers(1, 12), st.integers(1, 2**40)),
    st.sampled_from(Rounding),
    st.sampled_from([Overflow.SATURATE, Overflow.WRAP, Overflow.FORBID]),
    st.sampled_from([(1, False), (2, True), (8, False), (8, True), (32, False), (32, True)]),
    st.integers(-3, 3),
)
def test_equals_the_definition_on_rationals(
    values: list[int],
    exponent: int,
    divisor: int,
    rounding: Rounding,
    overflow: Overflow,
    form: tuple[int, bool],
    pedestal: int,
) -> None:
    to = pixels(*form, pedestal=pedestal)
    low, high = number_range(*form)
    requantiser = unit(exponent, rounding, divisor=divisor, overflow=overflow, to=to)
    expected = []
    for value in values:
        code = rounded(value * Fraction(2) ** exponent / divisor, rounding) + pedestal
        if overflow is Overflow.SATURATE:
            code = min(max(code, low), high)
        elif overflow is Overflow.WRAP:
            code = (code - low) % 2 ** form[0] + low
        expected.append(code)
    assert requantise(requantiser, Preload.ZERO, np.array(values, object)).tolist() == expected
    if all(-(2**63) <= value < 2**63 for value in values):
        got = requantise(requantiser, Preload.ZERO, np.array(values, np.int64))
        assert got.tolist() == expected
        assert got.dtype == np.int64 or overflow is Overflow.FORBID


@pytest.mark.parametrize("rounding", Rounding)
@pytest.mark.parametrize("exponent", [-1, -2, -5])
@pytest.mark.parametrize("divisor", [1, 2, 3, 6, 25])
def test_monotone_nearest_and_exact(rounding: Rounding, exponent: int, divisor: int) -> None:
    requantiser = unit(exponent, rounding, divisor=divisor)
    values = np.arange(-2000, 2001)
    got = requantise(requantiser, Preload.ZERO, values)
    assert (np.diff(got) >= 0).all()
    one = divisor * 2**-exponent
    whole = values % one == 0
    assert np.array_equal(got[whole], values[whole] // one)
    error = 2 * np.abs(got * one - values)
    directed = rounding.value.startswith("toward")
    assert (error < 2 * one).all() if directed else (error <= one).all()


def test_ties_away_mirror_and_even_outputs() -> None:
    halves = np.arange(-99, 100, 2)
    away = requantise(unit(-1, Rounding.TIES_TO_AWAY), Preload.ZERO, halves)
    assert np.array_equal(away, -away[::-1])
    assert (np.abs(away) * 2 > np.abs(halves)).all()
    even = requantise(unit(-1, Rounding.TIES_TO_EVEN), Preload.ZERO, halves)
    assert (even % 2 == 0).all()


@pytest.mark.parametrize("bits", [1, 2, 8])
def test_bias_and_variance_of_rounding(bits: int) -> None:
    """Over all residues: floor -(1 - 2**-n)/2, half up +2**-(n+1), half even 0, and variances.

    Constantinides, Cheung and Luk, Electron. Lett. 35(23), 1999 (from memory).
    """
    values = np.arange(2 ** (bits + 1))
    moments = {}
    for rounding in Rounding:
        got = requantise(unit(-bits, rounding), Preload.ZERO, values).tolist()
        errors = [code - Fraction(value, 2**bits) for value, code in enumerate(got)]
        mean = sum(errors, Fraction(0)) / len(errors)
        moments[rounding] = mean, sum((e - mean) ** 2 for e in errors) / len(errors)
    small = Fraction(1, 4**bits)
    assert moments[Rounding.TOWARD_NEGATIVE] == (
        Fraction(1, 2 ** (bits + 1)) - Fraction(1, 2),
        (1 - small) / 12,
    )
    assert moments[Rounding.TIES_TO_POSITIVE] == (Fraction(1, 2 ** (bits + 1)), (1 - small) / 12)
    assert moments[Rounding.TIES_TO_EVEN] == (0, (1 + 2 * small) / 12)


def test_preloaded_values_are_only_floored() -> None:
    values = list(range(-40, 41))
    loaded = codes(unit(-3), [value + 4 for value in values], Preload.ROUNDING)
    assert loaded == codes(unit(-3), values)


def test_half_away_without_shifting_negatives() -> None:
    """RFC 6386 p. 114: s >= 0 ? (s + 4) >> 3 : -((-s + 4) >> 3)."""
    values = list(range(-100, 101))
    theirs = [(s + 4) >> 3 if s >= 0 else -((-s + 4) >> 3) for s in values]
    assert codes(unit(-3, Rounding.TIES_TO_AWAY), values) == theirs


def test_any_shape_and_narrow_types() -> None:
    acc = np.array([[[127], [-128]]], np.int8)
    got = requantise(unit(-1, to=pixels(8, True, pedestal=64)), Preload.ZERO, acc)
    assert got.tolist() == [[[127], [0]]]
    assert requantise(unit(-1), Preload.ZERO, np.empty((0, 3, 1), np.int64)).shape == (0, 3, 1)


def test_saturates_to_the_range_not_the_format() -> None:
    to = replace(pixels(32), low=100_000, high=3_000_000_000)
    assert codes(unit(0, to=to), [1]) == [100_000]
    assert codes(unit(20, to=to), [2**15]) == [3_000_000_000]
