"""Integer and character constants."""

import re

from pycparser import c_ast

from guardbit.proof.c.types import Integer, Types

_NUMBER = re.compile(r"(0[xX][0-9a-fA-F]+|0[0-7]*|[1-9][0-9]*)([uUlL]*)$")
_ESCAPES = {"n": 10, "t": 9, "r": 13, "0": 0, "\\": 92, "'": 39, '"': 34, "a": 7, "b": 8}


def constant(types: Types, node: c_ast.Constant) -> tuple[Integer, int] | None:
    """Return type and value of a constant; None if it is none of an integer type."""
    if node.type == "char":
        value = _character(node.value)
        return None if value is None else (types.int, value)
    found = _NUMBER.match(node.value)
    if found is None:
        return None
    digits, suffix = found.groups()
    base = 16 if digits[:2].lower() == "0x" else 8 if digits[0] == "0" else 10
    value = int(digits, base)
    kind = types.of_constant(value, suffix.lower(), base == 10)
    return None if kind is None else (kind, value)


def _character(text: str) -> int | None:
    inside = text[1:-1]
    if len(inside) == 1 and ord(inside) < 128:
        return ord(inside)
    if len(inside) == 2 and inside[0] == "\\":
        return _ESCAPES.get(inside[1])
    return None
