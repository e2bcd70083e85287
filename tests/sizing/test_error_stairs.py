"""Codes as stairs, against the requantiser one sum at a time; and the scan over them."""

import random
from dataclasses import replace
from fractions import Fraction

import numpy as np
import pytest

from guardbit.arith.rounding import requantise
from guardbit.arith.words import clamp, wrap
from guardbit.model.enums import Overflow, Rounding
from guardbit.model.sizing import Interval
from guardbit.sizing.error.codes import codes_at
from guardbit.sizing.error.pixels import pixel_envelope, sum_range
from guardbit.sizing.error.scan import Scan
from guardbit.sizing.error.stairs import Stairs

from .small import pixels, to_output
from .test_error_envelope import random_inputs


def random_stairs(rng: random.Random, base: int, step: int, last: int) -> Stairs:
    """Return stairs with any rounding, overflow, register and clamp."""
    overflow = rng.choice(list(Overflow))
    r = to_output(
        rng.choice([-2, -1, 0, 1, 2, 3, 5, 64]),
        pixels(rng.randint(2, 5), rng.random() < 0.5, rng.choice([0, 0, 3])),
        rng.choice(list(Rounding)),
        overflow,
        rng.choice([1, 1, 3, 7, 12]),
    )
    preloaded = r.rounding is Rounding.TIES_TO_POSITIVE and rng.random() < 0.5
    word = (rng.randint(3, 7), rng.random() < 0.7) if rng.random() < 0.4 else None
    made = Stairs(r, preloaded, base, step, last, word)
    if word is None and rng.random() < 0.3:
        held = Interval(low := rng.randint(-20, 5), low + rng.randint(0, 30))
        return replace(made, moved=rng.randint(-4, 4), held=held)
    return made


def code_of(s: Stairs, n: int) -> int:
    total = s.base + s.step * n + s.moved
    if s.word:
        total = wrap(total, *s.word)
    if s.held:
        total = clamp(total, s.held.low, s.held.high)
    return requantise(s.requantiser, s.preloaded, total)


@pytest.mark.parametrize("seed", range(3))
def test_runs_have_the_requantisers_codes(seed: int) -> None:
    rng = random.Random(f"stairs{seed}")
    for _ in range(60):
        s = random_stairs(rng, rng.randint(-60, 10), rng.choice([1, 1, 2, 3, 6]), 50)
        codes = [code_of(s, n) for n in range(s.last + 1)]
        assert [s.code(n) for n in range(s.last + 1)] == codes
        many = codes_at(s, np.arange(s.last + 1))
        assert many is not None
        assert many.tolist() == codes
        limits = s.limits()
        assert limits.low <= min(codes)
        assert max(codes) <= limits.high
        for n in range(s.last + 1):
            run = s.run(n)
            assert 0 <= run.first <= n <= run.last <= s.last
            for at in (run.first, n, run.last):
                made = run.code if run.code is not None else s.rounded(run, at) + run.offset
                assert made == codes[at]


@pytest.mark.parametrize("rounding", list(Rounding))
def test_steps_against_every_value(rounding: Rounding) -> None:
    for divisor, shift, step in ((1, 2, 1), (1, 3, 3), (3, 0, 2), (7, -1, 1), (12, 1, 5)):
        s = Stairs(to_output(shift, pixels(8), rounding, divisor=divisor), False, -90, step, 200)
        run = replace(s.run(0), constant=s.ratio[0] * s.base, slope=s.ratio[0] * step)
        rounded = [s.rounded(run, n) for n in range(-100, 300)]
        for code in range(rounded[5], rounded[-5]):
            first = next(n for n, value in enumerate(rounded, -100) if value >= code)
            assert s.step_to(run, code) == first


def test_quiet_sums_are_those_that_wrap_nowhere() -> None:
    rng = random.Random("quiet")
    for _ in range(80):
        s = random_stairs(rng, rng.randint(-60, 10), rng.choice([1, 2, 3]), 40)
        if s.held is not None:
            continue
        calm = [n for n in range(s.last + 1) if is_calm(s, n)]
        assert s.quiet() == ((calm[0], calm[-1]) if calm else None)
        if calm:
            assert calm == list(range(calm[0], calm[-1] + 1))


def is_calm(s: Stairs, n: int) -> bool:
    total = s.base + s.step * n
    free = replace(s.requantiser, overflow=Overflow.FORBID)
    value = requantise(free, s.preloaded, total)
    if s.word and wrap(total, *s.word) != total:
        return False
    saturates = s.requantiser.overflow is Overflow.SATURATE
    return saturates or s.requantiser.to.low <= value <= s.requantiser.to.high


@pytest.mark.parametrize("seed", range(6))
@pytest.mark.parametrize("most_steps", [512, 1])
def test_a_scan_finds_the_greatest_of_all(
    seed: int, most_steps: int, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Also where only residues, or none at all, are gone through: then it is a bound."""
    monkeypatch.setattr("guardbit.sizing.error.stairs.MOST_STEPS", most_steps)
    rng = random.Random(f"scan{seed}")
    for _ in range(25):
        inputs, sign = random_inputs(rng, 5), rng.choice([1, -1])
        values = Interval(0, rng.randint(1, 9))
        step, ends = inputs.common, sum_range(inputs, values)
        last = (ends.high - ends.low) // step if step else 0
        stairs = replace(random_stairs(rng, ends.low, step, last), moved=0, held=None)
        legal = Interval(stairs.requantiser.to.low, stairs.requantiser.to.high)
        if stairs.requantiser.overflow is Overflow.FORBID:
            span = stairs.quiet()
        else:
            span = tuple(sorted(rng.randint(0, last) for _ in range(2)))  # type: ignore[assignment]
        if span is None:
            continue
        scan = Scan(sign, pixel_envelope(inputs, values, sign), stairs, legal, span)
        truth = max(scan.value(n) for n in range(span[0], span[1] + 1))
        found = scan.peak()
        assert found.attained == scan.value(found.n) <= truth <= found.value
        if most_steps > 1:
            assert found.value == truth
        else:
            assert found.value <= max(truth, Fraction(0)) + 2


def test_a_scan_that_is_cut_short_is_still_a_bound(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("guardbit.sizing.error.scan.MOST_PIECES", 1)
    rng = random.Random("short")
    for _ in range(20):
        inputs, values = random_inputs(rng, 6), Interval(0, 5)
        step, ends = inputs.common, sum_range(inputs, values)
        if not step:
            continue
        last = (ends.high - ends.low) // step
        r = to_output(2, pixels(4), Rounding.TIES_TO_EVEN, Overflow.WRAP)
        stairs = Stairs(r, False, ends.low, step, last, (4, True))
        scan = Scan(1, pixel_envelope(inputs, values, 1), stairs, Interval(0, 15), (0, last))
        assert max(scan.value(n) for n in range(last + 1)) <= scan.peak().value
