"""Builds of one mutant after another, around a harness that is compiled once."""

import shutil
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

from guardbit.build.compilation import (
    BuildError,
    Unit,
    compile_units,
    link,
    run_tool,
    write_sources,
)
from guardbit.build.compiler import STRICT, Compiler, identify
from guardbit.build.library import Library, units
from guardbit.build.sanitized import Program
from guardbit.build.texts import harness
from guardbit.model.finding import MachineError, finding
from guardbit.model.routine import Probe, Routine

_SECONDS = 0.5
# What a compiler may take for a warning, but no C allows.
_INVALID = (
    "-Werror=int-conversion",
    "-Werror=incompatible-pointer-types",
    "-Werror=implicit-function-declaration",
    "-Werror=return-type",
)
_OPTIONS = (
    ("ASAN_OPTIONS", "detect_leaks=0:abort_on_error=0:allocator_may_return_null=1"),
    ("UBSAN_OPTIONS", "print_stacktrace=0"),
)


@dataclass(frozen=True)
class Bay:
    """A compiler with its flags, and the harness that it compiled for a routine."""

    compiler: Compiler
    flags: tuple[str, ...]
    folder: Path
    probes: tuple[Probe, ...]

    @property
    def name(self) -> str:
        """Return the compiler's name."""
        return self.compiler.family.value


def sanitizing(
    compiler: Compiler, level: str, routine: Routine, probes: Sequence[Probe], folder: Path
) -> Bay:
    """Return a bay that builds with the compiler's sanitizers. Raises BuildError, MachineError."""
    names = ",".join(compiler.sanitizers)
    flags = (level, f"-fsanitize={names}", "-fno-sanitize-recover=all", "-fno-omit-frame-pointer")
    folder.mkdir(parents=True)
    bay = Bay(compiler, flags, folder, tuple(probes))
    (main,) = write_sources(folder, (harness(routine, probes),))
    compile_units(compiler, [Unit(main, folder / "harness.o", ("-std=c99", "-w", *flags))])
    return bay


def program(bay: Bay, routine: Routine) -> Program | None:
    """Return the routine around the bay's harness; None: it is not valid C.

    It stands in the bay's folder until the next is built.
    """
    place = bay.folder / "mutant"
    shutil.rmtree(place, ignore_errors=True)
    place.mkdir()
    made = units(place, routine.sources, bay.probes, ("-std=c99", "-g1", *_INVALID, *bay.flags))
    target = place / "program"
    try:
        compile_units(bay.compiler, made, jobs=1)
        objects = [bay.folder / "harness.o", *(unit.object for unit in made)]
        link(bay.compiler, objects, target, bay.flags)
    except BuildError:
        return None
    return Program(target, routine, _OPTIONS, _SECONDS)


@dataclass(frozen=True)
class Hosted:
    """A shared library of a routine; `warned` if the compiler warned of something."""

    library: Library
    warned: bool


def hosted(compiler: Compiler, routine: Routine, probes: Sequence[Probe], folder: Path) -> Hosted:
    """Return the routine as the ladder builds it, but with warnings allowed.

    Raises MachineError if it cannot be built.
    """
    shutil.rmtree(folder, ignore_errors=True)
    folder.mkdir(parents=True)
    lenient = tuple(flag for flag in STRICT if flag != "-Werror")
    target = folder / "guardbit.so"
    made = units(folder, routine.sources, probes, ())
    command = (*compiler.command, *lenient, "-O2", "-fPIC", "-shared")
    done = run_tool((*command, *(unit.source.name for unit in made), "-o", target.name), folder)
    if done.returncode != 0:
        reason = done.stderr.strip()[:300]
        raise MachineError(finding("tool-failed", command=command[0], reason=reason))
    return Hosted(Library(target, (routine,), tuple(probes), _SECONDS), "warning:" in done.stderr)


def second_compiler(first: Compiler) -> Compiler | None:
    """Return a compiler of another family on this machine, if there is one."""
    for name in ("clang", "gcc"):
        found = identify((name,)) if shutil.which(name) else None
        if found is not None and found.family is not first.family:
            return found
    return None
