"""A mutant: one small change of C code, by one operator, at one place."""

from collections.abc import Sequence
from dataclasses import dataclass, replace
from enum import StrEnum
from typing import TypeAlias

from guardbit.model.routine import Routine, SourceFile
from guardbit.verify.defects.lexer import Source, Span

_LONGEST = 160


class Operator(StrEnum):
    """What kind of change makes a mutant."""

    TAP = "tap"
    SIGN = "sign"
    SWAP = "swap"
    ROW = "row index"
    COLUMN = "column index"
    BORDER = "border"
    ROUNDING = "rounding"
    SHIFT = "shift"
    BOUND = "saturation bound"
    COMPARISON = "comparison"
    WIDTH = "lane width"
    WIDENING = "missing widening"
    ORDER = "order of sums"
    SCRATCH = "scratch length"
    LOOP = "loop bound"
    STRIDE = "stride"
    PEDESTAL = "pedestal"
    CHECK = "argument check"


@dataclass(frozen=True)
class Edit:
    """Characters `start`..`end` - 1 of a text, and what stands there instead."""

    start: int
    end: int
    text: str


Change: TypeAlias = tuple[Operator, tuple[Edit, ...]]


@dataclass(frozen=True)
class Mutant:
    """A changed source file. `before` and `after` are the lines that differ, on one line each."""

    operator: Operator
    file: str
    function: str
    line: int
    before: str
    after: str
    text: str


def put(source: Source, index: int, text: str) -> tuple[Edit, ...]:
    """Return the edit that puts a text in a token's place."""
    return put_span(source, Span(index, index), text)


def put_span(source: Source, span: Span, text: str) -> tuple[Edit, ...]:
    """Return the edit that puts a text in the place of a span of tokens."""
    return (Edit(source.tokens[span.first].start, source.tokens[span.last].end, text),)


def before(source: Source, index: int, text: str) -> tuple[Edit, ...]:
    """Return the edit that inserts a text before a token."""
    at = source.tokens[index].start
    return (Edit(at, at, text),)


def after(source: Source, index: int, text: str) -> tuple[Edit, ...]:
    """Return the edit that inserts a text after a token."""
    at = source.tokens[index].end
    return (Edit(at, at, text),)


def exchanged(source: Source, a: Span, b: Span) -> tuple[Edit, ...]:
    """Return the edits that swap two spans of tokens."""
    return (
        *put_span(source, a, source.written(b)),
        *put_span(source, b, source.written(a)),
    )


def made(source: Source, change: Change) -> Mutant:
    """Return the mutant that a change makes of a file."""
    operator, edits = change
    ordered = sorted(edits, key=lambda e: e.start)
    text = source.text
    for edit in reversed(ordered):
        text = text[: edit.start] + edit.text + text[edit.end :]
    first, last = ordered[0].start, ordered[-1].end
    grown = len(text) - len(source.text)
    return Mutant(
        operator,
        source.name,
        _function(source, first),
        source.text.count("\n", 0, first) + 1,
        _lines(source.text, first, last),
        _lines(text, first, last + grown),
        text,
    )


def _function(source: Source, at: int) -> str:
    for function in source.functions:
        span = Span(function.head.first, function.body.last)
        if source.tokens[span.first].start <= at <= source.tokens[span.last].end:
            return function.name
    return ""


def _lines(text: str, first: int, last: int) -> str:
    """Return the whole lines about a part of a text, on one line."""
    start = text.rfind("\n", 0, first) + 1
    end = text.find("\n", max(first, last))
    words = " ".join(text[start : end if end >= 0 else len(text)].split())
    return words if len(words) <= _LONGEST else words[: _LONGEST - 3] + "..."


def with_mutant(routine: Routine, mutant: Mutant) -> Routine:
    """Return the routine with the mutant's file instead of its own."""
    changed: Sequence[SourceFile] = [
        SourceFile(s.name, mutant.text) if s.name == mutant.file else s for s in routine.sources
    ]
    return replace(routine, sources=tuple(changed))
