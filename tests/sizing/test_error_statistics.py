"""Mean and variance of rounding against published formulas and every residue; the gain at DC."""

from fractions import Fraction
from statistics import mean, pvariance

import pytest

from guardbit.model.enums import Overflow, Preload, Rounding
from guardbit.model.filter import Accumulator
from guardbit.sizing.analyse import analyse
from guardbit.sizing.error.statistics import moments

from .small import axis, column_then_row, kernel, pixels, plain, rounded, single, to_output


def over_residues(mode: Rounding, n: int, low: int, high: int) -> tuple[Fraction, Fraction]:
    """Mean and variance over all multiples of 1/n in low <= v < high."""
    values = [Fraction(i, n) for i in range(low * n, high * n)]
    errors = [rounded(v, mode) - v for v in values]
    return Fraction(mean(errors)), Fraction(pvariance(errors))


@pytest.mark.parametrize("n", [1, 2, 3, 4, 5, 6, 7, 8, 12, 25, 64])
@pytest.mark.parametrize("mode", list(Rounding))
def test_moments_are_those_of_all_residues(mode: Rounding, n: int) -> None:
    assert moments(mode, n, negative=False) == over_residues(mode, n, 2, 4)
    assert moments(mode, n, positive=False) == over_residues(mode, n, -4, -2)


@pytest.mark.parametrize("n", [3, 4, 6, 8])
@pytest.mark.parametrize("mode", [Rounding.TOWARD_ZERO, Rounding.TIES_TO_AWAY])
def test_signs_equally_frequent(mode: Rounding, n: int) -> None:
    both = [over_residues(mode, n, *ends) for ends in ((2, 4), (-4, -2))]
    square = sum((v + m * m for m, v in both), Fraction(0)) / 2
    assert moments(mode, n) == (Fraction(0), square)


@pytest.mark.parametrize("n", range(1, 17))
def test_the_published_formulas_of_an_n_bit_shift(n: int) -> None:
    """Constantinides, Cheung and Luk, Electronics Letters 35(23), 1999 (from memory).

    Floor: mean -(1 - 2**-n) / 2, variance (1 - 4**-n) / 12; half up: mean 2**-(n + 1), the same
    variance; half to even: mean 0, variance (1 + 2 * 4**-n) / 12.
    """
    small = Fraction(1, 2**n)
    variance = (1 - small**2) / 12
    assert moments(Rounding.TOWARD_NEGATIVE, 2**n) == (-(1 - small) / 2, variance)
    assert moments(Rounding.TIES_TO_POSITIVE, 2**n) == (small / 2, variance)
    assert moments(Rounding.TIES_TO_EVEN, 2**n) == (Fraction(0), (1 + 2 * small**2) / 12)


def test_worked_numbers() -> None:
    """n = 1: 1/16, to even 1/8; n = 2: 0.078125; n = 8: 0.0833320618 (worked out by hand)."""
    assert moments(Rounding.TIES_TO_POSITIVE, 2)[1] == Fraction(1, 16)
    assert moments(Rounding.TIES_TO_EVEN, 2)[1] == Fraction(1, 8)
    assert moments(Rounding.TOWARD_NEGATIVE, 4)[1] == Fraction("0.078125")
    assert round(float(moments(Rounding.TOWARD_NEGATIVE, 256)[1]), 10) == 0.0833320618
    # the floor after 6 bits of an H.265 second pass is biased by -0.492 LSB
    assert moments(Rounding.TOWARD_NEGATIVE, 64)[0] == Fraction(-63, 128)


def test_taps_that_are_all_even_leave_half_the_residues() -> None:
    """All AV1 sub-pixel taps are even: a shift by 7 leaves 64 residues."""
    taps = [(0, 2, -16, 94, 58, -12, 2, 0)]
    (made,) = analyse(plain(taps, pixels(8), requantiser=to_output(7))).error.rounding
    assert (made.name, made.residues) == ("output", 64)
    assert made.mean == Fraction(1, 128)


def test_a_rounding_constant_rounds_half_up() -> None:
    preloaded = Accumulator(None, True, Overflow.FORBID, Preload.ROUNDING)
    made = [
        analyse(plain([(1, 2, 1)], pixels(8), accumulator, to_output(2))).error
        for accumulator in (preloaded, Accumulator(None, True, Overflow.FORBID, Preload.ZERO))
    ]
    assert made[0].rounding == made[1].rounding
    assert (made[0].low, made[0].high) == (made[1].low, made[1].high)


def test_both_requantisers_of_two_passes() -> None:
    f = column_then_row(
        ((1, 2, 1), pixels(8), to_output(2, pixels(8), Rounding.TOWARD_NEGATIVE)),
        ((1, 1, 1), to_output(0, pixels(8), Rounding.TIES_TO_EVEN, divisor=3)),
    )
    middle, last = analyse(f).error.rounding
    assert (middle.name, middle.mean, middle.variance) == (
        "intermediate",
        Fraction(-3, 8),
        Fraction(15, 192),
    )
    assert (last.name, last.residues, last.mean, last.variance) == (
        "output",
        3,
        Fraction(0),
        Fraction(8, 108),
    )


def test_the_gain_at_dc() -> None:
    """A third as 85 / 256: short by 1/768, or by 255/768 LSB of the greatest code."""
    third = kernel([[Fraction(1, 3)]], [[85]])
    f = single(third, pixels(8), axis(1), axis(1), requantiser=to_output(8))
    gain = analyse(f).error.gain
    assert gain is not None
    assert (gain.ideal, gain.fitted) == (Fraction(1, 3), Fraction(85, 256))
    assert gain.error == Fraction(-1, 768)
    assert gain.relative == Fraction(-1, 256)
    assert gain.at_full_scale == Fraction(-255, 768)
    zero = analyse(plain([(-1, 0, 1)], pixels(8), requantiser=to_output(0, pixels(9, True))))
    assert zero.error.gain is not None
    assert zero.error.gain.error == 0
    assert zero.error.gain.relative is None
