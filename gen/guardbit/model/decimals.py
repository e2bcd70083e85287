"""Decimal strings of exact numbers, rounded outward: a bound that is shown still holds."""

from fractions import Fraction


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
