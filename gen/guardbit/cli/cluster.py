"""Work on many items on an existing Dask cluster, as `executor.as_done` does it in processes."""

import queue
from collections.abc import Callable, Generator, Sequence
from contextlib import suppress
from importlib import import_module
from typing import Any, Protocol, TypeVar

from guardbit.model.finding import MachineError, finding

T = TypeVar("T")
R = TypeVar("R")

CONNECT_SECONDS = 15
IDLE_SECONDS = 60.0
TRIES = 4
_TICK = 0.1


class _Future(Protocol):
    """What is used of a future of the engine."""

    status: str

    def result(self, timeout: float) -> object: ...

    def exception(self, timeout: float) -> BaseException | None: ...

    def add_done_callback(self, function: Callable[["_Future"], None]) -> None: ...


class _Client(Protocol):
    """What is used of a client of the engine, which has no types of its own."""

    status: str

    def submit(self, work: Callable[[Any], Any], item: object, *, pure: bool) -> _Future: ...

    def cancel(self, futures: Sequence[_Future], *, force: bool) -> None: ...

    def scheduler_info(self, *, n_workers: int) -> dict[str, Any]: ...

    def wait_for_workers(self, n_workers: int, *, timeout: float) -> None: ...

    def close(self, *, timeout: float) -> None: ...


def as_done_on(
    address: str,
    work: Callable[[T], R],
    items: Sequence[T],
    tick: Callable[[int], None] = lambda done: None,
) -> Generator[tuple[int, R], None, None]:
    """Yield (number of the item, work(item)) as results arrive from a scheduler's workers.

    The engine itself gives what a worker held that went away to another one; an item with
    which workers keep going away is tried TRIES times. Closing the iterator, or any exception,
    cancels what is not done. Raises MachineError if the extra `cluster` is not installed, the
    scheduler cannot be reached, has no worker left, or an item cannot be worked on.
    """
    client = _client(address)
    try:
        yield from _Run(client, address, work, items).results(tick)
    finally:
        with suppress(Exception):
            client.close(timeout=5)


def _client(address: str) -> _Client:
    try:
        engine = import_module("distributed")
    except ImportError:
        raise MachineError(finding("needs-distributed")) from None
    try:
        client: _Client = engine.Client(address, timeout=CONNECT_SECONDS, set_as_default=False)
    except (OSError, ValueError, TypeError) as error:
        reason = str(error).splitlines()[0] if str(error) else type(error).__name__
        raise MachineError(
            finding("scheduler-unreachable", address=address, reason=reason)
        ) from None
    try:
        client.wait_for_workers(1, timeout=CONNECT_SECONDS)
    except TimeoutError:
        client.close(timeout=5)
        raise MachineError(finding("scheduler-without-workers", address=address)) from None
    return client


def _failed(address: str, reason: str) -> MachineError:
    short = " ".join(reason.split())[:200]
    return MachineError(finding("scheduler-failed", address=address, reason=short))


class _Run:
    """The items of one run, their futures, and what has arrived."""

    def __init__(
        self, client: _Client, address: str, work: Callable[[Any], Any], items: Sequence[Any]
    ) -> None:
        self._client, self._address, self._work, self._items = client, address, work, items
        self._arrived: queue.SimpleQueue[int] = queue.SimpleQueue()
        self._futures: dict[int, _Future] = {}
        self._tries = dict.fromkeys(range(len(items)), 0)

    def results(self, tick: Callable[[int], None]) -> Generator[tuple[int, Any], None, None]:
        """Yield number and result of every item; cancel what is left when closed."""
        done, idle = 0, 0.0
        try:
            for index in range(len(self._items)):
                self._submit(index)
            while done < len(self._items):
                try:
                    index = self._arrived.get(timeout=_TICK)
                except queue.Empty:
                    idle = self._waited(idle)
                    tick(done)
                    continue
                idle = 0.0
                for result in self._collected(index):
                    done += 1
                    tick(done)
                    yield index, result
        finally:
            with suppress(Exception):
                self._client.cancel(list(self._futures.values()), force=True)

    def _submit(self, index: int) -> None:
        self._tries[index] += 1
        future = self._client.submit(self._work, self._items[index], pure=False)
        self._futures[index] = future
        future.add_done_callback(lambda _: self._arrived.put(index))

    def _collected(self, index: int) -> list[object]:
        """Return the item's result in a list; an empty one if it is tried once more."""
        future = self._futures.pop(index)
        if future.status == "finished":
            with suppress(Exception):
                return [future.result(timeout=CONNECT_SECONDS)]
            # the worker that held the result went away in this moment
            self._again(index, "its result was lost")
            return []
        error = future.exception(timeout=CONNECT_SECONDS) if future.status == "error" else None
        if error is not None and type(error).__name__ != "KilledWorker":
            raise _failed(self._address, f"{type(error).__name__}: {error}")
        self._again(index, "workers that had it went away")
        return []

    def _again(self, index: int, reason: str) -> None:
        if self._tries[index] >= TRIES:
            raise _failed(self._address, reason)
        self._submit(index)

    def _waited(self, idle: float) -> float:
        """Return for how long no worker has been there. Raises MachineError if it is too long."""
        if self._client.status != "running":
            raise _failed(self._address, "the connection was lost")
        if self._client.scheduler_info(n_workers=-1)["workers"]:
            return 0.0
        if idle > IDLE_SECONDS:
            raise MachineError(finding("scheduler-without-workers", address=self._address))
        return idle + _TICK
