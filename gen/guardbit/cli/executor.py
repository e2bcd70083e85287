"""Work on many items in worker processes: results in the items' order, nobody left behind.

Each worker is a fresh process with a session of its own, so a Ctrl-C at the terminal reaches
only this process, which then ends the workers and whatever they started. A worker that dies
costs the item that it was working on, and no other.
"""

import os
import signal
import threading
import time
from collections import deque
from collections.abc import Callable, Generator, Iterator, Sequence
from contextlib import closing, contextmanager, suppress
from dataclasses import dataclass
from multiprocessing import get_context, parent_process
from multiprocessing.connection import Connection, wait
from multiprocessing.context import SpawnProcess
from typing import Generic, TypeVar

T = TypeVar("T")
R = TypeVar("R")

_PATIENCE = 10.0
_TICK = 0.1
_SWEEP = 0.02


def in_order(
    work: Callable[[T], R],
    items: Sequence[T],
    jobs: int,
    lost: Callable[[T, int], R],
    tick: Callable[[int], None] = lambda done: None,
) -> Generator[R, None, None]:
    """Yield work(item) for each item, in order, from up to `jobs` processes.

    `work` and what it takes and returns are picklable; it raises nothing. `lost(item,
    exit status)` stands in for the result of a worker that died (a negative status is a
    signal's number). `tick(items done)` is called about ten times a second. Closing the
    iterator, or any exception, ends every worker.
    """
    done: dict[int, R] = {}
    following = 0
    with closing(as_done(work, items, jobs, lost, tick)) as arriving:
        for index, result in arriving:
            done[index] = result
            while following in done:
                yield done.pop(following)
                following += 1


def as_done(
    work: Callable[[T], R],
    items: Sequence[T],
    jobs: int,
    lost: Callable[[T, int], R],
    tick: Callable[[int], None] = lambda done: None,
) -> Generator[tuple[int, R], None, None]:
    """Yield (number of the item, work(item)) as results arrive; else as `in_order`."""
    pool = _Pool(work, deque(enumerate(items)), lost)
    count = 0
    with _ended(pool):
        for _ in range(min(jobs, len(items))):
            pool.start()
        while count < len(items):
            arrived = pool.collect(_TICK)
            count += len(arrived)
            tick(count)
            yield from arrived


@dataclass
class _Worker(Generic[T]):
    process: SpawnProcess
    connection: Connection
    item: tuple[int, T] | None = None


class _Pool(Generic[T, R]):
    """The workers and the items that none has taken yet."""

    def __init__(
        self,
        work: Callable[[T], R],
        waiting: deque[tuple[int, T]],
        lost: Callable[[T, int], R],
    ) -> None:
        self._work, self._waiting, self._lost = work, waiting, lost
        self.workers: list[_Worker[T]] = []

    def start(self) -> None:
        """Start a worker and give it an item."""
        # Spawned, not forked: a fork would copy locks that other threads hold.
        context = get_context("spawn")
        ours, theirs = context.Pipe()
        process = context.Process(target=_serve, args=(theirs, self._work), daemon=True)
        worker: _Worker[T] = _Worker(process, ours)
        with _uninterrupted():
            process.start()
            self.workers.append(worker)
        theirs.close()
        self._feed(worker)

    def collect(self, seconds: float) -> list[tuple[int, R]]:
        """Return the results that arrive within `seconds`, with their items' numbers."""
        by_connection = {w.connection: w for w in self.workers if w.item is not None}
        ready = wait(list(by_connection), seconds)
        return [self._take(w) for c, w in by_connection.items() if c in ready]

    def _take(self, worker: _Worker[T]) -> tuple[int, R]:
        assert worker.item is not None
        index, item = worker.item
        try:
            result: R = worker.connection.recv()
        except (EOFError, OSError):
            return index, self._replace(worker, item)
        self._feed(worker)
        return index, result

    def _replace(self, worker: _Worker[T], item: T) -> R:
        self.workers.remove(worker)
        status = _end(worker.process, _PATIENCE)
        worker.connection.close()
        if self._waiting:
            self.start()
        return self._lost(item, status)

    def _feed(self, worker: _Worker[T]) -> None:
        worker.item = self._waiting.popleft() if self._waiting else None
        if worker.item is not None:
            # A worker that is dead already shows itself when its answer is read.
            with suppress(OSError):
                worker.connection.send(worker.item[1])


@contextmanager
def _ended(pool: _Pool[T, R]) -> Iterator[None]:
    try:
        yield
    finally:
        with _uninterrupted():
            for worker in pool.workers:
                worker.connection.close()
                if worker.item is not None:
                    worker.process.terminate()
            for worker in pool.workers:
                _end(worker.process, _PATIENCE)


def _end(process: SpawnProcess, seconds: float) -> int:
    """Return the exit status of a process that is ending; its whole session is ended with it."""
    wait([process.sentinel], seconds)
    # Before join(): until then the number cannot belong to another process.
    if process.pid is not None:
        with suppress(ProcessLookupError, PermissionError):
            os.killpg(process.pid, signal.SIGKILL)
        process.kill()
    process.join()
    return process.exitcode or 0


@contextmanager
def _uninterrupted() -> Generator[None, None, None]:
    """Hold back Ctrl-C, here and in processes started meanwhile."""
    before = signal.pthread_sigmask(signal.SIG_BLOCK, {signal.SIGINT})
    try:
        yield
    finally:
        signal.pthread_sigmask(signal.SIG_SETMASK, before)


def _serve(connection: Connection, work: Callable[[T], R]) -> None:
    """Answer items until there are no more. Runs in the worker."""
    os.setsid()
    signal.signal(signal.SIGINT, signal.SIG_IGN)
    signal.signal(signal.SIGTERM, _leave)
    signal.pthread_sigmask(signal.SIG_UNBLOCK, {signal.SIGINT})
    threading.Thread(target=_follow_parent, daemon=True).start()
    try:
        with suppress(EOFError, OSError):
            while True:
                connection.send(work(connection.recv()))
    except SystemExit:
        # All is cleared away. What was started and is still there has nobody left.
        os.killpg(os.getpid(), signal.SIGKILL)


def _leave(number: int, frame: object) -> None:
    """End this worker by an exception, so that temporary folders are cleared away."""
    # Not SIG_IGN, which programs started from now on would inherit.
    signal.signal(signal.SIGTERM, lambda number, frame: None)
    threading.Thread(target=_end_session, daemon=True).start()
    raise SystemExit(128 + number)


def _end_session() -> None:
    """End, again and again, what threads of this process may still be starting."""
    while True:
        os.killpg(os.getpid(), signal.SIGTERM)
        time.sleep(_SWEEP)


def _follow_parent() -> None:
    """End this session when the process that started it is gone, however it went."""
    parent = parent_process()
    assert parent is not None
    wait([parent.sentinel])
    os.kill(os.getpid(), signal.SIGTERM)
    threading.Event().wait(_PATIENCE)
    os.killpg(os.getpid(), signal.SIGKILL)
