"""Options that go through several values: "4..12", "4,6,8..10", "nearest,gain"."""

import re
from collections.abc import Callable, Iterator
from enum import StrEnum
from typing import Any, TypeAlias

import click

from guardbit.model.spec import Auto

DEFECTS = "120"
"""How many faults are seeded where the number is left out."""

Callback: TypeAlias = Callable[[click.Context, click.Parameter, str | None], tuple[Any, ...]]

_PART = re.compile(r"(-?[0-9]{1,3})(?:\.\.(-?[0-9]{1,3}))?")


def numbers(low: int, high: int, *, auto: bool = False) -> Callback:
    """Return what reads whole numbers low..high, and "auto" where that is allowed.

    They come in the order given, each once; none where the option is left out. What it
    returns raises click.BadParameter.
    """

    def read(_: click.Context, __: click.Parameter, value: str | None) -> tuple[Any, ...]:
        parts = [] if value is None else value.split(",")
        found = (each for part in parts for each in _numbers(part.strip(), low, high, auto))
        return tuple(dict.fromkeys(found))

    return read


def defects(_: click.Context, __: click.Parameter, value: str | None) -> int | None:
    """Return how many faults to seed; None: none. Raises click.BadParameter."""
    if value is None:
        return None
    if not re.fullmatch(r"[0-9]{1,5}", value) or int(value) == 0:
        said = f'"{value[:40]}" is no number of faults. With the usual number name the spec first: '
        raise click.BadParameter(f"{said}guardbit verify SPEC --seed-defects")
    return int(value)


def _numbers(part: str, low: int, high: int, auto: bool) -> Iterator[int | Auto]:
    if auto and part == Auto.AUTO.value:
        yield Auto.AUTO
        return
    match = _PART.fullmatch(part)
    if match is None:
        word = ' nor "auto"' if auto else ""
        raise click.BadParameter(f'"{part[:40]}" is no number, no range such as 4..12{word}.')
    first, last = int(match[1]), int(match[2] or match[1])
    if first > last:
        raise click.BadParameter(f'"{part}" ends below its start.')
    if first < low or last > high:
        raise click.BadParameter(f'"{part}" is not within {low}..{high}.')
    yield from range(first, last + 1)


def choices(*words: StrEnum) -> Callback:
    """Return what reads words of a closed list, as `numbers` does."""
    by_name = {word.value: word for word in words}

    def read(_: click.Context, __: click.Parameter, value: str | None) -> tuple[Any, ...]:
        parts = [] if value is None else [part.strip() for part in value.split(",")]
        for part in parts:
            if part not in by_name:
                raise click.BadParameter(f'"{part[:40]}" is none of {", ".join(by_name)}.')
        return tuple(dict.fromkeys(by_name[part] for part in parts))

    return read


def against(
    file: str | None, function: str | None, arguments: str | None
) -> tuple[str, str, tuple[str, ...]] | None:
    """Return the user's own C that is to be checked; None: what is emitted.

    Raises click.UsageError if only a part of it is named.
    """
    given = (file, function, arguments)
    if given == (None, None, None):
        return None
    if file is None or function is None or arguments is None:
        raise click.UsageError("--against, --function and --arguments belong together.")
    return file, function, tuple(part.strip() for part in arguments.split(","))
