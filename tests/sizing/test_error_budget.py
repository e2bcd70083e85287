"""The error budget by hand: contributions, and a total that is their joint maximum."""

from collections.abc import Callable
from fractions import Fraction

import pytest

from guardbit.model.enums import BorderMode, Overflow, Preload, Rounding
from guardbit.model.filter import Accumulator, Filter
from guardbit.model.sizing import ErrorBound
from guardbit.sizing.analyse import analyse

from .small import axis, column_then_row, kernel, pixels, plain, rounded, single, to_output

Ends = tuple[Fraction, Fraction]


def part(made: ErrorBound, cause: str) -> Ends:
    found = next(p for p in made.parts if p.cause == cause)
    return found.low, found.high


def ends(low: int | str | Fraction, high: int | str | Fraction) -> Ends:
    return Fraction(low), Fraction(high)


def one_tap(
    ideal: Fraction, integer: int, shift: int, rounding: Rounding = Rounding.TIES_TO_POSITIVE
) -> Filter:
    requantiser = to_output(shift, pixels(8), rounding)
    taps = kernel([[ideal]], [[integer]])
    return single(taps, pixels(8), axis(1), axis(1), requantiser=requantiser)


def by_hand(f: Callable[[int], Fraction], code: Callable[[int], int]) -> Ends:
    errors = [min(max(code(x), 0), 255) - min(max(f(x), Fraction(0)), Fraction(255))
              for x in range(256)]  # fmt: skip
    return min(errors), max(errors)


@pytest.mark.parametrize("rounding", list(Rounding))
def test_a_third_of_every_code(rounding: Rounding) -> None:
    """85 / 256 for 1/3: every code worked out on its own."""
    made = analyse(one_tap(Fraction(1, 3), 85, 8, rounding=rounding)).error
    truth = by_hand(lambda x: Fraction(x, 3), lambda x: rounded(Fraction(85 * x, 256), rounding))
    assert made.exact
    assert (made.low, made.high) == truth
    assert part(made, "coefficient fitting") == ends("-255/768", 0)


def test_the_total_is_less_than_the_sum_of_its_parts() -> None:
    """5/4 for 1: at 204 the code is 255 and 51 too much; beyond it is clamped ever nearer."""
    made = analyse(one_tap(Fraction(1), 5, 2)).error
    assert (made.low, made.high) == by_hand(Fraction, lambda x: (5 * x + 2) // 4)
    assert made.high == 51
    assert part(made, "coefficient fitting") == ends(0, "255/4")
    assert part(made, "final rounding") == ends("-1/4", "1/2")
    assert part(made, "saturation") == ends(255 - 319, 0)


def test_fitting_counts_where_the_ideal_code_is_legal() -> None:
    """9/4 for 2: only codes up to 127.5 have a legal ideal; 113.25 of them reach 255."""
    made = analyse(one_tap(Fraction(2), 9, 2)).error
    assert part(made, "coefficient fitting") == ends(0, Fraction(255, 8))
    assert part(made, "saturation") == ends(
        255 - rounded(Fraction(9 * 127, 4), to_output().rounding), 0
    )
    assert (made.low, made.high) == by_hand(lambda x: Fraction(2 * x), lambda x: (9 * x + 2) // 4)


def test_a_tap_fitted_to_zero_is_an_error_of_its_own() -> None:
    f = single(
        kernel([[1, Fraction(1, 8)]], [[1, 0]]), pixels(4), axis(1), axis(2),
        requantiser=to_output(0, pixels(4)),
    )  # fmt: skip
    made = analyse(f).error
    # 15 / 8 too little at most: beside a pixel of 13 or less
    assert made.exact
    assert (made.low, made.high) == ends("-15/8", 0)


def test_parts_of_two_passes() -> None:
    """(1, 2, 1) / 4 down, floored to 8 bits, then (-1, 3) / 1, clamped."""
    f = column_then_row(
        ((1, 2, 1), pixels(8), to_output(2, pixels(8), Rounding.TOWARD_NEGATIVE)),
        ((-1, 3), to_output(1, pixels(8))),
    )
    scaled = analyse(f).error
    assert part(scaled, "intermediate rounding") == ends("-9/8", "3/8")
    assert part(scaled, "intermediate saturation") == ends(0, 0)
    assert part(scaled, "final rounding") == ends(0, "1/2")


def test_clamping_in_between() -> None:
    """x * 3 clamped to 0..255, then the difference of two: 255 loses 510 beside an 85."""
    f = column_then_row(
        ((3,), pixels(8), to_output(0, pixels(8))),
        ((1, -1), to_output(0, pixels(10, True))),
    )
    made = analyse(f).error
    assert part(made, "intermediate saturation") == ends(-510, 510)
    # the other way round as well: the ideal code, -510 or 510, is still a legal one
    assert made.exact
    assert (made.low, made.high) == ends(-510, 510)


def test_a_register_that_wraps_has_an_exact_bound_for_all_inputs() -> None:
    wraps = Accumulator(7, False, Overflow.WRAP, Preload.ZERO)
    made = analyse(plain([(3,)], pixels(6), wraps, to_output(0, pixels(8)))).error
    errors = [(3 * x) % 128 - min(3 * x, 255) for x in range(64)]
    assert made.assumes_no_wrap
    assert (made.low, made.high) == ends(0, 0)
    assert made.overall == ends(min(errors), max(errors))


def test_a_register_that_clamps_moves_sums_by_no_more_than_they_leave_it() -> None:
    """0..255 clamped to 0..127 from above alone: never too great, 128 too small at most."""
    clamps = Accumulator(8, True, Overflow.SATURATE, Preload.ZERO)
    made = analyse(plain([(1, 0)], pixels(8), clamps, to_output(0, pixels(8)))).error
    assert made.overall == ends(-128, 0)
    assert not made.exact


@pytest.mark.parametrize("mode", [BorderMode.REPLICATE, BorderMode.PERIODIC])
def test_shifts_of_a_word_and_more_are_exact(mode: BorderMode) -> None:
    for shift in (31, 32, 64):
        f = plain([(3, 5)], pixels(16), requantiser=to_output(shift, pixels(16)), mode=mode)
        made = analyse(f).error
        # the ideal taps are 3 and 5 as well: all codes are 0, all ideal codes up to 65535
        assert made.low == -65535
        assert made.high == 0


def test_no_taps_no_error() -> None:
    made = analyse(plain([(0,)], pixels(8), requantiser=to_output(3, pixels(8, pedestal=9)))).error
    assert made.exact
    assert made.low == made.high == 0
