"""Functions of OpenCV whose integer arithmetic is exact: pyramids, derivatives, filter2D.

OpenCV correlates, its default border is whole-sample, and pyrDown of 8-bit images is
(sum of the 5x5 binomial + 128) >> 8 at even samples: a fixed-point filter that we did not write.
"""

import cv2
import numpy as np
import pytest
from numpy.typing import NDArray

from implementations import Implementation, Rows, each_implementation, filtered

SIZES = [(9, 12), (8, 7), (5, 3), (3, 2)]
BINOMIAL = [1, 4, 6, 4, 1]


def noise(size: tuple[int, int]) -> NDArray[np.uint8]:
    """8-bit noise, half of it black or white."""
    rng = np.random.default_rng(size[0] * 31 + size[1])
    codes = rng.integers(0, 256, size)
    return np.where(rng.random(size) < 0.5, 255 * (codes > 127), codes).astype(np.uint8)


def spec(
    taps: Rows, output: str, image: str = "", mode: str = "whole-sample", extra: str = ""
) -> str:
    """A correlation of 8-bit pixels."""
    return f"""
[filter]
name = "derivative"
operation = "correlation"
[kernel]
taps = {taps}
{extra}
[input]
bits = 8
[coefficient]
scale = "exact"
[output]
{output}
[border]
mode = "{mode}"
[image]
{image}
"""


SIGNED = "bits = 16\nsigned = true"


@pytest.mark.parametrize("size", SIZES)
@each_implementation
def test_pyramid_step(implementation: Implementation, size: tuple[int, int]) -> None:
    text = f"""
[filter]
name = "pyramid"
[kernel]
column = {BINOMIAL}
row = {BINOMIAL}
divisor = 256
[input]
bits = 8
[border]
mode = "whole-sample"
[image]
step = [2, 2]
"""
    image = noise(size)
    assert filtered(implementation, text, image.tolist()) == cv2.pyrDown(image).tolist()


@pytest.mark.parametrize("ksize", [3, 5])
@pytest.mark.parametrize("order", [(1, 0), (0, 1)])
@each_implementation
def test_sobel(implementation: Implementation, order: tuple[int, int], ksize: int) -> None:
    along, upright = (
        vector.astype(int).ravel().tolist() for vector in cv2.getDerivKernels(*order, ksize)
    )
    taps = [[a * b for b in along] for a in upright]
    image = noise((9, 12))
    expected = cv2.Sobel(image, cv2.CV_16S, *order, ksize=ksize).tolist()
    assert filtered(implementation, spec(taps, SIGNED), image.tolist()) == expected


@each_implementation
def test_scharr(implementation: Implementation) -> None:
    taps = [[-3, 0, 3], [-10, 0, 10], [-3, 0, 3]]
    image = noise((9, 12))
    expected = cv2.Scharr(image, cv2.CV_16S, 1, 0).tolist()
    assert filtered(implementation, spec(taps, SIGNED), image.tolist()) == expected


@pytest.mark.parametrize(
    ("ksize", "taps"),
    [(1, [[0, 1, 0], [1, -4, 1], [0, 1, 0]]), (3, [[2, 0, 2], [0, -8, 0], [2, 0, 2]])],
)
@each_implementation
def test_laplacian(implementation: Implementation, ksize: int, taps: Rows) -> None:
    for size in SIZES:
        image = noise(size)
        expected = cv2.Laplacian(image, cv2.CV_16S, ksize=ksize).tolist()
        assert filtered(implementation, spec(taps, SIGNED), image.tolist()) == expected


BORDERS = {
    "constant": cv2.BORDER_CONSTANT,
    "replicate": cv2.BORDER_REPLICATE,
    "half-sample": cv2.BORDER_REFLECT,
    "whole-sample": cv2.BORDER_REFLECT_101,
}


@pytest.mark.parametrize("mode", BORDERS)
@each_implementation
def test_filter2d_with_an_even_box(implementation: Implementation, mode: str) -> None:
    """OpenCV's anchor of an even box is at size // 2; CV_16S saturates, as the output here does."""
    taps = [[7, -9, 11, 40], [-25, 31, 90, -3], [1, 0, 2, -60]]
    text = spec(taps, SIGNED, mode=mode, extra="origin = [1, 2]")
    image = noise((7, 9))
    expected = cv2.filter2D(
        image, cv2.CV_16S, np.array(taps, np.float32), borderType=BORDERS[mode]
    ).tolist()
    assert filtered(implementation, text, image.tolist()) == expected
