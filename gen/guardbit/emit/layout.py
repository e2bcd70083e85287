"""Filters of the templates that break long lines where a person would."""

import textwrap
from collections.abc import Sequence

from guardbit.emit.expressions import number

WIDTH = 96


def fold(text: str) -> str:
    """Return declarations or calls with lines over WIDTH broken after commas, indented by 4."""
    return "\n".join(_folded(line) for line in text.split("\n"))


def _folded(line: str) -> str:
    if len(line) <= WIDTH:
        return line
    indent = " " * (len(line) - len(line.lstrip()) + 4)
    lines, current = [], ""
    for piece in line.split(", "):
        joined = f"{current}, {piece}" if current else piece
        if current and len(joined) + 1 > WIDTH:
            lines.append(f"{current},")
            joined = indent + piece
        current = joined
    return "\n".join([*lines, current])


def comment(text: str) -> str:
    """Return a sentence or two as a C comment, on as many lines as they take."""
    words = " ".join(text.split())
    if len(words) + 6 <= WIDTH:
        return f"/* {words} */"
    lines = textwrap.wrap(words, WIDTH - 6, break_on_hyphens=False)
    return "/* " + "\n * ".join(lines) + " */"


def prose(lines: Sequence[str]) -> str:
    """Return lines of text as the inside of a C comment block."""
    wrapped: list[str] = []
    for line in lines:
        indent = " " * (len(line) - len(line.lstrip()) + 2)
        wrapped += textwrap.wrap(line, WIDTH - 4, subsequent_indent=indent) or [""]
    return "\n".join(f" * {line}".rstrip() for line in wrapped)


def initialiser(values: Sequence[int]) -> str:
    """Return an initialiser's numbers, as many on a line as fit."""
    text = ", ".join(number(int(value)) for value in values)
    return textwrap.fill(text, WIDTH, initial_indent="    ", subsequent_indent="    ")
