"""Rung: frames that attain the exact worst cases of every register."""

from dataclasses import replace

import numpy as np

from guardbit.arith.borders import positions
from guardbit.model.certificate import Figure, RungResult
from guardbit.model.filter import raster, registers_of
from guardbit.model.finding import Finding, finding
from guardbit.model.sizing import Witness
from guardbit.model.vectors import Vector
from guardbit.vectors.witnesses import MOST_PIXELS, Attained, Shows
from guardbit.verify.bench import Bench, Trials, with_loads
from guardbit.verify.cases import Case
from guardbit.verify.compare import findings
from guardbit.verify.wording import left_out

NAME = "witnesses"


def cases(bench: Bench) -> list[Case]:
    """Return a case per witness that is small enough to run, and the ends of other taps."""
    cases = with_loads(bench, bench.witnessing, [load.extremes for load in bench.loads])
    shown = [a.witness for a in bench.attained if a.stimulus is not None]
    own = [_loaded(bench, case, w) for case, w in zip(cases, shown, strict=False)]
    return [*own, *cases[len(own) :]]


def _loaded(bench: Bench, case: Case, witness: Witness) -> Case:
    """Return a witness's case with the taps that it is for."""
    registers = registers_of(bench.filter)
    if registers is None or witness.taps is None:
        return case
    return replace(case, call=replace(case.call, taps=raster(registers, witness.taps)))


def result(bench: Bench, trials: Trials) -> RungResult:
    """Return which worst cases were attained, and what the routine made of them."""
    found, failed, left = findings(bench, trials)
    checked, missed = _attained(bench)
    too_large = sum(a.stimulus is None for a in bench.attained)
    skipped = (
        (f"{too_large} witness frames of more than {MOST_PIXELS} pixels",) if too_large else ()
    )
    hidden = _hidden(bench)
    if not trials.cases:
        reasons = skipped or ("the sizing names no witness frames",)
        return RungResult(NAME, False, 0, (), reasons, (), ())
    return RungResult(
        NAME,
        ran=True,
        cases=trials.made,
        covered=(*_covered(bench), *_loads(bench)),
        not_covered=(*skipped, *hidden, *_inexact(bench), *left_out(left)),
        figures=(
            Figure("worst cases attained in the reference", checked),
            Figure("witness frames that failed", failed),
        ),
        findings=(*missed, *found),
    )


_KINDS = {
    Shows.FINAL: "final sum",
    Shows.PARTIAL: "partial sum",
    Shows.HELD: "value held",
    Shows.CODE: "code",
}


def _covered(bench: Bench) -> tuple[str, ...]:
    run = [a for a in bench.attained if a.stimulus is not None]
    ends: dict[str, list[str]] = {}
    for attained in run:
        w = attained.witness
        text = f"{w.end} {_KINDS[attained.shows]} {w.value}"
        ends.setdefault(w.register, []).append(text)
    return tuple(f"{register}: {', '.join(found)}" for register, found in ends.items())


def _loads(bench: Bench) -> tuple[str, ...]:
    count = sum(bool(load.extremes) for load in bench.loads)
    return (f"the least and greatest sum of {count} other legal taps",) if count else ()


def _attained(bench: Bench) -> tuple[int, tuple[Finding, ...]]:
    """Return how many final ends the reference attains, and findings for those it does not.

    The ends of partial sums leave no trace in a final value: only the routine is run on them.
    """
    checked, missed = 0, []
    vectors = iter(bench.witnessing)
    for attained in bench.attained:
        if attained.stimulus is None:
            continue
        vector = next(vectors)
        w = attained.witness
        value = _reached(bench, attained, vector)
        if value is None:
            continue
        checked += 1
        held = w.value if attained.shows is Shows.CODE else _held(attained, w)
        if value != held:
            missed.append(
                finding("witness-missed", register=w.register, end=w.end, expected=held, got=value)
            )
    return checked, tuple(missed)


def _held(attained: Attained, w: Witness) -> int:
    """Return what the register shows for the witness's unlimited sum, if it wraps."""
    r = attained.register
    low = -(1 << (r.bits - 1)) if r.signed else 0
    return (w.value - low) % (1 << r.bits) + low if r.bits else w.value


def _reached(bench: Bench, attained: Attained, vector: Vector) -> int | None:
    """Return what the last pass shows at the witness's position; None: not told there."""
    f, w = bench.filter, attained.witness
    which = f.passes[attained.pass_index]
    # a register that saturates need not end at the sum's end
    saturates = which.accumulator.overflow == "saturate" and attained.shows is Shows.FINAL
    if attained.pass_index != len(f.passes) - 1 or saturates or w.partial:
        return None
    rows = positions(f.geometry.rows, f.geometry.extent, w.height)
    columns = positions(f.geometry.columns, f.geometry.extent, w.width)
    if w.position[0] not in rows or w.position[1] not in columns:
        return None
    at = rows.index(w.position[0]), columns.index(w.position[1])
    shown = (
        vector.response.output
        if attained.shows is Shows.CODE
        else (vector.response.accumulators[-1])
    )
    return int(shown[at][0])


def _hidden(bench: Bench) -> tuple[str, ...]:
    """Return a note if witnesses end at a saturated output, which hides the exact sum."""
    to = bench.filter.output
    hidden = 0
    for vector in bench.witnessing:
        output = vector.response.output
        hidden += bool(output.size and np.isin(output, (to.low, to.high)).all())
    text = f"{hidden} witness frames give only outputs at the ends of the range, which hide the sum"
    return (text,) if hidden else ()


def _inexact(bench: Bench) -> tuple[str, ...]:
    sums = (
        f"{r.name}: its ends are bounds, no frame is known to attain them"
        for r in bench.sizing.registers
        if not r.exact
    )
    held = (
        f"{r.name}: what it holds at the end is a bound"
        for r in bench.sizing.registers
        if r.exact and not r.held_exact
    )
    return (*sums, *held)
