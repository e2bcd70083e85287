"""The `nearest` fit, register widths and the two rules of `frac = "auto"`."""

from fractions import Fraction

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from guardbit.fit.nearest import (
    FRACS,
    exact,
    exact_frac,
    largest_nearest_frac,
    nearest,
    register,
    scaled,
    width,
)

from .specs import matrix, vector

TAPS = st.fractions(min_value=-(10**4), max_value=10**4, max_denominator=10**4)


@pytest.mark.parametrize(
    ("quarters", "wanted"),
    # x/4 for x = -6..6, IEEE 754-2019 4.3.1 roundTiesToEven.
    [(range(-6, 7), [-2, -1, -1, -1, 0, 0, 0, 0, 0, 1, 1, 1, 2])],
)
def test_ties_go_to_even(quarters: range, wanted: list[int]) -> None:
    assert nearest((tuple(Fraction(x, 4) for x in quarters),)) == (tuple(wanted),)


@given(TAPS, st.integers(-70, 70))
def test_nearest_is_nearest(tap: Fraction, frac: int) -> None:
    target = scaled(((tap,),), frac)[0][0]
    integer = nearest(((target,),))[0][0]
    assert target == (tap * 2**frac if frac >= 0 else tap / 2**-frac)
    distance = abs(integer - target)
    assert distance < Fraction(1, 2) or (distance == Fraction(1, 2) and integer % 2 == 0)


@pytest.mark.parametrize(
    ("values", "signed", "wanted"),
    [
        ([], True, 1),
        ([0], True, 1),
        ([-1], True, 1),
        ([1], True, 2),
        ([127, -128], True, 8),
        ([128], True, 9),
        ([-129], True, 9),
        ([0], False, 1),
        ([1], False, 1),
        ([255], False, 8),
        ([256], False, 9),
        ([-1], False, None),
        ([-(2**62)], True, 63),
    ],
)
def test_width(values: list[int], signed: bool, wanted: int | None) -> None:
    assert width(values, signed) == wanted


@given(st.integers(1, 40), st.booleans())
def test_width_and_register_agree(bits: int, signed: bool) -> None:
    low, high = register(bits, signed)
    assert high - low == 2**bits - 1
    assert width([low, high], signed) == bits
    assert width([high + 1], signed) == bits + 1


@pytest.mark.parametrize(
    ("taps", "wanted"),
    [
        ([0, 0], 0),
        ([1, 3], 0),
        ([2, 4], -1),
        (["1/2", 4], 1),
        (["3/8", "5/4"], 3),
        (["1/3"], None),
        (["0.1"], None),
        ([2**64], -64),
        # Further down than -64 there is no frac; at -64 it is an integer all the same.
        ([2**70], -64),
        ([Fraction(1, 2**64)], 64),
        ([Fraction(1, 2**65)], None),
        ([0, "1/4"], 2),
    ],
)
def test_exact_frac(taps: list[int | str], wanted: int | None) -> None:
    assert exact_frac(vector(taps)) == wanted


@given(st.lists(st.tuples(st.integers(-300, 300), st.integers(-20, 20)), min_size=1, max_size=6))
def test_exact_frac_is_the_smallest(parts: list[tuple[int, int]]) -> None:
    taps = tuple(n * Fraction(2) ** e for n, e in parts)
    found = exact_frac(taps)
    assert found is not None
    assert exact(scaled((taps,), found)) is not None
    if any(taps):
        assert exact(scaled((taps,), found - 1)) is None


@given(st.lists(TAPS, min_size=1, max_size=5), st.integers(2, 16))
@settings(deadline=None)
def test_largest_frac_is_the_largest_of_all_that_are_tried(taps: list[Fraction], bits: int) -> None:
    low, high = register(bits, True)
    fitting = [
        frac
        for frac in FRACS
        if all(low <= tap <= high for tap in nearest(scaled((tuple(taps),), frac))[0])
    ]
    assert largest_nearest_frac(taps, bits, True) == max(fitting)


def test_exact_refuses_a_fraction() -> None:
    assert exact(matrix([[1, "1/2"]])) is None
    assert exact(matrix([[1, -2]])) == ((1, -2),)
