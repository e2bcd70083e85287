"""H.265's separable interpolation (Rec. ITU-T H.265, 8.5.3.3.3): shifts without rounding.

First pass >> shift1 = min(4, depth - 8), second pass >> 6, floor both times, nothing clipped. Taps
as printed in Sze, Budagavi, Sullivan, "High Efficiency Video Coding (HEVC)", 2014, chapter 5.
"""

import random

import pytest

from implementations import Implementation, Rows, each_implementation, filtered, summed

QUARTER = [-1, 4, -10, 58, 17, -5, 1, 0]
HALF = [-1, 4, -11, 40, 40, -11, 4, -1]
CHROMA = [-6, 46, 28, -4]
BORDER = '[border]\nmode = "replicate"\n'


def spec(upright: list[int], along: list[int], depth: int, extra: str = BORDER) -> str:
    """The pair of filters at a bit depth; the registers are as narrow as published ranges allow."""
    shift1 = min(4, depth - 8)
    return f"""
[filter]
name = "interpolate"
operation = "correlation"
[kernel]
column = {upright}
row = {along}
divisor = [64, 64]
[input]
bits = {depth}
[coefficient]
frac = [6, 6]
[intermediate]
first = "horizontal"
bits = {16 if depth < 14 else 20}
signed = true
frac = {6 - shift1}
rounding = "toward-negative"
overflow = "forbid"
[intermediate.accumulator]
bits = {depth + 8}
[accumulator]
bits = 27
[output]
bits = 21
signed = true
frac = {6 - shift1}
rounding = "toward-negative"
overflow = "forbid"
{extra}
"""


def sample(taps: list[int], samples: list[int], at: int, shift: int) -> int:
    """One filtered sample of a line, edges repeated, shifted down without rounding."""
    before, last = len(taps) // 2 - 1, len(samples) - 1
    total = sum(tap * samples[min(max(at + k - before, 0), last)] for k, tap in enumerate(taps))
    return total >> shift


def predicted(upright: list[int], along: list[int], rows: Rows, depth: int) -> Rows:
    """The prediction samples before the weighting of 8.5.3.3.4."""
    shift1 = min(4, depth - 8)
    middle = [[sample(along, row, x, shift1) for x in range(len(row))] for row in rows]
    columns = [list(column) for column in zip(*middle, strict=True)]
    done = [[sample(upright, column, y, 6) for y in range(len(column))] for column in columns]
    return [list(row) for row in zip(*done, strict=True)]


def noise(height: int, width: int, depth: int) -> Rows:
    """Samples of that depth, many of them extreme."""
    rng, top = random.Random(depth), 2**depth - 1
    return [
        [rng.choice([0, top, rng.randint(0, top)]) for _ in range(width)] for _ in range(height)
    ]


@pytest.mark.parametrize("depth", [8, 10, 12])
@pytest.mark.parametrize("taps", [(HALF, HALF), (QUARTER, QUARTER[::-1]), (CHROMA, CHROMA[::-1])])
@each_implementation
def test_prediction(
    implementation: Implementation, taps: tuple[list[int], list[int]], depth: int
) -> None:
    for rows in (noise(11, 13, depth), noise(2, 3, depth)):
        expected = predicted(*taps, rows, depth)
        assert filtered(implementation, spec(*taps, depth), rows) == expected


# Greatest and least results over all phases: exact integers, reached by these patches.
EXTREMES = {8: (33150, -16830), 10: (33247, -16880), 12: (33271, -16893), 16: (532471, -270333)}


@pytest.mark.parametrize("depth", EXTREMES)
@each_implementation
def test_worst_patches(implementation: Implementation, depth: int) -> None:
    top = 2**depth - 1
    line = [0 if tap < 0 else top for tap in HALF]
    other = [top - code for code in line]
    rows = [other if tap < 0 else line for tap in HALF]
    text = spec(HALF, HALF, depth, '[image]\nextent = "valid"\n')
    for patch, code in zip(
        (rows, [[top - code for code in row] for row in rows]), EXTREMES[depth], strict=True
    ):
        assert filtered(implementation, text, patch) == [[code]]
    if depth == 8:
        assert summed(implementation, text, rows) in (None, [[2121600]])


def one_kernel(depth: int) -> str:
    """The 8x8 outer product in one pass, shifted once by shift1 + 6."""
    return f"""
[filter]
name = "atonce"
operation = "correlation"
[kernel]
column = {HALF}
row = {HALF}
divisor = 4096
[input]
bits = {depth}
[coefficient]
frac = 12
[output]
bits = 21
signed = true
frac = {6 - min(4, depth - 8)}
rounding = "toward-negative"
{BORDER}
"""


@each_implementation
def test_one_kernel_is_equal_at_8_bits_and_not_at_10(implementation: Implementation) -> None:
    for depth, equal in ((8, True), (10, False)):
        rows = noise(12, 12, depth)
        twice = filtered(implementation, spec(HALF, HALF, depth), rows)
        assert (filtered(implementation, one_kernel(depth), rows) == twice) is equal
