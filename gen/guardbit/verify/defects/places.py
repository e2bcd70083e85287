"""Operators on addresses: columns, rows, borders, strides, loops, the length of scratch."""

import re
from collections.abc import Iterator

from guardbit.verify.defects.lexer import Function, Source, Span, number_like
from guardbit.verify.defects.mutant import Change, Operator, after, put, put_span
from guardbit.verify.defects.roles import (
    assignment,
    holding,
    in_subscript,
    integer,
    is_map,
    is_value_function,
)

_NUMBERED = re.compile(r"([A-Za-z_]+)(\d+)")
_TIGHTER = {"<": "<=", "<=": "<", ">": ">=", ">=": ">"}
# Other continuations beside the image, as the body of a function (at, length).
_BODIES = {
    "replicate": "return {a} < 0 ? 0 : {a} < {n} ? {a} : {n} - 1;",
    "half-sample": "const {t} r = ({a} % (2 * {n}) + 2 * {n}) % (2 * {n}); "
    "return r < {n} ? r : 2 * {n} - 1 - r;",
    "whole-sample": "const {t} p = {n} > 1 ? 2 * {n} - 2 : 1; "
    "const {t} r = ({a} % p + p) % p; return r < {n} ? r : p - r;",
    "periodic": "return ({a} % {n} + {n}) % {n};",
}


def changes(source: Source) -> Iterator[Change]:
    """Yield the changes of where a file reads and writes."""
    yield from _columns(source)
    yield from _rows(source)
    yield from _borders(source)
    yield from _strides(source)
    yield from _loops(source)
    yield from _scratch(source)
    yield from _arguments(source)


def _stepped(source: Source, index: int) -> Iterator[str]:
    """Yield an integer constant by one up and by one down."""
    number = integer(source, index)
    if number is not None:
        yield number_like(source.at(index), number + 1)
        yield number_like(source.at(index), number - 1)


def _columns(source: Source) -> Iterator[Change]:
    """Yield every index of an array in a body by one up and down."""
    for function in source.functions:
        for opening in range(function.body.first, function.body.last):
            if source.at(opening) != "[" or source.kind(opening - 2) == "name":
                continue
            close = source.mate[opening]
            operator = Operator.BORDER if _is_margin(source, opening) else Operator.COLUMN
            offsets = [
                k
                for k in range(opening + 1, close)
                if source.kind(k) == "number"
                and (source.is_binary(k - 1, "+", "-") or close == opening + 2)
            ]
            for k in offsets:
                for text in _stepped(source, k):
                    yield operator, put(source, k, text)
            if not offsets:
                yield operator, after(source, close - 1, " + 1")
                yield operator, after(source, close - 1, " - 1")


def _is_margin(source: Source, opening: int) -> bool:
    """Return whether an index does not move with the index that is written."""
    for statement in source.statements:
        if opening in statement:
            sign = assignment(source, statement)
            if sign < 0 or opening < sign or source.at(statement.first + 1) != "[":
                return False
            moving = set(source.words(Span(statement.first + 2, sign - 2)))
            return not moving & set(source.words(Span(opening, source.mate[opening])))
    return False


def _rows(source: Source) -> Iterator[Change]:
    """Yield pointers to rows exchanged for a neighbour's, and row numbers by one up and down."""
    for function in source.functions:
        words = set(source.words(function.body))
        for index in range(function.body.first, function.body.last):
            named = _NUMBERED.fullmatch(source.at(index))
            if named and source.at(index + 1) == "[":
                for by in (1, -1):
                    other = f"{named[1]}{int(named[2]) + by}"
                    if other in words:
                        yield Operator.ROW, put(source, index, other)
    for statement in source.statements:
        found = holding(source, statement.first)
        if found is not None and not is_value_function(source, found):
            yield from _row_numbers(source, statement)


def _row_numbers(source: Source, statement: Span) -> Iterator[Change]:
    sign = assignment(source, statement)
    if sign < 0 or source.at(sign) != "=" or _is_length(source, source.at(sign - 1)):
        return
    first = sign + 1
    for index in range(first, statement.last):
        if in_subscript(source, index) or source.kind(index) != "number":
            continue
        if source.is_binary(index - 1, "+", "-", "%", "*"):
            for text in _stepped(source, index):
                yield Operator.ROW, put(source, index, text)
    last = statement.last - 1
    plain = source.kind(last) == "name" and (
        first == last or (source.is_cast(first) and first + 3 == last)
    )
    if plain and source.at(last + 1) == ";":
        yield Operator.ROW, after(source, last, " + 1")
        yield Operator.ROW, after(source, last, " - 1")


def _is_length(source: Source, name: str) -> bool:
    """Return whether a name is a stride, or the bound of a loop."""
    bounds = {
        source.at(k) for _, span, _ in source.headers for k in range(span.first, span.last + 1)
    }
    counters = {source.at(span.first) for _, span, _ in source.headers if span.last >= span.first}
    return "pitch" in name or "stride" in name or name in bounds - counters


def _borders(source: Source) -> Iterator[Change]:
    for function in source.functions:
        if is_map(source, function):
            yield from _map(source, function)
        elif not is_value_function(source, function):
            yield from _outside(source, function)
    maps = {f.name for f in source.functions if is_map(source, f)}
    for index in range(len(source)):
        if source.at(index) in maps and _is_call(source, index):
            first = Span(index + 2, _argument_end(source, index + 2))
            span = Span(index, source.mate[index + 1])
            yield Operator.BORDER, put_span(source, span, f"({source.written(first)})")


