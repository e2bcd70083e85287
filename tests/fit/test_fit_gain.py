"""The `gain` fit against exhaustive search, every tie-break included."""

from fractions import Fraction
from itertools import product
from random import Random
from time import perf_counter

import numpy as np
import pytest
from hypothesis import example, given, settings
from hypothesis import strategies as st

from guardbit.fit.apportion import Slots, apportion
from guardbit.fit.gain import gain, gain_sum, largest_gain_frac
from guardbit.fit.nearest import nearest, scaled
from guardbit.fit.symmetry import orbits
from tools import examples

from .specs import exhaustive_gain, matrix


def fractions(units: np.ndarray, unit: int) -> tuple[tuple[Fraction, ...], ...]:
    return tuple(tuple(Fraction(int(u), unit) for u in row) for row in units)


@pytest.mark.parametrize(
    ("targets", "limits", "wanted"),
    [
        # Ours. Nothing to mend.
        ([[1, 2, 1]], (-8, 7), [[1, 2, 1]]),
        # Thirds: rounding loses one; only the centre can take it and leave the flip.
        ([["1/3", "1/3", "1/3"]], (-8, 7), [[0, 1, 0]]),
        # Two halves, sum 1: a flip asks for equal taps, of which none sums to 1; then the
        # lexicographically smallest.
        ([["1/2", "1/2"]], (-8, 7), [[0, 1]]),
        # A sum of 3/2 is a tie: to even, 2.
        ([["3/4", "3/4"]], (-8, 7), [[1, 1]]),
        # A sum of 1/2 is a tie: to even, 0.
        ([["1/4", "1/4"]], (-8, 7), [[0, 0]]),
        # The same cost for either end of a row; the earlier is the smaller.
        ([["1/2", 5, "1/2"]], (-8, 7), [[0, 6, 0]]),
        ([["1/2", 5, "3/2"]], (-8, 7), [[0, 5, 2]]),
        # Antisymmetric: opposite taps stay opposite, ties to the smaller first tap.
        ([["-1/2", 0, "1/2"]], (-8, 7), [[-1, 0, 1]]),
        ([["1/2", 0, "-1/2"]], (-8, 7), [[0, 0, 0]]),
        ([["7/5", 0, "-7/5"]], (-8, 7), [[1, 0, -1]]),
        # -8 has no opposite in four bits.
        ([["-39/5", 0, "39/5"]], (-8, 7), [[-7, 0, 7]]),
        ([[0, 0], [0, 0]], (0, 1), [[0, 0], [0, 0]]),
        # 7.4 and 6.6 in three bits unsigned: 7 and 7.
        ([["37/5", "33/5"]], (0, 7), [[7, 7]]),
        # The limit holds one tap down, the sum pushes the other up.
        ([[9, 1]], (-8, 7), [[7, 3]]),
        ([[8]], (-8, 7), None),
        ([[-9, 0]], (-4, 3), None),
        # Four equal taps of sum 2: all flips and turns tie them, none of whose sums is 2.
        ([["1/2", "1/2"], ["1/2", "1/2"]], (-8, 7), [[0, 0], [1, 1]]),
        ([["1/2", "1/2"], ["1/2", "1/2"]], (0, 0), None),
    ],
)
def test_worked_cases(
    targets: list[list[int | str]], limits: tuple[int, int], wanted: list[list[int]] | None
) -> None:
    fitted = gain(matrix(targets), *limits)
    assert fitted == (None if wanted is None else tuple(tuple(row) for row in wanted))


SHAPES = [(1, 1), (1, 2), (2, 1), (1, 3), (1, 4), (4, 1), (1, 5), (2, 2), (2, 3), (3, 2)]


def small_units(shape: tuple[int, int], unit: int, folds: int, random: Random) -> np.ndarray:
    """Return targets (times unit), made symmetric or antisymmetric by `folds` random moves."""
    reach = 3 * unit
    units = np.array([random.randint(-reach, reach) for _ in range(shape[0] * shape[1])])
    units = units.reshape(shape)
    for _ in range(folds):
        moved = random.choice([units[::-1], units[:, ::-1], units[::-1, ::-1], units.T])
        if moved.shape == units.shape:
            units = (units + random.choice([1, -1]) * moved) // random.choice([1, 2])
    return units


def test_every_small_matrix_equals_exhaustive_search() -> None:
    random = Random(20250)
    seen = {"fitted": 0, "impossible": 0, "tied": 0}
    for _ in range(400):
        shape = random.choice(SHAPES)
        unit = random.choice([1, 2, 3, 4, 5, 8])
        units = small_units(shape, unit, random.randrange(4), random)
        low, high = random.choice([(-4, 3), (-2, 1), (0, 3), (-1, 0), (-3, 3)])
        wanted = exhaustive_gain(units, unit, low, high)
        fitted = gain(fractions(units, unit), low, high)
        if wanted is None:
            assert fitted is None, (units, unit, low, high)
            seen["impossible"] += 1
        else:
            assert fitted == tuple(map(tuple, wanted.tolist())), (units, unit, low, high)
            seen["fitted"] += 1
            seen["tied"] += len(orbits(tuple(map(tuple, units.tolist())))) < units.size
    assert min(seen.values()) > 40, seen


