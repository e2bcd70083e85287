"""TOML values to the values of a Spec, by the form that the key table states.

What is wrong is a list of faults; a value with a fault is not used for anything.
"""

import datetime
import difflib
import json
from collections.abc import Sequence
from dataclasses import dataclass
from enum import StrEnum
from fractions import Fraction
from typing import TypeVar

from guardbit.files.numbers import NotExactError, exact
from guardbit.model.finding import Value
from guardbit.model.spec import Auto, Sum
from guardbit.spec.forms import (
    BOX_LIMIT,
    Among,
    Choice,
    DivisorForm,
    Flag,
    Form,
    Identifier,
    Line,
    Numbers,
    Order,
    Paths,
    PinnedForm,
    Positive,
    Rational,
    RegistersForm,
    RelativePath,
    Rows,
    Size,
    Span,
    Two,
    Whole,
    WholeOrTwo,
)
from guardbit.spec.names import line_faults, name_faults
from guardbit.spec.toml import Real

T = TypeVar("T", bound=StrEnum)

# Of one array this many wrong items are named; the rest are counted.
NAMED_ITEMS = 8


@dataclass(frozen=True)
class Fault:
    """One thing wrong with a value; `item`: the number, from 0, of the array item it is in."""

    kind: str
    values: tuple[tuple[str, Value], ...] = ()
    item: int | None = None


class FaultyError(Exception):
    """A value that cannot be used, with every fault in it."""

    def __init__(self, *faults: Fault) -> None:
        super().__init__(*faults)
        self.faults = faults


def _faulty(kind: str, item: int | None = None, /, **values: Value) -> FaultyError:
    return FaultyError(Fault(kind, tuple(values.items()), item))


def shown(raw: object) -> str:
    """Return a TOML value as a message can quote it: short, printable, in TOML's words."""
    match raw:
        case bool():
            return "true" if raw else "false"
        case Real():
            return _short(str(raw))
        case str():
            return _short(json.dumps(raw))
        case int():
            return _short(str(raw)) if raw.bit_length() < 4000 else "a number of 4000 bits or more"
        case list():
            few = len(raw) <= 4
            return _short(f"[{', '.join(map(shown, raw))}]") if few else f"a list of {len(raw)}"
        case dict():
            return "a table"
        case datetime.datetime() | datetime.date() | datetime.time():
            return f"the date or time {raw}"
    return type(raw).__name__


def _short(text: str) -> str:
    return text if len(text) <= 60 else text[:57] + "..."


def quoted(number: Fraction) -> str:
    """Return an exact number as a message can quote it."""
    return _short(str(number))


def convert(form: Form, raw: object) -> object:
    """Return the value of a key of that form. Raises FaultyError."""
    match form:
        case Whole():
            return _whole_or_auto(form, raw)
        case Flag():
            return _typed(raw, bool, form.wanted)
        case Choice():
            return _choice(form, raw)
        case Among():
            return _among(form, raw)
        case Identifier() | Line():
            return _text(form, raw)
        case RelativePath():
            return _typed(raw, str, form.wanted)
        case Span():
            return _span(form, raw)
        case Two():
            return _two(raw, form.low, form.high, form.wanted)
        case WholeOrTwo():
            return _fracs(form, raw)
        case Size():
            return _size(form, raw)
        case Paths():
            return _paths(form, raw)
        case Order():
            return _order(form, raw)
    return _exact_form(form, raw)


def _exact_form(form: Form, raw: object) -> object:
    """Return the value of a key that holds exact rationals."""
    match form:
        case Positive():
            pair = _one_or_two(raw, form.wanted)
            sigma = tuple(_positive(item, form.wanted) for item in pair)
            return sigma if len(sigma) == 2 else sigma * 2
        case Rational():
            return (_positive if form.positive else number)(raw, form.wanted)
        case DivisorForm():
            pair = _one_or_two(raw, form.wanted)
            return tuple(_divisor(item, form.wanted) for item in pair)
        case Rows():
            return matrix(raw, form.wanted)
        case Numbers():
            return vector(raw, form.wanted)
        case PinnedForm() | RegistersForm():
            return raw
    raise TypeError(f"no conversion to {type(form).__name__}")


