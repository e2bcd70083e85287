"""What the functions and statements of a C file are for, as far as the operators need it."""

from guardbit.verify.defects.lexer import Function, Source, Span, value

_MAPS = ("index", "fold", "map", "clamp", "mirror", "reflect", "wrap")


def holding(source: Source, index: int) -> Function | None:
    """Return the function whose head or body a token stands in."""
    for function in source.functions:
        if function.head.first <= index <= function.body.last:
            return function
    return None


def inside(span: Span, function: Function) -> bool:
    """Return whether a span lies in a function's body."""
    return span.first in function.body


def is_value_function(source: Source, function: Function) -> bool:
    """Return whether a function takes and returns numbers alone, without a loop."""
    words = source.words(Span(function.head.first, function.parameters.last))
    return (
        "*" not in words
        and "void" not in words
        and not {"for", "while", "["} & set(source.words(function.body))
    )


def is_map(source: Source, function: Function) -> bool:
    """Return whether a function tells which pixel a position reads, by its name."""
    last = function.name.rsplit("_", 1)[-1]
    return is_value_function(source, function) and last in _MAPS


def is_tail(source: Source, function: Function) -> bool:
    """Return whether a function rounds, limits or offsets a number."""
    return is_value_function(source, function) and not is_map(source, function)


def assignment(source: Source, statement: Span) -> int:
    """Return the token that assigns in a statement, outside brackets; -1: none does."""
    signs = ("=", "+=", "-=")
    depth = source.opener[statement.first]
    for index in range(statement.first, statement.last):
        if source.at(index) in signs and source.opener[index] == depth:
            return index
    return -1


def is_sum(source: Source, statement: Span) -> bool:
    """Return whether a statement adds products of pixels and taps to something."""
    sign = assignment(source, statement)
    if sign < 0 or source.kind(statement.first) != "name" or source.kind(sign - 1) == "":
        return False
    if source.kind(statement.first + 1) == "name":
        return False
    right = source.words(Span(sign + 1, statement.last))
    if "[" not in right:
        return False
    return source.at(sign) in ("+=", "-=") or any(
        source.is_binary(index, "*") and source.opener[index] not in _indices(source, index)
        for index in range(sign + 1, statement.last)
    )


def _indices(source: Source, index: int) -> list[int]:
    return [k for k in source.around(index) if source.at(k) == "["]


def in_subscript(source: Source, index: int) -> bool:
    """Return whether a token stands between square brackets."""
    return bool(_indices(source, index))


def sums(source: Source) -> list[Span]:
    """Return the statements that add products."""
    return [statement for statement in source.statements if is_sum(source, statement)]


def terms(source: Source, statement: Span) -> list[int]:
    """Return the names of the arrays that are read in a sum, where they stand."""
    first = assignment(source, statement) + 1
    return [
        index
        for index in range(first, statement.last)
        if source.kind(index) == "name"
        and source.at(index + 1) == "["
        and not in_subscript(source, index)
    ]


def operand_start(source: Source, index: int) -> int:
    """Return where an operand starts, with the casts before it."""
    while source.at(index - 1) == ")" and source.is_cast(source.mate[index - 1]):
        index = source.mate[index - 1]
    return index


def integer(source: Source, index: int) -> int | None:
    """Return the value of a token that is an integer constant."""
    return value(source.at(index)) if source.kind(index) == "number" else None
