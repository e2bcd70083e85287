"""Writing found numbers into a spec's text, with its comments and layout kept."""

import tomllib
from collections.abc import Mapping, MutableMapping
from copy import deepcopy
from typing import TYPE_CHECKING, Any, TypeAlias

from guardbit.spec.lines import Scan, scan

if TYPE_CHECKING:
    from tomlkit.items import Item

PinValue: TypeAlias = "int | str | list[PinValue] | dict[str, PinValue]"

_TABLES = (
    "filter",
    "kernel",
    "input",
    "coefficient",
    "intermediate",
    "intermediate.accumulator",
    "accumulator",
    "output",
    "border",
    "image",
)
"""Tables that are written with a header, in the order that a reader expects."""


def pinned_text(text: str, values: Mapping[str, PinValue]) -> str:
    """Return a spec's text in which the dotted keys have the values.

    A key that is there keeps its place and comment, and its layout if the value is right
    already. A new one comes last in its table, a new table after the one that precedes it
    in the documentation. Matrices get one row per line, a dict is written inline. Line ends
    are the text's own.

    `text` is TOML that `read_spec` accepts. A result that would read as anything else than
    the old document with these values is never returned: that raises AssertionError.
    """
    import tomlkit

    breaks = "\r\n" if text.count("\n") == text.count("\r\n") > 0 else "\n"
    plain = text.replace("\r\n", "\n") if breaks == "\r\n" else text
    for key in values:
        plain = _with_table(plain, _table_of(key))
    document = tomlkit.parse(plain)
    for key, value in values.items():
        _put(document, key.split("."), value)
    made = tomlkit.dumps(document)
    if tomllib.loads(made) != _meant(tomllib.loads(plain), values):
        raise AssertionError("the text does not read as the values that were to be pinned")
    return made.replace("\n", "\r\n") if breaks == "\r\n" else made


def _table_of(key: str) -> str:
    """Return the longest known table that holds a dotted key."""
    inside = [name for name in _TABLES if key.startswith(f"{name}.")]
    return max(inside, key=len, default="")


def _meant(document: dict[str, Any], values: Mapping[str, PinValue]) -> dict[str, Any]:
    """Return the document with the values put in: what the new text has to say."""
    made = deepcopy(document)
    for key, value in values.items():
        *path, last = key.split(".")
        table = made
        for part in path:
            if not isinstance(table.get(part), dict):
                table[part] = {}
            table = table[part]
        table[last] = value
    return made


def _with_table(text: str, name: str) -> str:
    """Return the text with a header for a table that is not there yet.

    A table whose parent is written inline or in dotted keys gets no header.
    """
    found = scan(text)
    parent = name.partition(".")[0]
    if not name or name in found.keys:
        return text
    headers = _headers(text, found)
    if parent in found.keys and parent not in headers:
        return text
    at = _place(text, headers, name)
    lines = text.splitlines(keepends=True)
    before, after = "".join(lines[:at]), "".join(lines[at:])
    if before and not before.endswith("\n"):
        before += "\n"
    gap = "" if not before or before.endswith("\n\n") else "\n"
    return f"{before}{gap}[{name}]\n" + (f"\n{after}" if after else "")


def _headers(text: str, found: Scan) -> dict[str, int]:
    """Return the tables that have a header, with its line from 1."""
    lines = text.splitlines()
    return {key: line for key, line in found.keys.items() if lines[line - 1].lstrip()[:1] == "["}


def _place(text: str, headers: Mapping[str, int], name: str) -> int:
    """Return before which line, from 0, a new table's header belongs."""
    lines = text.splitlines()
    earlier = [each for each in _TABLES[: _TABLES.index(name)] if each in headers]
    if not earlier:
        return len(lines)
    follows = [line for line in headers.values() if line > headers[earlier[-1]]]
    if not follows:
        return len(lines)
    at = min(follows) - 1
    # comments right above a header are about that table
    while lines[at - 1].startswith("#"):
        at -= 1
    return at


def _put(table: MutableMapping[str, Any], path: list[str], value: PinValue) -> None:
    import tomlkit

    part, *rest = path
    if rest:
        if not isinstance(table.get(part), MutableMapping):
            _set(table, part, tomlkit.inline_table())
        _put(table[part], rest, value)
    elif part not in table or table[part] != value:
        _set(table, part, _item(value))


def _set(table: MutableMapping[str, Any], key: str, item: "Item") -> None:
    """Set a key; a new one stands before the blank lines and comments that end its table.

    They are about what follows.
    """
    from tomlkit.items import Table

    body = table.value.body if isinstance(table, Table) and key not in table else []
    ending = []
    while body and body[-1][0] is None:
        ending.append(body.pop())
    table[key] = item
    body.extend(reversed(ending))


def _item(value: PinValue) -> "Item":
    import tomlkit

    return tomlkit.value(_written(value))


def _written(value: PinValue) -> str:
    """Return a value as TOML: a matrix one row per line, its columns aligned."""
    import tomlkit

    if isinstance(value, dict):
        return "{ " + ", ".join(f"{key} = {_written(each)}" for key, each in value.items()) + " }"
    if not isinstance(value, list):
        return tomlkit.item(value).as_string()
    if not value or not all(isinstance(row, list) for row in value):
        return "[" + ", ".join(map(_written, value)) + "]"
    rows = [[_written(cell) for cell in row] for row in value if isinstance(row, list)]
    width = max((len(cell) for row in rows for cell in row), default=0)
    lines = ("[" + ", ".join(cell.rjust(width) for cell in row) + "]" for row in rows)
    return "[\n" + "".join(f"    {line},\n" for line in lines) + "]"