def _wrong(raw: object, wanted: str) -> FaultyError:
    return _faulty("type-wrong", got=shown(raw), expected=wanted)


def _typed(raw: object, kind: type[object], wanted: str) -> object:
    if not isinstance(raw, kind) or isinstance(raw, Real):
        raise _wrong(raw, wanted)
    return raw


def _whole(raw: object, low: int, high: int, wanted: str) -> int:
    if not isinstance(raw, int) or isinstance(raw, bool):
        raise _wrong(raw, wanted)
    if not low <= raw <= high:
        raise _faulty("out-of-limits", got=shown(raw), expected=wanted)
    return raw


def _whole_or_auto(form: Whole, raw: object) -> int | Auto:
    if form.auto and isinstance(raw, str) and not isinstance(raw, Real):
        return _word(Auto, raw, form.wanted)
    return _whole(raw, form.low, form.high, form.wanted)


def _word(words: type[T], raw: str, wanted: str) -> T:
    legal = [word.value for word in words]
    if raw in legal:
        return words(raw)
    close = difflib.get_close_matches(raw[:60].lower(), legal, 1, 0.5)
    if close:
        raise _faulty("word-misspelt", got=shown(raw), nearest=f'"{close[0]}"', expected=wanted)
    raise _faulty("word-unknown", got=shown(raw), expected=wanted)


def _choice(form: Choice, raw: object) -> StrEnum:
    if not isinstance(raw, str) or isinstance(raw, Real):
        raise _wrong(raw, form.wanted)
    return _word(form.words, raw, form.wanted)


def _among(form: Among, raw: object) -> int:
    number = _whole(raw, min(form.numbers), max(form.numbers), form.wanted)
    if number not in form.numbers:
        raise _faulty("out-of-limits", got=shown(raw), expected=form.wanted)
    return number


def _text(form: Identifier | Line, raw: object) -> str:
    if not isinstance(raw, str) or isinstance(raw, Real):
        raise _wrong(raw, form.wanted)
    faults = name_faults(raw) if isinstance(form, Identifier) else line_faults(raw)
    if faults:
        raise FaultyError(*(Fault(kind, values) for kind, values in faults))
    return raw


def _list_of(raw: object, count: int, wanted: str) -> Sequence[object]:
    if not isinstance(raw, list) or len(raw) != count:
        raise _wrong(raw, wanted)
    return raw


def _two(raw: object, low: int, high: int, wanted: str) -> tuple[int, int]:
    first, second = _list_of(raw, 2, wanted)
    return _whole(first, low, high, wanted), _whole(second, low, high, wanted)


def _span(form: Span, raw: object) -> tuple[int, int]:
    least, greatest = _two(raw, form.low, form.high, form.wanted)
    if least > greatest:
        raise _faulty("span-empty", got=shown(raw))
    return least, greatest


def _one_or_two(raw: object, wanted: str) -> Sequence[object]:
    return _list_of(raw, 2, wanted) if isinstance(raw, list) else (raw,)


def _fracs(form: WholeOrTwo, raw: object) -> tuple[int | Auto, ...]:
    # The form's words also describe one item: a pair cannot stand inside a pair.
    item = Whole(form.low, form.high, auto=True)
    return tuple(_whole_or_auto(item, each) for each in _one_or_two(raw, form.wanted))


def _size(form: Size, raw: object) -> tuple[int, int]:
    if isinstance(raw, list):
        return _two(raw, form.low, form.high, form.wanted)
    size = _whole(raw, form.low, form.high, form.wanted)
    return size, size


def _paths(form: Paths, raw: object) -> tuple[str, ...]:
    if not isinstance(raw, list) or not raw:
        raise _wrong(raw, form.wanted)
    paths = [path for path in raw if isinstance(path, str) and not isinstance(path, Real)]
    if len(paths) < len(raw):
        raise _wrong(raw, form.wanted)
    return tuple(paths)


def _order(form: Order, raw: object) -> tuple[StrEnum, ...]:
    if not isinstance(raw, list):
        raise _wrong(raw, form.wanted)
    given = [_choice(Choice(form.words), item) for item in raw]
    twice = next((word for at, word in enumerate(given) if word in given[:at]), None)
    if twice is not None:
        raise _faulty("word-twice", got=f'"{twice}"', expected=form.wanted)
    return (*given, *(word for word in form.words if word not in given))


