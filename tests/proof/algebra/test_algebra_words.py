"""Several numbers in one word, words in halves, and words of too few bits: what stays provable.

Taps and images are ours. Every value is compared with the same sum written plainly.
"""

from collections.abc import Iterable, Sequence

import pytest

from guardbit.proof.algebra.space import Space
from guardbit.proof.algebra.values import Form, InexpressibleError, Table, Value

BINOMIAL = (1, 4, 6, 4, 1)
SIGNED = (-1, 3, 5, 3, -1)
LARGE = (16, 64, 96, 64, 16)


@pytest.fixture(params=[False, True], ids=["as they are", "widened"])
def space(request: pytest.FixtureRequest) -> Space:
    return Space(widen=request.param)


def pixels(space: Space, count: int, most: int = 255) -> list[Value]:
    return [space.pixel(0, most) for _ in range(count)]


def total(space: Space, terms: Iterable[tuple[Value, int]]) -> Value:
    made: Value = 0
    for value, k in terms:
        made = space.add(made, space.multiply(value, k))
    return made


def weighed(space: Space, values: Sequence[Value], taps: Sequence[int]) -> Value:
    return total(space, zip(values, taps, strict=True))


def word_of(space: Space, low: Value, high: Value, bits: int = 16) -> Value:
    """Return low | high << bits as an unsigned number."""
    return space.bits_or(low, space.multiply(high, 1 << bits))


def clamped(space: Space, value: Value, low: int, high: int) -> Value:
    value = space.where(space.compare("<", value, low), low, value)
    return space.where(space.compare(">", value, high), high, value)


def unsigned_sum(space: Space, words: Sequence[Value], taps: Sequence[int], start: int) -> Value:
    """Return a sum of products in an unsigned word of 32 bits."""
    acc = space.wrap(start, 32, signed=False)
    for word, k in zip(words, taps, strict=True):
        factor = space.wrap(k, 32, signed=False)
        product = space.wrap(space.multiply(word, factor), 32, signed=False)
        acc = space.wrap(space.add(acc, product), 32, signed=False)
    return acc


def test_two_lanes_of_a_word(space: Space) -> None:
    left, right = pixels(space, 5), pixels(space, 5)
    words = [word_of(space, a, b) for a, b in zip(left, right, strict=True)]
    acc = unsigned_sum(space, words, BINOMIAL, 8 * 65537)
    low = space.bits_and(space.shift_down(acc, 4), 0xFFF)
    masked_first = space.shift_down(space.bits_and(acc, 0xFFFF), 4)
    high = space.shift_down(acc, 20)
    for got, lane in ((low, left), (masked_first, left), (high, right)):
        assert space.same(got, space.shift_down(space.add(weighed(space, lane, BINOMIAL), 8), 4))
    assert not space.same(low, space.shift_down(weighed(space, left, BINOMIAL), 4))


def test_two_lanes_with_negative_taps_and_a_bias(space: Space) -> None:
    left, right = pixels(space, 5), pixels(space, 5)
    words = [word_of(space, a, b) for a, b in zip(left, right, strict=True)]
    acc = unsigned_sum(space, words, SIGNED, 1024 * 65537)
    low = space.subtract(space.bits_and(acc, 0xFFFF), 1024)
    high = space.subtract(space.shift_down(acc, 16), 1024)
    assert space.same(low, weighed(space, left, SIGNED))
    assert space.same(high, weighed(space, right, SIGNED))


def test_a_lane_that_overflows_into_the_next_is_not_taken_for_its_sum(space: Space) -> None:
    left, right = pixels(space, 5, 65535), pixels(space, 5)
    words = [word_of(space, a, b) for a, b in zip(left, right, strict=True)]
    acc = unsigned_sum(space, words, BINOMIAL, 0)
    assert not space.same(space.shift_down(acc, 16), weighed(space, right, BINOMIAL))
    low = space.bits_and(acc, 0xFFFF)
    exact = weighed(space, left, BINOMIAL)
    assert not space.same(low, exact)
    frame = space.difference(low, exact)
    assert frame is not None
    assert space.at(low, frame) == space.at(exact, frame) % 65536


def test_signed_words_with_a_centred_high_lane(space: Space) -> None:
    left, right = pixels(space, 5), pixels(space, 5)
    words = [word_of(space, a, b) for a, b in zip(left, right, strict=True)]
    acc = space.add(weighed(space, words, BINOMIAL), -32768 * 65536)
    assert space.bounds(acc)[0] == -(1 << 31)
    turned = space.bits_xor(space.wrap(acc, 32, signed=False), 0x80000000)
    assert space.same(space.shift_down(turned, 16), weighed(space, right, BINOMIAL))
    quarter = space.shift_down(weighed(space, right, BINOMIAL), 4)
    assert space.same(space.shift_down(turned, 20), quarter)


