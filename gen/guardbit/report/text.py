"""Numbers and foreign text as they are shown: rounded outward, and free of control characters."""

from fractions import Fraction

from guardbit.model.sizing import Interval


def shown(text: str) -> str:
    """Return `text` on one line, with every character that could steer a terminal spelt out."""
    return "".join(c if c.isprintable() else ascii(c)[1:-1] for c in text)


def ascii_shown(text: str) -> str:
    """Return `shown(text)` with everything outside ASCII spelt out as well."""
    return shown(text).encode("ascii", "backslashreplace").decode("ascii")


def lower(value: Fraction, places: int = 6) -> str:
    """Return a decimal that is at most `value`: exact if `places` digits suffice."""
    return _decimal(_floor(value * 10**places), places)


def upper(value: Fraction, places: int = 6) -> str:
    """Return a decimal that is at least `value`: exact if `places` digits suffice."""
    return _decimal(-_floor(-value * 10**places), places)


def _floor(value: Fraction) -> int:
    return value.numerator // value.denominator


def _decimal(scaled: int, places: int) -> str:
    digits = str(abs(scaled)).zfill(places + 1)
    cut = len(digits) - places
    body = trimmed(f"{digits[:cut]}.{digits[cut:]}")
    return f"-{body}" if scaled < 0 else body


def trimmed(digits: str) -> str:
    """Return a decimal without the zeros that end its fraction."""
    return digits.rstrip("0").rstrip(".") if "." in digits else digits


def signed(digits: str) -> str:
    """Return a number's digits with a plus sign if it is above zero."""
    return digits if digits.startswith("-") or digits == "0" else f"+{digits}"


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
