"""The accumulator against scipy.signal.convolve2d in 64-bit integers, for every border and extent.

Borders that SciPy lacks are made by numpy.pad, then the valid part is taken. Images smaller than
the kernel and axes of length 1 are included.
"""

from collections.abc import Callable
from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.ndimage import convolve, correlate
from scipy.signal import convolve2d

from implementations import Implementation, each_implementation, filtered, summed

PADS: dict[str, Any] = {
    "constant": "constant",
    "replicate": "edge",
    "half-sample": "symmetric",
    "whole-sample": "reflect",
    "periodic": "wrap",
}
NDIMAGE = {
    "constant": "constant",
    "replicate": "nearest",
    "half-sample": "reflect",
    "whole-sample": "mirror",
    "periodic": "wrap",
}
IMAGES = [(6, 7), (2, 3), (1, 1), (1, 6), (5, 1), (3, 2)]
KERNELS = [(3, 3), (4, 5), (1, 9), (2, 2)]


def arrays(image: tuple[int, int], kernel: tuple[int, int]) -> tuple[NDArray[Any], NDArray[Any]]:
    """A 10-bit image and a kernel without symmetry."""
    rng = np.random.default_rng([*image, *kernel])
    return rng.integers(0, 1024, image), rng.integers(-40, 60, kernel)


def spec(
    kernel: NDArray[Any], mode: str, extent: str = "same", head: str = "", taps: str = ""
) -> str:
    """The kernel at frac 0 with a 32-bit signed output."""
    return f"""
[filter]
name = "compare"
{head}
[kernel]
taps = {kernel.tolist()}
{taps}
[input]
bits = 10
[coefficient]
frac = 0
[output]
bits = 32
signed = true
[border]
mode = "{mode}"
[image]
extent = "{extent}"
"""


@pytest.mark.parametrize("size", KERNELS)
@pytest.mark.parametrize("mode", PADS)
@each_implementation
def test_same_extent(implementation: Implementation, mode: str, size: tuple[int, int]) -> None:
    for shape in IMAGES:
        image, kernel = arrays(shape, size)
        # The origin (P - 1) // 2 reaches that far forward and the rest of the box backward.
        pads = [((n - 1) - (n - 1) // 2, (n - 1) // 2) for n in size]
        wide = np.pad(image, pads, PADS[mode])
        expected = convolve2d(wide, kernel, "valid").tolist()
        text = spec(kernel, mode)
        assert summed(implementation, text, image.tolist()) in (None, expected)
        assert filtered(implementation, text, image.tolist()) == expected


@pytest.mark.parametrize(
    ("mode", "boundary"), [("constant", "fill"), ("periodic", "wrap"), ("half-sample", "symm")]
)
@pytest.mark.parametrize("extent", ["same", "full"])
@each_implementation
def test_as_convolve2d(
    implementation: Implementation, extent: str, mode: str, boundary: str
) -> None:
    for shape in IMAGES:
        image, kernel = arrays(shape, (3, 4))
        expected = convolve2d(image, kernel, "full" if extent == "full" else "same", boundary)
        text = spec(kernel, mode, extent)
        assert filtered(implementation, text, image.tolist()) == expected.tolist()


@each_implementation
def test_valid_extent(implementation: Implementation) -> None:
    image, kernel = arrays((6, 7), (3, 4))
    expected = convolve2d(image, kernel, "valid").tolist()
    assert filtered(implementation, spec(kernel, "constant", "valid"), image.tolist()) == expected


@pytest.mark.parametrize("mode", NDIMAGE)
@pytest.mark.parametrize("function", [convolve, correlate])
@each_implementation
def test_as_ndimage(
    implementation: Implementation, function: Callable[..., Any], mode: str
) -> None:
    """SciPy's ndimage puts the origin of an even box at size // 2."""
    head = 'operation = "correlation"' if function is correlate else ""
    for shape in [(6, 7), (2, 3), (1, 6)]:
        image, kernel = arrays(shape, (4, 3))
        expected = function(image, kernel, mode=NDIMAGE[mode]).tolist()
        text = spec(kernel, mode, head=head, taps="origin = [2, 1]")
        assert filtered(implementation, text, image.tolist()) == expected
