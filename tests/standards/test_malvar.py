"""Malvar, He, Cutler 2004 (ICASSP), figure 2: demosaicing kernels that are not integers over 8.

Two of the kernels hold 0.5 and 1.5 eighths: an exact fit is over 16, with integer sum 16. Ranges
for 8-, 10- and 12-bit sensors are exact integers, computed by hand from the figure.
"""

import numpy as np
import pytest
from scipy.ndimage import correlate

from implementations import Implementation, Rows, each_implementation, filtered, summed

GREEN: list[list[float]] = [
    [0, 0, -1, 0, 0],
    [0, 0, 2, 0, 0],
    [-1, 2, 4, 2, -1],
    [0, 0, 2, 0, 0],
    [0, 0, -1, 0, 0],
]
RED_IN_ROW: list[list[float]] = [
    [0, 0, 0.5, 0, 0],
    [0, -1, 0, -1, 0],
    [-1, 4, 5, 4, -1],
    [0, -1, 0, -1, 0],
    [0, 0, 0.5, 0, 0],
]
RED_AT_BLUE: list[list[float]] = [
    [0, 0, -1.5, 0, 0],
    [0, 2, 0, 2, 0],
    [-1.5, 0, 6, 0, -1.5],
    [0, 2, 0, 2, 0],
    [0, 0, -1.5, 0, 0],
]
KERNELS: dict[str, tuple[list[list[float]], int]] = {
    "green": (GREEN, 8),
    "row": (RED_IN_ROW, 16),
    "blue": (RED_AT_BLUE, 16),
}
ENDS = {
    ("green", 8): (-1020, 3060),
    ("blue", 8): (-3060, 7140),
    ("blue", 10): (-12276, 28644),
    ("green", 12): (-16380, 49140),
    ("blue", 12): (-49140, 114660),
}


def spec(name: str, bits: int, more: str = "") -> str:
    """The kernel over 8, everything fitted automatically."""
    return f"""
[filter]
name = "{name}"
operation = "correlation"
[kernel]
taps = {KERNELS[name][0]}
divisor = 8
[input]
bits = {bits}
{more}
"""


@pytest.mark.parametrize("name", KERNELS)
@each_implementation
def test_fit_is_exact(implementation: Implementation, name: str) -> None:
    ideal, over = KERNELS[name]
    text = spec(name, 8, '[output]\nbits = 32\nsigned = true\n[image]\nextent = "full"\n')
    taps = [[round(tap * over / 8) for tap in row] for row in ideal]
    shown = summed(implementation, text, [[1]])
    assert shown in (None, [row[::-1] for row in taps[::-1]])
    assert sum(map(sum, taps)) == over


@pytest.mark.parametrize("name", KERNELS)
@each_implementation
def test_demosaiced_plane(implementation: Implementation, name: str) -> None:
    """Both ends of the output clamp; binary fractions are exact in double."""
    ideal, _ = KERNELS[name]
    rng = np.random.default_rng(11)
    image = rng.choice([0, 255, 17, 93, 200], (9, 10))
    exact = correlate(image.astype(float), np.array(ideal) / 8, mode="mirror")
    expected = np.clip(np.floor(exact + 0.5), 0, 255).astype(int)
    text = spec(name, 8, '[border]\nmode = "whole-sample"\n')
    assert filtered(implementation, text, image.tolist()) == expected.tolist()
    assert exact.min() < 0
    assert exact.max() > 255


def patch(ideal: list[list[float]], top: int, sign: int) -> Rows:
    """The window that drives the sum to one end."""
    return [[top if sign * tap > 0 else 0 for tap in row] for row in ideal]


@pytest.mark.parametrize(("name", "bits"), ENDS)
@each_implementation
def test_ranges(implementation: Implementation, name: str, bits: int) -> None:
    least, greatest = ENDS[name, bits]
    width = max((-least - 1).bit_length(), greatest.bit_length()) + 1
    text = spec(name, bits, f'[accumulator]\nbits = {width}\n[image]\nextent = "valid"\n')
    for sign, end in ((-1, least), (1, greatest)):
        window = patch(KERNELS[name][0], 2**bits - 1, sign)
        assert summed(implementation, text, window) in (None, [[end]])
