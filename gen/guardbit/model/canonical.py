"""Canonical JSON of the model's frozen types: same value, same bytes, on any machine.

Keys sorted, two-space indent, ASCII, one final newline. Fractions are strings "n/d";
integers beyond 53 bits are strings, since most readers of JSON keep numbers as doubles.
There are no floats: a measured figure is written as the decimal string it is reported as.
"""

import json
from collections.abc import Mapping
from dataclasses import fields, is_dataclass
from enum import Enum
from fractions import Fraction

_SAFE = 2**53


def plain(value: object) -> object:
    """Return `value` as dicts, lists, strings, booleans and small integers.

    Raises TypeError for a type that has no canonical form (floats among them).
    """
    match value:
        case None | bool():
            return value
        case Enum():
            return value.value
        case str():
            return value
        case int():
            return value if -_SAFE <= value <= _SAFE else str(value)
        case Fraction():
            return str(value)
        case Mapping():
            return {str(key): plain(item) for key, item in value.items()}
        case list() | tuple():
            return [plain(item) for item in value]
    if is_dataclass(value) and not isinstance(value, type):
        return {field.name: plain(getattr(value, field.name)) for field in fields(value)}
    raise TypeError(f"no canonical form for {type(value).__name__}")


def dumps(value: object) -> str:
    """Return the canonical JSON text of `value`."""
    return json.dumps(plain(value), sort_keys=True, indent=2, ensure_ascii=True) + "\n"
