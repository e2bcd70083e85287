"""One shared library of many routines, and the runner that calls it from a child process."""

import json
import sys
import tempfile
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

from guardbit.build.compilation import Unit, compile_units, link, write_sources
from guardbit.build.compiler import LENIENT, STRICT, Compiler
from guardbit.build.job import encode
from guardbit.build.processes import Ended, death, run_probe, run_tasks, watch
from guardbit.build.texts import kinds, labelled, probing, prototypes
from guardbit.model.finding import MachineError, finding
from guardbit.model.routine import Call, Codes, Outcome, Probe, Probed, Routine, SourceFile

SECONDS = 10.0
"""Processor time that one case may take before it counts as a hang."""

_SHARED = ("-O2", "-fPIC", "-shared")


@dataclass(frozen=True)
class Library:
    """A shared library, the routines and probes in it, and how long a call may take."""

    path: Path
    routines: tuple[Routine, ...]
    probes: tuple[Probe, ...]
    seconds: float = SECONDS

    def run(self, tasks: Sequence[tuple[Routine, Call]]) -> list[Outcome]:
        """Return an outcome per task, in order; all of them share one child process."""
        numbers = {id(routine): i for i, routine in enumerate(self.routines)}
        numbered = [(numbers[id(routine)], routine, call) for routine, call in tasks]
        return run_tasks(numbered, lambda job: self.launch(job, None))

    def probe(self, probe: Probe, arguments: Codes) -> Probed:
        """Return the probe's result for each argument."""
        return run_probe(arguments, lambda job: self.launch(job, probe.function))

    def check(self) -> None:
        """Load the library and look up every function. Raises BuildError, MachineError."""
        ended = self.launch(encode([]), None)
        if ended.status != 0:
            death(ended)
            raise MachineError(finding("child-failed", reason=ended.words.strip()[-300:]))

    def launch(self, job: bytes, probe: str | None = None) -> Ended:
        """Return how the child ended that ran a job file, or gave arguments to a probe."""
        with tempfile.TemporaryDirectory(dir=self.path.parent) as name:
            folder = Path(name)
            (folder / "input").write_bytes(job)
            (folder / "job.json").write_text(json.dumps(self._description(folder, probe)))
            # -P: nothing is imported from the folder that the user happens to be in
            command = (sys.executable, "-P", "-m", "guardbit.build.child")
            return watch((*command, str(folder / "job.json")), folder / "output", self.seconds)

    def _description(self, folder: Path, probe: str | None) -> dict[str, object]:
        declarations = [text for routine in self.routines for text in prototypes(routine)]
        declarations += [
            f"void guardbit_probe_{p.function}(const int64_t *, int64_t *, size_t);"
            for p in self.probes
        ]
        return {
            "library": str(self.path),
            "input": str(folder / "input"),
            "output": str(folder / "output"),
            "seconds": self.seconds,
            "declarations": declarations,
            "routines": [_described(routine) for routine in self.routines],
            "probe": probe,
        }


def _described(routine: Routine) -> dict[str, object]:
    entries = [
        {"function": entry.function, "kinds": kinds(entry)} for _, entry in labelled(routine)
    ]
    return {"entries": entries, "output_size": routine.output_size}


def units(
    folder: Path,
    sources: Sequence[SourceFile],
    probes: Sequence[Probe],
    flags: tuple[str, ...],
) -> list[Unit]:
    """Return the units to compile for sources that are written into `folder`.

    A source with probes is compiled by way of the unit that includes it.
    """
    write_sources(folder, sources)
    probed = {probe.source for probe in probes}
    chosen = [
        probing(source.name, probes) if source.name in probed else source
        for source in sources
        if source.name.endswith(".c")
    ]
    paths = write_sources(folder, chosen)
    return [Unit(path, path.with_suffix(".o"), flags) for path in paths]


def compile_library(
    compiler: Compiler,
    routines: Sequence[Routine],
    probes: Sequence[Probe],
    folder: Path,
) -> Library:
    """Return the shared library of all routines and probes, built in `folder`.

    File names and function names must differ between routines. Raises BuildError with the
    compiler's messages; a warning of the strict flags is one, a function that is not there too.
    """
    sources = {source.name: source for routine in routines for source in routine.sources}
    flags = LENIENT if any(routine.foreign for routine in routines) else STRICT
    made = units(folder, tuple(sources.values()), probes, (*flags, "-O2", "-fPIC"))
    compile_units(compiler, made)
    target = folder / "guardbit.so"
    link(compiler, [unit.object for unit in made], target, _SHARED)
    library = Library(target, tuple(routines), tuple(probes))
    library.check()
    return library


@dataclass(frozen=True)
class HostRunner:
    """Runs one routine of a shared library on this machine, in child processes."""

    library: Library
    routine: Routine

    @property
    def name(self) -> str:
        """Return what the runner is called in reports."""
        return "host"

    def run(self, calls: Sequence[Call]) -> list[Outcome]:
        """Return one outcome per call, in order, whatever the compiled code does."""
        return self.library.run([(self.routine, call) for call in calls])

    def probe(self, probe: Probe, arguments: Codes) -> Probed:
        """Return the probe's result for each argument."""
        return self.library.probe(probe, arguments)
