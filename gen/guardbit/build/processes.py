"""Child processes that run jobs: watched, restarted behind a case that killed one."""

import signal
import subprocess
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import TypeAlias

import numpy as np

from guardbit.build.compilation import BuildError
from guardbit.build.job import encode
from guardbit.build.results import decode
from guardbit.model.finding import MachineError, finding
from guardbit.model.routine import Call, Codes, Harm, Outcome, Probed, Routine

MOST_DEATHS = 8
"""After so many crashes of one job the rest of it is not run; a hang counts for four."""

_WEIGHT = {Harm.HANG: 4}

NOT_LOADED, CANNOT_RUN = 98, 99
"""Exit statuses by which a child says that a function is missing, or that it is at fault."""

_LEAST_PATIENCE = 30.0
_MOST_CODES = 1 << 24

_Task: TypeAlias = tuple[int, Routine, Call]


@dataclass(frozen=True)
class Ended:
    """How a child ended. `status` is negative for a signal, None if it was stopped here."""

    data: bytes
    status: int | None
    words: str


def watch(
    command: Sequence[str],
    output: Path,
    seconds: float,
    environment: Mapping[str, str] | None = None,
) -> Ended:
    """Return how a child ended that writes to `output`.

    The child limits its processor time itself; one that writes nothing for much longer than
    `seconds` is ended from here. Raises MachineError if it cannot be started.
    """
    output.write_bytes(b"")
    log = output.with_suffix(".log")
    try:
        with log.open("wb") as words:
            child = subprocess.Popen(
                command, stdin=subprocess.DEVNULL, stdout=words, stderr=words, env=environment
            )
    except OSError as error:
        reason = error.strerror or str(error)
        raise MachineError(finding("tool-failed", command=command[0], reason=reason)) from error
    status = _wait(child, output, max(_LEAST_PATIENCE, 4 * seconds))
    return Ended(output.read_bytes(), status, log.read_text("utf-8", "replace"))


def _wait(child: subprocess.Popen[bytes], output: Path, patience: float) -> int | None:
    size = -1
    try:
        while size != (size := output.stat().st_size):
            try:
                return child.wait(timeout=patience)
            except subprocess.TimeoutExpired:
                continue
        return None
    finally:
        if child.poll() is None:
            child.kill()
            child.wait()


def death(ended: Ended) -> tuple[Harm, str]:
    """Return the harm that ended a child before it was done.

    Raises BuildError if a function is not in the library, MachineError if the child failed.
    """
    if ended.status == NOT_LOADED:
        raise BuildError(finding("link-failed", message=ended.words.strip()[-300:]))
    if ended.status == CANNOT_RUN:
        raise MachineError(finding("child-failed", reason=ended.words.strip()[-300:]))
    if ended.status is None or ended.status == -signal.SIGVTALRM:
        return Harm.HANG, "no end within the time limit"
    if ended.status < 0:
        return Harm.CRASH, signal.Signals(-ended.status).name
    return Harm.CRASH, f"the process ended with status {ended.status}"


def run_tasks(
    tasks: Sequence[_Task],
    launch: Callable[[bytes], Ended],
    diagnose: Callable[[Ended], tuple[Harm, str]] = death,
) -> list[Outcome]:
    """Return an outcome per task, in order, with a new child after each that died."""
    done: list[Outcome] = []
    deaths = 0
    while len(done) < len(tasks) and deaths < MOST_DEATHS:
        rest = _some(tasks[len(done) :])
        ended = launch(encode(rest))
        good = decode(ended.data, [(routine, call) for _, routine, call in rest])
        done += good
        if len(good) < len(rest):
            harm, detail = diagnose(ended)
            done.append(Outcome((), None, None, harm, detail))
            deaths += _WEIGHT.get(harm, 1)
    left = Outcome((), None, None, Harm.NOT_RUN, "after too many crashes or hangs")
    return done + [left] * (len(tasks) - len(done))


def _some(tasks: Sequence[_Task]) -> Sequence[_Task]:
    """Return as many of the first tasks as one child is given: their frames stay in memory."""
    total = np.cumsum([call.frame.size for _, _, call in tasks])
    return tasks[: max(1, int(np.searchsorted(total, _MOST_CODES)))]


def run_probe(
    arguments: Codes,
    launch: Callable[[bytes], Ended],
    diagnose: Callable[[Ended], tuple[Harm, str]] = death,
) -> Probed:
    """Return what a probe gave for each argument, up to where its child died."""
    ended = launch(np.int64(arguments.size).tobytes() + arguments.astype(np.int64).tobytes())
    values = np.frombuffer(ended.data[: len(ended.data) // 8 * 8], np.int64)
    if values.size == arguments.size:
        return Probed(values)
    return Probed(values, *diagnose(ended))
