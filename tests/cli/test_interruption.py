"""Runs that end before their time: Ctrl-C, a kill, a reader that goes away, a full device."""

import os
import signal
import subprocess
import sys
import time
import uuid
from collections.abc import Callable
from pathlib import Path

import pytest

Start = Callable[..., "subprocess.Popen[str]"]
Guardbit = Callable[..., object]
Maker = Callable[..., Path]
MARK = "GUARDBIT_TEST_MARK"


def marked(mark: str) -> list[int]:
    """Return the processes that have the mark in their environment."""
    found = []
    for folder in Path("/proc").glob("[0-9]*"):
        try:
            if f"{MARK}={mark}".encode() in (folder / "environ").read_bytes():
                found.append(int(folder.name))
        except OSError:
            continue
    return found


def all_gone(mark: str, seconds: float = 20) -> bool:
    end = time.monotonic() + seconds
    while (left := marked(mark)) and time.monotonic() < end:
        time.sleep(0.05)
    return not left


@pytest.fixture
def endless(soften: Path) -> Path:
    """Return a compiler that tells what it is, and then says when it starts and never ends."""
    path = Path("endless-cc")
    path.write_text(
        '#!/bin/sh\ncase "$*" in *-dM*) exec cc "$@";; esac\n'
        f"touch {path.resolve().parent}/started.$$\nsleep 60\n"
    )
    path.chmod(0o755)
    Path("temporary").mkdir()
    return path.resolve()


def marking(mark: str) -> dict[str, str]:
    """Return an environment with the mark, in which temporary files are found again."""
    return {MARK: mark, "TMPDIR": str(Path("temporary").resolve())}


def wait_for(pattern: str, count: int, seconds: float = 20) -> None:
    end = time.monotonic() + seconds
    while len(list(Path().glob(pattern))) < count:
        assert time.monotonic() < end, f"no {pattern}"
        time.sleep(0.02)


@pytest.mark.parametrize(
    ("number", "status", "words"), [(signal.SIGINT, 130, "interrupted"), (signal.SIGTERM, 143, "")]
)
@pytest.mark.parametrize("count", [1, 2])
@pytest.mark.parametrize("send", [os.kill, os.killpg])
def test_a_signal_ends_all_quietly(
    start: Start,
    endless: Path,
    spec_file: Maker,
    number: signal.Signals,
    status: int,
    words: str,
    count: int,
    send: Callable[[int, int], None],
) -> None:
    """To the process alone, as a script may send it, or to its group, as a terminal does."""
    mark = uuid.uuid4().hex
    specs = [spec_file(f"s{index}") for index in range(count)]
    arguments = [*specs, "--jobs", "2", "--cc", endless, "-o", "out"]
    process = start("verify", *arguments, env=marking(mark))
    wait_for("started.*", count)
    send(process.pid, number)
    out, err = process.communicate(timeout=40)
    assert process.returncode == status
    assert out == "" and words in err and err.count("\n") <= 1
    assert all_gone(mark)
    assert not Path("out").exists()
    assert list(Path("temporary").iterdir()) == []


@pytest.mark.parametrize("count", [1, 2])
def test_a_killed_call_takes_its_workers_along(
    start: Start, endless: Path, spec_file: Maker, count: int
) -> None:
    mark = uuid.uuid4().hex
    specs = [spec_file(f"s{index}") for index in range(count)]
    process = start("verify", *specs, "--jobs", "2", "--cc", endless, env=marking(mark))
    wait_for("started.*", count)
    process.kill()
    process.communicate(timeout=40)
    assert all_gone(mark)


def test_a_kill_while_writing_leaves_whole_files(
    start: Start, guardbit: Guardbit, soften: Path, spec_file: Maker
) -> None:
    guardbit("emit", soften, "-o", "new")
    new = {path.name: path.read_bytes() for path in Path("new").iterdir()}
    spec_file("soften3", bits="20")
    guardbit("emit", soften, "-o", "old")
    old = {path.name: path.read_bytes() for path in Path("old").iterdir()}
    spec_file("soften3")
    for step in range(6):
        guardbit("emit", spec_file("soften3", bits="20"), "-o", "out", "--force")
        spec_file("soften3")
        process = start("emit", soften, "-o", "out")
        time.sleep(0.2 + 0.08 * step)
        process.kill()
        process.communicate(timeout=40)
        there = {path.name: path.read_bytes() for path in Path("out").iterdir()}
        assert set(there) == set(new)
        assert all(data in (old[name], new[name]) for name, data in there.items())


def test_a_reader_that_goes_away(start: Start, soften: Path, spec_file: Maker) -> None:
    process = start("size", soften, spec_file("other"), "--jobs", "1")
    assert process.stdout is not None and process.stderr is not None
    process.stdout.close()
    assert process.stderr.read() == ""
    assert process.wait(timeout=20) == 141


@pytest.mark.parametrize("arguments", [["size", "soften3.toml"], ["--help"], ["explain"]])
def test_a_full_device(start: Start, soften: Path, arguments: list[str]) -> None:
    with Path("/dev/full").open("w") as full:
        process = start(*arguments, stdout=full)
    assert process.stderr is not None
    said = process.stderr.read()
    assert process.wait(timeout=20) == 3
    assert said.startswith("The output could not be written: No space left on device.")


def test_a_full_disk(soften: Path) -> None:
    """A limit on the size of files stands in for a disk with no space left (EFBIG, ENOSPC)."""
    call = f"ulimit -f 1; exec {sys.executable} -m guardbit.cli.main emit soften3.toml -o out"
    done = subprocess.run(["/bin/sh", "-c", call], capture_output=True, text=True, check=False)
    assert done.returncode == 3 and done.stdout == ""
    assert done.stderr.startswith("out: There is no room left")
    assert list(Path("out").iterdir()) == []
