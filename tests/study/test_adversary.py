"""Frames with great errors: never beyond the bound, and close to it."""

import random
from dataclasses import replace
from fractions import Fraction
from pathlib import Path

import numpy as np
import pytest

from guardbit.fit.resolve import resolve
from guardbit.model.sizing import End, Sizing
from guardbit.sizing.analyse import analyse
from guardbit.spec.reader import parse_spec, read_spec
from guardbit.study.adversary.attempt import attempt, ideal_code
from guardbit.study.adversary.nudges import Option, Stage, Window, repeated
from guardbit.study.adversary.search import adversary

EXAMPLES = sorted((Path(__file__).parents[2] / "examples").glob("*.toml"))
HEAD = '[filter]\nname = "one"\n'


def sized(tables: str) -> Sizing:
    return analyse(resolve(parse_spec(HEAD + tables, "one.toml", Path())))


def tightness(sizing: Sizing) -> list[float]:
    """Assert what no frame may break; return how close both ends are."""
    found = adversary(sizing)
    assert [worst.end for worst in found] == [End.LEAST, End.GREATEST]
    f = sizing.filter
    for worst in found:
        assert worst.calm
        assert sizing.error.low <= worst.error <= sizing.error.high
        assert f.input.low <= worst.frame.min() <= worst.frame.max() <= f.input.high
        assert attempt(f, worst.frame, worst.position).error == worst.error
        if sizing.error.exact:
            assert worst.error == worst.bound
    return [float(worst.tightness) for worst in found]


@pytest.mark.parametrize("path", EXAMPLES, ids=lambda path: path.stem)
def test_bounds_of_the_examples_are_tight(path: Path) -> None:
    sizing = analyse(resolve(read_spec(path)))
    wanted = 0.95 if len(sizing.filter.passes) == 1 else 0.5
    assert min(tightness(sizing)) >= wanted


SIX = "[3, -16, 77, 77, -16, 3]"
EIGHT = "[-1, 4, -11, 40, 40, -11, 4, -1]"


@pytest.mark.parametrize(
    ("name", "tables", "wanted"),
    [
        (
            "VP8 half-sample, one pass (RFC 6386 s.18.3)",
            f"[kernel]\ntaps = [{SIX}]\ndivisor = 128\n[input]\nbits = 8\n",
            1.0,
        ),
        (
            "VP8 half-sample, two passes, clamped after both (RFC 6386 s.18.3)",
            f"[kernel]\ncolumn = {SIX}\nrow = {SIX}\ndivisor = [128, 128]\n[input]\nbits = 8\n"
            "[intermediate]\nbits = 8\nfirst = 'horizontal'\n",
            0.5,
        ),
        (
            "H.265 luma half-sample at 10 bits, floors without offset (clause 8.5.3.3.3)",
            f"[kernel]\ncolumn = {EIGHT}\nrow = {EIGHT}\ndivisor = [64, 64]\n[input]\nbits = 10\n"
            "[intermediate]\nbits = 16\nsigned = true\nfrac = 4\nrounding = 'toward-negative'\n"
            "first = 'horizontal'\n[output]\nbits = 16\nsigned = true\nfrac = 4\n"
            "rounding = 'toward-negative'\n",
            0.9,
        ),
        (
            "a Gaussian of irrational taps",
            "[kernel]\nformula = 'gaussian'\nsize = 5\nsigma = 1.1\n[input]\nbits = 8\n"
            "[coefficient]\nbits = 8\n",
            0.99,
        ),
        (
            "sums further apart than any window",
            "[kernel]\ntaps = [[0.31, -0.72, 0.55], [0.2, 0.61, -0.4], [0.9, 0.13, 0.77]]\n"
            "[input]\nbits = 12\n[coefficient]\nbits = 24\n[output]\nbits = 16\nsigned = true\n",
            0.99,
        ),
        (
            "a register that wraps",
            "[kernel]\ntaps = [[5, 9, 5]]\ndivisor = 16\n[input]\nbits = 8\n"
            "[accumulator]\nbits = 11\noverflow = 'wrap'\n",
            0.95,
        ),
    ],
    ids=lambda value: value if isinstance(value, str) and "\n" not in value else "",
)
def test_bounds_of_known_filters_are_tight(name: str, tables: str, wanted: float) -> None:
    assert min(tightness(sized(tables))) >= wanted


