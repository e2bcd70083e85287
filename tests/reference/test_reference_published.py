"""Arrays that SciPy's, NumPy's and others' own tests and pages print."""

from typing import Any

import numpy as np
import pytest

from guardbit.model.enums import BorderMode, Extent, Operation
from guardbit.reference.borders import border_index

from .builders import Image, Taps, make, output, pixels

CONSTANT, REPLICATE, HALF, WHOLE, PERIODIC = (
    BorderMode.CONSTANT,
    BorderMode.REPLICATE,
    BorderMode.HALF_SAMPLE,
    BorderMode.WHOLE_SAMPLE,
    BorderMode.PERIODIC,
)
CORRELATION = Operation.CORRELATION


def centred(taps: Taps) -> tuple[int, int]:
    """Return the origin that scipy.ndimage gives a kernel: length // 2."""
    return len(taps) // 2, len(taps[0]) // 2


# scipy/signal/tests/test_signaltools.py, TestConvolve2d.
A, B = [[1, 2, 3], [3, 4, 5]], [[2, 3, 4], [4, 5, 6]]
E = [[2, 3, 4, 5, 6, 7, 8], [4, 5, 6, 7, 8, 9, 10]]
FULL: dict[str, tuple[dict[str, Any], Image]] = {
    "zero": ({}, [[2, 7, 16, 17, 12], [10, 30, 62, 58, 38], [12, 31, 58, 49, 30]]),
    "one": ({"value": 1}, [[24, 26, 31, 34, 32], [28, 40, 62, 64, 52], [32, 46, 67, 62, 48]]),
    "wrap": (
        {"mode": PERIODIC},
        [[80, 80, 74, 80, 80], [68, 68, 62, 68, 68], [80, 80, 74, 80, 80]],
    ),
    "symm": (
        {"mode": HALF},
        [[34, 30, 44, 62, 66], [52, 48, 62, 80, 84], [82, 78, 92, 110, 114]],
    ),
}


@pytest.mark.parametrize("name", FULL)
@pytest.mark.parametrize("origin", [(0, 0), (1, 1), (-3, 5)])
def test_scipy_convolve2d_full(name: str, origin: tuple[int, int]) -> None:
    knobs, expected = FULL[name]
    assert output(make(B, extent=Extent.FULL, origin=origin, **knobs), A) == expected


def test_scipy_convolve2d_valid_and_same() -> None:
    assert output(make(A, extent=Extent.VALID), E) == [[62, 80, 98, 116, 134]]
    assert output(make(E), A) == [[22, 28, 34], [80, 98, 116]]


def test_scipy_convolve2d_kernel_longer_than_the_image() -> None:
    """Its comment says that these were computed by hand (gh-8684, gh-8814)."""
    signed = pixels(8, signed=True)
    image, ones = [[2, -1, 3, 4]], [[1] * 21]
    assert output(make(ones, source=signed, mode=HALF), image) == [[37, 42, 44, 45]]
    assert output(make(ones, source=signed, mode=PERIODIC), image) == [[43, 44, 42, 39]]


# The docstring of scipy.ndimage.convolve, and the other modes run in SciPy 1.17.1.
DOC = [[1, 2, 0, 0], [5, 3, 0, 4], [0, 0, 0, 7], [9, 3, 0, 0]]
DOC_TAPS = [[1, 1, 1], [1, 1, 0], [1, 0, 0]]
DOC_NEAREST = [[18, 10, 7, 8], [10, 3, 11, 22], [24, 12, 14, 18], [33, 15, 10, 7]]
DOC_MODES: list[tuple[dict[str, Any], Image]] = [
    ({}, [[11, 10, 7, 4], [10, 3, 11, 11], [15, 12, 14, 7], [12, 3, 7, 0]]),
    ({"value": 1}, [[13, 11, 8, 7], [11, 3, 11, 14], [16, 12, 14, 10], [15, 6, 10, 5]]),
    ({"mode": HALF}, DOC_NEAREST),
    ({"mode": REPLICATE}, DOC_NEAREST),
    ({"mode": WHOLE}, [[17, 10, 11, 4], [10, 3, 11, 11], [18, 12, 14, 7], [12, 3, 14, 7]]),
    ({"mode": PERIODIC}, [[18, 10, 7, 19], [17, 3, 11, 17], [15, 12, 14, 21], [15, 6, 9, 10]]),
]


