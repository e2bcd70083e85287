"""Rung: the values that reach a requantiser, through its compiled tail."""

from dataclasses import dataclass, replace

import numpy as np

from guardbit.arith.rounding import limit, ratio, requantise, unlimited
from guardbit.model.certificate import Figure, RungResult
from guardbit.model.enums import Overflow, Preload
from guardbit.model.filter import Requantiser
from guardbit.model.finding import Finding, Place, finding
from guardbit.model.routine import Codes, Probe, Runner
from guardbit.model.sizing import Interval
from guardbit.reference.requantise import requantise as reference_requantise
from guardbit.verify.bench import Bench

NAME = "requantiser"
ALL = 1 << 24
_MOST_STEPS = 1 << 15
_SAMPLE = 1 << 16
_MOST_RUNS = 1 << 16
_SEED = 16_180


@dataclass(frozen=True, eq=False)
class Arguments:
    """The arguments given to one tail; `complete` if they are all that can reach it."""

    values: Codes
    complete: bool
    note: str


def arguments(probe: Probe, r: Requantiser, most: int = ALL) -> Arguments:
    """Return all arguments of a probe if they are fewer than `most`, else those that matter.

    These are the ends, both sides of every multiple of half an output step inside the output
    range (a sample of them if there are too many), and a random sample.
    """
    low, high = probe.argument.low, probe.argument.high
    if high - low < most:
        return Arguments(np.arange(low, high + 1, dtype=np.int64), True, "")
    centres, note = _half_steps(r, low, high)
    rng = np.random.default_rng(_SEED)
    near = np.concatenate([centres + k for k in (-2, -1, 0, 1, 2)])
    ends = np.array([low, low + 1, -1, 0, 1, high - 1, high], object)
    picked = rng.integers(low, high, _SAMPLE, np.int64, endpoint=True)
    values = np.concatenate([near, ends, picked.astype(object)])
    legal = values[(values >= low) & (values <= high)]
    return Arguments(np.unique(legal.astype(np.int64)), False, note)


