"""Numbers and foreign text as they are shown, free of control characters."""

from fractions import Fraction

from guardbit.model.decimals import lower
from guardbit.model.sizing import Interval


def shown(text: str) -> str:
    """Return `text` on one line, with every character that could steer a terminal spelt out."""
    return "".join(c if c.isprintable() else ascii(c)[1:-1] for c in text)


def ascii_shown(text: str) -> str:
    """Return `shown(text)` with everything outside ASCII spelt out as well."""
    return shown(text).encode("ascii", "backslashreplace").decode("ascii")


def ratio(value: Fraction) -> str:
    """Return a ratio with a few digits, never more than `value`."""
    if value >= 10**6:
        power = value.numerator.bit_length() - value.denominator.bit_length() - 1
        return f"over 2^{power}"
    return lower(value, 0 if value >= 100 else 1 if value >= 10 else 3)


def interval(value: Interval) -> str:
    """Return "low .. high"."""
    return f"{value.low} .. {value.high}"


def grouped(count: int) -> str:
    """Return a count with its thousands apart."""
    return f"{count:,}"


def plural(count: int, noun: str) -> str:
    """Return the count with its noun, which takes an s unless the count is one."""
    return f"{grouped(count)} {noun}" if count == 1 else f"{grouped(count)} {noun}s"