def number(raw: object, wanted: str) -> Fraction:
    """Return the exact rational that a TOML number, or a ratio in quotes, writes."""
    if isinstance(raw, int) and not isinstance(raw, bool):
        return Fraction(raw)
    if not isinstance(raw, str):
        raise _wrong(raw, wanted)
    try:
        return exact(raw.replace("_", "") if isinstance(raw, Real) else raw)
    except NotExactError as error:
        raise _faulty(error.kind, got=shown(raw), expected=wanted) from None


def _positive(raw: object, wanted: str) -> Fraction:
    value = number(raw, wanted)
    if value <= 0:
        raise _faulty("out-of-limits", got=shown(raw), expected=wanted)
    return value


def _divisor(raw: object, wanted: str) -> Fraction | Sum:
    return Sum.SUM if raw == Sum.SUM.value else _positive(raw, wanted)


def vector(raw: object, wanted: str) -> tuple[Fraction, ...]:
    """Return a list of exact numbers, of 1..255 items. Raises FaultyError with all faults."""
    if not isinstance(raw, list):
        raise _wrong(raw, wanted)
    if not raw:
        raise _faulty("kernel-empty")
    if len(raw) > BOX_LIMIT:
        raise _faulty("kernel-too-long", got=len(raw), limit=BOX_LIMIT)
    return _numbers([raw], wanted, in_matrix=False)[0]


def matrix(raw: object, wanted: str) -> tuple[tuple[Fraction, ...], ...]:
    """Return rows of exact numbers, at most 255 x 255. Raises FaultyError with all faults."""
    if not isinstance(raw, list):
        raise _wrong(raw, wanted)
    rows = [row for row in raw if isinstance(row, list)]
    if len(rows) < len(raw):
        raise _wrong(raw, wanted)
    longest = max(map(len, rows), default=0)
    if longest == 0:
        raise _faulty("kernel-empty")
    if len(rows) > BOX_LIMIT or longest > BOX_LIMIT:
        raise _faulty("kernel-too-large", rows=len(rows), columns=longest, limit=BOX_LIMIT)
    _refuse_ragged(rows)
    return _numbers(rows, wanted, in_matrix=True)


def _refuse_ragged(rows: list[list[object]]) -> None:
    expected = len(rows[0])
    ragged = tuple(
        Fault("kernel-ragged", (("row", at + 1), ("got", len(row)), ("expected", expected)), at)
        for at, row in enumerate(rows)
        if len(row) != expected
    )
    if ragged:
        raise FaultyError(*_some(ragged))


def _numbers(
    rows: list[list[object]], wanted: str, in_matrix: bool
) -> tuple[tuple[Fraction, ...], ...]:
    faults: list[Fault] = []
    result = []
    for at, row in enumerate(rows):
        taps = []
        for column, raw in enumerate(row):
            try:
                taps.append(number(raw, wanted))
            except FaultyError as error:
                faults.append(_tap_fault(error, at, column, in_matrix))
        result.append(tuple(taps))
    if faults:
        raise FaultyError(*_some(tuple(faults)))
    return tuple(result)


# A tap's fault says where in its array the tap is.
_OF_TAPS = {
    "type-wrong": "tap-type-wrong",
    "number-malformed": "tap-malformed",
    "number-not-finite": "tap-not-finite",
    "number-too-long": "tap-too-long",
    "number-over-zero": "tap-over-zero",
}


def _tap_fault(error: FaultyError, row: int, column: int, in_matrix: bool) -> Fault:
    """Return the one fault of a tap with its place: "row 2, column 5", counted from 1."""
    fault = error.faults[0]
    where = f"row {row + 1}, column {column + 1}" if in_matrix else f"place {column + 1}"
    values = {**dict(fault.values), "where": where}
    del values["expected"]
    return Fault(_OF_TAPS[fault.kind], tuple(values.items()), row if in_matrix else column)


def _some(faults: tuple[Fault, ...]) -> tuple[Fault, ...]:
    rest = len(faults) - NAMED_ITEMS
    if rest <= 0:
        return faults
    return (*faults[:NAMED_ITEMS], Fault("more-like-these", (("got", rest),)))
