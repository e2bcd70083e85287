"""Operators on numbers: rounding, shifts, limits, pedestals, comparisons, types, checks."""

from collections.abc import Iterator

from guardbit.verify.defects.lexer import Function, Source, Span, number_like
from guardbit.verify.defects.mutant import Change, Operator, put, put_span
from guardbit.verify.defects.roles import (
    assignment,
    holding,
    integer,
    is_map,
    is_tail,
    sums,
)

_RELATIONS = {"<": "<=", "<=": "<", ">": ">=", ">=": ">", "==": "!=", "!=": "=="}
_LOGIC = {"&&": "||", "||": "&&"}


def changes(source: Source) -> Iterator[Change]:
    """Yield the changes of a file's numbers, comparisons, types and checks."""
    for function in source.functions:
        if is_tail(source, function):
            yield from _tail(source, function)
    yield from _preloads(source)
    yield from _bounds(source)
    yield from _comparisons(source)
    yield from _types(source)
    yield from _casts(source)
    yield from _checks(source)


def _by_one(source: Source, index: int) -> Iterator[str]:
    number = integer(source, index)
    if number is not None:
        yield number_like(source.at(index), number + 1)
        yield number_like(source.at(index), number - 1)


def _tail(source: Source, function: Function) -> Iterator[Change]:
    """Yield a requantiser's shifts, rounding constants and pedestals changed."""
    for index in range(function.body.first, function.body.last):
        number = integer(source, index)
        if number is None:
            continue
        if source.at(index - 1) in ("<<", ">>", "/", "%"):
            yield from _scales(source, index, number)
        elif source.is_binary(index - 1, "+", "-") or _is_raised(source, index):
            rounding = _is_scaled(source, function, index)
            operator = Operator.ROUNDING if rounding else Operator.PEDESTAL
            for text in (*_by_one(source, index), *(["0"] * (number > 1))):
                yield operator, put(source, index, text)


def _is_raised(source: Source, index: int) -> bool:
    """Return whether a number is added to what comes next."""
    return source.is_binary(index + 1, "+", "-") and source.at(index - 1) != "-"


def _scales(source: Source, index: int, number: int) -> Iterator[Change]:
    sign = source.at(index - 1)
    for text in _by_one(source, index):
        yield Operator.SHIFT, put(source, index, text)
    if sign == "/" and number & (number - 1) == 0 and number > 1:
        yield Operator.SHIFT, put(source, index, number_like(source.at(index), 2 * number))
        yield Operator.SHIFT, put(source, index, number_like(source.at(index), number // 2))
        floor = f">> {number.bit_length() - 1}"
        yield Operator.ROUNDING, put_span(source, Span(index - 1, index), floor)
    if sign == ">>" and number < 31:
        yield Operator.ROUNDING, put_span(source, Span(index - 1, index), f"/ {1 << number}")


def _is_scaled(source: Source, function: Function, index: int) -> bool:
    """Return whether the sum that a number is part of is shifted or divided afterwards."""
    scales = (">>", "/", "%")
    for bracket in source.around(index):
        if source.at(bracket) == "(" and source.at(source.mate[bracket] + 1) in scales:
            return True
    for statement in source.statements:
        sign = assignment(source, statement)
        if index in statement and sign > 0:
            name = source.at(sign - 1)
            return any(
                source.at(k) == name and source.at(k + 1) in scales
                for k in range(statement.last, function.body.last)
            )
    return False


def _preloads(source: Source) -> Iterator[Change]:
    """Yield what the sums start from, by one up and down."""
    summed = {source.at(statement.first) for statement in sums(source)}
    for statement in source.statements:
        sign = assignment(source, statement)
        if sign > 0 and source.at(sign - 1) in summed and statement.last == sign + 2:
            number = integer(source, sign + 1)
            for text in (*_by_one(source, sign + 1), *(["0"] if number else [])):
                yield Operator.ROUNDING, put(source, sign + 1, text)


def _bounds(source: Source) -> Iterator[Change]:
    """Yield the limits of values changed by one: where they are compared, returned or set."""
    for function in source.functions:
        tail = is_tail(source, function)
        for index in range(function.body.first, function.body.last):
            if integer(source, index) is None:
                continue
            start = index - 1 if source.at(index - 1) == "-" else index
            compared = source.at(start - 1) in _RELATIONS
            of_pixel = compared and source.at(start - 2) == "]"
            given = source.at(start - 1) in ("return", "=") and source.at(index + 1) == ";"
            if (tail and (compared or given)) or of_pixel:
                for text in _by_one(source, index):
                    yield Operator.BOUND, put(source, index, text)


def _comparisons(source: Source) -> Iterator[Change]:
    loops = [k for _, span, _ in source.headers for k in range(span.first, span.last + 1)]
    for index in range(len(source)):
        sign = source.at(index)
        scratch = "scratch_len" in (source.at(index - 1), source.at(index - 3))
        if holding(source, index) is None or index in loops or scratch:
            continue
        if sign in _RELATIONS:
            yield Operator.COMPARISON, put(source, index, _RELATIONS[sign])
        elif sign in _LOGIC:
            yield Operator.COMPARISON, put(source, index, _LOGIC[sign])
        elif sign == "!":
            yield Operator.COMPARISON, put(source, index, "")


_NARROWER = {
    "int64_t": ("int32_t", "uint64_t"),
    "uint64_t": ("uint32_t", "int64_t"),
    "int32_t": ("int16_t", "uint32_t"),
    "uint32_t": ("uint16_t", "int32_t"),
    "int16_t": ("int8_t", "uint16_t"),
    "uint16_t": ("uint8_t", "int16_t"),
    "int8_t": ("uint8_t",),
    "uint8_t": ("int8_t",),
    "size_t": ("uint16_t", "uint8_t"),
}


def _types(source: Source) -> Iterator[Change]:
    """Yield the types of locals, static functions and scratch, narrower and of the other sign."""
    for index in range(len(source)):
        kinds = _NARROWER.get(source.at(index), ())
        if not kinds or not _is_own(source, index):
            continue
        for kind in kinds:
            yield Operator.WIDTH, put(source, index, kind)


def _is_own(source: Source, index: int) -> bool:
    """Return whether a type is not part of what callers see."""
    function = holding(source, index)
    if function is None:
        return source.at(index - 1) == "typedef" and source.at(index + 1).endswith("_word")
    return function.static or index in function.body


def _casts(source: Source) -> Iterator[Change]:
    for index in range(len(source)):
        if source.is_cast(index) and holding(source, index) is not None:
            yield Operator.WIDENING, put_span(source, Span(index, index + 2), "")


def _checks(source: Source) -> Iterator[Change]:
    """Yield conditions that are never met, statuses of success, and sizes by one."""
    for span in source.conditions:
        function = holding(source, span.first)
        if function is None or is_map(source, function) or "scratch_len" in source.words(span):
            continue
        yield Operator.CHECK, put_span(source, span, "0")
        if not is_tail(source, function):
            for index in range(span.first, span.last + 1):
                if source.at(index).endswith("u") and integer(source, index) is not None:
                    for text in _by_one(source, index):
                        yield Operator.CHECK, put(source, index, text)
    for index in range(len(source)):
        name = source.at(index)
        if source.at(index - 1) == "return" and "_BAD_" in name:
            good = name[: name.index("_BAD_")] + "_OK"
            yield Operator.CHECK, put(source, index, good)
