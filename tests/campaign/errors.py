"""The bound on the error against adversarial frames, over random specs.

    python tests/campaign/errors.py [--specs 5000] [--seed errors] [--show 10]

For each spec a search makes frames with as great an error as it can (study.adversary), and some
random frames are added. A frame beyond the bound is a violation: exit status 1. How tight the
bound is says the tightness, largest error found over bound; its quantiles are printed, for one
pass and for two, with the specs at which it is least.
"""

from __future__ import annotations

import argparse
import random
import sys
from collections import Counter
from dataclasses import dataclass, field
from fractions import Fraction
from pathlib import Path
from time import monotonic

import numpy as np

sys.path.insert(0, str(Path(__file__).parents[1]))

import randomspecs
from guardbit.arith.borders import positions
from guardbit.fit.resolve import resolve
from guardbit.model.filter import Axis, Filter
from guardbit.model.finding import SpecError
from guardbit.model.sizing import Sizing
from guardbit.sizing.analyse import analyse, unmet
from guardbit.spec.reader import parse_spec
from guardbit.study.adversary.attempt import Attempt, attempt
from guardbit.study.adversary.search import adversary

QUANTILES = (0.0, 0.001, 0.01, 0.05, 0.1, 0.25, 0.5)
WANTED = 0.95
RANDOM_FRAMES = 2


@dataclass(frozen=True)
class Sample:
    """One spec: how tight its bound is, and whether the frames kept to it."""

    text: str
    passes: int
    acts: bool
    calm: bool
    tightness: float
    violations: int
    exact: bool
    size_seconds: float
    search_seconds: float


@dataclass
class Tally:
    """The samples of a campaign."""

    samples: list[Sample] = field(default_factory=list)
    counts: Counter[str] = field(default_factory=Counter)


def sample(rng: random.Random, text: str) -> Sample | None:
    """Return what one spec gives; None if it has no output, or is refused."""
    began = monotonic()
    try:
        sizing = analyse(resolve(parse_spec(text, "case.toml", Path())))
    except SpecError:
        return None
    if unmet(sizing):
        return None
    sized = monotonic()
    f = sizing.filter
    found = [Attempt(w.error, w.calm) for w in adversary(sizing)]
    attempts = found + [a for _ in range(RANDOM_FRAMES) for a in random_attempts(rng, f)]
    if not found:
        return None
    return Sample(
        text,
        len(f.passes),
        sizing.error.assumes_no_wrap,
        any(a.calm for a in attempts),
        tightness(sizing, found),
        sum(is_beyond(sizing, a) for a in attempts),
        sizing.error.exact,
        sized - began,
        monotonic() - sized,
    )


def tightness(sizing: Sizing, found: list[Attempt]) -> float:
    """Return the largest error found over the bound, both in magnitude; 1 if both are 0."""
    errors = [abs(a.error) for a in found if a.calm or not sizing.error.assumes_no_wrap]
    bound = max(abs(sizing.error.low), abs(sizing.error.high))
    largest = max(errors, default=Fraction(0))
    return float(largest / bound) if bound else float(not largest)


def is_beyond(sizing: Sizing, found: Attempt) -> bool:
    """Return whether an error breaks the bound that holds for it."""
    bound, ends = sizing.error, []
    if found.calm or not bound.assumes_no_wrap:
        ends.append((bound.low, bound.high))
    if bound.overall is not None:
        ends.append(bound.overall)
    return any(not low <= found.error <= high for low, high in ends)


def random_attempts(rng: random.Random, f: Filter) -> list[Attempt]:
    """Return what a random frame gives at a random position, if it has one."""
    axes = (f.geometry.rows, f.geometry.columns)
    size = [rng.randint(axis.sizes[0], min(axis.sizes[1], axis.sizes[0] + 12)) for axis in axes]
    places = [kept(f, axis, n) for axis, n in zip(axes, size, strict=True)]
    if not all(places):
        return []
    codes = [f.input.low, f.input.high] if rng.random() < 0.5 else None
    frame = np.array(
        [
            [[rng.choice(codes) if codes else rng.randint(f.input.low, f.input.high)]
             for _ in range(size[1])]
            for _ in range(size[0])
        ],
        dtype=np.int64,
    )  # fmt: skip
    return [attempt(f, frame, (rng.choice(places[0]), rng.choice(places[1])))]


def kept(f: Filter, axis: Axis, length: int) -> range:
    """Return the output positions along an axis."""
    return positions(axis, f.geometry.extent, length)


def report(tally: Tally, show: int) -> None:
    """Print the figures."""
    samples = tally.samples
    print(f"{tally.counts['drawn']} specs drawn, {len(samples)} sized and searched")
    for passes, acts in ((1, False), (1, True), (2, False), (2, True)):
        every = [s for s in samples if (s.passes, s.acts) == (passes, acts)]
        some = [s for s in every if s.calm]
        if not some:
            continue
        values = np.array([s.tightness for s in some])
        marks = ", ".join(
            f"{100 * q:g} %: {v:.4f}"
            for q, v in zip(QUANTILES, np.quantile(values, QUANTILES), strict=True)
        )
        what = "in inputs with which nothing wraps or is clamped" if acts else "in all inputs"
        print(f"passes {passes}, {what}: {len(some)} specs, tightness at quantiles {marks}")
        print(
            f"    {np.mean(values >= WANTED):.4f} of them at least {WANTED}, "
            f"{sum(s.exact for s in some)} bounds attained as proved, "
            f"{len(every) - len(some)} without such a frame"
        )
    slowest = max(samples, key=lambda s: s.size_seconds)
    print(f"slowest sizing {slowest.size_seconds:.2f} s")
    print(f"violations: {sum(s.violations for s in samples)}")
    loose = sorted((s for s in samples if s.passes == 1 and s.calm), key=lambda s: s.tightness)
    for s in [*(s for s in samples if s.violations), *loose][:show]:
        print(f"--- {s.passes} passes, tightness {s.tightness:.4f}, violations {s.violations}")
        print(s.text)


def main() -> int:
    """Run the campaign and return the exit status."""
    parser = argparse.ArgumentParser(description="error bounds against adversarial frames")
    parser.add_argument("--specs", type=int, default=5000)
    parser.add_argument("--seed", default="errors")
    parser.add_argument("--show", type=int, default=0, help="specs to print")
    options = parser.parse_args()
    began, tally = monotonic(), Tally()
    while len(tally.samples) < options.specs:
        number = tally.counts["drawn"]
        rng = random.Random(f"{options.seed}{number}")
        tally.counts["drawn"] += 1
        made = sample(rng, randomspecs.random_spec(rng, f"e{number}"))
        if made is not None:
            tally.samples.append(made)
    report(tally, options.show)
    print(f"{monotonic() - began:.0f} s")
    return 1 if any(s.violations for s in tally.samples) else 0


if __name__ == "__main__":
    sys.exit(main())
