"""Published kernels fitted: their taps are known, so nothing may differ."""

from fractions import Fraction
from typing import Any

import pytest

from guardbit.fit.resolve import resolve
from guardbit.model.enums import First, FitRule, Operation
from guardbit.model.filter import Filter
from guardbit.model.spec import Auto

from .specs import integers, kernel, spec

AUTO = Auto.AUTO
CORRELATION = {"operation": Operation.CORRELATION}


def test_burt_adelson_is_the_binomial() -> None:
    """Burt and Adelson, IEEE Trans. Commun. 31(4) 1983 p. 533, a = 0.375."""
    a = Fraction(3, 8)
    line: list[Any] = [
        Fraction(1, 4) - a / 2,
        Fraction(1, 4),
        a,
        Fraction(1, 4),
        Fraction(1, 4) - a / 2,
    ]
    made = kernel(spec(column=line, row=line))
    assert made.frac == 8
    assert integers(made) == [a * b for a in (1, 4, 6, 4, 1) for b in (1, 4, 6, 4, 1)]
    apart = kernel(spec(column=line, row=line, coefficient={"frac": (AUTO, AUTO)}))
    assert (apart.frac, integers(apart)) == (8, integers(made))


HALF, THREE_HALVES = "1/2", "-3/2"
MALVAR = [
    ([[0, 0, -1, 0, 0], [0, 0, 2, 0, 0], [-1, 2, 4, 2, -1], [0, 0, 2, 0, 0], [0, 0, -1, 0, 0]], 3),
    (
        [
            [0, 0, HALF, 0, 0],
            [0, -1, 0, -1, 0],
            [-1, 4, 5, 4, -1],
            [0, -1, 0, -1, 0],
            [0, 0, HALF, 0, 0],
        ],
        4,
    ),
    (
        [
            [0, 0, THREE_HALVES, 0, 0],
            [0, 2, 0, 2, 0],
            [THREE_HALVES, 0, 6, 0, THREE_HALVES],
            [0, 2, 0, 2, 0],
            [0, 0, THREE_HALVES, 0, 0],
        ],
        4,
    ),
]


@pytest.mark.parametrize(("taps", "frac"), MALVAR)
@pytest.mark.parametrize("rule", [FitRule.NEAREST, FitRule.GAIN])
def test_malvar_kernels_are_exact(taps: list[list[Any]], frac: int, rule: FitRule) -> None:
    """Malvar, He and Cutler, ICASSP 2004, Fig. 2: taps over 8, some of them halves."""
    made = kernel(spec(taps, kernel={"divisor": (8,)}, coefficient={"fit": rule, "bits": 8}))
    assert made.frac == frac
    assert sum(integers(made)) == 2**frac
    assert all(term.integer == term.ideal * 2**frac for term in made.terms)


VP8 = [
    [0, -6, 123, 12, -1, 0],
    [2, -11, 108, 36, -8, 1],
    [0, -9, 93, 50, -6, 0],
    [3, -16, 77, 77, -16, 3],
]


@pytest.mark.parametrize("taps", VP8)
@pytest.mark.parametrize("rule", [FitRule.NEAREST, FitRule.GAIN])
def test_vp8_six_tap(taps: list[int], rule: FitRule) -> None:
    """RFC 6386 s.18.3: taps over 128, rounded and clamped to 8 bits after each pass."""
    made: Filter = resolve(
        spec(
            column=taps,
            row=taps,
            kernel={"divisor": (128, 128), "origin": (2, 2)},
            filter=CORRELATION,
            coefficient={"fit": rule, "bits": 8},
            intermediate={"first": First.HORIZONTAL, "bits": 8, "signed": False},
        )
    )
    first, second = made.passes
    wanted = [(k - 2, tap) for k, tap in enumerate(taps) if tap]
    assert [(term.dx, term.integer) for term in first.kernel.terms] == wanted
    assert [(term.dy, term.integer) for term in second.kernel.terms] == wanted
    assert [each.requantiser.exponent for each in made.passes] == [-7, -7]
