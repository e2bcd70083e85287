"""Random specs, four ways: compiled C, NumPy reference, plain-integer oracle, SciPy.

Where both sides accept a spec, frames are filtered by all four; SciPy's sums are compared where
no accumulator really saturates. Where one accepts what the other calls contradictory, that is a
mismatch too. Single taps are changed by one, to tell how many of such changes the frames show.
"""

from __future__ import annotations

import random
import shutil
import tempfile
from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass, field, replace
from itertools import islice
from pathlib import Path

import numpy as np

import oracle
import packaged
import randomspecs
from guardbit.arith.intervals import contains
from guardbit.arith.words import format_range
from guardbit.build.compilation import BuildError
from guardbit.build.compiler import find_compiler
from guardbit.build.library import compile_library
from guardbit.model.enums import Outside
from guardbit.model.filter import Filter
from guardbit.model.finding import SpecError
from guardbit.model.routine import Call, Codes, Outcome
from guardbit.plan.evaluate import PlanFaultError
from guardbit.reference.run import rejects, respond
from guardbit.verify.second import in_register, second_sums

BATCH = 50
UNSAFE = ("accumulator-", "code-out-of-range", "requantiser-over-64", "product-over-64")


@dataclass
class Tally:
    """What one batch did."""

    counts: Counter[str] = field(default_factory=Counter)
    refusals: Counter[str] = field(default_factory=Counter)
    mismatches: list[str] = field(default_factory=list)

    def add(self, other: Tally) -> None:
        """Take in another batch's tally."""
        self.counts += other.counts
        self.refusals += other.refusals
        self.mismatches += other.mismatches


@dataclass(frozen=True)
class Subject:
    """A spec that both sides accept, with its frames."""

    text: str
    contract: oracle.Contract
    made: packaged.Made
    images: list[oracle.Image]
    taps: oracle.Integers | None = None

    @property
    def filter(self) -> Filter:
        """The contract with the taps loaded."""
        f = self.made.sizing.filter
        found = f if self.taps is None else packaged.with_taps(f, self.taps)
        assert found is not None, "the package refuses taps that the oracle allows"
        return found

    def call(self, image: oracle.Image) -> Call:
        """The call of the compiled C."""
        taps = None if self.taps is None else packaged.cells_of(self.taps)
        return Call(packaged.codes(image), shape(self, image), taps=taps)


def subjects(
    rng: random.Random, label: str, frames: int, specs: int, tally: Tally
) -> Iterator[Subject]:
    """Yield the specs of one batch that both sides accept; count the others."""
    for number in range(specs):
        name = f"{label}n{number}"
        text = randomspecs.random_spec(rng, name)
        tally.counts["specs"] += 1
        try:
            contract = oracle.load(text)
        except oracle.ContradictionError:
            contract = None
        try:
            made = packaged.made(text, Path(), name)
        except SpecError as error:
            kinds = {f.kind for f in error.findings}
            tally.refusals.update(sorted(kinds))
            if contract is not None and not all(kind.startswith(UNSAFE) for kind in kinds):
                tally.mismatches.append(f"only the package refuses ({error}):\n{text}")
            continue
        except PlanFaultError as error:
            tally.mismatches.append(f"{error}:\n{text}")
            continue
        if contract is None:
            tally.mismatches.append(f"only the oracle refuses:\n{text}")
            continue
        images = list(islice(randomspecs.frames(rng, contract), frames))
        yield Subject(text, contract, made, images)
        if contract.registers is not None and contract.taps is not None:
            tally.counts["specs with registers"] += 1
            taps = randomspecs.random_loading(rng, contract.registers, contract.taps)
            other = oracle.load(text, taps=taps)
            yield Subject(text, other, made, images, taps)


def batch(seed: int, frames: int, specs: int = BATCH) -> Tally:
    """Return what a batch of specs did; `seed` decides everything."""
    tally = Tally()
    rng = random.Random(seed)
    chosen = list(subjects(rng, f"s{seed}", frames, specs, tally))
    folder = Path(tempfile.mkdtemp(prefix="guardbit-campaign-"))
    try:
        routines = list(dict.fromkeys(s.made.emission.routine for s in chosen))
        shared = compile_library(find_compiler(), routines, (), folder)
        tasks = [(s.made.emission.routine, s.call(image)) for s in chosen for image in s.images]
        outcomes = iter(shared.run(tasks))
        for s in chosen:
            judge(s, [next(outcomes) for _ in s.images], tally)
    except BuildError as error:
        files = {f.place.file or "" for f in error.findings}
        texts = "\n".join(s.text for s in chosen if f"{s.made.sizing.filter.name}.c" in files)
        tally.mismatches.append(f"{error}:\n{texts}")
    finally:
        shutil.rmtree(folder)
    return tally