def _half_steps(r: Requantiser, low: int, high: int) -> tuple[Codes, str]:
    """Return where the exact output is a multiple of one half, and a note if sampled."""
    up, down = ratio(r)
    codes = (r.to.low - r.to.pedestal - 1, r.to.high - r.to.pedestal + 1)
    first = max(2 * codes[0], low * 2 * up // down - 1)
    last = min(2 * codes[1], high * 2 * up // down + 1)
    if first > last:
        return np.array([], object), "no rounding boundary lies inside the output range"
    count = last - first + 1
    if count <= 2 * _MOST_STEPS:
        halves = np.arange(count, dtype=object) + first
        note = f"of {high - low + 1} values: every rounding boundary, and {_SAMPLE} at random"
    else:
        rng = np.random.default_rng(_SEED)
        steps = rng.integers(0, count, 2 * _MOST_STEPS, np.uint64).astype(object)
        halves = steps + first
        note = (
            f"of {high - low + 1} values: {2 * _MOST_STEPS} of {count} rounding boundaries, "
            f"and {_SAMPLE} values, at random"
        )
    return halves * down // (2 * up), note


def result(bench: Bench, runner: Runner) -> RungResult:
    """Return whether each compiled tail agrees with the scalar statement of the requantiser."""
    if not bench.probes:
        why = "the routine offers no function of its own for the requantiser"
        return RungResult(NAME, False, 0, (), (why,), (), ())
    cases, covered, notes, found = 0, [], [], []
    for probe in bench.probes:
        r = bench.filter.passes[probe.requantiser].requantiser
        given = arguments(legal(bench, probe), r)
        wrong = check(probe, r, given.values, runner)
        cases += given.values.size
        what = "all" if given.complete else f"{given.values.size} of the"
        argument = legal(bench, probe).argument
        span = f"{argument.low} to {argument.high}"
        covered.append(f"{probe.function}: {what} arguments {span}")
        notes += [f"{probe.function}, {given.note}"] if given.note else []
        found += wrong
    figures = (Figure("arguments given to compiled requantisers", cases),)
    return RungResult(NAME, True, cases, tuple(covered), tuple(notes), figures, tuple(found))


def legal(bench: Bench, probe: Probe) -> Probe:
    """Return the probe with the arguments that legal frames give, where only these count.

    An output whose overflow is forbidden is specified for them alone.
    """
    sized = bench.sizing.requantisers[probe.requantiser].argument
    if bench.filter.passes[probe.requantiser].requantiser.overflow is not Overflow.FORBID:
        return probe
    low, high = max(sized.low, probe.argument.low), min(sized.high, probe.argument.high)
    return replace(probe, argument=Interval(low, high))


def check(probe: Probe, r: Requantiser, values: Codes, runner: Runner) -> list[Finding]:
    """Return findings for a probe's results on ascending distinct arguments: the first one."""
    answer = runner.probe(probe, values)
    place = Place(probe.source)
    if answer.harm is not None:
        reached = answer.values.size
        return [
            finding(
                "probe-harm",
                place,
                runner=runner.name,
                harm=answer.harm,
                argument=int(values[reached]),
                detail=answer.detail,
            )
        ]
    wrong = first_wrong(probe, r, values, answer.values)
    if wrong is None:
        return []
    at, expected = wrong
    return [
        finding(
            "requantiser-differs",
            place,
            runner=runner.name,
            argument=int(values[at]),
            expected=expected,
            got=int(answer.values[at]),
        )
    ]


def first_wrong(probe: Probe, r: Requantiser, values: Codes, got: Codes) -> tuple[int, int] | None:
    """Return (index, expected) of a wrong result, None if all are right. `values` ascend.

    Where the results are constant over a run, the ends of the run are computed: rounding is
    monotone, so that an unlimited value that is the same at both ends is the same between;
    and so is a clamped one. An output that wraps is looked at in halves until that holds.
    """
    if not got.size:
        return None
    starts = np.concatenate([[0], np.flatnonzero(np.diff(got)) + 1])
    if starts.size > _MOST_RUNS:
        return _wrong_in_many(probe, r, values, got)
    ends = np.concatenate([starts[1:], [got.size]]) - 1
    for first, last in zip(starts.tolist(), ends.tolist(), strict=True):
        wrong = _wrong_in_run(probe, r, values, got, (first, last))
        if wrong is not None:
            return wrong
    return None


def _wrong_in_many(
    probe: Probe, r: Requantiser, values: Codes, got: Codes
) -> tuple[int, int] | None:
    """Return as above, by the reference for all values, and as scalars for a sample."""
    preload = Preload.ROUNDING if probe.preloaded else Preload.ZERO
    wrong = np.flatnonzero(reference_requantise(r, preload, values) - probe.remove != got)
    rng = np.random.default_rng(_SEED)
    sample = rng.integers(0, got.size, _MOST_RUNS)
    for at in (*wrong[:1].tolist(), *sample.tolist()):
        expected = requantise(r, probe.preloaded, int(values[at])) - probe.remove
        if expected != int(got[at]):
            return at, expected
    return None


def _wrong_in_run(
    probe: Probe, r: Requantiser, values: Codes, got: Codes, run: tuple[int, int]
) -> tuple[int, int] | None:
    waiting = [run]
    while waiting:
        first, last = waiting.pop()
        rounded = [unlimited(r, probe.preloaded, int(values[at])) for at in (first, last)]
        for at, value in zip((first, last), rounded, strict=True):
            expected = limit(r, value) - probe.remove
            if expected != int(got[at]):
                return at, expected
        turns = r.overflow is not Overflow.SATURATE and rounded[0] != rounded[1]
        if turns and last - first > 1:
            middle = (first + last) // 2
            waiting += [(middle, last), (first, middle)]
    return None
