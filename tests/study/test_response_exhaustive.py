"""The `response` fit against every integer vector there is, judged by NumPy's FFT.

Nothing of the package judges here: deviations of all vectors are taken on a grid, and those of
the best again on a far finer one.
"""

from collections.abc import Iterator
from fractions import Fraction
from itertools import product
from math import cos, pi
from random import Random

import numpy as np
import pytest
from numpy.typing import NDArray

from fit.specs import spec
from guardbit.fit.nearest import nearest
from guardbit.model.frequency import FactorFit
from guardbit.study.response.fit import TOLERANCE, fit_response

Floats = NDArray[np.float64]
Rows = list[list[Fraction]]

COARSE, FINE = 24, 512


def grid_deviation(difference: Floats, points: int) -> Floats:
    """Return the largest |response| on a grid, for each matrix of a stack."""
    largest: Floats = np.abs(np.fft.rfft2(difference, (points, points))).max(axis=(-1, -2))
    return largest


def optimum(stack: NDArray[np.int64], targets: Floats) -> tuple[float, float]:
    """Return the least deviation in a stack of integer matrices, from below and from above."""
    coarse = np.concatenate(
        [grid_deviation(part - targets, COARSE) for part in np.array_split(stack, 64) if len(part)]
    )
    size = sum(n - 1 for n in targets.shape)
    # A grid's largest value is at least cos(pi N / points) times the true one, N over both axes.
    hopeful = stack[coarse <= coarse.min() / cos(pi * size / 2 / COARSE) + 1e-9]
    fine = np.array([grid_deviation(each - targets, FINE) for each in hopeful])
    return float(fine.min()), float(fine.min()) / cos(pi * size / 2 / FINE)


def every(low: int, high: int, shape: tuple[int, int]) -> NDArray[np.int64]:
    count = shape[0] * shape[1]
    numbers = np.array(list(product(range(low, high + 1), repeat=count)), dtype=np.int64)
    return numbers.reshape(-1, *shape)


def symmetric(low: int, high: int, shape: list[list[int]]) -> NDArray[np.int64]:
    """Return all matrices in which places of one number are equal (opposite if negative)."""
    pattern = np.array(shape)
    found = []
    for values in product(range(low, high + 1), repeat=int(np.abs(pattern).max())):
        by = np.array([0, *values])
        found.append(np.sign(pattern) * by[np.abs(pattern)])
    stack = np.array(found)
    return stack[((stack >= low) & (stack <= high)).all(axis=(1, 2))]


def fitted(rows: Rows, bits: int, frac: int, signed: bool = True) -> FactorFit:
    taps = [[str(tap) for tap in row] for row in rows]
    made = spec(taps, coefficient={"bits": bits, "frac": (frac,), "signed": signed})
    (only,) = fit_response(made, 20).factors
    return only


def check(found: FactorFit, targets: Floats, stack: NDArray[np.int64]) -> None:
    """Hold a fit against the best of a stack of candidates with the ideal's symmetry."""
    unit = 2.0**found.frac
    below, above = optimum(stack, targets)
    deviation, bound = float(found.deviation) * unit, float(found.bound) * unit
    itself = grid_deviation(np.array(found.integers) - targets, FINE)
    assert itself <= deviation * (1 + 1e-12)
    assert bound <= above * (1 + 1e-12), "a vector beats the bound"
    assert found.floor <= found.bound <= found.deviation
    assert deviation >= below * (1 - 1e-12)
    assert found.proved
    assert deviation <= above * (1 + 2 * float(TOLERANCE))


def scaled(rows: Rows, frac: int) -> Floats:
    return np.array([[float(tap * 2**frac) for tap in row] for row in rows])


