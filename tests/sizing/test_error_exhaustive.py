"""The bound on the error against every frame of every legal size of small filters."""

import random
from collections.abc import Callable
from dataclasses import dataclass, replace
from fractions import Fraction
from math import lcm

import numpy as np
import pytest

from guardbit.model.enums import BorderMode, Extent, Grid, Rounding
from guardbit.model.filter import Border, Filter
from guardbit.model.sizing import ErrorBound
from guardbit.sizing.analyse import analyse
from guardbit.sizing.error.choices import Work

from .small import (
    Ints,
    Run,
    all_frames,
    axis,
    kept,
    kernel,
    pixels,
    run,
    single,
    sizes,
    source_values,
    to_output,
)
from .test_sizing_exhaustive import Bools, has_output, is_calm, random_double, random_single

MOST_FRAMES = 750


@dataclass
class Range:
    low: Fraction | None = None
    high: Fraction | None = None

    def add(self, errors: Ints, denominator: int) -> None:
        if len(errors):
            ends = [Fraction(int(e), denominator) for e in (errors.min(), errors.max())]
            self.low = min(ends[0] if self.low is None else self.low, ends[0])
            self.high = max(ends[1] if self.high is None else self.high, ends[1])


def truth(f: Filter) -> tuple[Range, Range] | None:
    """The errors of all frames where nothing wraps or is clamped, and all errors."""
    calm, every = Range(), Range()
    for size in sizes(f):
        if (f.input.high - f.input.low + 1) ** (size[0] * size[1]) > MOST_FRAMES:
            return None
        frames = all_frames(f, size)
        ran = run(f, frames, size)
        for place, (errors, unit) in enumerate(errors_of(f, frames, size, ran)):
            calm.add(errors[undisturbed(f, ran, place)], unit)
            every.add(errors, unit)
    return calm, every


def undisturbed(f: Filter, ran: Run, place: int) -> Bools:
    made = is_calm(f.passes[-1], ran.registers[-1][place])
    for seen in ran.registers[0] if len(f.passes) == 2 else ():
        made = made & is_calm(f.passes[0], seen)
    return made


def errors_of(f: Filter, frames: Ints, size: tuple[int, int], ran: Run) -> list[tuple[Ints, int]]:
    taps = [(0, 0, Fraction(2) ** (f.output.frac - f.input.frac))]
    for p in f.passes:
        taps = [(y + t.dy, x + t.dx, w * t.ideal) for y, x, w in taps for t in p.kernel.terms]
    unit = lcm(*(weight.denominator for _, _, weight in taps))
    made = []
    places = [
        (y, x)
        for y in kept(f, f.geometry.rows, size[0])
        for x in kept(f, f.geometry.columns, size[1])
    ]
    for i, (y, x) in enumerate(places):
        total = np.full(len(frames), f.output.pedestal * unit)
        for dy, dx, weight in taps:
            total += source_values(f, frames, size, y + dy, x + dx) * int(weight * unit)
        ideal = np.clip(total, f.output.low * unit, f.output.high * unit)
        made.append((ran.outputs[:, i] * unit - ideal, unit))
    return made


def holds(bound: tuple[Fraction, Fraction], errors: Range) -> bool:
    if errors.low is None or errors.high is None:
        return True
    return bound[0] <= errors.low and errors.high <= bound[1]


@dataclass
class Tightness:
    """How many ends were compared, attained as claimed, and attained at all."""

    ends: int = 0
    exact: int = 0
    attained: int = 0
    all_inputs: int = 0

    def compare(self, made: ErrorBound, calm: Range, every: Range) -> None:
        errors = calm if made.assumes_no_wrap else every
        assert holds((made.low, made.high), errors)
        if made.overall is not None:
            assert holds(made.overall, every)
            self.all_inputs += 1
        if errors.low is None:
            return
        attained = (errors.low == made.low) + (errors.high == made.high)
        self.ends += 2
        self.attained += attained
        if made.exact:
            assert attained == 2
            self.exact += 2