@pytest.mark.parametrize(("knobs", "expected"), DOC_MODES)
def test_ndimage_convolve_docstring(knobs: dict[str, Any], expected: Image) -> None:
    assert output(make(DOC_TAPS, **knobs), DOC) == expected


def test_ndimage_convolve_docstring_small_images() -> None:
    image = [[2, 0, 0], [1, 0, 0], [0, 0, 0]]
    ones = [[0, 1, 0], [0, 1, 0], [0, 1, 0]]
    assert output(make(ones, mode=HALF), image) == [[5, 0, 0], [3, 0, 0], [1, 0, 0]]
    identity = [[1, 0, 0], [0, 1, 0], [0, 0, 1]]
    assert output(make(identity, mode=HALF), image) == [[4, 2, 0], [3, 2, 0], [1, 1, 0]]
    image = [[2, 0, 1], [1, 0, 0], [0, 0, 0]]
    tall = [[0, 1, 0]] * 5
    assert output(make(tall, mode=REPLICATE), image) == [[7, 0, 3], [5, 0, 2], [3, 0, 1]]


# scipy/ndimage/tests/test_filters.py, test_extend05 and test_extend06 (correlation).
NINE = [[1, 2, 3], [4, 5, 6], [7, 8, 9]]
EXTEND_05 = {
    REPLICATE: [[1, 1, 2], [1, 1, 2], [4, 4, 5]],
    HALF: [[1, 1, 2], [1, 1, 2], [4, 4, 5]],
    PERIODIC: [[9, 7, 8], [3, 1, 2], [6, 4, 5]],
    WHOLE: [[5, 4, 5], [2, 1, 2], [5, 4, 5]],
    CONSTANT: [[0, 0, 0], [0, 1, 2], [0, 4, 5]],
}
EXTEND_06 = {
    REPLICATE: [[5, 6, 6], [8, 9, 9], [8, 9, 9]],
    HALF: [[5, 6, 6], [8, 9, 9], [8, 9, 9]],
    PERIODIC: [[5, 6, 4], [8, 9, 7], [2, 3, 1]],
    WHOLE: [[5, 6, 5], [8, 9, 8], [5, 6, 5]],
    CONSTANT: [[5, 6, 0], [8, 9, 0], [0, 0, 0]],
}
# The same file, test_extend02 and test_extend04: the image is shorter than the kernel.
EXTEND_02 = {REPLICATE: [1, 1, 1], PERIODIC: [3, 1, 2], HALF: [3, 3, 2], WHOLE: [1, 2, 3]}
EXTEND_04 = {REPLICATE: [3, 3, 3], PERIODIC: [2, 3, 1], HALF: [2, 1, 1], WHOLE: [1, 2, 3]}


@pytest.mark.parametrize("mode", BorderMode)
def test_ndimage_extend(mode: BorderMode) -> None:
    one = [[1, 0], [0, 0]]
    filter = make(one, mode=mode, operation=CORRELATION, origin=centred(one))
    assert output(filter, NINE) == EXTEND_05[mode]
    last = [[0, 0, 0], [0, 0, 0], [0, 0, 1]]
    assert output(make(last, mode=mode, operation=CORRELATION), NINE) == EXTEND_06[mode]


@pytest.mark.parametrize("mode", BorderMode)
@pytest.mark.parametrize(
    ("taps", "expected"), [([[1] + [0] * 7], EXTEND_02), ([[0] * 8 + [1]], EXTEND_04)]
)
def test_ndimage_extend_beyond_the_image(
    mode: BorderMode, taps: Taps, expected: dict[BorderMode, list[int]]
) -> None:
    filter = make(taps, mode=mode, operation=CORRELATION, origin=centred(taps))
    assert output(filter, [[1, 2, 3]]) == [expected.get(mode, [0, 0, 0])]


def test_ndimage_even_kernels() -> None:
    """test_correlate11 and test_correlate12 of the same file."""
    image, ones, diagonal = [[1, 2, 3], [4, 5, 6]], [[1, 1], [1, 1]], [[1, 0], [0, 1]]
    knobs: dict[str, Any] = {"mode": HALF, "origin": (1, 1)}
    correlate = knobs | {"operation": CORRELATION}
    assert output(make(ones, **correlate), image) == [[4, 6, 10], [10, 12, 16]]
    assert output(make(diagonal, **correlate), image) == [[2, 3, 5], [5, 6, 8]]
    assert output(make(ones, **knobs), image) == [[12, 16, 18], [18, 22, 24]]
    assert output(make(diagonal, **knobs), image) == [[6, 8, 9], [9, 11, 12]]