def test_square_of_three_equals_exhaustive_search() -> None:
    random = Random(7)
    for _ in range(8):
        units = small_units((3, 3), 4, 3, random)
        wanted = exhaustive_gain(units, 4, -2, 1)
        fitted = gain(fractions(units, 4), -2, 1)
        assert fitted == (None if wanted is None else tuple(map(tuple, wanted.tolist())))


@st.composite
def slots(draw: st.DrawFn) -> tuple[Slots, int]:
    """Draw up to five weighted items in a range of up to eight values, and a sum near theirs."""
    count = draw(st.integers(1, 5))
    unit = draw(st.sampled_from([1, 2, 3, 4, 6, 7]))
    low = draw(st.integers(-6, 2))
    high = low + draw(st.integers(0, 7))
    near = st.integers((low - 2) * unit, (high + 2) * unit)
    same = draw(near)
    # Few distinct targets make many ties.
    target = st.one_of(near, st.sampled_from([same, same + unit, same + unit // 2]))
    targets = draw(st.tuples(*[target] * count))
    weights = draw(st.tuples(*[st.sampled_from([1, 2, 4, 8])] * count))
    total = sum(w * x for w, x in zip(weights, targets, strict=True)) // unit
    return Slots(targets, weights, unit, low, high), total + draw(st.integers(-9, 9))


@given(slots())
@settings(max_examples=examples(400), deadline=None)
@example((Slots((2, 2, 2, 2, 2), (8, 8, 4, 4, 1), 4, -4, 3), 7))
@example((Slots((3, 3, 3, 3, 3), (1, 2, 4, 8, 8), 2, -3, 4), 21))
def test_apportion_equals_exhaustive_search(case: tuple[Slots, int]) -> None:
    s, total = case
    weights = np.array(s.weights)
    every = np.array(list(product(range(s.low, s.high + 1), repeat=len(weights))))
    legal = every[every @ weights == total]
    found = apportion(s, total)
    if not len(legal):
        assert found is None
        return
    off = legal * s.unit - np.array(s.targets)
    best = np.lexsort(((off**2) @ weights, abs(off) @ weights))[0]
    assert found == tuple(legal[best].tolist())


TAPS = st.fractions(min_value=-4, max_value=4, max_denominator=40)


@given(st.lists(st.lists(TAPS, min_size=3, max_size=3), min_size=1, max_size=5))
@settings(max_examples=examples(150), deadline=None)
def test_sum_is_exact_and_no_exchange_betters_it(rows: list[list[Fraction]]) -> None:
    targets = tuple(map(tuple, rows))
    fitted = gain(targets, -40, 40)
    assert fitted is not None
    flat = [n for row in fitted for n in row]
    ideal = [x for row in targets for x in row]
    assert sum(flat) == gain_sum(targets) == round(sum(ideal, Fraction(0)))
    if len(orbits_of(targets)) == len(ideal):
        # A convex cost under one sum: no pair of steps betters it, so nothing does.
        off = [n - x for n, x in zip(flat, ideal, strict=True)]
        up = min((abs(e + 1) - abs(e), 2 * e + 1) for e in off)
        down = min((abs(e - 1) - abs(e), 1 - 2 * e) for e in off)
        zero = Fraction(0)
        assert (up[0] + down[0], up[1] + down[1]) >= (zero, zero)


def orbits_of(targets: tuple[tuple[Fraction, ...], ...]) -> tuple[object, ...]:
    ranks = {value: i for i, value in enumerate(sorted({abs(x) for row in targets for x in row}))}
    signs = (tuple((ranks[abs(x)] + 1) * ((x > 0) - (x < 0)) for x in row) for row in targets)
    return orbits(tuple(signs))


@pytest.mark.parametrize(
    ("rows", "weights", "forced"),
    [
        (((1, 2, 1), (2, 4, 2), (1, 2, 1)), [4, 4, 1], 0),
        # Sobel-Feldman: the flip that swaps the sides negates.
        (((-1, 0, 1), (-2, 0, 2), (-1, 0, 1)), [0, 0, 0, 0], 2),
        (((1, 2), (3, 4)), [1, 1, 1, 1], 0),
        (((1, 2), (2, 1)), [2, 2], 0),
        # Antisymmetric under the transpose.
        (((0, 1), (-1, 0)), [0, 0], 1),
        (((1, 2, 2, 1),), [2, 2], 0),
        (((0, 0), (0, 0)), [0], 1),
    ],
)
def test_orbits(rows: tuple[tuple[int, ...], ...], weights: list[int], forced: int) -> None:
    found = orbits(rows)
    assert sorted(p for orbit in found for p in orbit.positions) == [
        (y, x) for y in range(len(rows)) for x in range(len(rows[0]))
    ]
    loose = [0 if orbit.forced else orbit.balance for orbit in found]
    assert sum(orbit.forced for orbit in found) == forced
    if not forced:
        assert loose == weights
    else:
        assert not any(loose)


def bell(size: int, tilt: int = 0) -> tuple[tuple[Fraction, ...], ...]:
    """Return rational taps of a bell of unit sum; `tilt` breaks its symmetry."""
    middle = size // 2
    raw = [
        [
            Fraction(10**6, 100 + (y - middle) ** 2 + (x - middle) ** 2 + tilt * (3 * y + x))
            for x in range(size)
        ]
        for y in range(size)
    ]
    cut = [[Fraction(int(tap)) for tap in row] for row in raw]
    total = sum(sum(row) for row in cut)
    return tuple(tuple(tap / total for tap in row) for row in cut)


@pytest.mark.parametrize("tilt", [0, 1])
@pytest.mark.parametrize("frac", [4, 15])
def test_thousands_of_taps_are_fast(tilt: int, frac: int) -> None:
    targets = scaled(bell(63, tilt), frac)
    begun = perf_counter()
    fitted = gain(targets, -(2**15), 2**15 - 1)
    assert perf_counter() - begun < 2
    assert fitted is not None
    assert sum(map(sum, fitted)) == 2**frac
    if not tilt:
        assert fitted == tuple(zip(*fitted, strict=True)) == fitted[::-1]


def test_auto_frac_never_bends_a_tap() -> None:
    ideal = bell(5)
    frac = largest_gain_frac(ideal, 8, True)
    assert frac is not None
    greatest = max(map(max, ideal))
    assert greatest * 2**frac < 128 <= greatest * 2 ** (frac + 1) + 2
    assert gain(scaled(ideal, frac), -128, 127) == gain(scaled(ideal, frac), -(2**40), 2**40)


def test_gain_equals_nearest_where_nearest_keeps_the_sum() -> None:
    targets = matrix([["1/4", "7/4", "1/4"], ["7/4", 4, "7/4"], ["1/4", "7/4", "1/4"]])
    assert gain(targets, -8, 7) == nearest(targets)


def tied_3x3(targets: np.ndarray, unit: int, low: int, high: int) -> np.ndarray | None:
    """Return the best of all 3x3 matrices with every flip and turn, of the sum asked for."""
    total = round(Fraction(int(targets.sum()), unit))
    corner, edge, centre = np.array(list(product(range(low, high + 1), repeat=3))).T
    every = np.array([[corner, edge, corner], [edge, centre, edge], [corner, edge, corner]])
    stack = np.moveaxis(every, -1, 0)
    legal = stack[stack.sum(axis=(1, 2)) == total]
    if not len(legal):
        return None
    off = legal * unit - targets
    # A stable sort: the triples come in lexicographic order, which is that of the matrices.
    best: np.ndarray = legal[np.lexsort(((off**2).sum((1, 2)), abs(off).sum((1, 2))))[0]]
    return best


@pytest.mark.parametrize("bits", [3, 4])
def test_symmetric_3x3_equals_exhaustive_search(bits: int) -> None:
    random, (low, high), seen = Random(30 + bits), (-(2 ** (bits - 1)), 2 ** (bits - 1) - 1), 0
    for _ in range(60):
        unit = random.choice([2, 3, 10, 256])
        corner, edge, centre = (random.randint(low * unit, high * unit) for _ in range(3))
        units = np.array([[corner, edge, corner], [edge, centre, edge], [corner, edge, corner]])
        wanted = tied_3x3(units, unit, low, high)
        if wanted is not None:
            seen += 1
            assert gain(fractions(units, unit), low, high) == tuple(map(tuple, wanted.tolist()))
    assert seen > 30


@pytest.mark.parametrize("bits", [3, 4])
def test_general_2x2_equals_exhaustive_search(bits: int) -> None:
    random, low, high = Random(20 + bits), -(2 ** (bits - 1)), 2 ** (bits - 1) - 1
    for _ in range(60 if bits == 3 else 15):
        unit = random.choice([2, 3, 10, 256])
        units = np.array([random.randint(low * unit, high * unit) for _ in range(4)]).reshape(2, 2)
        wanted = exhaustive_gain(units, unit, low, high)
        fitted = gain(fractions(units, unit), low, high)
        assert fitted == (None if wanted is None else tuple(map(tuple, wanted.tolist())))
