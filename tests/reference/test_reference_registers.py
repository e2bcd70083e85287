"""Registers that wrap or saturate, and widths beyond the machine's, against plain integers."""

from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from guardbit.model.enums import BorderMode, Operation, Overflow, Preload, Rounding
from guardbit.model.filter import Filter
from guardbit.reference.run import respond
from tools import examples

from .builders import MODES, Array, extended, frame_of, make, number_range, output, pixels, sums
from .builders import two_passes as passes


def one_by_one(filter: Filter, image: Array) -> list[list[int]]:
    """Return the accumulators of a one-pass `same` filter, added up in plain integers."""
    one = filter.passes[0]
    pad = max((max(abs(t.dy), abs(t.dx)) for t in one.kernel.terms), default=0)
    wide = extended(image, (pad, pad), filter.border.mode, filter.border.value).tolist()
    height, width = image.shape
    return [
        [add_up(filter, wide, row + pad, column + pad) for column in range(width)]
        for row in range(height)
    ]


def add_up(filter: Filter, wide: list[list[int]], row: int, column: int) -> int:
    one = filter.passes[0]
    register, pedestal = one.accumulator, one.source.pedestal
    held = 0
    if register.preload is Preload.ROUNDING:
        held = 2 ** (-one.requantiser.exponent - 1)
    for term in one.kernel.terms:
        held += term.integer * (wide[row + term.dy][column + term.dx] - pedestal)
        assert register.bits is not None
        low, high = number_range(register.bits, register.signed)
        if register.overflow is Overflow.SATURATE:
            held = min(max(held, low), high)
        elif register.overflow is Overflow.WRAP:
            held = (held - low) % 2**register.bits + low
    return held


@settings(max_examples=examples(150), deadline=None)
@given(
    seed=st.integers(0, 2**32 - 1),
    bits=st.sampled_from([2, 3, 7, 8, 9, 15, 16, 17, 31, 32, 33, 63, 64]),
    signed=st.booleans(),
    overflow=st.sampled_from([Overflow.WRAP, Overflow.SATURATE]),
    large=st.integers(0, 66),
    mode=st.sampled_from(MODES),
    operation=st.sampled_from(Operation),
    shift=st.integers(0, 8),
)
def test_registers_equal_a_plain_loop(
    seed: int,
    bits: int,
    signed: bool,
    overflow: Overflow,
    large: int,
    mode: BorderMode,
    operation: Operation,
    shift: int,
) -> None:
    rng = np.random.default_rng(seed)
    image = rng.integers(-128, 128, (3, 4))
    taps = [[int(tap) << large >> 6 for tap in row] for row in rng.integers(-99, 100, (3, 2))]
    loads = 1 <= shift < bits
    filter = make(
        taps,
        source=pixels(8, True, pedestal=-5),
        bits=bits,
        signed=signed,
        overflow=overflow,
        mode=mode,
        value=11,
        operation=operation,
        exponent=-shift,
        preload=Preload.ROUNDING if loads else Preload.ZERO,
    )
    assert sums(filter, image).tolist() == one_by_one(filter, image)


def test_modular_sums_come_out_right_in_the_end() -> None:
    """J. O. Smith, Introduction to Digital Filters, "Two's Complement Wrap-Around": 3 bits."""
    knobs: dict[str, Any] = {"bits": 3, "overflow": Overflow.WRAP, "source": pixels(3, True)}
    ones = [[1, 1, 1]]
    assert sums(make(ones, **knobs), np.array([[3, 3, -4]]))[0, 1] == 2
    assert sums(make(ones, **knobs), np.array([[1, 3, -2]]))[0, 1] == 2
    assert sums(make([[1, 1]], **knobs), np.array([[3, 3]]))[0, 1] == -2


def test_saturation_depends_on_the_order() -> None:
    """Upper row first, then left to right: 7 bits hold 63, so late negatives show."""
    knobs: dict[str, Any] = {"bits": 7, "overflow": Overflow.SATURATE, "mode": BorderMode.PERIODIC}
    image = np.full((2, 2), 60)
    ordered = {"operation": Operation.CORRELATION, "origin": (0, 0)}
    assert sums(make([[1, 1], [-1, 0]], **ordered, **knobs), image)[0, 0] == 3
    assert sums(make([[-1, 0], [1, 1]], **ordered, **knobs), image)[0, 0] == 60
    assert sums(make([[1, -1], [1, 0]], **ordered, **knobs), image)[0, 0] == 60
    flipped = {"origin": (0, 0)}
    assert sums(make([[0, -1], [1, 1]], **flipped, **knobs), image)[0, 0] == 3


