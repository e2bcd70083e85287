"""Operators on sums of products: taps, signs, exchanged taps, the order of saturating sums."""

from collections.abc import Iterator
from itertools import pairwise

from guardbit.verify.defects.lexer import Source, Span, number_like
from guardbit.verify.defects.mutant import Change, Operator, after, before, exchanged, put
from guardbit.verify.defects.roles import (
    assignment,
    holding,
    in_subscript,
    integer,
    operand_start,
    sums,
    terms,
)

_LIMITS = ("least", "greatest")


def changes(source: Source) -> Iterator[Change]:
    """Yield the changes of a file's sums."""
    for statement in sums(source):
        yield from _taps(source, statement)
        yield from _signs(source, statement)
        yield from _swaps(source, statement)
    yield from _between(source)
    yield from _tables(source)
    yield from _order(source)


def _coefficient(source: Source, term: int) -> int | None:
    """Return the constant that multiplies a term, where it stands; None: it is 1 or loaded."""
    start = operand_start(source, term)
    if not source.is_binary(start - 1, "*"):
        return None
    return start - 2 if source.kind(start - 2) == "number" else None


def _is_factor(source: Source, term: int) -> bool:
    """Return whether a term multiplies what comes next: it is a tap that was loaded."""
    return source.at(source.mate[term + 1] + 1) == "*"


def _taps(source: Source, statement: Span) -> Iterator[Change]:
    for term in terms(source, statement):
        start = operand_start(source, term)
        number = _coefficient(source, term)
        if number is not None and (tap := integer(source, number)) is not None:
            for by in (1, -1):
                yield Operator.TAP, put(source, number, number_like(source.at(number), tap + by))
        elif _is_factor(source, term):
            for step in ("+ 1", "- 1"):
                close = source.mate[term + 1]
                edits = (*before(source, start, "("), *after(source, close, f" {step})"))
                yield Operator.TAP, edits
        elif not source.is_binary(start - 1, "*"):
            for factor in ("2", "0"):
                yield Operator.TAP, before(source, start, f"{factor} * ")


def _signs(source: Source, statement: Span) -> Iterator[Change]:
    sign = assignment(source, statement)
    other = {"+=": "-=", "-=": "+=", "+": "-", "-": "+"}
    if source.at(sign) in other:
        yield Operator.SIGN, put(source, sign, other[source.at(sign)])
    for index in range(sign + 1, statement.last):
        if in_subscript(source, index) or source.at(index) not in ("+", "-"):
            continue
        if source.is_binary(index, "+", "-"):
            yield Operator.SIGN, put(source, index, other[source.at(index)])
        elif source.at(index) == "-":
            yield Operator.SIGN, put(source, index, "")
    for term in terms(source, statement):
        number = _coefficient(source, term)
        start = operand_start(source, term) if number is None else number
        if source.at(start - 1) in ("=", "+=", "-=", ",", "("):
            yield Operator.SIGN, before(source, start, "-")


def _constants(source: Source, statement: Span) -> list[int]:
    found = (_coefficient(source, term) for term in terms(source, statement))
    return [number for number in found if number is not None]


def _swaps(source: Source, statement: Span) -> Iterator[Change]:
    """Yield neighbouring taps exchanged, and neighbouring arrays."""
    for a, b in pairwise(_constants(source, statement)):
        if source.at(a) != source.at(b):
            yield Operator.SWAP, exchanged(source, Span(a, a), Span(b, b))
    reads = terms(source, statement)
    for a, b in pairwise(reads):
        first, second = Span(a, source.mate[a + 1]), Span(b, source.mate[b + 1])
        same = source.written(first) == source.written(second)
        if not same and _constants(source, statement):
            yield Operator.SWAP, exchanged(source, first, second)


def _between(source: Source) -> Iterator[Change]:
    """Yield the first taps of neighbouring statements exchanged, which lie in other rows."""
    for above, below in pairwise(sums(source)):
        a, b = _constants(source, above), _constants(source, below)
        if not a or not b or holding(source, a[0]) != holding(source, b[0]):
            continue
        if source.at(a[0]) != source.at(b[0]):
            yield Operator.SWAP, exchanged(source, Span(a[0], a[0]), Span(b[0], b[0]))


def _tables(source: Source) -> Iterator[Change]:
    """Yield the numbers of constant arrays, by one up and down."""
    for index in range(len(source)):
        if source.at(index) != "{" or source.at(index - 1) != "=" or source.at(index - 2) != "]":
            continue
        name = source.at(source.mate[index - 2] - 1)
        operator = Operator.BOUND if name in _LIMITS else Operator.TAP
        for k in range(index + 1, source.mate[index]):
            if (entry := integer(source, k)) is not None:
                for by in (1, -1):
                    yield operator, put(source, k, number_like(source.at(k), entry + by))


def _order(source: Source) -> Iterator[Change]:
    """Yield statements of the kind x = f(x, ...) exchanged with one of the next three."""
    kept = [s for s in source.statements if _folds(source, s)]
    for number, a in enumerate(kept):
        for b in kept[number + 1 : number + 4]:
            same = source.written(a) == source.written(b)
            if not same and holding(source, a.first) == holding(source, b.first):
                yield Operator.ORDER, exchanged(source, a, b)


def _folds(source: Source, statement: Span) -> bool:
    words = source.words(statement)
    return len(words) > 6 and words[1] == "=" and words[3] == "(" and words[4] == words[0]
