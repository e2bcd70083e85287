"""Formulas against published kernels and against what they are for."""

from fractions import Fraction
from math import comb, exp

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.signal import convolve2d

from guardbit.spec.formulas import (
    RECIPES,
    Direction,
    Formula,
    Parameters,
    derivative,
    evaluate,
    gaussian,
    laplacian,
)

DOWN, ALONG = Direction.VERTICAL, Direction.HORIZONTAL


def matrix(formula: Formula, **given: object) -> NDArray[np.int64]:
    """The whole kernel of a formula with integer taps."""
    ideal = evaluate(formula, Parameters(**given))  # type: ignore[arg-type]
    if ideal.taps is not None:
        return np.array([[int(tap) for tap in row] for row in ideal.taps])
    assert ideal.column is not None and ideal.row is not None
    return np.outer([int(tap) for tap in ideal.column], [int(tap) for tap in ideal.row])


def test_every_formula_has_a_recipe() -> None:
    assert set(RECIPES) == set(Formula)


@pytest.mark.parametrize("size", [1, 2, 3, 4, 5, 8, 33])
def test_binomial_rows_are_repeated_means(size: int) -> None:
    """Pascal's rule: each row is the one before convolved with (1, 1)."""
    row = np.array([1], dtype=object)
    for _ in range(size - 1):
        row = np.convolve(row, np.array([1, 1], dtype=object))
    ideal = evaluate(Formula.BINOMIAL, Parameters(size=(size, 1)))
    assert list(ideal.column or ()) == list(row)
    assert ideal.sums[0] == 2 ** (size - 1)
    assert ideal.row == (Fraction(1),)


def test_box() -> None:
    assert (matrix(Formula.BOX, size=(2, 5)) == np.ones((2, 5))).all()


def test_first_derivative_of_size_3_is_sobel() -> None:
    """Sobel's coefficients in convolution order: the well-known [-1 0 1] is for correlation."""
    sobel = np.array([[-1, 0, 1], [-2, 0, 2], [-1, 0, 1]])
    along = matrix(Formula.FIRST_DERIVATIVE, size=(3, 3), axis=ALONG)
    assert (along == sobel[::-1, ::-1]).all()
    assert (matrix(Formula.FIRST_DERIVATIVE, size=(3, 3), axis=DOWN) == along.T).all()


@pytest.mark.parametrize(
    ("order", "size", "correlation"),
    [
        # Common practice, as OpenCV's getDerivKernels gives them for ksize 3, 5 and 7.
        (1, 3, [-1, 0, 1]),
        (1, 5, [-1, -2, 0, 2, 1]),
        (1, 7, [-1, -4, -5, 0, 5, 4, 1]),
        (2, 3, [1, -2, 1]),
        (2, 5, [1, 0, -2, 0, 1]),
        (2, 7, [1, 2, -1, -4, -1, 2, 1]),
    ],
)
def test_smoothed_differences_are_the_common_ones(
    order: int, size: int, correlation: list[int]
) -> None:
    assert list(derivative(order, size)) == correlation[::-1]


@pytest.mark.parametrize(("height", "width"), [(3, 3), (1, 3), (5, 3), (5, 7), (9, 9)])
@pytest.mark.parametrize("axis", [DOWN, ALONG])
def test_first_derivative_of_a_ramp(height: int, width: int, axis: Direction) -> None:
    """The scale and the sign that the explanation states, for a slope of 3 per pixel."""
    size = (height, width) if axis is ALONG else (width, height)
    ys, xs = np.mgrid[:20, :20]
    image = 3 * (xs if axis is ALONG else ys) + 5 * (ys if axis is ALONG else xs)
    found = convolve2d(image, matrix(Formula.FIRST_DERIVATIVE, size=size, axis=axis), "valid")
    assert (found == 3 * 2 ** (width - 2) * 2 ** (height - 1)).all()


@pytest.mark.parametrize(("height", "width"), [(3, 3), (1, 3), (5, 3), (5, 7)])
@pytest.mark.parametrize("axis", [DOWN, ALONG])
def test_second_derivative_of_a_valley(height: int, width: int, axis: Direction) -> None:
    """x^2 has the second derivative 2; a ramp across and along it adds nothing."""
    size = (height, width) if axis is ALONG else (width, height)
    ys, xs = np.mgrid[:20, :20]
    along, across = (xs, ys) if axis is ALONG else (ys, xs)
    image = along * along + 7 * along + 11 * across
    found = convolve2d(image, matrix(Formula.SECOND_DERIVATIVE, size=size, axis=axis), "valid")
    assert (found == 2 * 2 ** (width - 3) * 2 ** (height - 1)).all()


def test_laplacian_is_the_common_one() -> None:
    assert list(map(list, laplacian(4))) == [[0, 1, 0], [1, -4, 1], [0, 1, 0]]
    assert list(map(list, laplacian(8))) == [[1, 1, 1], [1, -8, 1], [1, 1, 1]]


@pytest.mark.parametrize(("neighbours", "scale"), [(4, 1), (8, 3)])
def test_laplacian_of_a_bowl(neighbours: int, scale: int) -> None:
    """x^2 + 2 y^2 has the Laplacian 6."""
    ys, xs = np.mgrid[:9, :9]
    kernel = matrix(Formula.LAPLACIAN, neighbours=neighbours)
    assert (convolve2d(xs * xs + 2 * ys * ys + 5 * xs, kernel, "valid") == 6 * scale).all()


@pytest.mark.parametrize(("size", "sigma"), [(1, 1), (3, 1), (4, 2), (5, 1), (7, 3), (2, 5)])
def test_gaussian_agrees_with_the_double(size: int, sigma: int) -> None:
    taps = gaussian(size, Fraction(sigma, 2))
    for k, tap in enumerate(taps):
        distance = k - (size - 1) / 2
        assert float(tap) == pytest.approx(exp(-(distance**2) / (2 * (sigma / 2) ** 2)), rel=1e-14)
    assert taps == taps[::-1]


def test_gaussian_to_50_decimals() -> None:
    """e^-1/2 from its own series in rational arithmetic, far beyond 50 decimals."""
    term = total = Fraction(1)
    for n in range(1, 60):
        term *= Fraction(-1, 2 * n)
        total += term
    tap = gaussian(3, Fraction(1))[0]
    assert abs(tap - total) <= Fraction(1, 2 * 10**50)
    assert 10**50 % tap.denominator == 0
    assert str(int(tap * 10**20)) == "60653065971263342360"  # e^-0.5 = 0.60653 06597 12633 42360


def test_gaussian_far_out_is_zero_and_never_slow() -> None:
    assert list(gaussian(255, Fraction(1, 10**300))) == [0] * 127 + [1] + [0] * 127
    assert set(gaussian(3, Fraction(10**300))) == {1}
    assert gaussian(31, Fraction(1))[0] == Fraction(14, 10**50)  # e^-112.5 = 1.388e-49


def test_gaussian_of_two_sigmas() -> None:
    ideal = evaluate(Formula.GAUSSIAN, Parameters(size=(3, 5), sigma=(Fraction(1), Fraction(2))))
    assert ideal.column == gaussian(3, Fraction(1))
    assert ideal.row == gaussian(5, Fraction(2))
    # d = 2, sigma = 2 and d = 1, sigma = 1 are the same point of the curve.
    assert (ideal.row or ())[0] == (ideal.column or ())[0]


def test_nothing_beats_the_centre_of_a_binomial() -> None:
    ideal = evaluate(Formula.BINOMIAL, Parameters(size=(255, 255)))
    assert max(ideal.column or ()) == comb(254, 127)
