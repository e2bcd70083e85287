"""Registers that saturate or wrap where a border folds taps, against every frame."""

from dataclasses import replace

import pytest

from guardbit.model.enums import BorderMode, Extent, Grid, Overflow, Preload, Rounding
from guardbit.model.filter import Accumulator, Border, Filter, Requantiser
from guardbit.model.sizing import Interval
from guardbit.sizing.analyse import analyse

from .shown import left_holding
from .small import (
    axis,
    column_then_row,
    double,
    kernel,
    pixels,
    plain,
    single,
    to_output,
)
from .test_sizing_exhaustive import check_register, check_requantisers, runs

LINE = [(3, -1, 5, -4)]
SQUARE = [(2, -3), (-1, 3)]


def register(bits: int, overflow: Overflow, signed: bool = True) -> Accumulator:
    return Accumulator(bits, signed, overflow, Preload.ZERO)


def check(f: Filter) -> None:
    made = analyse(f)
    found = [run for _, run in runs(made.filter)]
    for which in range(len(f.passes)):
        check_register(made.filter, made.registers[which], found, which)
    check_requantisers(made.filter, made, found)


def test_the_example_of_four_taps_on_one_pixel() -> None:
    """Worked by hand: 9 gives 27, 18, 63, 27, and 15 gives 45, 30, 63, 3."""
    f = single(kernel(LINE), pixels(4), axis(1, (1, 1)), axis(4, (1, 1)),
               Border(BorderMode.REPLICATE, 0, Grid.PIXEL),
               accumulator=register(7, Overflow.SATURATE))  # fmt: skip
    made = analyse(f).registers[0]
    assert (made.final, made.partial) == (Interval(0, 45), Interval(0, 105))
    assert (made.held, made.held_exact) == (Interval(0, 27), True)
    # the sum is greatest at 15, where the register ends at 3
    assert [w.value for w in made.held_witnesses] == [27]
    assert left_holding(analyse(f).filter, made.held_witnesses[0], 0) == 27
    assert (made.bits_forbid, made.bits_wrap, made.spare) == (8, 7, -1)


@pytest.mark.parametrize("mode", list(BorderMode))
@pytest.mark.parametrize("overflow", list(Overflow))
@pytest.mark.parametrize("long", [1, 2, 3, 4])
def test_lines_of_two_bit_pixels(mode: BorderMode, overflow: Overflow, long: int) -> None:
    for bits in (3, 4, 5):
        for signed, pedestal, outside in ((True, 0, 0), (True, 2, 3), (False, 1, 0)):
            border = Border(mode, outside, Grid.PIXEL)
            source = pixels(2, pedestal=pedestal)
            accumulator = register(bits, overflow, signed)
            columns = axis(4, (1, long))
            f = single(kernel(LINE), source, axis(1, (1, 1)), columns, border,
                       accumulator=accumulator, requantiser=to_output(1, pixels(3)))  # fmt: skip
            check(f)


@pytest.mark.parametrize("mode", list(BorderMode))
@pytest.mark.parametrize("overflow", [Overflow.WRAP, Overflow.SATURATE])
@pytest.mark.parametrize("extent", [Extent.SAME, Extent.FULL])
def test_squares_of_codes_that_keep_away_from_zero(
    mode: BorderMode, overflow: Overflow, extent: Extent
) -> None:
    for legal in ((1, 2), (2, 3)):
        border = Border(mode, 0, Grid.PIXEL)
        axes = axis(2, (1, 2)), axis(2, (1, 3))
        source, last = pixels(2, legal=legal), to_output(0, pixels(2, True), overflow=Overflow.WRAP)
        taps, accumulator = kernel(SQUARE), register(3, overflow)
        check(single(taps, source, *axes, border, extent, accumulator, last))


MIDDLES = [
    to_output(0, pixels(2, True)),
    to_output(0, pixels(3), Rounding.TIES_TO_EVEN, Overflow.WRAP),
    to_output(1, pixels(2, True, 1), Rounding.TOWARD_ZERO, Overflow.WRAP),
    to_output(-1, pixels(4), overflow=Overflow.WRAP, divisor=3),
]


