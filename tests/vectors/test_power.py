"""What the frames can show of a tap that is off by one, against trying everything."""

from itertools import product
from pathlib import Path

import numpy as np
import pytest

from guardbit.fit.resolve import resolve
from guardbit.model.filter import Filter
from guardbit.reference.run import respond
from guardbit.sizing.analyse import analyse
from guardbit.spec.reader import parse_spec
from guardbit.vectors.changes import SIGNS, changes, single_channels, taps, with_tap
from guardbit.vectors.classes import labels, lengths, named, sites
from guardbit.vectors.hidden import COARSE, PEDESTAL, SEARCHED
from guardbit.vectors.power import measure_power
from guardbit.vectors.stimuli import level, random_frame

BINOMIAL = (
    "taps = [[1,4,6,4,1],[4,16,24,16,4],[6,24,36,24,6],[4,16,24,16,4],[1,4,6,4,1]]\ndivisor = 256"
)


def filter_of(kernel: str, rest: str = "") -> Filter:
    head = "" if "[input]" in rest else "[input]\nbits = 8\n"
    text = f'[filter]\nname = "trial"\n[kernel]\n{kernel}\n{head}{rest}\n'
    return analyse(resolve(parse_spec(text, "trial.toml", Path()))).filter


def test_classes_of_three_taps() -> None:
    f = filter_of("taps = [[1, 2, 1]]")
    assert labels(f, 1, 1) == ((1, 1),)
    assert labels(f, 1, 2) == ((1, 0), (0, 1))
    assert labels(f, 1, 4) == ((1, 0), (0, 0), (0, 0), (0, 1))
    assert {s.label for s in sites(f, 1, lengths(f, 1, 99))} == {(1, 1), (1, 0), (0, 1), (0, 0)}
    assert labels(f, 0, 3) == ((0, 0),) * 3


def test_classes_have_names() -> None:
    assert named(((0, 0), (0, 0))) == "interior"
    assert named(((2, 0), (0, 1))) == "reads outside: 2 rows above, 1 column to the right"


def test_a_bare_unit_impulse_shows_nothing_and_the_frames_show_all() -> None:
    f = filter_of(BINOMIAL, '[border]\nmode = "replicate"')
    impulse = np.zeros((9, 9, 1), np.int64)
    impulse[4, 4] = 1
    quiet = respond(f, impulse).output
    for tap in taps(f):
        assert np.array_equal(
            respond(with_tap(f, tap, tap.term.integer + 1), impulse).output, quiet
        )
    power = measure_power(f)
    assert (power.taps, power.classes, power.checks) == (25, 81, 25 * 81 * 2)
    assert power.shown == power.checks


def test_taps_that_read_the_pedestal_are_unobservable() -> None:
    power = measure_power(filter_of(BINOMIAL))
    # taps inside, summed over the nine classes of an axis: 5 + 2*4 + 3*3 + 2*2 + 1
    assert power.shown == 2 * 27**2
    assert power.unobservable == ((PEDESTAL, 2 * (2025 - 27**2)),)
    assert power.not_shown_count == 0


def test_a_constant_beside_the_pedestal_is_observable() -> None:
    power = measure_power(filter_of(BINOMIAL, '[border]\nmode = "constant"\nvalue = 200'))
    assert power.shown == power.checks


CASES = {
    "exact": ("taps = [[1, 2, 1]]\ndivisor = 4", '[border]\nmode = "replicate"'),
    "negative": ("taps = [[-1, 3, -1]]\ndivisor = 4", '[border]\nmode = "half-sample"'),
    "coarse": ("taps = [[8, 16, 8]]\ndivisor = 32", '[border]\nmode = "replicate"'),
    "even box": ("taps = [[3, 5]]\ndivisor = 8", '[border]\nmode = "whole-sample"'),
    "periodic": ("taps = [[1, 1, 1]]\ndivisor = 3", '[border]\nmode = "periodic"'),
    "constant": ("taps = [[2, 1, 2]]\ndivisor = 8", ""),
    "constant one": ("taps = [[2, 4, 2]]\ndivisor = 8", "[border]\nvalue = 1"),
    "away": (
        "taps = [[2, -4, 6]]\ndivisor = 8",
        '[output]\nsigned = true\nrounding = "ties-to-away"\n[border]\nmode = "replicate"',
    ),
    "even": (
        "taps = [[2, -4, 6]]\ndivisor = 8",
        '[output]\nsigned = true\nrounding = "ties-to-even"\n[border]\nmode = "replicate"',
    ),
    "zero": (
        "taps = [[2, -6, 2]]\ndivisor = 8",
        '[output]\nsigned = true\nrounding = "toward-zero"\n[border]\nmode = "replicate"',
    ),
    "pedestal": (
        "taps = [[4, -8, 4]]\ndivisor = 8",
        "pedestal = 3\n[output]\nsigned = true\n[border]\nvalue = 5",
    ),
    "wrapping": (
        "taps = [[2, 4, 2]]\ndivisor = 4",
        '[accumulator]\nbits = 5\noverflow = "wrap"\n[border]\nmode = "replicate"',
    ),
    "clamping": (
        "taps = [[1, 2, 1]]\ndivisor = 4",
        '[accumulator]\nbits = 5\noverflow = "saturate"\n[border]\nmode = "replicate"',
    ),
}