def test_rounding_constant_that_the_register_cannot_hold_is_clamped() -> None:
    knobs: dict[str, Any] = {"bits": 4, "exponent": -6, "preload": Preload.ROUNDING}
    assert sums(make([[-1]], overflow=Overflow.SATURATE, **knobs), np.array([[3]])) == [[4]]
    assert sums(make([[0]], overflow=Overflow.SATURATE, **knobs), np.array([[3]])) == [[7]]
    assert sums(make([[1]], overflow=Overflow.WRAP, **knobs), np.array([[3]])) == [[3]]


@pytest.mark.parametrize("overflow", [Overflow.WRAP, Overflow.SATURATE])
def test_an_open_width_is_refused(overflow: Overflow) -> None:
    with pytest.raises(ValueError, match="not resolved"):
        sums(make([[1]], bits=None, overflow=overflow), np.array([[1]]))


def test_64_bit_sums_beyond_int64() -> None:
    taps = [[2**55, 2**56, -(2**54)]]
    image = np.array([[255, 255, 255]])
    unsigned = make(taps, signed=False, overflow=Overflow.SATURATE, mode=BorderMode.PERIODIC)
    assert sums(unsigned, image).tolist() == [[2**64 - 1] * 3]
    exact = 255 * (2**56 + 2**55 - 2**54)
    wraps = make(taps, signed=False, overflow=Overflow.WRAP, mode=BorderMode.PERIODIC)
    assert exact > 2**63
    assert sums(wraps, image).tolist() == [[exact % 2**64] * 3]
    signed = make(taps, overflow=Overflow.WRAP, mode=BorderMode.PERIODIC)
    assert sums(signed, image).tolist() == [[(exact + 2**63) % 2**64 - 2**63] * 3]


def test_two_passes_beyond_int64() -> None:
    """32-bit intermediate codes times 32-bit taps: Python integers carry the sum."""
    rng = np.random.default_rng(8)
    image = rng.integers(0, 2**16, (3, 4))
    column, row = [[2**15], [-(2**14)], [3]], [[2**31 - 1, -(2**31), 2**30]]
    middle = pixels(32, True, pedestal=-(2**31))
    first = make(column, source=pixels(16), to=middle, mode=BorderMode.REPLICATE)
    second = make(row, source=middle, to=pixels(32, True), exponent=-33)
    response = respond(passes(first, second), frame_of(image))
    wide = extended(image, (1, 1), BorderMode.REPLICATE).tolist()
    for y in range(3):
        tall = [2**15 * wide[y + 2][x] - 2**14 * wide[y + 1][x] + 3 * wide[y][x] for x in range(6)]
        seen = [min(max(t - 2**31, -(2**31)), 2**31 - 1) + 2**31 for t in tall]
        for x in range(4):
            total = (2**31 - 1) * seen[x + 2] - 2**31 * seen[x + 1] + 2**30 * seen[x]
            assert response.accumulators[1][y, x, 0] == total
            code = min(max((total + 2**32) // 2**33, -(2**31)), 2**31 - 1)
            assert response.output[y, x, 0] == code


@pytest.mark.parametrize("exponent", [-192, -65, -64, -63, -33, -32, -31, 31, 32, 63, 64, 192])
@pytest.mark.parametrize("rounding", Rounding)
def test_shifts_of_the_word_s_width_and_more(exponent: int, rounding: Rounding) -> None:
    filter = make([[-3]], exponent=exponent, rounding=rounding)
    image = [[0, 1, 200]]
    if exponent > 0:
        low = -(2**31)
        expected = [max(-3 * pixel * 2**exponent, low) for pixel in image[0]]
    else:
        toward = -1 if rounding is Rounding.TOWARD_NEGATIVE else 0
        expected = [0, toward, toward]
    assert output(filter, image) == [expected]


def test_proved_ranges_are_not_touched() -> None:
    """`forbid` limits nothing: someone else has proved that nothing can leave."""
    filter = make([[1000]], bits=4, to=pixels(4), limit=Overflow.FORBID)
    assert output(filter, [[255]]) == [[255000]]
