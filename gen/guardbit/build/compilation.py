"""Running a compiler: source files in, object code out, or findings with file and line."""

import re
import subprocess
from collections.abc import Sequence
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass
from pathlib import Path

from guardbit.build.compiler import Compiler
from guardbit.model.finding import Finding, GuardbitError, MachineError, Place, finding
from guardbit.model.routine import SourceFile

_SECONDS = 300
_MOST_FINDINGS = 10
_MESSAGE = re.compile(r"^(?P<file>[^:\n]+):(?P<line>\d+):(?:\d+:)? (?:fatal )?error: (?P<text>.*)$")


class BuildError(GuardbitError):
    """The C does not compile, or does not hold what its routine says: a failed check."""

    status = 1


@dataclass(frozen=True)
class Unit:
    """One translation unit: a file in the folder, the object made of it, its flags."""

    source: Path
    object: Path
    flags: tuple[str, ...]


def write_sources(folder: Path, sources: Sequence[SourceFile]) -> tuple[Path, ...]:
    """Return the paths of the sources written into `folder`, in order."""
    paths = tuple(folder / source.name for source in sources)
    for path, source in zip(paths, sources, strict=True):
        path.write_text(source.text, encoding="utf-8")
    return paths


def compile_units(compiler: Compiler, units: Sequence[Unit], jobs: int = 2) -> None:
    """Compile all units. Raises BuildError with a finding per message of the compiler."""
    with ThreadPoolExecutor(max_workers=max(1, jobs)) as pool:
        texts = list(pool.map(lambda unit: _compile(compiler, unit), units))
    found = [item for text, unit in zip(texts, units, strict=True) for item in _read(text, unit)]
    if found:
        raise BuildError(*found[:_MOST_FINDINGS])


def link(compiler: Compiler, objects: Sequence[Path], target: Path, flags: Sequence[str]) -> None:
    """Link objects into `target`. Raises BuildError with the linker's first message."""
    done = run_tool((*compiler.command, *flags, *map(str, objects), "-o", str(target)))
    if done.returncode != 0:
        text = next((t for t in done.stderr.splitlines() if "undefined" in t), done.stderr.strip())
        raise BuildError(finding("link-failed", message=text[:400]))


def run_tool(command: Sequence[str], cwd: Path | None = None) -> subprocess.CompletedProcess[str]:
    """Return what a compiler or a tool beside it did. Raises MachineError if it cannot run."""
    try:
        return subprocess.run(
            command,
            cwd=cwd,
            capture_output=True,
            text=True,
            errors="replace",
            timeout=_SECONDS,
            check=False,
        )
    except OSError as error:
        reason = error.strerror or str(error)
        raise MachineError(finding("tool-failed", command=command[0], reason=reason)) from error
    except subprocess.TimeoutExpired as error:
        reason = f"no end after {_SECONDS} s"
        raise MachineError(finding("tool-failed", command=command[0], reason=reason)) from error


def _compile(compiler: Compiler, unit: Unit) -> str:
    command = (*compiler.command, *unit.flags, "-c", unit.source.name, "-o", str(unit.object))
    done = run_tool(command, cwd=unit.source.parent)
    return "" if done.returncode == 0 else done.stderr or "the compiler gave no message"


def _read(text: str, unit: Unit) -> list[Finding]:
    """Return a finding per error message in a compiler's text; one at least if there is text."""
    if not text:
        return []
    matches = filter(None, (_MESSAGE.match(line) for line in text.splitlines()))
    found = [
        finding("compile-error", Place(m["file"], int(m["line"])), message=m["text"])
        for m in matches
    ]
    place = Place(unit.source.name)
    return found or [finding("compile-error", place, message=text.strip()[:400])]
