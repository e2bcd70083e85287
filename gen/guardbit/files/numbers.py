"""Exact numbers from text: decimals and ratios, never by way of a binary float."""

import re
from fractions import Fraction

LENGTH_LIMIT = 400
EXPONENT_LIMIT = 400

_DECIMAL = re.compile(r"[+-]?(?:[0-9]+(?:\.[0-9]*)?|\.[0-9]+)(?:[eE]([+-]?[0-9]+))?")
_RATIO = re.compile(r"([+-]?[0-9]+) */ *([0-9]+)")
_NOT_FINITE = re.compile(r"[+-]?(?:inf|infinity|nan)", re.IGNORECASE)


_REASONS = {
    "number-malformed": "neither a decimal nor a ratio",
    "number-not-finite": "not finite",
    "number-too-long": f"over {LENGTH_LIMIT} digits, or a power of ten beyond {EXPONENT_LIMIT}",
    "number-over-zero": "a division by zero",
}


class NotExactError(ValueError):
    """The text is no exact number; `kind` says why as a finding does, `reason` in words."""

    def __init__(self, kind: str) -> None:
        super().__init__(kind)
        self.kind = kind
        self.reason = _REASONS[kind]


def exact(text: str) -> Fraction:
    """Return the rational that `text` writes: "3", "-0.25", "1e-3" or "1/16".

    Raises NotExactError of kind number-malformed, number-not-finite, number-too-long (over
    400 characters, or a power of ten beyond 400, refused before it is expanded) or
    number-over-zero.
    """
    text = text.strip()
    if len(text) > LENGTH_LIMIT:
        raise NotExactError("number-too-long")
    if _NOT_FINITE.fullmatch(text):
        raise NotExactError("number-not-finite")
    if ratio := _RATIO.fullmatch(text):
        return _ratio(int(ratio[1]), int(ratio[2]))
    decimal = _DECIMAL.fullmatch(text)
    if decimal is None:
        raise NotExactError("number-malformed")
    if abs(int(decimal[1] or 0)) > EXPONENT_LIMIT:
        raise NotExactError("number-too-long")
    return Fraction(text)


def _ratio(over: int, under: int) -> Fraction:
    if under == 0:
        raise NotExactError("number-over-zero")
    return Fraction(over, under)
