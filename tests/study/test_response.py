"""The `response` fit: kinds of symmetry, registers, pairs, limits of time, what it says of itself.

Optimality is held against exhaustive search in test_response_exhaustive.py.
"""

import math
import os
from dataclasses import replace
from fractions import Fraction
from time import monotonic
from typing import Any

import numpy as np
import pytest

from fit.specs import EXACT, spec
from guardbit.fit.nearest import nearest, scaled
from guardbit.model.finding import SpecError
from guardbit.model.frequency import FactorFit, ResponseFit
from guardbit.model.spec import Auto, Spec
from guardbit.sizing.peak import peak
from guardbit.study.response.fit import fit_response
from guardbit.study.response.polish import polished, wandered
from guardbit.study.response.quiet import quiet_output
from guardbit.study.response.tangents import directions, first_conditions, ladders, solve
from guardbit.study.response.tied import deviation, gathered, spread, tied
from guardbit.study.response.waves import basis, grid, peaks

Rows = list[list[int | str]]


def fitted(taps: Rows, **coefficient: object) -> FactorFit:
    (only,) = fit_response(spec(taps, coefficient=coefficient), 10).factors
    return only


def deviation_of(integers: tuple[tuple[int, ...], ...], made: Spec, frac: int) -> float:
    """Return the largest |fitted - ideal| on a grid of NumPy's FFT."""
    assert made.kernel.taps is not None
    (divisor,) = made.kernel.divisor
    assert isinstance(divisor, Fraction)
    ideal = np.array([[float(tap / divisor) for tap in row] for row in made.kernel.taps])
    return float(np.abs(np.fft.fft2(np.array(integers) / 2**frac - ideal, (256, 256))).max())


KINDS: dict[str, Rows] = {
    "full": [["1/9", "1/7", "1/9"], ["1/7", "2/5", "1/7"], ["1/9", "1/7", "1/9"]],
    "half turn": [["1/9", "1/7", "2/9"], ["1/3", "2/5", "1/3"], ["2/9", "1/7", "1/9"]],
    "antisymmetric": [["-1/9", 0, "1/9"], ["-2/7", 0, "2/7"], ["-1/9", 0, "1/9"]],
    "opposite under transpose": [[0, "1/3", "1/7"], ["-1/3", 0, "1/5"], ["-1/7", "-1/5", 0]],
    "one flip": [["1/9", "1/7", "1/9"], ["1/3", "2/5", "1/3"], ["3/7", "-1/7", "3/7"]],
    "none": [["1/9", "1/7", "-1/8"], ["1/3", "2/5", "1/6"]],
    "row": [["1/10", "2/7", "1/3", "2/7", "1/10"]],
    "even row": [["1/10", "2/7", "-2/7", "-1/10"]],
    "column": [["1/10"], ["2/7"], ["1/3"]],
    "tap": [["5/13"]],
}


@pytest.mark.parametrize("kind", KINDS)
def test_every_kind_of_symmetry_is_kept(kind: str) -> None:
    taps = KINDS[kind]
    found = fitted(taps, bits=5)
    made = spec(taps, coefficient={"bits": 5})
    integers, ideal = np.array(found.integers), np.array(made.kernel.taps)
    moves: list[Any] = [np.flipud, np.fliplr, lambda m: m[::-1, ::-1]]
    if integers.shape[0] == integers.shape[1]:
        moves += [np.transpose, np.rot90, lambda m: np.rot90(m, 3), lambda m: np.rot90(m, 2).T]
    for move in moves:
        for sign in (1, -1):
            if (move(ideal) == sign * ideal).all():
                assert (move(integers) == sign * integers).all()
    assert found.nearest is not None and found.proved
    assert found.floor <= found.bound <= found.deviation <= found.nearest
    measured = deviation_of(found.integers, made, found.frac)
    assert measured * (1 - 1e-12) <= float(found.deviation) <= measured * 1.01


@pytest.mark.parametrize(
    ("coefficient", "frac", "integers"),
    [
        # Exact in 4 bits at frac 2, so nothing to search.
        ({"bits": 4}, 2, ((1, 2, 1),)),
        ({"bits": Auto.AUTO}, 2, ((1, 2, 1),)),
        ({"bits": Auto.AUTO, "frac": (3,)}, 3, ((2, 4, 2),)),
        # 1 bit unsigned at frac 1: 1/4 is a tie, at 0 and 1 alike; (0, 1, 0) loses DC and
        # Nyquist by 1/2 and 1/2, (1, 1, 1) by as much.
        ({"bits": 1, "signed": False, "frac": (1,)}, 1, ((0, 1, 0),)),
    ],
)
def test_worked_cases(
    coefficient: dict[str, Any], frac: int, integers: tuple[tuple[int, ...], ...]
) -> None:
    found = fitted([["1/4", "1/2", "1/4"]], **coefficient)
    assert (found.frac, found.integers) == (frac, integers)
    assert found.proved and found.gap <= Fraction(1, 1000)