@pytest.mark.parametrize("name", CASES)
def test_power_is_the_truth_for_a_format_small_enough_to_try_all(name: str) -> None:
    kernel, border = CASES[name]
    coefficient = '[coefficient]\nscale = "exact"' if name == "periodic" else ""
    sizes = "[image]\nheight = [1, 1]\nwidth = [1, 4]"
    f = filter_of(kernel, f"[input]\nbits = 3\n{border}\n{coefficient}\n{sizes}")
    power = measure_power(f)
    truth = observable(f)
    assert power.shown == len(truth)
    if name != "clamping":  # larger frames are not tried one by one there
        assert power.not_shown_count == 0
    assert power.checks == power.not_shown_count + power.shown + sum(
        count for _, count in power.unobservable
    )
    if name == "coarse":
        assert {why for why, _ in power.unobservable} <= {COARSE, SEARCHED}


def observable(f: Filter) -> set[tuple[object, ...]]:
    """Return the (tap, sign, class) that some frame of width 1 to 4 shows, by trying all."""
    found: set[tuple[object, ...]] = set()
    for width in (1, 2, 3, 4):
        frames = np.array(list(product(range(8), repeat=width))).T.reshape(1, width, -1)
        wide = single_channels(f, frames.shape[2])
        plain = respond(wide, frames).output
        for tap, sign in product(taps(f), SIGNS):
            other = respond(with_tap(wide, tap, tap.term.integer + sign), frames).output
            shown = (other != plain).any(axis=(0, 2))
            names = np.array([str(label) for label in labels(f, 1, width)])
            found |= {(tap.term.dx, sign, str(n)) for n in names[shown]}
    return found


def test_both_ways_to_change_a_tap_agree() -> None:
    f = filter_of(BINOMIAL, '[border]\nmode = "periodic"')
    rng = np.random.default_rng(3)
    stack = np.concatenate([random_frame(f, (6, 7), rng, level(f)) for _ in range(5)], axis=2)
    wide = single_channels(f, 5)
    at = tuple(np.indices((6, 7)).reshape(2, -1))
    fast = list(changes(wide, stack, respond(wide, stack), taps(f), (at[0], at[1])))
    for tap, changed in zip(taps(f), fast, strict=True):
        for sign, one in zip(SIGNS, changed, strict=True):
            other = respond(with_tap(wide, tap, tap.term.integer + sign), stack).output
            assert np.array_equal((other != respond(wide, stack).output).reshape(42, 5), one)


TWO_PASSES = """
[input]
bits = 8
[coefficient]
frac = [4, 4]
[intermediate]
bits = 8
signed = false
[border]
mode = "replicate"
"""


def test_two_passes_and_saturation_are_measured_by_running_the_changed_filter() -> None:
    kernel = "column = [1, 4, 6, 4, 1]\nrow = [1, 4, 6, 4, 1]\ndivisor = [16, 16]"
    two = measure_power(filter_of(kernel, TWO_PASSES))
    assert (two.taps, two.classes) == (10, 81)
    assert two.shown == two.checks
    clamped = '[accumulator]\nbits = 16\noverflow = "saturate"\n[border]\nmode = "replicate"'
    one = measure_power(filter_of(BINOMIAL, clamped))
    # of an image of one pixel the clamped sum hides every change: all 256 codes were tried
    assert one.unobservable == ((SEARCHED, 50),)
    assert one.shown == one.checks - 50


def test_a_large_kernel_is_sampled_and_says_so() -> None:
    rows = ["[" + ", ".join(["1"] * 31) + "]"] * 31
    power = measure_power(filter_of(f"taps = [{', '.join(rows)}]\ndivisor = 1024"))
    assert power.checks <= 125_000
    assert any("border classes" in note for note in power.notes)
    assert power.shown > 0


def test_a_kernel_of_zeros_has_no_taps_and_frames_all_the_same() -> None:
    power = measure_power(filter_of("taps = [[0, 0]]"))
    assert (power.taps, power.checks, power.shown) == (0, 0, 0)
    assert power.stimuli
