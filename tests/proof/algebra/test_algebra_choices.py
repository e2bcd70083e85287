"""Masks, and what is chosen by them: over one base, over several, and in masked arithmetic."""

from itertools import product

import pytest

from guardbit.proof.algebra.space import Space
from guardbit.proof.algebra.values import InexpressibleError, Table, Value


@pytest.fixture(params=[False, True], ids=["as they are", "widened"])
def space(request: pytest.FixtureRequest) -> Space:
    return Space(widen=request.param)


def test_comparisons_that_ranges_decide_are_numbers(space: Space) -> None:
    x = space.pixel(10, 20)
    decided = {"<": (21, 10), "<=": (20, 9), ">": (9, 20), ">=": (10, 21), "!=": (9, None)}
    for op, (holds, fails) in decided.items():
        assert space.compare(op, x, holds) == 1
        assert fails is None or space.compare(op, x, fails) == 0
    assert space.compare("==", x, 9) == 0
    assert space.compare("==", x, x) == 1
    for op in ("<", "<=", ">", ">=", "==", "!="):
        assert not isinstance(space.compare(op, x, 15), int)


def test_a_pixel_of_one_value_is_a_number_and_takes_no_place(space: Space) -> None:
    assert space.pixel(7, 7) == 7
    first = space.pixel(0, 1)
    assert space.pixels(first) == [0]


@pytest.mark.parametrize("op", ["<", ">"])
def test_the_greater_of_two_pixels(space: Space, op: str) -> None:
    a, b = space.pixel(0, 255), space.pixel(10, 300)
    pair = (b, a) if op == "<" else (a, b)
    greater = space.where(space.compare(op, a, b), *pair)
    least = space.where(space.compare(op, b, a), *pair)
    assert space.bounds(greater) in {(0, 300), (10, 300)}
    for x, y in product((0, 9, 10, 11, 254, 255), (10, 11, 254, 255, 256, 300)):
        assert space.at(greater, {0: x, 1: y}) == max(x, y)
        assert space.at(least, {0: x, 1: y}) == min(x, y)
    # written the other way round it is the same value
    other = space.where(space.compare(">=", b, a), b, a)
    assert space.same(greater, other)
    assert space.same(space.add(greater, least), space.add(a, b))


def test_masks_of_many_pixels_are_one_mask(space: Space) -> None:
    row = [space.pixel(0, 255) for _ in range(300)]
    legal: Value = 1
    for x in row:
        legal = space.both(legal, space.compare("<=", x, 200))
    # deeper than Python's stack: each step is an atom of the one before
    assert space.at(legal, dict.fromkeys(range(300), 200)) == 1
    for i in (0, 150, 299):
        assert space.at(legal, {i: 201}) == 0
    assert space.bounds_where(row[299], legal) == (0, 200)
    assert space.witness(space.opposite(legal)) is not None
    assert space.witness(legal) is not None


def test_a_joint_mask_bounds_both_sides(space: Space) -> None:
    a, b = space.pixel(0, 255), space.pixel(0, 255)
    mask = space.both(space.compare(">", a, 100), space.compare("<", b, 50))
    assert space.bounds_where(a, mask) == (101, 255)
    assert space.bounds_where(b, mask) == (0, 49)
    never = space.both(mask, space.compare("<", a, 100))
    assert space.bounds_where(b, never) is None
    chosen = space.where(mask, 7, 3)
    assert space.at(chosen, {0: 101, 1: 49}) == 7
    assert space.at(chosen, {0: 101, 1: 50}) == 3


def test_bounds_of_a_sum_of_which_a_part_is_masked(space: Space) -> None:
    a, b = space.pixel(0, 255), space.pixel(0, 255)
    mask = space.compare(">", a, 200)
    assert space.bounds_where(space.add(a, b), mask) == (201, 510)
    assert space.bounds_where(space.subtract(b, space.multiply(a, 2)), mask) == (-510, -147)
    # a sum of a rounded part: its atom is a function of the mask's base
    half = space.add(space.shift_down(a, 1), b)
    assert space.bounds_where(half, mask) == (100, 382)
    assert space.bounds_where(b, mask) == (0, 255)


def test_what_a_mask_of_another_pixel_chooses(space: Space) -> None:
    a, b = space.pixel(0, 255), space.pixel(0, 255)
    mask = space.compare("<", a, 16)
    # the two differ by a number: the choice is a sum
    held = space.where(mask, space.add(b, 3), b)
    assert space.same(held, space.add(b, space.multiply(mask, 3)))
    assert space.bounds(held) == (0, 258)
    with pytest.raises(InexpressibleError):
        space.where(mask, b, 0)
    with pytest.raises(InexpressibleError):
        space.multiply(a, b)


@pytest.mark.parametrize("low", [-700, 0])
def test_branch_free_arithmetic_is_that_of_branches(space: Space, low: int) -> None:
    x = space.pixel(low, 900)
    sign = space.shift_down(x, 31)
    held = space.bits_and(x, space.complement(sign))
    held = space.bits_or(held, space.shift_down(space.subtract(255, held), 31))
    held = space.bits_and(held, 255)
    wanted = space.where(space.compare("<", x, 0), 0, x)
    wanted = space.where(space.compare(">", wanted, 255), 255, wanted)
    assert space.same(held, wanted)
    magnitude = space.subtract(space.bits_xor(x, sign), sign)
    assert space.same(magnitude, space.where(space.compare("<", x, 0), space.negate(x), x))
    square = space.multiply(x, x)
    assert space.at(square, {0: 77}) == 77 * 77


def test_a_mask_with_a_slope_is_taken_where_the_base_is(space: Space) -> None:
    """A pixel of 0 and 1 is a mask by itself, on a domain that is wider when widened."""
    space.table(space.pixel(-40, 900))
    bit = space.pixel(0, 1)
    chosen = space.where(bit, 5, 9)
    assert [space.at(chosen, {1: x}) for x in (0, 1)] == [9, 5]
    assert space.bounds_where(chosen, bit) == (5, 5)
    assert space.bounds_where(chosen, space.opposite(bit)) == (9, 9)


def test_looking_up(space: Space) -> None:
    table = [3 * i % 17 - 8 for i in range(256)]
    x = space.pixel(0, 255)
    found = space.look_up(table, x)
    assert [space.at(found, {0: i}) for i in range(256)] == table
    table[3] = 99
    again = space.look_up(table, x)
    assert space.at(again, {0: 3}) == 99
    assert not space.same(found, again)
    assert space.same(space.look_up(range(256), x), x)
    with pytest.raises(InexpressibleError):
        space.look_up(table[:255], x)


def test_a_function_is_carried_from_one_pixel_to_another(space: Space) -> None:
    a, b, c = space.pixel(0, 255), space.pixel(0, 255), space.pixel(0, 254)

    def of(x: Value) -> Value:
        return space.shift_down(space.add(space.multiply(x, 3), 5), 3)

    assert space.shape(a) == space.shape(b) != space.shape(c)
    made = space.carried(of(a), a, b)
    assert made is not None
    assert space.same(made, of(b))
    assert space.carried(space.add(a, b), a, b) is None
    assert space.carried(7, a, b) == 7


def test_breakpoints_are_where_a_table_turns(space: Space) -> None:
    space.table(space.pixel(-40, 1200))
    x = space.pixel(0, 1000)
    value = space.where(space.compare(">", x, 255), 255, x)
    assert isinstance(value, Table)
    found = space.breakpoints(value)
    assert found is not None
    base, starts = found
    assert (base.terms, starts) == ({1: 1}, (0, 256))
    assert space.breakpoints(x) is None
    assert space.breakpoints(3) is None