def test_ndimage_whole_sample_of_one_pixel() -> None:
    """test_correlate26 (gh-11661)."""
    assert output(make([[1] * 5], mode=WHOLE), [[1]]) == [[5]]


def test_house_vector() -> None:
    """1..25 over [[1, 2], [3, 4]], run in scipy.ndimage 1.17.1."""
    taps = np.arange(1, 26).reshape(5, 5).tolist()
    mirrored = [[715, 780], [845, 910]]
    expected = {
        CONSTANT: [[89, 99], [139, 149]],
        REPLICATE: [[550, 615], [680, 745]],
        HALF: [[855, 790], [725, 660]],
        WHOLE: mirrored,
        PERIODIC: mirrored,
    }
    for mode, values in expected.items():
        assert output(make(taps, mode=mode), [[1, 2], [3, 4]]) == values


# numpy/lib/tests/test_arraypad.py and the documentation of numpy.pad, as indices.
PADDED: list[tuple[BorderMode, int, int, list[int]]] = [
    (WHOLE, 3, 4, [0, 1, 2, 1, 0, 1, 2, 1, 0, 1, 2]),
    (PERIODIC, 3, 4, [2, 0, 1, 2, 0, 1, 2, 0, 1, 2, 0]),
    (REPLICATE, 5, 2, [0, 0, 0, 1, 2, 3, 4, 4, 4]),
    (WHOLE, 5, 2, [2, 1, 0, 1, 2, 3, 4, 3, 2]),
    (HALF, 5, 2, [1, 0, 0, 1, 2, 3, 4, 4, 3]),
    (PERIODIC, 5, 2, [3, 4, 0, 1, 2, 3, 4, 0, 1]),
    (HALF, 3, 7, [0, 0, 1, 2, 2, 1, 0, 0, 1, 2, 2, 1, 0, 0, 1, 2, 2]),
    (WHOLE, 3, 7, [1, 2, 1, 0, 1, 2, 1, 0, 1, 2, 1, 0, 1, 2, 1, 0, 1]),
    (PERIODIC, 3, 7, [2, 0, 1, 2, 0, 1, 2, 0, 1, 2, 0, 1, 2, 0, 1, 2, 0]),
    (HALF, 2, 7, [1, 1, 0, 0, 1, 1, 0, 0, 1, 1, 0, 0, 1, 1, 0, 0]),
    (WHOLE, 2, 7, [1, 0, 1, 0, 1, 0, 1, 0, 1, 0, 1, 0, 1, 0, 1, 0]),
]


@pytest.mark.parametrize(("mode", "length", "pad", "expected"), PADDED)
def test_numpy_pad(mode: BorderMode, length: int, pad: int, expected: list[int]) -> None:
    assert border_index(range(-pad, length + pad), length, mode, 1).tolist() == expected


@pytest.mark.parametrize("mode", BorderMode)
@pytest.mark.parametrize("pitch", [1, 2, 3])
def test_any_distance_from_one_pixel(mode: BorderMode, pitch: int) -> None:
    far = range(-6000, 6001, pitch * 1000)
    pixel = [0] * len(far)
    if mode is CONSTANT:
        pixel = [0 if place == 0 else 1 for place in far]
    assert border_index(far, 1, mode, pitch).tolist() == pixel


def test_dumoulin_and_visin_orientation() -> None:
    """arXiv 1603.07285, figure 1.1: what they call convolution is correlation."""
    image = [[3, 3, 2, 1, 0], [0, 0, 1, 3, 1], [3, 1, 2, 2, 3], [2, 0, 0, 2, 2], [2, 0, 0, 0, 1]]
    taps = [[0, 1, 2], [2, 2, 0], [0, 1, 2]]
    theirs = make(taps, operation=CORRELATION, extent=Extent.VALID)
    assert output(theirs, image) == [[12, 12, 17], [10, 17, 19], [9, 6, 14]]
    flipped = make(taps, extent=Extent.VALID)
    assert output(flipped, image) == [[18, 20, 19], [10, 9, 17], [11, 8, 14]]


def test_song_ho_ahn_example() -> None:
    """ "Example of 2D Convolution", 2005 (numbers from memory, recomputed)."""
    taps = [[-1, -2, -1], [0, 0, 0], [1, 2, 1]]
    assert output(make(taps), NINE) == [[-13, -20, -17], [-18, -24, -18], [13, 20, 17]]
