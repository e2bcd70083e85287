"""AV1's block interpolation and Wiener filter (AV1 specification, 4.7, 7.11.3.2-4, 7.17.4).

Round2(x, n) = floor(x / 2^n + 1/2), of negative x too. Rows first; the Wiener filter clips its
intermediate, of which the standard notes that intermediate + offset fits Min(15, depth + 5) bits.
Where the standard takes rows from neighbouring stripes, edges are simply repeated here.
"""

import random
from collections.abc import Callable

import pytest

from implementations import Implementation, Rows, each_implementation, filtered

REGULAR = [0, 2, -16, 94, 58, -12, 2, 0]
SHARP = [-4, 12, -24, 80, 80, -24, 12, -4]
WIENER_WORST = (-5, -23, -17)


def round2(x: int, n: int) -> int:
    """The standard's Round2."""
    return x if n == 0 else (x + (1 << (n - 1))) >> n


def rounds(depth: int) -> tuple[int, int]:
    """InterRound0 and InterRound1 of a single prediction."""
    return (5, 9) if depth == 12 else (3, 11)


def spec(upright: list[int], along: list[int], depth: int, middle: str) -> str:
    """Two passes; the intermediate keeps 7 - InterRound0 fraction bits."""
    return f"""
[filter]
name = "av1"
operation = "correlation"
[kernel]
column = {upright}
row = {along}
divisor = [128, 128]
[input]
bits = {depth}
[coefficient]
frac = [7, 7]
[intermediate]
first = "horizontal"
frac = {7 - rounds(depth)[0]}
{middle}
[border]
mode = "replicate"
"""


def along_line(taps: list[int], samples: list[int], at: int) -> int:
    """The sum of products at one place of a line, coordinates clamped."""
    before, last = (len(taps) - 1) // 2, len(samples) - 1
    return sum(tap * samples[min(max(at + k - before, 0), last)] for k, tap in enumerate(taps))


def both_passes(
    upright: list[int], along: list[int], rows: Rows, depth: int, between: Callable[[int], int]
) -> Rows:
    """Rows with Round2(InterRound0), `between`, columns with Round2(InterRound1), Clip1."""
    first, second = rounds(depth)
    middle = [
        [between(round2(along_line(along, row, x), first)) for x in range(len(row))] for row in rows
    ]
    columns = [list(column) for column in zip(*middle, strict=True)]
    top = 2**depth - 1
    done = [
        [
            min(max(round2(along_line(upright, column, y), second), 0), top)
            for y in range(len(column))
        ]
        for column in columns
    ]
    return [list(row) for row in zip(*done, strict=True)]


def noise(height: int, width: int, depth: int) -> Rows:
    """Samples of that depth, many of them extreme."""
    rng, top = random.Random(depth), 2**depth - 1
    return [
        [rng.choice([0, top, rng.randint(0, top)]) for _ in range(width)] for _ in range(height)
    ]


@pytest.mark.parametrize("depth", [8, 10, 12])
@each_implementation
def test_block_interpolation(implementation: Implementation, depth: int) -> None:
    # "The output of the horizontal filter always fits within 16 bits": so it may be forbidden to
    # overflow.
    middle = 'bits = 16\nsigned = true\noverflow = "forbid"'
    text = spec(SHARP, REGULAR, depth, middle)
    for rows in (noise(12, 14, depth), noise(1, 3, depth)):
        expected = both_passes(SHARP, REGULAR, rows, depth, lambda code: code)
        assert filtered(implementation, text, rows) == expected


def wiener_taps(coefficients: tuple[int, int, int]) -> list[int]:
    """The seven taps; the middle one makes the sum 128."""
    half = list(coefficients)
    return [*half, 128 - 2 * sum(half), *half[::-1]]


@pytest.mark.parametrize("depth", [8, 10, 12])
@each_implementation
def test_wiener_filter(implementation: Implementation, depth: int) -> None:
    first = rounds(depth)[0]
    offset, limit = 1 << (depth + 7 - first - 1), (1 << (depth + 8 - first)) - 1
    taps, mild = wiener_taps(WIENER_WORST), wiener_taps((3, -7, 15))
    bits = min(15, depth + 5)
    clipped = 0

    def clip3(code: int) -> int:
        nonlocal clipped
        inside = min(max(code, -offset), limit - offset)
        clipped += inside != code
        return inside

    rows = noise(11, 13, depth)
    worst = [0 if tap < 0 else 2**depth - 1 for tap in taps]
    rows[3] = worst + [2**depth - 1 - code for code in worst[:6]]
    expected = both_passes(mild, taps, rows, depth, clip3)
    text = spec(mild, taps, depth, f"bits = {bits}\nsigned = false\npedestal = {offset}")
    assert filtered(implementation, text, rows) == expected
    assert clipped > 0


@each_implementation
def test_intra_edge_kernel(implementation: Implementation) -> None:
    """Section 7.11.2.12: (s + 8) >> 4 with the index clamped."""
    taps, rows = [2, 4, 4, 4, 2], noise(1, 20, 8)
    text = f"""
[filter]
name = "edge"
operation = "correlation"
[kernel]
taps = [{taps}]
divisor = 16
[input]
bits = 8
[border]
mode = "replicate"
"""
    expected = [(along_line(taps, rows[0], x) + 8) >> 4 for x in range(20)]
    assert filtered(implementation, text, rows) == [expected]
