"""How output is drawn: its width, colour, and the signs that a stream can show.

Every state has a word and a sign; colour only repeats them. A stream that is not a terminal,
a dumb terminal and NO_COLOR (no-color.org) get plain ASCII without colour.
"""

from collections.abc import Mapping
from dataclasses import dataclass
from io import StringIO
from typing import TYPE_CHECKING, TextIO

if TYPE_CHECKING:
    from rich.console import Console, RenderableType

PIPE_WIDTH = 100
WIDEST = 110
NARROWEST = 40


@dataclass(frozen=True)
class Look:
    """`fine` allows signs outside ASCII."""

    width: int = PIPE_WIDTH
    colour: bool = False
    fine: bool = False

    def sign(self, state: str) -> str:
        """Return the sign of "holds", "fails", "not run", "open" or "note"."""
        return (_FINE if self.fine else _PLAIN)[state]


_FINE = {"holds": "◆", "fails": "✖", "not run": "◇", "open": "◇", "note": "→"}
_PLAIN = {"holds": "[+]", "fails": "[X]", "not run": "[ ]", "open": "[?]", "note": "->"}
STYLES = {
    "holds": "green",
    "fails": "bold red",
    "not run": "yellow",
    "open": "yellow",
    "note": "cyan",
}


def look_of(stream: TextIO, environment: Mapping[str, str], columns: int) -> Look:
    """Return how to draw on `stream`; `columns` is the terminal's width, if it is one."""
    if not stream.isatty():
        return Look()
    width = max(NARROWEST, min(columns, WIDEST))
    if environment.get("NO_COLOR") or environment.get("TERM", "dumb") == "dumb":
        return Look(width)
    encoding = (stream.encoding or "").lower().replace("-", "")
    return Look(width, colour=True, fine=encoding == "utf8")


def drawn(look: Look, *parts: "RenderableType") -> str:
    """Return the text of `parts`, one below the other, as `look` says."""
    console = _console(look)
    for part in parts:
        console.print(part)
    lines = _text_of(console).split("\n")
    return "\n".join(line.rstrip() for line in lines)


def _console(look: Look) -> "Console":
    from rich.console import Console

    return Console(
        file=StringIO(),
        width=look.width,
        force_terminal=look.colour,
        color_system="standard" if look.colour else None,
        legacy_windows=False,
        highlight=False,
        markup=False,
        emoji=False,
        _environ={},
    )


def _text_of(console: "Console") -> str:
    assert isinstance(console.file, StringIO)
    return console.file.getvalue()