def test_an_automatic_frac_is_that_of_nearest() -> None:
    found = fitted([["1/3", "2/3", "1/3"]], bits=6)
    # 2/3 * 2^5 = 21.3 fits, 2/3 * 2^6 = 42.7 does not.
    assert found.frac == 5
    # (11, 21, 11) / 32 is off by 1/96, -1/96, 1/96: 1/32 where the signs agree, at Nyquist.
    assert found.integers == ((11, 21, 11),)
    assert found.deviation == found.nearest == Fraction(1, 32)


def test_a_register_too_small_for_nearest_still_gets_its_best() -> None:
    found = fitted([["3/4", 3, "3/4"]], bits=3, frac=(1,))
    assert found.nearest is None
    assert found.integers[0][1] == 3
    # 6 becomes 3: at best the rest spreads the missing 3 between DC and Nyquist.
    assert found.deviation >= Fraction(3, 2) / 2
    # -8 has a code and 8 has none: nearest is measured beside the start.
    lone = fitted([["-8/3", 0, "8/3"]], bits=4, frac=(1,))
    assert lone.integers == ((-5, 0, 5),)
    edge = fitted([["-4", "4"]], bits=4, frac=(1,))
    assert (edge.integers, edge.nearest) == (((-7, 7),), None)


def test_a_register_far_too_small_is_filled() -> None:
    # 4096 / 3 in 3 bits: 3 each, at frac 20 as well, where nothing is left to search for.
    for frac in (12, 20):
        found = fitted([["1/3", "2/3"]], bits=3, frac=(frac,))
        assert (found.integers, found.nearest) == (((3, 3),), None)
        assert found.deviation == 1 - Fraction(6, 2**frac)


def test_a_kernel_of_zeros() -> None:
    found = fitted([[0, 0], [0, 0]], bits=4)
    assert found.integers == ((0, 0), (0, 0))
    assert found.deviation == found.gap == 0 and found.proved


def test_column_and_row_are_fitted_each_alone() -> None:
    pair: dict[str, Any] = {
        "column": ["1/3", "1/3", "1/3"],
        "row": ["1/9", "7/9", "1/9"],
        "kernel": {"divisor": (1, 1)},
    }
    made = spec(**pair, coefficient={"bits": 5, "frac": (3, 4)})
    found = fit_response(made, 10)
    column, row = found.factors
    assert (column.name, row.name) == ("column", "row")
    assert (column.frac, row.frac) == (3, 4)
    assert np.array(column.integers).shape == (3, 1) and np.array(row.integers).shape == (1, 3)
    alone = fitted([["1/9", "7/9", "1/9"]], bits=5, frac=(4,))
    assert row.integers == alone.integers and row.deviation == alone.deviation
    assert found.proved
    assert found == ResponseFit(found.factors, "another time")


def test_pinned_taps_and_the_rule_that_is_asked_for_do_not_matter() -> None:
    made = spec([["1/3", "2/3"]], coefficient={"bits": 5})
    assert fit_response(made, 5) == fit_response(
        replace(made, coefficient=replace(made.coefficient, pinned=None)), 5
    )


@pytest.mark.parametrize(
    ("made", "kind"),
    [
        (spec([[1, 2]], coefficient=EXACT), "pinned-with-exact"),
        (spec([["1/3"]], coefficient={"bits": Auto.AUTO}), "bits-auto-inexact"),
        (spec([[-1, 1]], coefficient={"bits": 4, "signed": False}), "no-frac-fits"),
        (spec([[1]], coefficient={"bits": 4, "frac": (1, 1)}), "pair-needs-vectors"),
    ],
)
def test_refusals(made: Spec, kind: str) -> None:
    with pytest.raises(SpecError) as caught:
        fit_response(made, 1)
    assert kind in [found.kind for found in caught.value.findings]


def unsymmetric() -> Spec:
    random = np.random.default_rng(6)
    taps = [[f"{n}/1000" for n in row] for row in random.integers(-300, 300, (6, 6)).tolist()]
    return spec(taps, coefficient={"bits": 7})


def test_the_time_limit_ends_a_search_that_then_says_how_far_it_got() -> None:
    began = monotonic()
    found = fit_response(unsymmetric(), 2)
    assert monotonic() - began < 6
    assert 1 < float(found.seconds) < 6
    (only,) = found.factors
    assert not found.proved and 0 < only.gap < 1
    assert only.nearest is not None and only.deviation < only.nearest
    assert 0 < only.bound < only.deviation


def test_no_time_at_all_leaves_an_honest_bound() -> None:
    (only,) = fit_response(unsymmetric(), 0).factors
    assert only.nearest is not None and only.deviation <= only.nearest
    targets = scaled(unsymmetric().kernel.taps or (), only.frac)
    squares = sum(
        (n - x) ** 2
        for line, row in zip(nearest(targets), targets, strict=True)
        for n, x in zip(line, row, strict=True)
    )
    # Parseval: the root of the sum of squares of the rounding.
    assert math.isclose(float(only.bound) * 2.0**only.frac, math.sqrt(squares), rel_tol=1e-9)
    assert not only.proved


