"""The streams of one run of the command: how to draw on them, and what happens when they fail."""

import os
import sys
import time
from collections.abc import Callable
from contextlib import suppress
from math import ceil
from shutil import get_terminal_size
from typing import TextIO

from guardbit.report.look import Look, look_of

_BAR = 20
_LONG = 1.0


class PipeClosedError(Exception):
    """Whoever read our output has gone; there is nobody to tell."""


class OutputError(Exception):
    """The output cannot be written."""


class Session:
    """Standard output for results, standard error for findings; both flushed as they come."""

    def __init__(self, json: bool = False) -> None:
        self.json = json
        self.debug = os.environ.get("GUARDBIT_DEBUG", "0") not in ("", "0")
        columns = get_terminal_size((100, 24)).columns
        # A character that the stream's encoding lacks is spelt out; it never stops the work.
        for stream in (sys.stdout, sys.stderr):
            if hasattr(stream, "reconfigure"):
                stream.reconfigure(errors="backslashreplace")
        self.out_look: Look = look_of(sys.stdout, os.environ, columns)
        self.err_look: Look = look_of(sys.stderr, os.environ, columns)

    def out(self, text: str) -> None:
        """Write results. Raises PipeClosedError, OutputError."""
        _write(sys.stdout, text)

    def err(self, text: str) -> None:
        """Write to standard error; if that fails there is nowhere left to say so."""
        with suppress(PipeClosedError, OutputError):
            _write(sys.stderr, text)

    def bar(self, noun: str, total: int, begun: int | None = None) -> Callable[[int], None]:
        """Return what draws progress after a second, given how many are done; -1 wipes it.

        With `begun`, how many were done before, it also tells the time that is left at the
        pace since then. It draws nothing where there is no terminal to draw on.
        """
        if not sys.stderr.isatty() or os.environ.get("TERM", "dumb") == "dumb":
            return lambda done: None
        return _Bar(self, noun, total, begun).show


class _Bar:
    def __init__(self, session: Session, noun: str, total: int, begun: int | None) -> None:
        self._session, self._noun, self._total = session, noun, total
        self._begun = begun
        self._start, self._drawn = time.monotonic(), ""

    def show(self, done: int) -> None:
        """Draw how many are done; wipe the line if that is negative."""
        seconds = time.monotonic() - self._start
        text = "" if done < 0 or seconds < _LONG else self._line(done, int(seconds))
        if text != self._drawn:
            self._drawn = text
            self._session.err(f"\r\x1b[K{text}")

    def _line(self, done: int, seconds: int) -> str:
        full = _BAR * done // self._total
        left = self._left(done)
        return (
            f"[{'#' * full}{'.' * (_BAR - full)}] {done} of {self._total} {self._noun}, "
            f"{seconds} s{left}"
        )

    def _left(self, done: int) -> str:
        if self._begun is None or done <= self._begun:
            return ""
        pace = (time.monotonic() - self._start) / (done - self._begun)
        return f", about {ceil(pace * (self._total - done))} s left"


def _write(stream: TextIO, text: str) -> None:
    try:
        stream.write(text)
        stream.flush()
    except BrokenPipeError:
        discard(stream)
        raise PipeClosedError from None
    except OSError as error:
        discard(stream)
        raise OutputError(error.strerror or str(error)) from None


def discard(stream: TextIO) -> None:
    """Send what is left in a broken stream nowhere, so that closing it stays silent."""
    with suppress(OSError, ValueError):
        os.dup2(os.open(os.devnull, os.O_WRONLY), stream.fileno())
