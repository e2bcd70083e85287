"""A Dask cluster of processes on the loopback interface: a scheduler and workers, each its own."""

import subprocess
import sys
import time
from collections.abc import Iterator
from contextlib import ExitStack, contextmanager
from dataclasses import dataclass
from pathlib import Path

SECONDS = 30.0


@dataclass(frozen=True)
class Cluster:
    """The scheduler's address, and the workers' processes."""

    address: str
    workers: tuple["subprocess.Popen[bytes]", ...]


@contextmanager
def local_cluster(folder: Path, workers: int) -> Iterator[Cluster]:
    """Yield a cluster whose processes end with the block; `folder` holds what they write."""
    with ExitStack() as stack:
        told = folder / "scheduler.json"
        words = [
            "scheduler",
            "--host",
            "127.0.0.1",
            "--port",
            "0",
            "--no-dashboard",
            "--no-jupyter",
        ]
        _start(stack, [*words, "--scheduler-file", str(told)], folder)
        address = _address(told)
        started = tuple(_worker(stack, address, folder) for _ in range(workers))
        yield Cluster(address, started)


def _worker(stack: ExitStack, address: str, folder: Path) -> "subprocess.Popen[bytes]":
    words = ["worker", address, "--host", "127.0.0.1", "--nthreads", "1", "--no-nanny"]
    words += ["--no-dashboard", "--memory-limit", "0", "--local-directory", str(folder)]
    return _start(stack, words, folder)


def _start(stack: ExitStack, words: list[str], folder: Path) -> "subprocess.Popen[bytes]":
    log = stack.enter_context((folder / f"{words[0]}.log").open("ab"))
    command = [sys.executable, "-m", "distributed.cli.dask_" + words[0], *words[1:]]
    process = subprocess.Popen(command, stdout=log, stderr=log, cwd=folder)
    stack.callback(_ended, process)
    return process


def _ended(process: "subprocess.Popen[bytes]") -> None:
    process.kill()
    process.wait()


def _address(told: Path) -> str:
    import json

    end = time.monotonic() + SECONDS
    while time.monotonic() < end:
        try:
            return str(json.loads(told.read_text())["address"])
        except (OSError, ValueError, KeyError):
            time.sleep(0.05)
    raise AssertionError("the scheduler did not start")
