"""A TOML document as Python values, with the line of each key, or the reason why not."""

import re
import tomllib
from typing import Any

from guardbit.files.numbers import LENGTH_LIMIT
from guardbit.files.reading import label
from guardbit.model.finding import Place, SpecError, Value, finding
from guardbit.spec.lines import Scan, scan

DEPTH_LIMIT = 16

_AT = re.compile(r" \(at (?:line (\d+), column \d+|end of document)\)$")


class Real(str):
    """A TOML float as it is written: "0.1", "1e9", "nan". Its digits decide, not its double."""

    __slots__ = ()


def load(text: str, name: str) -> tuple[dict[str, Any], Scan]:
    """Return the document, floats as `Real`, and where its keys stand.

    Raises SpecError with the first error of syntax, its line and, where that is a key given
    twice, both lines. Numbers, keys and brackets of absurd length are refused unread.
    """
    found = scan(text)
    _refuse_absurd(found, name)
    try:
        return tomllib.loads(text, parse_float=Real), found
    except tomllib.TOMLDecodeError as error:
        raise _syntax(str(error), text, name, found) from None
    except (ValueError, RecursionError) as error:
        raise _refused("toml-syntax", name, None, reason=str(error)) from None


def _refuse_absurd(found: Scan, name: str) -> None:
    limits = (
        ("toml-long-word", found.longest_word, LENGTH_LIMIT),
        ("toml-deep", found.longest_key, DEPTH_LIMIT),
        ("toml-deep", found.deepest, DEPTH_LIMIT),
    )
    for kind, (size, line), limit in limits:
        if size > limit:
            raise _refused(kind, name, line, limit=limit)


def _syntax(message: str, text: str, name: str, found: Scan) -> SpecError:
    """Return the error that a message of the reader stands for."""
    at = _AT.search(message)
    line = int(at[1]) if at and at[1] else text.count("\n") + 1
    reason = _AT.sub("", message)
    if reason.startswith("Cannot "):
        repeated = [(key, where) for key, where in found.order if where <= line]
        key, where = repeated[-1] if repeated else ("", line)
        place = Place(label(name), where, key)
        return SpecError(finding("toml-twice", place, first=found.keys.get(key, where)))
    return _refused("toml-syntax", name, line, reason=reason)


def _refused(kind: str, name: str, line: int | None, **values: Value) -> SpecError:
    return SpecError(finding(kind, Place(label(name), line), **values))
