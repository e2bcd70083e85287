"""A program of its own around a routine, built with sanitizers, that runs the same jobs."""

import os
import re
import struct
import tempfile
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

from guardbit.build.compilation import Unit, compile_units, link, write_sources
from guardbit.build.compiler import Compiler
from guardbit.build.library import SECONDS, units
from guardbit.build.processes import Ended, death, run_probe, run_tasks, watch
from guardbit.build.texts import harness
from guardbit.model.finding import MachineError, finding
from guardbit.model.routine import Call, Codes, Harm, Outcome, Probe, Probed, Routine

_PLAIN = ("-std=c99", "-w", "-g")
# gcc's and clang's two sanitizers, and zig's own runtime of the second
_KIND = re.compile(
    r"ERROR: AddressSanitizer: (?P<a>[^\n]*)|runtime error: (?P<u>[^\n]*)|panic: (?P<z>[^\n]*)"
)
_PLACE = re.compile(r"([\w.+-]+\.[ch]):(\d+)")
_ACCESS = re.compile(r"^(READ|WRITE) of size (\d+)", re.MULTILINE)


@dataclass(frozen=True)
class Program:
    """An executable harness of one routine in a folder of its own."""

    path: Path
    routine: Routine
    environment: tuple[tuple[str, str], ...] = ()
    seconds: float = SECONDS

    def launch(self, job: bytes, what: str = "job") -> Ended:
        """Return how the program ended on a job file, or on a probe's arguments."""
        with tempfile.TemporaryDirectory(dir=self.path.parent) as name:
            given, output = Path(name) / "input", Path(name) / "output"
            given.write_bytes(job)
            command = (str(self.path), what, str(given), str(output), str(self.seconds))
            return watch(command, output, self.seconds, {**os.environ, **dict(self.environment)})


def build_program(
    compiler: Compiler,
    routine: Routine,
    probes: Sequence[Probe],
    folder: Path,
    flags: tuple[str, ...],
) -> Path:
    """Return the path of a harness around the routine, built with `flags`. Raises BuildError."""
    all_flags = (*_PLAIN, *flags)
    made = units(folder, routine.sources, probes, all_flags)
    (main,) = write_sources(folder, (harness(routine, probes),))
    # the harness needs declarations beyond C99 and is not what is measured
    made.append(Unit(main, main.with_suffix(".o"), all_flags))
    compile_units(compiler, made)
    target = folder / "guardbit_harness"
    link(compiler, [unit.object for unit in made], target, flags)
    return target


@dataclass(frozen=True)
class SanitizedRunner:
    """Runs one routine under the sanitizers named, in buffers of exact length."""

    program: Program
    sanitizers: tuple[str, ...]

    @property
    def name(self) -> str:
        """Return what the runner is called in reports."""
        return "sanitized"

    def run(self, calls: Sequence[Call]) -> list[Outcome]:
        """Return one outcome per call, in order, whatever the compiled code does."""
        tasks = [(0, self.program.routine, call) for call in calls]
        return run_tasks(tasks, self.program.launch, diagnose)

    def probe(self, probe: Probe, arguments: Codes) -> Probed:
        """Return the probe's result for each argument."""
        return run_probe(arguments, lambda job: self.program.launch(job, probe.function), diagnose)


def sanitized_runner(
    compiler: Compiler,
    routine: Routine,
    probes: Sequence[Probe],
    folder: Path,
    seconds: float = SECONDS,
) -> SanitizedRunner:
    """Return a runner with the sanitizers that the compiler has.

    Raises BuildError, or MachineError if a program with sanitizers does not start here.
    """
    names = ",".join(compiler.sanitizers)
    # -O0: an optimiser may remove undefined behaviour whose result is not used
    flags = ("-O0", f"-fsanitize={names}", "-fno-sanitize-recover=all", "-fno-omit-frame-pointer")
    path = build_program(compiler, routine, probes, folder, flags)
    options = "detect_leaks=0:abort_on_error=0:allocator_may_return_null=1"
    environment = (("ASAN_OPTIONS", options), ("UBSAN_OPTIONS", "print_stacktrace=0"))
    program = Program(path, routine, environment, seconds)
    trial = program.launch(struct.pack("=Q", 0))
    if trial.status != 0:
        reason = trial.words.strip()[:300] or f"status {trial.status}"
        raise MachineError(finding("sanitizer-not-starting", reason=reason))
    return SanitizedRunner(program, compiler.sanitizers)


def diagnose(ended: Ended) -> tuple[Harm, str]:
    """Return what a sanitizer said when it ended the program, else how the program died."""
    found = _KIND.search(ended.words)
    if found is None:
        return death(ended)
    return Harm.SANITIZER, describe(ended.words)


def describe(words: str) -> str:
    """Return a sanitizer's report as "kind, file line n"."""
    found = _KIND.search(words)
    if found is None:
        return words.strip()[:200]
    traced = (m for m in _PLACE.finditer(words) if not m[1].startswith("guardbit_"))
    place = next(traced, None)
    if found["a"] is None:
        kind = found["u"] or found["z"]
    else:
        access = _ACCESS.search(words)
        kind = found["a"].split(" on ")[0].strip()
        kind += f", {access[1]} of size {access[2]}" if access else ""
    return f"{kind}, {place[1]} line {place[2]}" if place else kind