def compared(draw: Callable[[random.Random], Filter], name: str, count: int) -> Tightness:
    rng, found = random.Random(name), Tightness()
    for _ in range(count):
        f = draw(rng)
        made = analyse(f) if has_output(f) else None
        errors = truth(made.filter) if made else None
        if made and errors and errors[1].low is not None:
            # what two passes claim is for frames in which no result at all is disturbed
            if len(f.passes) == 2 and made.error.assumes_no_wrap:
                made = replace(made, error=replace(made.error, exact=False))
            found.compare(made.error, *errors)
    return found


@pytest.mark.parametrize("seed", range(3))
def test_one_pass_against_every_frame(seed: int) -> None:
    found = compared(random_single, f"errors{seed}", 90)
    assert found.exact > 0.8 * found.ends > 50
    assert found.all_inputs > 10


@pytest.mark.parametrize("seed", range(2))
def test_two_passes_against_every_frame(seed: int) -> None:
    found = compared(random_double, f"errors{seed}", 30)
    assert found.attained > 0.7 * found.ends > 15
    assert found.exact > 10


WAYS = [(random_single, 1), (random_double, 1), (random_double, 128)]


@pytest.mark.parametrize(("draw", "splits"), WAYS)
def test_bounds_over_real_pixels_hold_as_well(
    draw: Callable[[random.Random], Filter], splits: int, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Where the choices of integer pixels are too many to go through."""
    monkeypatch.setattr("guardbit.sizing.error.bound.WORK", Work(list=0, table=0))
    monkeypatch.setattr("guardbit.sizing.error.peaks.MOST_SPLITS", splits)
    found = compared(draw, "real", 25)
    assert found.ends > 15
    assert found.attained > 0.2 * found.ends


@pytest.mark.parametrize("walk", [0, 400])
def test_classes_that_are_walked_or_not(walk: int, monkeypatch: pytest.MonkeyPatch) -> None:
    """A constant outside the legal range, with the classes one by one, or one case for all."""
    monkeypatch.setattr("guardbit.sizing.error.inputs.WALK_CASES", walk)
    rng, exact = random.Random("walk"), 0
    for _ in range(25):
        taps = [[rng.randint(-3, 4) for _ in range(3)]]
        ideal = [[t + Fraction(rng.randint(-2, 2), 5) for t in taps[0]]]
        f = single(
            kernel(ideal, taps),
            pixels(4, legal=(1, 3)),
            axis(1, (1, 1)),
            axis(3, (1, 4)),
            Border(BorderMode.CONSTANT, rng.choice([0, 9, 15]), Grid.PIXEL),
            rng.choice([Extent.SAME, Extent.FULL]),
            requantiser=to_output(2, pixels(4, True), rng.choice(list(Rounding))),
        )
        made, errors = analyse(f).error, truth(analyse(f).filter)
        assert errors is not None
        assert holds((made.low, made.high), errors[1])
        exact += made.exact
        if made.exact:
            assert (made.low, made.high) == (errors[1].low, errors[1].high)
    assert exact == (25 if walk else 0)


@pytest.mark.parametrize("rounding", list(Rounding))
@pytest.mark.parametrize("mode", list(BorderMode))
def test_every_border_and_rounding(mode: BorderMode, rounding: Rounding) -> None:
    taps = [(1, 3), (2, -1)]
    ideal = [(Fraction(5, 4), Fraction(8, 3)), (Fraction(2), Fraction(-1, 2))]
    f = single(
        kernel(ideal, taps),
        pixels(3, pedestal=1, legal=(0, 4)),
        axis(2, (1, 2)),
        axis(2, (1, 2)),
        Border(mode, 2, Grid.PIXEL),
        Extent.FULL,
        requantiser=to_output(2, pixels(3, pedestal=2), rounding),
    )
    made, errors = analyse(f).error, truth(f)
    assert made.exact
    assert errors is not None
    assert (made.low, made.high) == (errors[1].low, errors[1].high)