def shape(s: Subject, image: oracle.Image) -> tuple[int, int]:
    """The output's size, as the oracle has it."""
    height, width = len(image), len(image[0])
    return (
        len(oracle.positions(s.contract, 0, height)),
        len(oracle.positions(s.contract, 1, width)),
    )


def judge(s: Subject, outcomes: list[Outcome], tally: Tally) -> None:
    """Compare all frames of a spec."""
    f = s.filter
    shown: set[tuple[int, int, int]] = set()
    for image, outcome in zip(s.images, outcomes, strict=True):
        tally.counts["frames"] += 1
        for complaint in compare(s, image, outcome, tally):
            tally.mismatches.append(f"{complaint}\n{image}\n{s.taps}\n{s.text}")
        shown |= noticed(f, image)
    taps = [
        (i, j) for i, p in enumerate(f.passes) for j, t in enumerate(p.kernel.terms) if t.integer
    ]
    tally.counts["tap changes"] += 2 * len(taps)
    tally.counts["tap changes noticed"] += len(shown)


def compare(s: Subject, image: oracle.Image, outcome: Outcome, tally: Tally) -> Iterator[str]:
    """Yield what differs on one frame."""
    f = s.filter
    frame = packaged.codes(image)
    if outcome.harm is not None:
        yield f"the C did harm: {outcome.harm} {outcome.detail}"
        return
    refused = oracle.rejects(s.contract, image)
    if rejects(f, frame) != refused or (outcome.statuses == (packaged.BAD_CODE,)) != refused:
        yield f"rejected by oracle: {refused}, status {outcome.statuses}"
        return
    if refused:
        tally.counts["frames rejected"] += 1
        return
    codes, sums = oracle.run(s.contract, image)
    response = respond(f, frame)
    if packaged.image_of(response.output) != codes:
        yield "reference and oracle differ in codes"
    if sums != (response.accumulators[-1].tolist() if response.output.size else []):
        yield "reference and oracle differ in sums"
    if outcome.statuses != (0,) or outcome.output is None:
        yield f"status {outcome.statuses}"
    elif response.output.size and not np.array_equal(outcome.output, response.output):
        yield f"C and reference differ: {outcome.output.tolist()} {response.output.tolist()}"
    to = f.output
    tally.counts["outputs"] += response.output.size
    tally.counts["outputs inside"] += int(
        np.count_nonzero((response.output > to.low) & (response.output < to.high))
    )
    held = s.made.sizing.registers[-1].held
    finals = response.accumulators[-1]
    legal = f.outside is not Outside.UNDEFINED or bool(
        np.all((frame >= f.input.low) & (frame <= f.input.high))
    )
    if finals.size and legal and not held.low <= finals.min() <= finals.max() <= held.high:
        yield f"sums leave what the sizing says, {held}"
    yield from by_scipy(s, frame, response.accumulators[-1], tally)


def by_scipy(s: Subject, frame: Codes, sums: object, tally: Tally) -> Iterator[str]:
    """Yield a complaint if SciPy's convolution gives other sums."""
    f = s.filter
    saturates = tuple(
        p.accumulator.overflow.value == "saturate"
        and not contains(format_range(r.bits, r.signed), r.partial)
        for p, r in zip(f.passes, s.made.sizing.registers, strict=True)
    )
    second = second_sums(f, frame, saturates)
    if second is None:
        return
    tally.counts["frames by SciPy"] += 1
    made = in_register(f.passes[-1], second.sums)
    if not np.array_equal(made[second.sure], np.asarray(sums)[second.sure]):
        yield "SciPy and reference differ in sums"


def noticed(f: Filter, image: oracle.Image) -> set[tuple[int, int, int]]:
    """The tap changes (pass, tap, by) that show in the frame's output."""
    frame = packaged.codes(image)
    plain = respond(f, frame).output
    found = set()
    for i, which in enumerate(f.passes):
        for j, term in enumerate(which.kernel.terms):
            for by in (1, -1) if term.integer else ():
                terms = list(which.kernel.terms)
                terms[j] = replace(term, integer=term.integer + by)
                passes = list(f.passes)
                passes[i] = replace(which, kernel=replace(which.kernel, terms=tuple(terms)))
                if not np.array_equal(
                    respond(replace(f, passes=tuple(passes)), frame).output, plain
                ):
                    found.add((i, j, by))
    return found
