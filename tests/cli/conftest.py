"""A small spec, and the command run in this process or in one of its own."""

import os
import signal
import subprocess
import sys
from collections.abc import Callable, Iterator, Mapping
from contextlib import ExitStack
from dataclasses import dataclass
from pathlib import Path
from typing import IO

import pytest

from guardbit.cli.main import status_of


@dataclass(frozen=True)
class Ran:
    status: int
    out: str
    err: str


Guardbit = Callable[..., Ran]


@pytest.fixture
def guardbit(capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch) -> Guardbit:
    """Return the command, run in this process, its streams not terminals."""
    monkeypatch.delenv("GUARDBIT_DEBUG", raising=False)

    def run(*arguments: str | Path) -> Ran:
        status = status_of([str(each) for each in arguments])
        captured = capsys.readouterr()
        return Ran(status, captured.out, captured.err)

    return run


@pytest.fixture
def start() -> Iterator[Callable[..., "subprocess.Popen[str]"]]:
    """Yield the command as a process of its own, leading a group of its own.

    `env` adds to the environment; `stdout` is a pipe unless a file is given.
    """
    # a suite that a shell started in the background has SIGINT ignored, and hands that on
    before = signal.signal(signal.SIGINT, signal.default_int_handler)
    with ExitStack() as stack:
        stack.callback(signal.signal, signal.SIGINT, before)

        def run(
            *arguments: str | Path,
            env: Mapping[str, str] | None = None,
            stdout: IO[str] | int = subprocess.PIPE,
        ) -> "subprocess.Popen[str]":
            process = subprocess.Popen(
                [sys.executable, "-m", "guardbit.cli.main", *map(str, arguments)],
                stdout=stdout,
                stderr=subprocess.PIPE,
                text=True,
                env={**os.environ, **(env or {})},
                process_group=0,
            )
            stack.enter_context(process)
            stack.callback(process.kill)
            return process

        yield run
