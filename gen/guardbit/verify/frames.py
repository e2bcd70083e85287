"""Rung: structured, random and real frames against the reference, and that against SciPy."""

from dataclasses import dataclass

import numpy as np

from guardbit.arith.intervals import contains
from guardbit.model.certificate import Figure, RungResult
from guardbit.model.enums import Outside, Overflow
from guardbit.model.filter import Filter
from guardbit.model.finding import Finding, finding
from guardbit.model.vectors import Purpose, Vector
from guardbit.verify.bench import Bench, Trials, with_loads
from guardbit.verify.cases import Case
from guardbit.verify.compare import findings
from guardbit.verify.second import in_register, register, requantised, second_sums
from guardbit.verify.typing import Array
from guardbit.verify.wording import left_out, percent

NAME = "frames"
_MOST_WORK = 1 << 28


@dataclass(frozen=True)
class _Agreement:
    """How the reference compares with the second statements of the arithmetic."""

    confirmed: int
    unsure: int
    skipped: int
    requantised: int
    findings: tuple[Finding, ...]


def cases(bench: Bench) -> list[Case]:
    """Return a case per frame; every third has gaps between rows."""
    return with_loads(bench, bench.frames, [load.frames for load in bench.loads])


def result(bench: Bench, trials: Trials) -> RungResult:
    """Return what the routine made of the frames, and whether SciPy confirms the reference."""
    found, failed, left = findings(bench, trials)
    agreement = _agreement(bench)
    inside, outputs = _inside(bench)
    return RungResult(
        NAME,
        ran=True,
        cases=trials.made,
        covered=_covered(bench, agreement),
        not_covered=(*_not_covered(bench, agreement), *left_out(left)),
        figures=(
            Figure("output values compared", outputs),
            Figure("outputs strictly inside the range", percent(inside, outputs), "%"),
            Figure("accumulators confirmed by SciPy", agreement.confirmed),
            Figure("frames that failed", failed),
        ),
        findings=(*found, *agreement.findings),
    )


def _covered(bench: Bench, agreement: _Agreement) -> tuple[str, ...]:
    count = dict.fromkeys(Purpose, 0)
    for vector in bench.frames:
        count[vector.purpose] += 1
    shapes = {vector.frame.shape for vector in bench.frames}
    more = sum(len(load.frames) for load in bench.loads)
    return (
        ", ".join(f"{n} {purpose}" for purpose, n in count.items() if n)
        + f" frames of {len(shapes)} sizes, bit for bit against the NumPy reference",
        *([f"{more} of them again with {len(bench.loads)} other legal taps"] * (more > 0)),
        f"{agreement.confirmed} accumulator values against scipy.signal.convolve2d, on images "
        "extended by np.pad",
        f"{agreement.requantised} codes against a second statement of the requantiser",
    )


def _not_covered(bench: Bench, agreement: _Agreement) -> tuple[str, ...]:
    notes = []
    if agreement.unsure:
        notes.append(
            f"{agreement.unsure} accumulator values that may saturate on the way: SciPy, which "
            "has no such sums, cannot confirm them"
        )
    if agreement.skipped:
        notes.append(f"{agreement.skipped} frames are too large to repeat with SciPy here")
    if bench.options.photograph is None:
        notes.append("no photograph was given")
    notes.append("sizes beyond those run are argued from border classes")
    return tuple(notes)


def _inside(bench: Bench) -> tuple[int, int]:
    to = bench.filter.output
    outputs = [vector.response.output for vector in bench.frames]
    inside = sum(int(((o > to.low) & (o < to.high)).sum()) for o in outputs)
    return inside, sum(o.size for o in outputs)


def _agreement(bench: Bench) -> _Agreement:
    f = bench.filter
    may = tuple(
        which.accumulator.overflow is Overflow.SATURATE and not contains(register(which), r.partial)
        for which, r in zip(f.passes, bench.sizing.registers, strict=True)
    )
    confirmed, unsure, skipped = 0, 0, 0
    found: list[Finding] = []
    work = 0
    for f, vector in sorted(_answered(bench), key=lambda pair: pair[1].frame.size):
        work += vector.frame.size * bench.taps
        if work > _MOST_WORK:
            skipped += 1
            continue
        good, open_, wrong = _sums_agree(f, vector, may)
        confirmed, unsure = confirmed + good, unsure + open_
        found += wrong
    codes, wrong = _codes_agree(f, tuple(vector for _, vector in _answered(bench)))
    return _Agreement(confirmed, unsure, skipped, codes, (*found[:3], *wrong))


def _answered(bench: Bench) -> list[tuple[Filter, Vector]]:
    """Return every frame with the filter that its response is of."""
    own = [(bench.filter, vector) for vector in bench.frames]
    return own + [(load.filter, vector) for load in bench.loads for vector in load.frames]


def _sums_agree(
    filter: Filter, vector: Vector, may_saturate: tuple[bool, ...]
) -> tuple[int, int, list[Finding]]:
    """Return (values confirmed, values that SciPy cannot tell, findings)."""
    reference = vector.response.accumulators[-1]
    beyond = filter.outside is not Outside.CLAMP and _is_illegal(filter, vector)
    second = None if beyond else second_sums(filter, vector.frame, may_saturate)
    if second is None:
        return 0, reference.size, []
    sums = in_register(filter.passes[-1], second.sums)
    wrong = second.sure & (_modulo(reference) != sums.view(np.uint64))
    if wrong.any():
        at = tuple(np.argwhere(wrong)[0])
        return (
            0,
            0,
            [
                finding(
                    "reference-differs",
                    case=vector.name,
                    what="accumulator",
                    row=int(at[0]),
                    column=int(at[1]),
                    first=str(reference[at]),
                    second=str(sums[at]),
                )
            ],
        )
    sure = int(second.sure.sum())
    return sure, reference.size - sure, []


def _is_illegal(filter: Filter, vector: Vector) -> bool:
    source = filter.input
    return bool(((vector.frame < source.low) | (vector.frame > source.high)).any())


def _modulo(values: Array) -> Array:
    if values.dtype == object:
        return np.array(values % (1 << 64), np.uint64)
    return values.astype(np.int64).view(np.uint64)


def _codes_agree(filter: Filter, vectors: tuple[Vector, ...]) -> tuple[int, list[Finding]]:
    """Return how many last-pass codes were computed again, and findings."""
    which = filter.passes[-1]
    known: dict[int, int] = {}
    count = 0
    for vector in vectors:
        acc, codes = vector.response.accumulators[-1], vector.response.output
        again = requantised(which, acc, known)
        count += codes.size
        if not np.array_equal(again, codes):
            at = tuple(np.argwhere(again != codes)[0])
            return count, [
                finding(
                    "reference-differs",
                    case=vector.name,
                    what=f"code of {acc[at]}",
                    row=int(at[0]),
                    column=int(at[1]),
                    first=str(codes[at]),
                    second=str(again[at]),
                )
            ]
    return count, []