def symmetric_3x3() -> Iterator[tuple[list[list[int]], Rows]]:
    """Yield patterns of ties and ideals that have them."""
    random = Random(9)
    full = [[1, 2, 1], [2, 3, 2], [1, 2, 1]]
    turned = [[1, 2, 3], [4, 5, 4], [3, 2, 1]]
    slope = [[-1, 0, 1], [-2, 0, 2], [-1, 0, 1]]
    mirrored = [[1, 2, 1], [3, 4, 3], [5, 6, 5]]
    for pattern in (full, full, full, turned, slope, slope, mirrored):
        values = [Fraction(random.randint(-70, 110), 128) for _ in range(6)]
        yield (
            pattern,
            [[Fraction(np.sign(p).item()) * values[abs(p) - 1] for p in row] for row in pattern],
        )


@pytest.mark.parametrize("bits", [3, 4])
def test_symmetric_3x3(bits: int) -> None:
    low, high = -(1 << bits - 1), (1 << bits - 1) - 1
    for pattern, rows in symmetric_3x3():
        if bits == 4 and np.abs(pattern).max() > 3:
            continue
        frac = bits - 2
        stack = symmetric(low, high, pattern)
        check(fitted(rows, bits, frac), scaled(rows, frac), stack)


@pytest.mark.parametrize("bits", [3, 4])
def test_general_2x2(bits: int) -> None:
    random = Random(40 + bits)
    low, high = -(1 << bits - 1), (1 << bits - 1) - 1
    stack = every(low, high, (2, 2))
    for _ in range(6 if bits == 3 else 2):
        rows = [[Fraction(random.randint(-90, 90), 100) for _ in "ab"] for _ in "ab"]
        found = fitted(rows, bits, bits - 1)
        check(found, scaled(rows, bits - 1), stack)
        assert found.bound == found.floor


def test_no_symmetric_fit_beats_the_bound_for_all_integers() -> None:
    # Both symmetric: the floor is a bound for vectors without the symmetry too.
    random = Random(77)
    pairs, nines = every(-4, 3, (2, 2)), every(-2, 1, (3, 3))
    for _ in range(4):
        a, b = (Fraction(random.randint(-90, 70), 100) for _ in range(2))
        found = fitted([[a, b], [b, a]], 3, 2)
        _, above = optimum(pairs, scaled([[a, b], [b, a]], 2))
        assert float(found.floor) * 4 <= above * (1 + 1e-12)
    corner, edge, centre = (Fraction(n, 100) for n in (-23, 31, 44))
    rows = [[corner, edge, corner], [edge, centre, edge], [corner, edge, corner]]
    found = fitted(rows, 2, 1)
    _, above = optimum(nines, scaled(rows, 1))
    assert 0 < float(found.floor) * 2 <= above * (1 + 1e-12)


def test_an_unsymmetric_vector_can_be_better() -> None:
    # A Gaussian's 3x3 at frac 1: tied, the four corners are set together or not at all.
    corner, edge, centre = (Fraction(n, 100) for n in (15, 25, 44))
    rows = [[corner, edge, corner], [edge, centre, edge], [corner, edge, corner]]
    found = fitted(rows, 2, 1)
    _, above = optimum(every(-2, 1, (3, 3)), scaled(rows, 1))
    assert float(found.floor) * 2 <= above
    assert float(found.bound) * 2 > above * 1.05


def test_never_worse_than_nearest() -> None:
    random = Random(12)
    better = 0
    for _ in range(12):
        shape = random.choice([(1, 3), (3, 1), (2, 3), (3, 3)])
        rows = [
            [Fraction(random.randint(-90, 90), 100) for _ in range(shape[1])]
            for _ in range(shape[0])
        ]
        found = fitted(rows, 4, 2)
        targets = scaled(rows, 2)
        rounded = np.array(nearest(tuple(tuple(t * 4 for t in row) for row in rows)))
        of_nearest = grid_deviation(rounded - targets, FINE)
        assert found.nearest is not None
        assert float(found.nearest) * 4 >= of_nearest - 1e-9
        assert found.deviation <= found.nearest
        better += found.deviation < found.nearest
    assert better >= 2
