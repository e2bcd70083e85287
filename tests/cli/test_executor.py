"""Workers are given Python expressions: a test module's functions have no name in a child."""

import os
import signal
import subprocess
import sys
import time
from collections.abc import Generator
from contextlib import closing
from pathlib import Path

import pytest

from guardbit.cli.executor import as_done, in_order

SLEEP = "__import__('time').sleep({}) or {!r}"
# Leaves its own number and that of a process that it started, then works on.
HOLD = (
    "[open({path!r}, 'w').write(f'{{__import__(\"os\").getpid()}} "
    '{{__import__("subprocess").Popen(["sleep", "60"]).pid}}\'), '
    "__import__('time').sleep(60)]"
)


def lost(item: str, status: int) -> object:
    return ("lost", item[:9], status)


def run(items: list[str], jobs: int) -> Generator[object, None, None]:
    return in_order(eval, items, jobs, lost)


def alive(pid: int) -> bool:
    try:
        os.kill(pid, 0)
    except ProcessLookupError:
        return False
    # A zombie that init has not collected is dead as well.
    return "\nState:\tZ" not in Path(f"/proc/{pid}/status").read_text()


def gone(pids: list[int], seconds: float = 8) -> bool:
    end = time.monotonic() + seconds
    while time.monotonic() < end:
        try:
            if not any(alive(pid) for pid in pids):
                return True
        except FileNotFoundError:
            pass
        time.sleep(0.05)
    return False


def numbers(path: Path, seconds: float = 8) -> list[int]:
    end = time.monotonic() + seconds
    while time.monotonic() < end:
        if path.is_file() and len(words := path.read_text().split()) == 2:
            return [int(word) for word in words]
        time.sleep(0.05)
    raise AssertionError(f"nothing in {path}")


def test_results_keep_the_order_given() -> None:
    items = [SLEEP.format(0.4, "slow"), "'quick'", "6 * 7", SLEEP.format(0.1, "last")]
    assert list(run(items, 2)) == ["slow", "quick", 42, "last"]


def test_no_items() -> None:
    assert list(run([], 4)) == []


def test_work_runs_elsewhere_and_at_once() -> None:
    items = [f"({SLEEP.format(0.5, 1)}) and __import__('os').getpid()"] * 2
    pids = list(run(items, 2))
    assert len({os.getpid(), *pids}) == 3


@pytest.mark.parametrize(
    ("end", "status"),
    [
        ("__import__('os')._exit(3)", 3),
        ("__import__('os').kill(__import__('os').getpid(), 11)", -signal.SIGSEGV),
        ("__import__('os').kill(__import__('os').getpid(), 9)", -signal.SIGKILL),
    ],
)
def test_a_worker_that_dies_costs_its_own_item(end: str, status: int) -> None:
    results = list(run(["1", end, "2", "3"], 1))
    assert results == [1, ("lost", end[:9], status), 2, 3]


def test_every_worker_dies() -> None:
    end = "__import__('os')._exit(1)"
    assert list(run([end] * 5, 2)) == [("lost", end[:9], 1)] * 5


def test_ticks_come_while_work_is_long() -> None:
    ticks: list[int] = []
    items = [SLEEP.format(0.6, 1), "2"]
    assert list(in_order(eval, items, 2, lost, ticks.append)) == [1, 2]
    assert len(ticks) >= 4
    assert ticks == sorted(ticks) and ticks[-1] == 2


def test_closing_ends_workers_and_what_they_started(tmp_path: Path) -> None:
    path = tmp_path / "numbers"
    items = ["'first'", HOLD.format(path=str(path))]
    with closing(run(items, 2)) as results:
        assert next(results) == "first"
        pids = numbers(path)
        assert all(alive(pid) for pid in pids)
    assert gone(pids)


def test_an_exception_at_the_consumer_ends_workers(tmp_path: Path) -> None:
    path = tmp_path / "numbers"

    def tick(done: int) -> None:
        if path.is_file() and len(path.read_text().split()) == 2:
            raise KeyboardInterrupt

    with pytest.raises(KeyboardInterrupt):
        list(in_order(eval, [HOLD.format(path=str(path)), "1"], 2, lost, tick))
    assert gone(numbers(path))


def test_workers_follow_a_parent_that_is_killed(tmp_path: Path) -> None:
    path = tmp_path / "numbers"
    script = tmp_path / "parent.py"
    script.write_text(
        "from guardbit.cli.executor import in_order\n"
        "if __name__ == '__main__':\n"
        f"    list(in_order(eval, [{HOLD.format(path=str(path))!r}], 1, print))\n"
    )
    parent = subprocess.Popen([sys.executable, str(script)])
    pids = numbers(path)
    parent.kill()
    parent.wait()
    assert gone(pids)


def test_results_can_be_had_as_they_arrive() -> None:
    items = [SLEEP.format(0.6, "slow"), "'quick'", "'quicker'"]
    with closing(as_done(eval, items, 2, lost)) as arriving:
        found = list(arriving)
    assert found[-1] == (0, "slow")
    assert sorted(index for index, _ in found) == [0, 1, 2]