def test_the_borrow_of_a_negative_low_lane_is_removed_by_half_a_lane(space: Space) -> None:
    left, right = pixels(space, 5), pixels(space, 5)
    low, high = weighed(space, left, SIGNED), weighed(space, right, SIGNED)
    acc = space.add(low, space.multiply(high, 65536))
    assert space.same(space.shift_down(space.add(acc, 0x8000), 16), high)
    assert space.same(space.wrap(space.bits_and(acc, 0xFFFF), 16, signed=True), low)
    borrowed = space.add(high, space.multiply(space.compare("<", low, 0), -1))
    assert space.same(space.shift_down(acc, 16), borrowed)
    assert not space.same(space.shift_down(acc, 16), high)


def test_three_lanes_of_ten_bits(space: Space) -> None:
    lanes = [pixels(space, 3) for _ in range(3)]
    words = [
        word_of(space, word_of(space, a, b, 10), c, 20) for a, b, c in zip(*lanes, strict=True)
    ]
    acc = unsigned_sum(space, words, (1, 2, 1), 0)
    for i, lane in enumerate(lanes):
        got = space.bits_and(space.shift_down(acc, 10 * i), 1023)
        assert space.same(got, weighed(space, lane, (1, 2, 1)))
        half = space.bits_and(space.shift_down(acc, 10 * i + 2), 255)
        assert space.same(half, space.shift_down(weighed(space, lane, (1, 2, 1)), 2))


def test_sixteen_bits_that_wrapped_are_recovered(space: Space) -> None:
    row = pixels(space, 5)
    acc: Value = 0
    for pixel, k in zip(row, SIGNED, strict=True):
        acc = space.wrap(space.add(acc, space.multiply(pixel, k)), 16, signed=False)
    assert isinstance(acc, Form)
    assert acc.modulus == 16
    assert space.bounds(acc) == (0, 65535)
    assert space.same(space.wrap(acc, 16, signed=True), weighed(space, row, SIGNED))
    # of a difference of two such only a residue is known: what needs the number has none
    gap = space.subtract(acc, space.wrap(weighed(space, row, LARGE), 16, signed=False))
    with pytest.raises(InexpressibleError):
        space.shift_down(gap, 17)


def test_a_residue_of_a_long_sum_stays_a_residue(space: Space) -> None:
    row = pixels(space, 5, 65535)
    acc = space.wrap(weighed(space, row, LARGE), 16, signed=False)
    assert isinstance(acc, Form)
    assert space.bounds(acc) == (0, 65535)
    again = space.wrap(space.add(acc, 65536 * 3), 16, signed=False)
    assert space.same(acc, again)
    frame = {0: 40000, 1: 50000, 2: 60000, 3: 1, 4: 7}
    exact = sum(k * frame[i] for i, k in enumerate(LARGE))
    assert space.at(acc, frame) == exact % 65536
    # times 2**16 the residue is known modulo 2**32
    high = space.wrap(space.multiply(acc, 65536), 32, signed=False)
    assert space.at(high, frame) == exact % 65536 << 16


def test_a_word_is_its_halves(space: Space) -> None:
    row = [weighed(space, pixels(space, 5), LARGE) for _ in range(3)]
    for bits in (1, 4, 8):
        halves = [(space.shift_down(v, bits), space.low_bits(v, bits)) for v in row]
        whole = total(space, [(h, 3 << bits) for h, _ in halves] + [(low, 3) for _, low in halves])
        assert space.same(whole, weighed(space, row, (3, 3, 3)))
        assert not space.same(whole, space.add(weighed(space, row, (3, 3, 3)), 1))


@pytest.mark.parametrize("rounding", [0, 128, 32768])
def test_a_second_pass_in_byte_rows_is_one_floor(space: Space, rounding: int) -> None:
    """floor((a + floor(b / 256)) / 256) = floor((256 a + b) / 65536)."""
    rows = [weighed(space, pixels(space, 5), LARGE) for _ in range(5)]
    upper = weighed(space, [space.shift_down(v, 8) for v in rows], LARGE)
    lower = weighed(space, [space.bits_and(v, 255) for v in rows], LARGE)
    assert space.bounds(upper)[1] < 65536 > space.bounds(lower)[1]
    carry = space.shift_down(space.add(lower, rounding % 256), 8)
    got = space.shift_down(space.add(space.add(upper, carry), rounding >> 8), 8)
    wanted = space.shift_down(space.add(weighed(space, rows, LARGE), rounding), 16)
    assert space.same(got, wanted)
    more = space.add(weighed(space, rows, LARGE), rounding + 256)
    assert not space.same(got, space.shift_down(more, 16))


