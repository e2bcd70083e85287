"""H.264's luma and chroma interpolation (ISO/IEC 14496-10, 8.4.2.2.1 and 8.4.2.2.2).

The centre half sample is a 6x6 kernel with one rounding at the end; its two passes carry the
unrounded sums, so that one pass and two passes are equal to the last bit.
"""

import random

import pytest

from implementations import Implementation, Rows, each_implementation, filtered, summed

TAPS = [1, -5, 20, 20, -5, 1]
BORDER = '[border]\nmode = "replicate"\n'


def head(kernel: str, extra: str = "") -> str:
    """A correlation of 8-bit pixels."""
    return f"""
[filter]
name = "halfsample"
operation = "correlation"
[kernel]
{kernel}
[input]
bits = 8
{extra}
"""


CENTRE = f"taps = {[[a * b for b in TAPS] for a in TAPS]}\ndivisor = 1024"
WIDE = '[accumulator]\nbits = 20\n[image]\nextent = "valid"\n'


def clamped(rows: Rows, y: int, x: int) -> int:
    """The sample at clamped coordinates."""
    return rows[min(max(y, 0), len(rows) - 1)][min(max(x, 0), len(rows[0]) - 1)]


def sums_along(rows: Rows, y: int, x: int) -> int:
    """b1 = E - 5F + 20G + 20H - 5I + J, G being the sample at (y, x)."""
    e, f, g, h, i, j = (clamped(rows, y, x + k) for k in range(-2, 4))
    return e - 5 * f + 20 * g + 20 * h - 5 * i + j


def centre(rows: Rows, y: int, x: int) -> int:
    """j = Clip1((j1 + 512) >> 10), the six-tap over the unrounded b1 of six rows."""
    cc, dd, h1, m1, ee, ff = (sums_along(rows, y + k, x) for k in range(-2, 4))
    j1 = cc - 5 * dd + 20 * h1 + 20 * m1 - 5 * ee + ff
    return min(max((j1 + 512) >> 10, 0), 255)


def noise(height: int, width: int) -> Rows:
    """8-bit samples, many of them extreme."""
    rng = random.Random(height * width)
    return [[rng.choice([0, 255, rng.randrange(256)]) for _ in range(width)] for _ in range(height)]


@pytest.mark.parametrize("size", [(12, 15), (3, 2), (1, 1), (1, 9)])
@each_implementation
def test_centre_sample(implementation: Implementation, size: tuple[int, int]) -> None:
    rows = noise(*size)
    expected = [[centre(rows, y, x) for x in range(size[1])] for y in range(size[0])]
    assert filtered(implementation, head(CENTRE, BORDER), rows) == expected


@each_implementation
def test_two_passes_without_rounding_are_the_same(implementation: Implementation) -> None:
    vectors = f"column = {TAPS}\nrow = {TAPS}\ndivisor = [32, 32]"
    middle = '[intermediate]\nfirst = "horizontal"\nbits = 15\nfrac = 5\noverflow = "forbid"\n'
    rows = noise(12, 15)
    once = filtered(implementation, head(CENTRE, BORDER), rows)
    assert filtered(implementation, head(vectors, middle + BORDER), rows) == once


@each_implementation
def test_half_sample(implementation: Implementation) -> None:
    rows = noise(5, 16)
    expected = [
        [min(max((sums_along(rows, y, x) + 16) >> 5, 0), 255) for x in range(16)] for y in range(5)
    ]
    text = head(f"taps = [{TAPS}]\ndivisor = 32", "[accumulator]\nbits = 15\n" + BORDER)
    assert filtered(implementation, text, rows) == expected


@pytest.mark.parametrize(("flipped", "total"), [(False, 475320), (True, -214200)])
@each_implementation
def test_worst_patch_needs_20_bits(
    implementation: Implementation, flipped: bool, total: int
) -> None:
    line = [255, 0, 255, 255, 0, 255]
    other = [255 - code for code in line]
    rows = [line, other, line, line, other, line]
    if flipped:
        rows = [[255 - code for code in row] for row in rows]
    assert summed(implementation, head(CENTRE, WIDE), rows) in (None, [[total]])


@pytest.mark.parametrize(("x", "y"), [(0, 0), (3, 5), (7, 7)])
@each_implementation
def test_chroma_sample(implementation: Implementation, x: int, y: int) -> None:
    weights = [[(8 - x) * (8 - y), x * (8 - y)], [(8 - x) * y, x * y]]
    rows = noise(6, 7)
    expected = [
        [
            (
                weights[0][0] * clamped(rows, i, j)
                + weights[0][1] * clamped(rows, i, j + 1)
                + weights[1][0] * clamped(rows, i + 1, j)
                + weights[1][1] * clamped(rows, i + 1, j + 1)
                + 32
            )
            >> 6
            for j in range(7)
        ]
        for i in range(6)
    ]
    text = head(f"taps = {weights}\ndivisor = 64\norigin = [0, 0]", BORDER)
    assert filtered(implementation, text, rows) == expected
