"""The ladder: builds, runs and judges a routine, rung by rung."""

import tempfile
from collections.abc import Callable, Sequence
from concurrent.futures import Future, ThreadPoolExecutor
from dataclasses import dataclass, replace
from pathlib import Path
from typing import TypeVar

from guardbit.build.compilation import BuildError
from guardbit.build.compiler import STRICT, Compiler
from guardbit.build.coverage import coverage_program
from guardbit.build.library import HostRunner, compile_library
from guardbit.build.sanitized import Program, SanitizedRunner, sanitized_runner
from guardbit.model.certificate import Figure, RungResult
from guardbit.model.finding import GuardbitError, MachineError
from guardbit.model.routine import Probe, Routine
from guardbit.model.sizing import Sizing
from guardbit.verify import bands, calls, error, frames, impulses, proof, requantiser, sanitized
from guardbit.verify import witnesses as witnessing
from guardbit.verify.bench import Bench, Options, prepare, run
from guardbit.verify.cases import Case, work
from guardbit.verify.defects import rung as seeded
from guardbit.verify.second import load_scipy

__all__ = ["Options", "climb"]

BUILD = "build"
_COMPARED = (impulses, witnessing, frames, bands, calls)
_AFTER = (
    *(rung.NAME for rung in _COMPARED),
    requantiser.NAME,
    sanitized.NAME,
    error.NAME,
    proof.NAME,
)

_OFFERED = (bands.NAME, calls.NAME, requantiser.NAME)

_T = TypeVar("_T")

_WORKERS = 6
"""Threads that mostly wait: for compilers, and for the processes that call the routine."""

_SLOWEST = 1e-7
"""Seconds a product may take, in the slowest build, both runs of a case together."""


@dataclass(frozen=True, eq=False)
class _Order:
    """What is to be built, with which compiler."""

    compiler: Compiler
    routine: Routine
    probes: tuple[Probe, ...]


@dataclass(frozen=True, eq=False)
class _Builds:
    """The three builds, each a result or the error that it ended with."""

    host: "Future[HostRunner | GuardbitError]"
    sanitized: "Future[SanitizedRunner | GuardbitError]"
    counting: "Future[Program | GuardbitError]"


def climb(
    sizing: Sizing,
    routine: Routine,
    probes: Sequence[Probe],
    compiler: Compiler,
    options: Options | None = None,
) -> tuple[RungResult, ...]:
    """Return the results of all rungs for a routine, whoever wrote it, in their order.

    A crash, a hang or a write out of bounds of the compiled code is a finding. Raises
    MachineError if the compiler cannot be run or a reproducer cannot be written.
    """
    chosen = options or Options()
    with (
        tempfile.TemporaryDirectory(prefix="guardbit-") as name,
        ThreadPoolExecutor(max_workers=_WORKERS) as pool,
    ):
        order = _Order(compiler, routine, tuple(probes))
        builds = _start(pool, order, Path(name))
        pool.submit(load_scipy)
        bench = prepare(sizing, routine, tuple(probes), chosen)
        host = builds.host.result()
        if isinstance(host, GuardbitError):
            return _not_built(compiler, routine, host)
        rungs = _climb(pool, compiler, bench, host, builds)
    if chosen.defects is None:
        return rungs
    return (*rungs, seeded.result(bench, compiler, chosen.defects, rungs))


def _start(pool: ThreadPoolExecutor, order: _Order, folder: Path) -> _Builds:
    places = [folder / name for name in ("host", "sanitized", "counting")]
    for place in places:
        place.mkdir()
    what = (order.compiler, order.routine, order.probes)

    def host() -> HostRunner:
        made = compile_library(order.compiler, [order.routine], order.probes, places[0])
        return HostRunner(made, order.routine)

    return _Builds(
        pool.submit(_tried, host),
        pool.submit(_tried, lambda: sanitized_runner(*what, places[1])),
        pool.submit(_tried, lambda: coverage_program(*what, places[2])),
    )


def _tried(work: Callable[[], _T]) -> _T | GuardbitError:
    try:
        return work()
    except GuardbitError as ended:
        return ended


def _climb(
    pool: ThreadPoolExecutor,
    compiler: Compiler,
    bench: Bench,
    host: HostRunner,
    builds: _Builds,
) -> tuple[RungResult, ...]:
    cases = {rung.NAME: rung.cases(bench) for rung in _COMPARED}
    every = [case for some in cases.values() for case in some]
    repeated = sanitized.affordable(bench, every)
    seconds = _patience(bench, every)
    host = replace(host, library=replace(host.library, seconds=seconds))
    # the slow builds run their cases in processes of their own while this one compares
    counted = pool.submit(
        lambda: sanitized.count(
            bench, compiler, _timed(builds.counting.result(), seconds), repeated
        )
    )
    checked = pool.submit(
        lambda: sanitized.result(
            bench,
            _limited(builds.sanitized.result(), seconds),
            repeated,
            len(every),
            counted.result(),
        )
    )
    # a child per rung: one whose calls crash does not use up the patience for another's
    running = [(rung, pool.submit(run, host, cases[rung.NAME])) for rung in _COMPARED]
    compared = [rung.result(bench, trials.result()) for rung, trials in running]
    tail = requantiser.result(bench, host)
    far = error.result(bench.sizing, bench.frames)
    shown = proof.result(bench.sizing.filter, bench.routine)
    rungs = (_built(compiler, bench.routine), *compared, tail, checked.result(), far, shown)
    return tuple(rung for rung in rungs if rung.ran or not _is_absent(bench.routine, rung))


def _is_absent(routine: Routine, rung: RungResult) -> bool:
    """Return whether a rung is about what the user's own C does not offer."""
    return routine.foreign and rung.name in _OFFERED


def _patience(bench: Bench, cases: Sequence[Case]) -> float:
    """Return the processor seconds that a case may take, by the largest one's products."""
    most = max((work(case, bench.taps) for case in cases), default=0)
    return bench.options.seconds + most * _SLOWEST


def _timed(built: Program | GuardbitError, seconds: float) -> Program | GuardbitError:
    return replace(built, seconds=seconds) if isinstance(built, Program) else built


def _limited(
    built: SanitizedRunner | GuardbitError, seconds: float
) -> SanitizedRunner | GuardbitError:
    if isinstance(built, GuardbitError):
        return built
    return replace(built, program=replace(built.program, seconds=seconds))


def _built(compiler: Compiler, routine: Routine) -> RungResult:
    units = [source.name for source in routine.sources if source.name.endswith(".c")]
    return RungResult(
        BUILD,
        ran=True,
        cases=len(units),
        covered=(f"{', '.join(units)} with {compiler.label}{_warnings(routine)}",),
        not_covered=("other compilers and targets", *_missing(routine)),
        figures=(Figure("compiler", compiler.label),),
        findings=(),
    )


def _missing(routine: Routine) -> tuple[str, ...]:
    return ("bands, status codes, requantisers alone: it offers none",) if routine.foreign else ()


def _warnings(routine: Routine) -> str:
    return "" if routine.foreign else f": no warning under {' '.join(STRICT)}"


def _not_built(
    compiler: Compiler, routine: Routine, ended: GuardbitError
) -> tuple[RungResult, ...]:
    """Return a build rung with the compiler's messages, and the others as not run."""
    if isinstance(ended, MachineError) or not isinstance(ended, BuildError):
        raise ended
    build = RungResult(BUILD, True, 1, (), (f"compiled with {compiler.label}",), (), ended.findings)
    why = ("the C does not compile",)
    return (build, *(RungResult(name, False, 0, (), why, (), ()) for name in _AFTER))