def test_many_taps() -> None:
    """961 taps that differ: more than a window or a sample changes."""
    rng = random.Random("many")
    taps = [[round(rng.uniform(-1, 2), 3) for _ in range(31)] for _ in range(31)]
    sizing = sized(
        f"[kernel]\ntaps = {taps}\ndivisor = 'sum'\n[input]\nbits = 8\n[coefficient]\nbits = 10\n"
    )
    assert min(tightness(sizing)) > 0.95


def test_a_constant_outside_the_range_is_a_class_of_its_own() -> None:
    sizing = sized(
        "[kernel]\ntaps = [[1, 2, 4]]\ndivisor = 7\n[input]\nbits = 8\nrange = [100, 120]\n"
        "[coefficient]\nbits = 4\n[border]\nmode = 'constant'\nvalue = 255\n"
    )
    assert sizing.error.exact
    assert tightness(sizing) == [1.0, 1.0]


def test_frames_that_clamp_no_partial_sum() -> None:
    """The register holds a quarter of what sums can be: most pixels clamp it on the way."""
    sizing = sized(
        "[kernel]\ntaps = [[5, -7, 9, 4]]\ndivisor = 16\n[input]\nbits = 8\n"
        "[coefficient]\nfrac = 4\n[output]\nsigned = true\n"
        "[accumulator]\nbits = 11\noverflow = 'saturate'\n"
    )
    assert sizing.error.assumes_no_wrap
    assert not sizing.error.exact
    assert min(tightness(sizing)) > 0.9


def test_no_image_has_an_interior() -> None:
    sizing = sized(
        "[kernel]\ntaps = [[1, 2, 3, 2, 1]]\ndivisor = 9\n[input]\nbits = 8\n"
        "[coefficient]\nbits = 8\n[border]\nmode = 'whole-sample'\n[image]\nwidth = [2, 4]\n"
    )
    assert sizing.error.exact
    assert tightness(sizing) == [1.0, 1.0]


def test_an_attempt_against_plain_fractions() -> None:
    sizing = sized("[kernel]\ntaps = [[1, 3]]\ndivisor = 8\n[input]\nbits = 8\npedestal = 16\n")
    frame = np.array([[[200], [33]]])
    # convolution: 1 * x[0, 1] + 3 * x[0, 0], over 8
    ideal = Fraction((33 - 16) + 3 * (200 - 16), 8)
    assert ideal_code(sizing.filter, frame, (0, 1)) == ideal
    made = attempt(sizing.filter, frame, (0, 1))
    assert made.calm
    assert made.error == int(ideal + Fraction(1, 2)) - ideal


def test_an_attempt_tells_where_a_register_wraps() -> None:
    sizing = sized(
        "[kernel]\ntaps = [[4]]\n[input]\nbits = 8\n[output]\nbits = 10\n"
        "[coefficient]\nfrac = 0\n[accumulator]\nbits = 9\noverflow = 'wrap'\n"
    )
    made = [attempt(sizing.filter, np.array([[[code]]]), (0, 0)) for code in (63, 64)]
    # 256 is read as -256, whose code is clamped to 0
    assert [(one.calm, int(one.error)) for one in made] == [(True, 0), (False, -256)]


def test_a_window_finds_the_cheapest_changes() -> None:
    """Against all choices of -2..3 times (3, 5) and 0..1 times (-2, 1)."""
    stages = [*repeated(0, 3, 5, 3), *repeated(0, 3, 5, -2), Stage(1, (Option(1, -2, 1),))]
    window = Window.of(stages, 12)
    for change in range(-12, 13):
        costs = [5 * a + b for a in range(-2, 4) for b in (0, 1) if 3 * a - 2 * b == change]
        found = int(window.costs[change + 12])
        assert found == min(costs) if costs else found > 1 << 59
        if costs:
            made = window.changes(change)
            assert 3 * made.get(0, 0) - 2 * made.get(1, 0) == change


def test_a_tightness_of_an_error_of_nothing() -> None:
    worst = adversary(sized("[kernel]\ntaps = [[1]]\n[input]\nbits = 4\n"))[1]
    assert worst.tightness == 1
    assert replace(worst, bound=Fraction(1, 2)).tightness == 0
