"""C compilers of this machine: finding one, and the flags that it is given."""

import importlib.util
import os
import re
import shlex
import shutil
import subprocess
import sys
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from enum import StrEnum
from functools import lru_cache

from guardbit.model.finding import MachineError, finding

STRICT = (
    "-std=c99",
    "-pedantic",
    "-Wall",
    "-Wextra",
    "-Wconversion",
    "-Wsign-conversion",
    "-Wshadow",
    "-Wcast-qual",
    "-Werror",
)
"""The flags under which emitted C compiles without a warning, on gcc and clang."""

LENIENT = ("-std=c99", "-w")
"""The flags for C of the user's own, which need not be free of warnings."""

_INSTALL = "apt-get install gcc (Debian), xcode-select --install (macOS), or pip install ziglang"


class Family(StrEnum):
    GCC = "gcc"
    CLANG = "clang"
    ZIG = "zig"


@dataclass(frozen=True)
class Compiler:
    """`command` is what is run, with any arguments that $CC gives it."""

    command: tuple[str, ...]
    family: Family
    version: str

    @property
    def label(self) -> str:
        """Return family and version, for reports."""
        return f"{self.family} {self.version}"

    @property
    def sanitizers(self) -> tuple[str, ...]:
        """Return the sanitizers that the compiler brings with it."""
        return ("undefined",) if self.family is Family.ZIG else ("address", "undefined")


def find_compiler(environment: Mapping[str, str] | None = None) -> Compiler:
    """Return the C compiler to use: $CC, else cc, gcc, clang, else the ziglang wheel's.

    Raises MachineError if there is none that works, or if $CC does not work.
    """
    env = os.environ if environment is None else environment
    if chosen := env.get("CC", "").strip():
        found = identify(tuple(shlex.split(chosen)))
        if found is None:
            raise MachineError(finding("compiler-not-working", command=chosen))
        return found
    for command in _candidates():
        if found := identify(command):
            return found
    raise MachineError(finding("no-compiler", tried="cc, gcc, clang, ziglang", install=_INSTALL))


def _candidates() -> Iterator[tuple[str, ...]]:
    yield from ((name,) for name in ("cc", "gcc", "clang") if shutil.which(name))
    if importlib.util.find_spec("ziglang") is not None:
        yield (sys.executable, "-m", "ziglang", "cc")


@lru_cache(maxsize=32)
def identify(command: tuple[str, ...]) -> Compiler | None:
    """Return the compiler behind a command, told by its predefined macros; None: it is none."""
    try:
        done = subprocess.run(
            (*command, "-dM", "-E", "-x", "c", os.devnull),
            capture_output=True,
            text=True,
            errors="replace",
            timeout=60,
            check=False,
        )
    except (OSError, subprocess.TimeoutExpired):
        return None
    macros = dict(re.findall(r"^#define (\w+) (.*)$", done.stdout, re.MULTILINE))
    if done.returncode != 0 or "__GNUC__" not in macros:
        return None
    return Compiler(command, _family(command, macros), _version(macros))


def _family(command: tuple[str, ...], macros: Mapping[str, str]) -> Family:
    if "ziglang" in command or command[0].rsplit("/", 1)[-1] == "zig":
        return Family.ZIG
    return Family.CLANG if "__clang__" in macros else Family.GCC


def _version(macros: Mapping[str, str]) -> str:
    prefix = "__clang" if "__clang__" in macros else "__GNUC"
    names = ("_major__", "_minor__", "_patchlevel__")
    if prefix == "__GNUC":
        names = ("__", "_MINOR__", "_PATCHLEVEL__")
    return ".".join(macros.get(prefix + name, "0").strip() for name in names)