def test_kernels_too_large_to_search_take_no_longer() -> None:
    random = np.random.default_rng(4)
    taps = [[f"{n}/9973" for n in row] for row in random.integers(-99, 99, (40, 40)).tolist()]
    began = monotonic()
    (only,) = fit_response(spec(taps, coefficient={"bits": 6}), 2).factors
    assert monotonic() - began < 6
    assert only.nearest is not None and only.deviation <= only.nearest


def test_each_condition_holds_for_true_integers() -> None:
    # The programme has to let every better vector in: the optimum of a brute search solves it.
    targets = tuple(tuple(Fraction(n, 7) for n in row) for row in ((9, 4), (-3, 8)))
    t = tied(targets, -4, 3)
    steps = [(j, k) for j in range(4) for k in (-1, 1)]
    nearby = [tuple(map(round, t.firsts))]
    nearby += [tuple(v + step * (i == j) for i, v in enumerate(nearby[0])) for j, step in steps]
    sizes = [float(deviation(t, values).guaranteed) for values in nearby]
    outcome = solve(t, first_conditions(t, 6), max(sizes), 10)
    assert outcome.finished and outcome.values is not None
    assert outcome.bound <= min(sizes)
    best = float(deviation(t, outcome.values).guaranteed)
    assert outcome.bound <= best <= outcome.bound / math.cos(math.pi / 16) * 1.1


def test_small_changes_never_make_it_worse() -> None:
    made = unsymmetric()
    t = tied(scaled(made.kernel.taps or (), 7), -64, 63)
    start = tuple(t.clamped(j, round(x)) for j, x in enumerate(t.firsts))
    waves = basis(t, grid(t.shape, 4))  # where both of them look

    def size(values: tuple[int, ...]) -> float:
        off = [float(v - x) for v, x in zip(values, t.firsts, strict=True)]
        return float(np.abs(waves @ off).max())

    near = polished(t, start)
    far = wandered(t, start, 0.5)
    assert polished(t, near) == near
    assert size(far) <= size(near) * (1 + 1e-9) and size(near) < size(start)
    low = replace(t, low=-3, high=2)
    assert all(-3 <= value <= 2 for value in wandered(low, (0,) * len(start), 0.1))


def test_directions() -> None:
    rows = {kind: spec(taps).kernel.taps or () for kind, taps in KINDS.items()}
    assert tied(rows["full"], -4, 3).parity == 1
    assert tied(rows["antisymmetric"], -4, 3).parity == -1
    assert len(directions(tied(rows["none"], -4, 3))) == 16
    places = grid((3, 3), 4)
    assert np.abs(basis(tied(rows["half turn"], -4, 3), places).imag).max() < 1e-12
    assert np.abs(basis(tied(rows["antisymmetric"], -4, 3), places).real).max() < 1e-12


def test_peaks_are_found_between_grid_points() -> None:
    t = tied(tuple(tuple(Fraction(x) for x in row) for row in ((3, -1, 2), (1, 5, -4))), -8, 7)
    off = [float(x) for x in t.firsts]
    places, angles = peaks(t, off, 0.0)
    response = basis(t, places) @ off
    assert np.allclose(np.angle(response), angles)
    largest = peak({(y, x): row for y, line in enumerate(t.targets) for x, row in enumerate(line)})
    assert abs(np.abs(response).max() - float(largest.guaranteed)) < 1e-5


def test_gathered_undoes_spread_and_sees_what_is_not_tied() -> None:
    t = tied(tuple(tuple(map(Fraction, row)) for row in ((1, 2, 1), (0, 5, 0))), -2, 1)
    assert spread(t, (1, -2, 0, 1)) == ((1, -2, 1), (0, 1, 0))
    assert gathered(t, ((1, -2, 1), (0, 1, 0))) == (1, -2, 0, 1)
    assert gathered(t, ((1, 0, 0), (0, 0, 0))) is None
    assert gathered(t, ((1, 3, 1), (0, 0, 0))) is None


def test_ladders_hold_the_least_squares_of_sums() -> None:
    # Four taps of 0.3: a sum of 1 costs 3 * 0.09 + 0.49, spread as 0, 0, 0, 1.
    t = tied(((Fraction(3, 10),) * 2,) * 2, -4, 3)
    (sums,) = ladders(t, 2.0, average=True)
    costs = dict(zip(range(sums.low, sums.high + 1), sums.squares, strict=True))
    assert math.isclose(costs[0], 0.36) and math.isclose(costs[1], 0.76)
    assert math.isclose(costs[4], 4 * 0.49)
    (values,) = ladders(t, 2.0, average=False)
    assert (values.low, values.high) == (0, 1)


def test_what_a_solver_prints_stays_out_of_our_output(capfd: pytest.CaptureFixture[str]) -> None:
    with quiet_output():
        os.write(1, b"words of another\n")
    os.write(1, b"ours\n")
    assert capfd.readouterr().out == "ours\n"