def test_byte_rows_of_a_rounded_first_pass(space: Space) -> None:
    taps = (-32, 64, 196, 64, -32)
    rows = []
    for _ in range(5):
        acc = weighed(space, pixels(space, 5), taps)
        rows.append(clamped(space, space.shift_down(space.add(acc, 4), 3), 0, 60000))
    upper = weighed(space, [space.shift_down(v, 8) for v in rows], LARGE)
    lower = weighed(space, [space.bits_and(v, 255) for v in rows], LARGE)
    got = space.shift_down(space.add(upper, space.shift_down(lower, 8)), 8)
    assert space.same(got, space.shift_down(weighed(space, rows, LARGE), 16))


def test_a_negative_floor_is_joined_too(space: Space) -> None:
    a, b = weighed(space, pixels(space, 3), (1, 2, 1)), weighed(space, pixels(space, 3), (1, 2, 1))
    got = space.shift_down(space.subtract(a, space.shift_down(b, 3)), 4)
    wanted = space.shift_down(
        space.add(space.subtract(space.multiply(a, 8), b), 7),
        7,
    )
    assert space.same(got, wanted)


def test_a_rounded_mean_of_a_mean(space: Space) -> None:
    a, b, c = pixels(space, 3)
    mean = space.shift_down(space.add(space.shift_down(space.add(a, b), 1), c), 1)
    assert space.same(mean, space.shift_down(total(space, [(a, 1), (b, 1), (c, 2)]), 2))


def test_two_passes_are_functions_of_the_same_atoms(space: Space) -> None:
    grid = [pixels(space, 6) for _ in range(6)]
    taps = (3, -16, 77, 77, -16, 3)

    def passed(values: Sequence[Value], biased: bool) -> Value:
        acc = space.add(weighed(space, values, taps), 64)
        if biased:
            acc = space.shift_down(space.add(acc, 8192), 7)
            return clamped(space, space.subtract(acc, 64), 0, 255)
        return clamped(space, space.shift_down(acc, 7), 0, 255)

    once = passed([passed(row, True) for row in grid], True)
    other = passed([passed(row, False) for row in grid], False)
    assert space.same(once, other)
    assert isinstance(once, Table)
    across = passed([passed(column, True) for column in zip(*grid, strict=True)], True)
    assert not space.same(once, across)
    frame = space.difference(once, across)
    assert frame is not None
    assert space.at(once, frame) != space.at(across, frame)


def test_an_accumulator_that_saturates_at_every_add(space: Space) -> None:
    row = pixels(space, 9)
    taps = (-43, -43, -43, 86, 86, 86, -43, -43, -43)

    def saturated(order: Sequence[int]) -> Value:
        acc: Value = 0
        for i in order:
            acc = clamped(space, space.add(acc, space.multiply(row[i], taps[i])), -16384, 16383)
        return acc

    inwards = saturated(range(9))
    assert space.same(inwards, saturated(range(9)))
    outwards = saturated(range(8, -1, -1))
    assert not space.same(inwards, outwards)
    frame = space.difference(inwards, outwards)
    assert frame is not None
    assert space.at(inwards, frame) != space.at(outwards, frame)
    assert space.bounds(inwards) == (-16384, 16383)


def test_more_results_than_pieces_can_be(space: Space) -> None:
    x = space.pixel(-(1 << 31), (1 << 31) - 1)
    down = space.shift_down(space.add(x, 8), 4)
    assert space.same(space.shift_down(down, 3), space.shift_down(space.add(x, 8), 7))
    assert space.bounds(space.low_bits(x, 4)) == (0, 15)
    assert not space.same(down, space.shift_down(x, 4))
    held = clamped(space, down, -1000, 1000)
    assert space.bounds(held) == (-1000, 1000)
    for value in (-(1 << 31), -16009, -16008, -9, -8, 0, 7, 8, 16007, 1 << 30):
        assert space.at(down, {0: value}) == value + 8 >> 4
        assert space.at(held, {0: value}) == max(-1000, min(1000, value + 8 >> 4))
    frame = space.difference(held, clamped(space, down, -1000, 999))
    assert frame is not None
    assert frame[0] + 8 >> 4 >= 1000
