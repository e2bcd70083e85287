"""Words, intervals, index maps and positions."""

import pytest
from hypothesis import given
from hypothesis import strategies as st

from guardbit.arith.borders import map_index, positions, read_index, sites
from guardbit.arith.intervals import (
    add,
    clamp_to,
    contains,
    hull,
    requantised_range,
    scale,
    shift,
    wrapped,
)
from guardbit.arith.rounding import requantise
from guardbit.arith.words import (
    bits_needed,
    clamp,
    container_range,
    container_word,
    format_range,
    smallest_container,
    wrap,
)
from guardbit.model.enums import BorderMode, Container, Extent, Grid, Overflow, Rounding
from guardbit.model.filter import Axis, Border, PixelFormat, Requantiser
from guardbit.model.sizing import Interval


@pytest.mark.parametrize(
    ("low", "high", "signed", "bits"),
    [
        (0, 0, False, 1), (0, 0, True, 1), (0, 1, False, 1), (0, 1, True, 2), (-1, 0, True, 1),
        (-1, 0, False, None), (-128, 127, True, 8), (-129, 0, True, 9), (0, 128, True, 9),
        (0, 255, False, 8), (0, 256, False, 9), (-8160, 40800, True, 17),
        (-(2**63), 2**63 - 1, True, 64), (0, 2**64 - 1, False, 64),
    ],
)  # fmt: skip
def test_bits_needed(low: int, high: int, signed: bool, bits: int | None) -> None:
    assert bits_needed(low, high, signed) == bits


@given(st.integers(-(2**70), 2**70), st.integers(1, 66), st.booleans())
def test_wrap_is_congruent_and_inside(value: int, bits: int, signed: bool) -> None:
    got = wrap(value, bits, signed)
    word = format_range(bits, signed)
    assert word.low <= got <= word.high
    assert (got - value) % 2**bits == 0
    assert clamp(value, word.low, word.high) == sorted((word.low, value, word.high))[1]


@given(st.integers(-(2**70), 2**70), st.integers(0, 2**70), st.booleans())
def test_bits_needed_is_least(low: int, size: int, signed: bool) -> None:
    bits = bits_needed(low, low + size, signed)
    if bits is None:
        assert not signed
        assert low < 0
        return
    assert contains(format_range(bits, signed), Interval(low, low + size))
    if bits > 1:
        assert not contains(format_range(bits - 1, signed), Interval(low, low + size))


def test_modular_examples() -> None:
    """J. O. Smith, Introduction to Digital Filters: 3 + 3 wraps to -2 in three bits."""
    assert wrap(3 + 3, 3, True) == -2
    assert wrap(-2 - 4, 3, True) == 2
    assert wrap(1 + 3, 3, True) == -4
    assert wrap(-4 - 2, 3, True) == 2


def test_containers() -> None:
    assert container_range(Container.I16) == Interval(-32768, 32767)
    assert container_range(Container.U32) == Interval(0, 2**32 - 1)
    for container in Container:
        bits, signed = container_word(container)
        assert smallest_container(bits, signed) is container
        assert container_range(container) == format_range(bits, signed)
    assert smallest_container(9, True) is Container.I16
    assert smallest_container(17, False) is Container.U32
    assert smallest_container(33, True) is None


intervals = st.builds(lambda a, b: Interval(min(a, b), max(a, b)), *[st.integers(-40, 40)] * 2)


@given(intervals, intervals, st.integers(-5, 5))
def test_interval_operations(a: Interval, b: Interval, k: int) -> None:
    xs, ys = range(a.low, a.high + 1), range(b.low, b.high + 1)
    sums = [x + y for x in (xs[0], xs[-1]) for y in (ys[0], ys[-1])]
    assert add(a, b) == Interval(min(sums), max(sums))
    assert scale(a, k) == Interval(min(k * x for x in xs), max(k * x for x in xs))
    assert shift(a, k) == Interval(a.low + k, a.high + k)
    assert hull([a, b]) == Interval(min(*xs, *ys), max(*xs, *ys))
    assert contains(a, b) == all(y in xs for y in ys)
    held = [clamp(x, b.low, b.high) for x in xs]
    assert clamp_to(a, b) == Interval(min(held), max(held))


@given(intervals, st.integers(1, 6), st.booleans())
def test_wrapped_is_the_hull(a: Interval, bits: int, signed: bool) -> None:
    values = [wrap(x, bits, signed) for x in range(a.low, a.high + 1)]
    assert wrapped(a, bits, signed) == Interval(min(values), max(values))


@given(intervals, st.integers(-3, 1), st.sampled_from([1, 3, 5]), st.sampled_from(list(Rounding)),
       st.sampled_from([Overflow.SATURATE, Overflow.WRAP]), st.booleans())  # fmt: skip
def test_requantised_range_holds_every_code(
    a: Interval, exponent: int, divisor: int, mode: Rounding, overflow: Overflow, signed: bool
) -> None:
    low = -4 if signed else 0
    to = PixelFormat(3, signed, 0, 1, low, low + 7, Container.I8)
    r = Requantiser(exponent, divisor, mode, overflow, to)
    codes = [requantise(r, False, x) for x in range(a.low, a.high + 1)]
    made = requantised_range(r, False, a)
    if overflow is Overflow.SATURATE or exponent <= 0:
        assert made == Interval(min(codes), max(codes))
    assert made.low <= min(codes) <= max(codes) <= made.high


# ... a b c d ... continued, eight on each side: the rows of the contract's border table
TABLE = {
    BorderMode.CONSTANT: "--------abcd--------",
    BorderMode.REPLICATE: "aaaaaaaaabcddddddddd",
    BorderMode.HALF_SAMPLE: "abcddcbaabcddcbaabcd",
    BorderMode.WHOLE_SAMPLE: "cbabcdcbabcdcbabcdcb",
    BorderMode.PERIODIC: "abcdabcdabcdabcdabcd",
}


@pytest.mark.parametrize("mode", list(BorderMode))
def test_index_maps(mode: BorderMode) -> None:
    got = [map_index(mode, i, 4) for i in range(-8, 12)]
    assert "".join("-" if i is None else "abcd"[i] for i in got) == TABLE[mode]
    alone = [map_index(mode, i, 1) for i in range(-3, 4)]
    constant = [None, None, None, 0, None, None, None]
    assert alone == (constant if mode is BorderMode.CONSTANT else [0] * 7)


def test_sites_never_mix() -> None:
    for mode in BorderMode:
        border = Border(mode, 0, Grid.SITE)
        for length in range(3, 9):
            for at in range(-20, 30):
                index = read_index(border, 3, at, length)
                assert index is None or (index - at) % 3 == 0
    assert [sites(7, 3, r) for r in range(3)] == [3, 2, 2]
    with pytest.raises(ValueError, match="no pixel"):
        read_index(Border(BorderMode.REPLICATE, 0, Grid.SITE), 3, 2, 2)


def test_positions() -> None:
    axis = Axis(-1, 3, (1, 99), 2, 1, 1)
    assert list(positions(axis, Extent.SAME, 6)) == [1, 3, 5]
    assert list(positions(axis, Extent.FULL, 4)) == [0, 2, 4, 6]
    assert list(positions(axis, Extent.VALID, 9)) == [4, 6]
    assert list(positions(axis, Extent.VALID, 4)) == []
    assert list(positions(axis, Extent.SAME, 1)) == []
