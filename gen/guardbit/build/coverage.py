"""Which lines and branches of a routine's sources its calls execute."""

import re
import shutil
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

from guardbit.build.compilation import run_tool
from guardbit.build.compiler import Compiler, Family
from guardbit.build.library import SECONDS
from guardbit.build.sanitized import Program, build_program
from guardbit.model.finding import MachineError, finding
from guardbit.model.routine import Probe, Routine

_LINE = re.compile(r"^\s*(?P<count>[^:]+):\s*(?P<line>\d+):(?P<text>.*)$")
_BRANCH = re.compile(r"^branch\s+(?P<number>\d+) (?:taken (?P<count>\d+)|never executed)")


@dataclass(frozen=True)
class Gap:
    """A line that was not executed, or (`branch` set) a direction not taken at its end."""

    file: str
    line: int
    branch: int | None
    text: str


@dataclass(frozen=True)
class Coverage:
    """Counts over the routine's own C files, and what was left out."""

    lines: int
    lines_run: int
    branches: int
    branches_taken: int
    gaps: tuple[Gap, ...]


def coverage_program(
    compiler: Compiler,
    routine: Routine,
    probes: Sequence[Probe],
    folder: Path,
    seconds: float = SECONDS,
) -> Program:
    """Return a harness that counts executions. Raises BuildError, MachineError (no tool)."""
    coverage_tool(compiler)
    path = build_program(compiler, routine, probes, folder, ("-O0", "--coverage"))
    return Program(path, routine, (), seconds)


def coverage_tool(compiler: Compiler) -> tuple[str, ...]:
    """Return the command that reads the compiler's counters. Raises MachineError: none."""
    base = Path(compiler.command[0]).name
    names = {
        Family.GCC: (base.replace("gcc", "gcov") if "gcc" in base else "gcov", "gcov"),
        Family.CLANG: (
            base.replace("clang", "llvm-cov") if base.startswith("clang") else "llvm-cov",
            f"llvm-cov-{compiler.version.split('.')[0]}",
            "llvm-cov",
        ),
        Family.ZIG: (),
    }[compiler.family]
    found = next((name for name in names if shutil.which(name)), None)
    if found is None:
        raise MachineError(finding("no-coverage-tool", compiler=compiler.label))
    return (found, "gcov") if compiler.family is Family.CLANG else (found,)


def measure(compiler: Compiler, program: Program) -> Coverage:
    """Return what all runs of the program so far executed. Raises MachineError."""
    folder = program.path.parent
    counters = sorted(path.name for path in folder.glob("*.gcda"))
    command = (*coverage_tool(compiler), "-b", "-c", "-t", *counters)
    done = run_tool(command, cwd=folder)
    if done.returncode != 0 or not counters:
        reason = done.stderr.strip()[:300] or "no counters were written"
        raise MachineError(finding("tool-failed", command=command[0], reason=reason))
    own = {s.name for s in program.routine.sources}
    return read_counts(done.stdout, own)


def read_counts(text: str, files: set[str]) -> Coverage:
    """Return the counts for `files` in the annotated listing that gcov prints."""
    lines: dict[tuple[str, int], tuple[int, str]] = {}
    branches: dict[tuple[str, int, int], int] = {}
    file, line = "", 0
    for row in text.splitlines():
        if branch := _BRANCH.match(row):
            key = (file, line, int(branch["number"]))
            branches[key] = branches.get(key, 0) + int(branch["count"] or 0)
        elif listed := _LINE.match(row):
            line = int(listed["line"])
            if line == 0 and listed["text"].startswith("Source:"):
                file = Path(listed["text"][7:]).name
            elif (count := _count(listed["count"])) is not None:
                seen = lines.get((file, line), (0, ""))[0]
                lines[file, line] = (seen + count, listed["text"].strip())
    own_lines = {k: v for k, v in lines.items() if k[0] in files}
    own_branches = {k: v for k, v in branches.items() if k[0] in files}
    return _summary(own_lines, own_branches)


def _count(text: str) -> int | None:
    """Return an execution count; None for a line without code."""
    text = text.strip().rstrip("*")
    if text == "-":
        return None
    return 0 if text.startswith(("#", "=")) else int(text)


def _summary(
    lines: dict[tuple[str, int], tuple[int, str]], branches: dict[tuple[str, int, int], int]
) -> Coverage:
    idle = [Gap(file, line, None, text) for (file, line), (n, text) in lines.items() if n == 0]
    missed = [
        Gap(file, line, number, lines[file, line][1])
        for (file, line, number), n in branches.items()
        if n == 0 and lines.get((file, line), (0, ""))[0] > 0
    ]
    return Coverage(
        len(lines),
        len(lines) - len(idle),
        len(branches),
        sum(n > 0 for n in branches.values()),
        tuple(sorted(idle + missed, key=lambda g: (g.file, g.line, g.branch or 0))),
    )
