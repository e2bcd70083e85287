"""Rung: all calls again under sanitizers, and what lines and branches the calls execute."""

from collections.abc import Sequence
from dataclasses import dataclass
from functools import partial

from guardbit.build.compiler import Compiler
from guardbit.build.coverage import Coverage, Gap, measure
from guardbit.build.processes import run_probe, run_tasks
from guardbit.build.sanitized import Program, SanitizedRunner
from guardbit.model.certificate import Figure, RungResult
from guardbit.model.finding import Finding, GuardbitError, MachineError
from guardbit.verify.bench import Bench, run
from guardbit.verify.cases import Case, work
from guardbit.verify.compare import findings
from guardbit.verify.requantiser import arguments, check, legal
from guardbit.verify.wording import left_out, percent

NAME = "sanitized"
_MOST_WORK = 1 << 27
_MOST_ARGUMENTS = 1 << 16
_LISTED = 20
_FULL_NAMES = {"address": "AddressSanitizer", "undefined": "UndefinedBehaviorSanitizer"}


@dataclass(frozen=True)
class Counted:
    """What a counting build executed, or why there is none."""

    coverage: Coverage | None
    reason: str = ""


def affordable(bench: Bench, cases: Sequence[Case]) -> list[Case]:
    """Return the cases, the cheap ones first, that slow builds can repeat in reasonable time."""
    chosen: list[Case] = []
    spent = 0
    for case in sorted(cases, key=lambda c: work(c, bench.taps)):
        spent += work(case, bench.taps)
        if spent > _MOST_WORK:
            break
        chosen.append(case)
    return chosen


def count(
    bench: Bench, compiler: Compiler, built: Program | GuardbitError, cases: Sequence[Case]
) -> Counted:
    """Return what the calls and probes execute of the routine's sources."""
    if isinstance(built, GuardbitError):
        return Counted(None, reason_of(built))
    tasks = [(0, bench.routine, case.call) for case in cases]
    try:
        run_tasks(tasks, built.launch)
        for probe in bench.probes:
            r = bench.filter.passes[probe.requantiser].requantiser
            values = arguments(probe, r, _MOST_ARGUMENTS).values
            run_probe(values, partial(built.launch, what=probe.function))
        return Counted(measure(compiler, built))
    except MachineError as error:
        return Counted(None, reason_of(error))


def reason_of(error: GuardbitError) -> str:
    """Return a short reason out of an error's first finding."""
    found = error.findings[0]
    values = [str(value) for _, value in found.values if value]
    return f"{found.kind}: {', '.join(values)}"


def result(
    bench: Bench,
    runner: SanitizedRunner | GuardbitError,
    cases: Sequence[Case],
    every: int,
    counted: Counted,
) -> RungResult:
    """Return what sanitizers said of the cases, out of `every` one that was run without."""
    if isinstance(runner, GuardbitError):
        reasons = (f"no program with sanitizers: {reason_of(runner)}", *_uncounted(counted))
        return RungResult(NAME, False, 0, _covered(counted), reasons, _figures(counted), ())
    trials = run(runner, cases)
    found, failed, left = findings(bench, trials)
    given, wrong = _probed(bench, runner)
    names = " and ".join(_FULL_NAMES[name] for name in runner.sanitizers)
    missing = () if "address" in runner.sanitizers else ("no AddressSanitizer in this compiler",)
    fewer = every - len(cases)
    return RungResult(
        NAME,
        ran=True,
        cases=trials.made + given,
        covered=(
            f"{len(cases)} calls of the rungs in buffers of exact length, and {given} arguments "
            f"of requantisers, under {names}",
            *_covered(counted),
        ),
        not_covered=(
            *missing,
            *((f"{fewer} calls on large frames were not repeated",) if fewer else ()),
            *left_out(left),
            *_uncounted(counted),
        ),
        figures=(Figure("calls that failed under sanitizers", failed), *_figures(counted)),
        findings=(*found, *wrong),
    )


def _probed(bench: Bench, runner: SanitizedRunner) -> tuple[int, list[Finding]]:
    given, found = 0, []
    for probe in bench.probes:
        r = bench.filter.passes[probe.requantiser].requantiser
        values = arguments(legal(bench, probe), r, _MOST_ARGUMENTS).values
        given += values.size
        found += check(probe, r, values, runner)
    return given, found


def _covered(counted: Counted) -> tuple[str, ...]:
    c = counted.coverage
    if c is None:
        return ()
    return (
        f"{c.lines_run} of {c.lines} lines and {c.branches_taken} of {c.branches} branch "
        "directions of the C were executed",
    )


def _uncounted(counted: Counted) -> tuple[str, ...]:
    c = counted.coverage
    if c is None:
        return (f"lines and branches were not counted: {counted.reason}",)
    shown = [_gap(gap) for gap in c.gaps[:_LISTED]]
    more = len(c.gaps) - len(shown)
    return (*shown, *((f"{more} more lines and branches not executed",) if more else ()))


def _gap(gap: Gap) -> str:
    what = "not executed" if gap.branch is None else f"branch {gap.branch} never taken"
    return f"{gap.file} line {gap.line} {what}: {gap.text[:80]}"


def _figures(counted: Counted) -> tuple[Figure, ...]:
    c = counted.coverage
    if c is None:
        return ()
    return (
        Figure("lines executed", percent(c.lines_run, c.lines), "%"),
        Figure("branch directions executed", percent(c.branches_taken, c.branches), "%"),
    )