@pytest.mark.parametrize("mode", list(BorderMode))
@pytest.mark.parametrize("middle", MIDDLES)
@pytest.mark.parametrize("policies", [(a, b) for a in Overflow for b in Overflow])
def test_two_passes_of_two_bit_pixels(
    mode: BorderMode, middle: Requantiser, policies: tuple[Overflow, Overflow]
) -> None:
    first, second = column_then_row(
        ((2, -3, 1), pixels(2), middle),
        ((3, -2), to_output(1, pixels(2))),
        mode,
        accumulators=(register(4, policies[0]), register(4, policies[1])),
    ).passes
    border = Border(mode, 3, Grid.PIXEL)
    check(double(first, second, axis(3, (1, 3)), axis(2, (1, 2)), border, Extent.SAME))


def test_what_each_policy_needs() -> None:
    """Saturating needs what forbidding needs to change nothing, wrapping what the final needs."""
    taps, source = [(1, 1, 1, -1, -1)], pixels(8, legal=(16, 17))
    for overflow, spare, limit in ((Overflow.FORBID, 1, 51), (Overflow.SATURATE, 1, 51),
                                   (Overflow.WRAP, 2, 19)):  # fmt: skip
        made = analyse(plain(taps, source, register(8, overflow))).registers[0]
        assert (made.bits_forbid, made.bits_wrap) == (7, 6)
        assert made.spare == spare
        assert made.headroom is not None
        assert made.headroom * limit == 127
        assert made.held == made.final == Interval(14, 19)
        assert made.held_exact
    middle = to_output(1, pixels(8, True))
    both = (register(7, Overflow.SATURATE), register(5, Overflow.WRAP))
    f = column_then_row(((1, 1), pixels(4), middle), ((1, -1), to_output()), accumulators=both)
    first, second = analyse(f).registers
    assert (first.bits_forbid, first.bits_wrap, first.spare) == (6, 6, 1)
    assert (second.bits_forbid, second.bits_wrap, second.spare) == (5, 5, 0)


def test_a_bound_is_called_one() -> None:
    """Six pixels of 8 bits are pending at once: too many sums to tell apart."""
    taps = [[(-1) ** i * (90 + i) for i in range(12)]]
    f = single(kernel(taps), pixels(8), axis(1, (1, 1)), axis(12, (6, 6)),
               Border(BorderMode.PERIODIC, 0, Grid.PIXEL),
               accumulator=register(12, Overflow.SATURATE))  # fmt: skip
    made = analyse(f)
    assert made.registers[0].exact
    assert not made.registers[0].held_exact
    assert not made.requantisers[0].exact
    assert made.registers[0].held_witnesses == ()


def test_a_wide_register_that_wraps_is_called_a_bound() -> None:
    f = plain([(2**31 - 1, 1)], pixels(16), register(40, Overflow.WRAP))
    made = analyse(f)
    assert made.registers[0].held == Interval(-(2**39), 2**39 - 1)
    assert not made.registers[0].held_exact
    narrow = analyse(plain([(255, 1)], pixels(16), register(20, Overflow.WRAP))).registers[0]
    assert narrow.held == Interval(-(2**19), 2**19 - 1)
    assert narrow.held_exact
    for witness in narrow.held_witnesses:
        g = replace(f, passes=plain([(255, 1)], pixels(16), register(20, Overflow.WRAP)).passes)
        assert left_holding(g, witness, 0) == witness.value


def test_a_wide_register_that_wraps_is_exact_where_sums_reach_all_integers() -> None:
    """The taps 1, 300 and -40000 leave no gap on 16-bit pixels; 31 bits are one too few."""
    f = plain([(1, 300, -40000)], pixels(16), register(31, Overflow.WRAP))
    made = analyse(f)
    (r,) = made.registers
    assert (r.held, r.held_exact, r.spare) == (Interval(-(2**30), 2**30 - 1), True, -2)
    ends = {w.end: w for w in r.held_witnesses}
    assert len(ends) == 2
    for witness in ends.values():
        assert left_holding(made.filter, witness, 0) == witness.value