def _map(source: Source, function: Function) -> Iterator[Change]:
    """Yield a map's numbers and signs changed, and the maps of the other borders."""
    flipped = {"+": "-", "-": "+"}
    for index in range(function.body.first, function.body.last):
        for text in _stepped(source, index):
            yield Operator.BORDER, put(source, index, text)
        if source.is_binary(index, "+", "-"):
            yield Operator.BORDER, put(source, index, flipped[source.at(index)])
    words = source.words(function.parameters)
    names = [words[k - 1] for k, word in enumerate(words) if word in (",", ")")]
    if len(names) == 2:
        kind = source.at(function.parameters.first + 1)
        for body in _BODIES.values():
            text = "{ " + body.format(a=names[0], n=names[1], t=kind) + " }"
            yield Operator.BORDER, put_span(source, function.body, text)


def _outside(source: Source, function: Function) -> Iterator[Change]:
    """Yield the constants that are stored, and those that tell rows outside from inside."""
    for statement in source.statements:
        sign = assignment(source, statement)
        stored = source.at(sign) == "=" and source.at(sign - 1) == "]" and sign > 0
        if stored and statement.first in function.body and statement.last == sign + 2:
            for text in _stepped(source, sign + 1):
                yield Operator.BORDER, put(source, sign + 1, text)
    for span in source.conditions:
        if span.first in function.body and "0" in source.words(span):
            for index in range(span.first, span.last + 1):
                if source.at(index - 1) in ("<", ">=") and integer(source, index) == 0:
                    for text in _stepped(source, index):
                        yield Operator.BORDER, put(source, index, text)


def _is_call(source: Source, index: int) -> bool:
    return source.at(index + 1) == "(" and source.kind(index - 1) != "name"


def _argument_end(source: Source, first: int) -> int:
    """Return the last token of the argument that starts there."""
    index = first
    while source.at(index) not in (",", ")", ";", ""):
        index = source.mate[index] if source.at(index) in ("(", "[") else index
        index += 1
    return index - 1


_OTHER = {"src_stride": ("width",), "dst_stride": ("out_width", "width"), "pitch": ("width",)}


def _strides(source: Source) -> Iterator[Change]:
    """Yield strides taken for widths, and by one up and down."""
    checked = [k for span in source.conditions for k in range(span.first, span.last + 1)]
    for function in source.functions:
        known = set(source.words(Span(function.parameters.first, function.body.last)))
        for index in range(function.body.first, function.body.last):
            name = source.at(index)
            if not source.is_binary(index - 1, "*") or index in checked:
                continue
            if name in _OTHER:
                for other in _OTHER[name]:
                    if other in known:
                        yield Operator.STRIDE, put(source, index, other)
                yield Operator.STRIDE, put(source, index, f"({name} + 1)")
                yield Operator.STRIDE, put(source, index, f"({name} - 1)")
    for statement in source.statements:
        sign = assignment(source, statement)
        if sign > 0 and ("pitch" in source.at(sign - 1) or "stride" in source.at(sign - 1)):
            yield from _lengths(source, Span(sign + 1, statement.last - 1), Operator.STRIDE)


def _lengths(source: Source, span: Span, operator: Operator) -> Iterator[Change]:
    """Yield the numbers of an expression by one up and down, else the whole of it."""
    numbers = [k for k in range(span.first, span.last + 1) if integer(source, k) is not None]
    for index in numbers:
        for text in _stepped(source, index):
            yield operator, put(source, index, text)
    if not numbers and span.first <= span.last:
        yield operator, after(source, span.last, " + 1")
        yield operator, after(source, span.last, " - 1")


def _loops(source: Source) -> Iterator[Change]:
    for start, condition, step in source.headers:
        for index in range(condition.first, condition.last + 1):
            if source.at(index) in _TIGHTER:
                yield Operator.LOOP, put(source, index, _TIGHTER[source.at(index)])
        yield from _lengths(source, condition, Operator.LOOP)
        if start.first <= start.last:
            yield from _lengths(source, start, Operator.LOOP)
        if step.last == step.first + 1 and source.at(step.last) == "++":
            yield Operator.LOOP, put(source, step.last, " += 2")
    for statement in source.statements:
        sign = assignment(source, statement)
        name = source.at(sign - 1)
        if sign > 0 and _is_length(source, name) and "pitch" not in name and "stride" not in name:
            yield from _lengths(source, Span(sign + 1, statement.last - 1), Operator.LOOP)


def _scratch(source: Source) -> Iterator[Change]:
    for span in source.conditions:
        if "scratch_len" in source.words(span):
            yield from _lengths(source, span, Operator.SCRATCH)
            for index in range(span.first, span.last + 1):
                if source.at(index) in _TIGHTER:
                    yield Operator.SCRATCH, put(source, index, _TIGHTER[source.at(index)])
            yield Operator.SCRATCH, put_span(source, span, "0")
    for index in range(len(source)):
        # where a part of scratch starts
        if source.at(index) == "scratch" and source.is_binary(index + 1, "+"):
            for k in range(index + 2, _argument_end(source, index + 2) + 1):
                for text in _stepped(source, k):
                    yield Operator.SCRATCH, put(source, k, text)


def _arguments(source: Source) -> Iterator[Change]:
    """Yield calls of the file's functions with two neighbouring plain arguments exchanged."""
    names = {function.name for function in source.functions}
    for index in range(len(source)):
        if source.at(index) not in names or not _is_call(source, index):
            continue
        for k in range(index + 2, source.mate[index + 1] - 2):
            plain = source.kind(k) == "name" and source.at(k + 1) == ","
            alone = source.at(k - 1) in ("(", ",") and source.at(k + 3) in (",", ")")
            if plain and alone and source.kind(k + 2) == "name":
                edits = (*put(source, k, source.at(k + 2)), *put(source, k + 2, source.at(k)))
                yield Operator.SWAP, edits
