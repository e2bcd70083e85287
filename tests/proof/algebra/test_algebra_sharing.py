"""What makes it fast: functions are worked out once, whatever the pixels; sums make none."""

import pytest

from guardbit.proof.algebra.space import Space
from guardbit.proof.algebra.values import Value

TAPS = (1, 4, 6, 4, 1, -3, 8, 2, 2)


def tail(space: Space, pixels: list[Value], taps: tuple[int, ...]) -> Value:
    acc: Value = 0
    for pixel, k in zip(pixels, taps, strict=True):
        acc = space.add(acc, space.multiply(pixel, k))
    code = space.shift_down(space.add(acc, 8), 4)
    code = space.where(space.compare("<", code, 0), 0, code)
    return space.where(space.compare(">", code, 255), 255, code)


@pytest.mark.parametrize("widen", [False, True])
def test_a_second_pixel_makes_no_new_function(widen: bool) -> None:
    space = Space(widen=widen)
    row = [space.pixel(0, 255) for _ in range(40)]
    tail(space, row[:9], TAPS)
    made = len(space.shelf)
    for i in range(1, 30):
        tail(space, row[i : i + 9], TAPS)
    assert len(space.shelf) == made


def test_sums_make_no_function() -> None:
    space = Space()
    row = [space.pixel(0, 255) for _ in range(225)]
    total: Value = 0
    for pixel in row:
        total = space.subtract(space.multiply(total, -1), space.multiply(pixel, 3))
    assert len(space.shelf) == 0


def test_widened_a_border_of_fewer_values_shares_the_functions() -> None:
    counts = []
    for widen in (False, True):
        space = Space(widen=widen)
        row = [space.pixel(0, 255) for _ in range(9)]
        whole = tail(space, row, TAPS)
        before = len(space.shelf)
        # at an edge one pixel stands for two, and the negative tap meets a positive one
        edge = tail(space, [*row[:5], *row[4:8]], TAPS)
        counts.append(len(space.shelf) - before)
        assert space.bounds(whole) == (0, 255)
        frame = dict.fromkeys(range(9), 200)
        total = 200 * sum(TAPS)
        assert space.at(edge, frame) == min(255, (total + 8) // 16)
    assert counts[1] < counts[0]


def test_bounds_are_exact_however_wide_the_functions_are() -> None:
    space = Space(widen=True)
    space.table(space.pixel(-300, 700))
    x = space.pixel(3, 600)
    held = space.shift_down(x, 3)
    assert space.bounds(held) == (0, 75)
    assert space.bounds(space.where(space.compare("<", x, 100), 0, held)) == (0, 75)
    assert space.bounds(space.where(space.compare("<", x, 100), 99, held)) == (12, 99)
