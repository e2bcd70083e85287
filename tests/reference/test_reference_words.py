"""Choosing a word never costs exactness: every quantity alone at the ends of each word."""

from dataclasses import replace
from fractions import Fraction

import numpy as np
import pytest

from guardbit.model.enums import BorderMode, Overflow, Preload, Rounding
from guardbit.model.filter import Requantiser
from guardbit.reference.requantise import requantise
from guardbit.reference.words import limits, stored, word_for, wrapped

from .builders import S32, make, output, pixels, sums, two_passes

ENDS = [2**15, 2**31, 2**63]


def test_words_hold_their_bounds() -> None:
    names = [word_for(end - 1 + more).name for end in ENDS for more in (0, 1)]
    assert names == ["int16", "int32", "int32", "int64", "int64", "object"]


def test_stored_keeps_int64_as_long_as_it_can() -> None:
    assert stored(np.array([1 - 2**63, 5], object)).dtype == np.int64
    assert stored(np.array([2**63], object)).tolist() == [2**63]


@pytest.mark.parametrize("bits", [1, 2, 15, 16, 17, 31, 32, 33, 63, 64])
@pytest.mark.parametrize("signed", [False, True])
def test_wrapped_at_its_limits(bits: int, signed: bool) -> None:
    low, high = limits(bits, signed)
    values = [low - 1, low, low + 1, -1, 0, 1, high - 1, high, high + 1]
    expected = [(value - low) % 2**bits + low for value in values]
    assert wrapped(np.array(values, object), bits, signed).tolist() == expected
    for value, end in zip(values, expected, strict=True):
        narrow = np.array([value], word_for(abs(value)))
        assert wrapped(narrow, bits, signed).tolist() == [end]


@pytest.mark.parametrize("end", ENDS)
@pytest.mark.parametrize("rounding", Rounding)
def test_requantiser_at_the_end_of_each_word(end: int, rounding: Rounding) -> None:
    to = replace(S32, pedestal=100)
    directed = rounding.value.startswith("toward")
    for divisor in (1, 2, end // 2 + 1, end - 3, end - 1):
        unit = Requantiser(0, divisor, rounding, Overflow.FORBID, to)
        for value in (1, end // 2, end - 101, end - 100, end - 5, end - 3, end - 1, end):
            for acc in (value, -value):
                got = requantise(unit, Preload.ZERO, np.array([acc], word_for(value)))
                error = abs(int(got[0]) - 100 - Fraction(acc, divisor))
                assert error < 1 if directed else error <= Fraction(1, 2)


@pytest.mark.parametrize("end", ENDS)
def test_taps_of_a_dark_frame(end: int) -> None:
    assert sums(make([[end, -end]]), np.zeros((1, 3), int)).tolist() == [[0, 0, 0]]


@pytest.mark.parametrize("end", ENDS)
def test_sums_at_the_end_of_each_word(end: int) -> None:
    image = np.array([[1, 1, 1]])
    total = sums(make([[end - 2, 1, 1]], mode=BorderMode.PERIODIC), image)
    assert total.tolist() == [[end] * 3]
    total = sums(make([[2 - end, -1, -2]], mode=BorderMode.PERIODIC), image)
    assert total.tolist() == [[-end - 1] * 3]


def test_rounding_constant_alone_fills_a_word() -> None:
    for shift in (15, 16, 31, 32, 62, 63, 64):
        filter = make([[1]], exponent=-shift, preload=Preload.ROUNDING)
        assert sums(filter, np.array([[1]])).tolist() == [[2 ** (shift - 1) + 1]]


def test_codes_far_from_zero_and_near_their_pedestal() -> None:
    source = pixels(16, pedestal=40000)
    filter = make([[1, 1]], source=source, value=40000)
    assert output(filter, [[40010, 40000]]) == [[10, 10]]


def test_a_constant_larger_than_every_code() -> None:
    filter = make([[1, 1, 1]], source=pixels(16), value=60000)
    assert output(filter, [[0]]) == [[120000]]


@pytest.mark.parametrize("tap", [0, 1])
def test_an_intermediate_whose_codes_are_nearer_zero_than_its_pedestal(tap: int) -> None:
    middle = pixels(17, True, pedestal=-40000)
    filter = two_passes(make([[1], [1]], to=middle), make([[tap]], source=middle))
    assert output(filter, [[7], [3]]) == [[7 * tap], [10 * tap]]
    middle = pixels(16, True, pedestal=-(2**15))
    first = make([[1], [0]], source=pixels(16), to=middle)
    assert output(two_passes(first, make([[tap]], source=middle)), [[60000]]) == [[60000 * tap]]
