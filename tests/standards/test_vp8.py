"""VP8's sub-pixel filters (RFC 6386, section 18.3): two passes with an 8-bit word in between.

The standard filters rows first, rounds and clamps to 0..255 after each pass, and repeats edge
samples. Its own arithmetic stands here on its own; the taps are in correlation order.
"""

import random

import pytest

from implementations import Implementation, Rows, each_implementation, filtered, summed

SIX_TAP = {
    0: [0, 0, 128, 0, 0, 0],
    1: [0, -6, 123, 12, -1, 0],
    2: [2, -11, 108, 36, -8, 1],
    3: [0, -9, 93, 50, -6, 0],
    4: [3, -16, 77, 77, -16, 3],
    5: [0, -6, 50, 93, -9, 0],
    6: [1, -8, 36, 108, -11, 2],
    7: [0, -1, 12, 123, -6, 0],
}
WORST = [255, 0, 255, 255, 0, 255]


def spec(upright: list[int], along: list[int], first: str = "horizontal") -> str:
    """The two-pass filter as a spec."""
    return f"""
[filter]
name = "sixtap"
operation = "correlation"
[kernel]
column = {upright}
row = {along}
divisor = [128, 128]
[input]
bits = 8
[intermediate]
first = "{first}"
bits = 8
signed = false
[border]
mode = "replicate"
"""


def one_pass(taps: list[int], samples: list[int], at: int) -> int:
    """clamp255((a + 64) >> 7) at one place of a line of samples, edges repeated."""
    last, before = len(samples) - 1, (len(taps) - 1) // 2
    places = (min(max(at + k - before, 0), last) for k in range(len(taps)))
    total = sum(tap * samples[place] for tap, place in zip(taps, places, strict=True))
    return min(max((total + 64) >> 7, 0), 255)


def predicted(upright: list[int], along: list[int], rows: Rows) -> Rows:
    """The standard's prediction: rows first, then columns."""
    middle = [[one_pass(along, row, x) for x in range(len(row))] for row in rows]
    columns = [list(column) for column in zip(*middle, strict=True)]
    done = [[one_pass(upright, column, y) for y in range(len(column))] for column in columns]
    return [list(row) for row in zip(*done, strict=True)]


def noise(height: int, width: int, seed: int = 0) -> Rows:
    """Uniform 8-bit noise with extreme rows on top."""
    rng = random.Random(seed)
    rows = [[rng.randrange(256) for _ in range(width)] for _ in range(height)]
    rows[0] = [WORST[x % 6] for x in range(width)]
    return rows


@pytest.mark.parametrize(("down", "along"), [(4, 4), (2, 6), (1, 3), (0, 5), (7, 0)])
@each_implementation
def test_six_tap_prediction(implementation: Implementation, down: int, along: int) -> None:
    taps = SIX_TAP[down], SIX_TAP[along]
    for rows in (noise(13, 17), noise(2, 3), [[7]]):
        assert filtered(implementation, spec(*taps), rows) == predicted(*taps, rows)


@pytest.mark.parametrize("phase", [1, 4])
@each_implementation
def test_bilinear_prediction(implementation: Implementation, phase: int) -> None:
    taps = [128 - 16 * phase, 16 * phase]
    rows = noise(9, 11, phase)
    assert filtered(implementation, spec(taps, taps), rows) == predicted(taps, taps, rows)


def test_taps_always_sum_to_128() -> None:
    assert all(sum(taps) == 128 for taps in SIX_TAP.values())


@each_implementation
def test_the_order_of_the_passes_shows(implementation: Implementation) -> None:
    taps, rows = SIX_TAP[4], noise(24, 24)
    across = filtered(implementation, spec(taps, taps), rows)
    down = filtered(implementation, spec(taps, taps, "vertical"), rows)
    differing = sum(
        a != b for pair in zip(across, down, strict=True) for a, b in zip(*pair, strict=True)
    )
    # 43.8 % of a 256x256 frame of noise.
    assert 24 * 24 // 4 < differing < 24 * 24 * 2 // 3


@pytest.mark.parametrize(("window", "total"), [(WORST, 40800), ([255 - x for x in WORST], -8160)])
@each_implementation
def test_half_sample_sums_need_17_bits(
    implementation: Implementation, window: list[int], total: int
) -> None:
    text = f"""
[filter]
name = "half"
operation = "correlation"
[kernel]
taps = [{SIX_TAP[4]}]
divisor = 128
[input]
bits = 8
[accumulator]
bits = 17
[image]
extent = "valid"
"""
    assert summed(implementation, text, [window]) in (None, [[total]])
    assert filtered(implementation, text, [window]) == [[255 if total > 0 else 0]]
