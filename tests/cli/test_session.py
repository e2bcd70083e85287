import errno
import os
import pty
import subprocess
import sys
from collections.abc import Callable, Mapping
from io import StringIO
from pathlib import Path

import pytest

from guardbit.cli.session import OutputError, PipeClosedError, Session


def on_a_terminal(arguments: list[str], environment: Mapping[str, str]) -> str:
    """Return what the command writes to a pseudo-terminal that it has for both streams."""
    master, slave = pty.openpty()
    process = subprocess.Popen(
        [sys.executable, "-m", "guardbit.cli.main", *arguments],
        stdout=slave,
        stderr=slave,
        env={**os.environ, "COLUMNS": "80", "PYTHONUTF8": "1", **environment},
    )
    os.close(slave)
    said = b""
    with process:
        try:
            while part := os.read(master, 4096):
                said += part
        except OSError as error:
            # Linux says so when the other side has been closed.
            assert error.errno == errno.EIO
    os.close(master)
    return said.decode().replace("\r\n", "\n")


def test_a_terminal_gets_colour_and_fine_signs(soften: Path) -> None:
    said = on_a_terminal(["size", str(soften)], {"TERM": "xterm", "NO_COLOR": ""})
    assert "\x1b[1m" in said and "\u25a0" in said


@pytest.mark.parametrize("environment", [{"TERM": "xterm", "NO_COLOR": "1"}, {"TERM": "dumb"}])
def test_a_plain_terminal_gets_plain_text(soften: Path, environment: Mapping[str, str]) -> None:
    said = on_a_terminal(["size", str(soften)], environment)
    assert "\x1b" not in said and said.isascii()
    assert max(map(len, said.splitlines())) <= 80


def test_progress_is_shown_only_for_long_work(soften: Path, spec_file: Callable[..., Path]) -> None:
    slow = Path("slow-cc")
    slow.write_text("#!/bin/sh\nsleep 1\nexit 1\n")
    slow.chmod(0o755)
    arguments = ["verify", str(soften), str(spec_file("other")), "--cc", str(slow.resolve())]
    said = on_a_terminal(arguments, {"TERM": "xterm", "NO_COLOR": "1"})
    assert "[....................] 0 of 2 specs, 1 s" in said
    assert "\x1b[K" in said.split("soften3.toml:")[0]
    quick = on_a_terminal(["size", str(soften)], {"TERM": "xterm", "NO_COLOR": "1"})
    assert "specs," not in quick and "\x1b" not in quick


class _Broken(StringIO):
    def __init__(self, number: int) -> None:
        super().__init__()
        self._number = number

    def write(self, text: str) -> int:
        raise OSError(self._number, os.strerror(self._number))


@pytest.mark.parametrize(
    ("number", "expected"), [(errno.EPIPE, PipeClosedError), (errno.ENOSPC, OutputError)]
)
def test_a_stream_that_fails(
    monkeypatch: pytest.MonkeyPatch, number: int, expected: type[Exception]
) -> None:
    session = Session()
    monkeypatch.setattr(sys, "stdout", _Broken(number))
    monkeypatch.setattr(sys, "stderr", _Broken(number))
    with pytest.raises(expected):
        session.out("text")
    session.err("nobody can be told that this failed")


def test_no_bar_without_a_terminal(capsys: pytest.CaptureFixture[str]) -> None:
    tick = Session().bar("specs", 3)
    tick(1)
    tick(-1)
    assert capsys.readouterr() == ("", "")
