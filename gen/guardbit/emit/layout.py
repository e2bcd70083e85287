"""Filters of the templates that break long lines where a person would."""

import textwrap
from collections.abc import Sequence

from guardbit.emit.expressions import number

WIDTH = 96


def fold(text: str) -> str:
    """Return C with lines over WIDTH broken after commas, or before a colon; indented by 4."""
    return "\n".join(_folded(line) for line in text.split("\n"))


def _folded(line: str) -> str:
    if len(line) <= WIDTH:
        return line
    indent = " " * (len(line) - len(line.lstrip()) + 4)
    if ", " not in line:
        return f"\n{indent}: ".join(line.rsplit(" : ", 1))
    lines, current = [], ""
    for piece in line.split(", "):
        joined = f"{current}, {piece}" if current else piece
        if current and len(joined) + 1 > WIDTH:
            lines.append(f"{current},")
            joined = indent + piece
        current = joined
    return "\n".join([*lines, current])


def harmless(text: str) -> str:
    """Return text that can stand in a C comment: it neither ends nor opens one."""
    return text.replace("*/", "* /").replace("/*", "/ *").replace("??", "? ?")


def comment(text: str, indent: int = 0) -> str:
    """Return a sentence or two as a C comment, on as many lines as they take."""
    words = " ".join(harmless(text).split())
    left = " " * indent
    if indent + len(words) + 6 <= WIDTH:
        return f"/* {words} */"
    lines = textwrap.wrap(words, WIDTH - indent - 6, break_on_hyphens=False)
    return "/* " + f"\n{left} * ".join(lines) + " */"


def prose(lines: Sequence[str]) -> str:
    """Return lines of text as the inside of a C comment block; long ones are broken.

    Two spaces in a row or more start a column, under which a broken line goes on.
    """
    wrapped: list[str] = []
    for line in lines:
        column = line.rfind("  ") + 2 if "  " in line else 0
        wrapped += textwrap.wrap(
            harmless(line), WIDTH - 4, subsequent_indent=" " * column, break_on_hyphens=False
        ) or [""]
    return "\n".join(f" * {line}".rstrip() for line in wrapped)


def initialiser(values: Sequence[int], indent: int = 4) -> str:
    """Return an initialiser's numbers, as many on a line as fit."""
    text, left = ", ".join(number(int(value)) for value in values), " " * indent
    return textwrap.fill(text, WIDTH, initial_indent=left, subsequent_indent=left)
