"""Decimal strings of exact numbers, rounded outward: a bound that is shown still holds."""

from decimal import Context, Decimal
from fractions import Fraction

_DIGITS = Context(prec=50)
_LEVEL_PLACES = 30


def lower(value: Fraction, places: int = 6) -> str:
    """Return a decimal that is at most `value`: exact if `places` digits suffice."""
    return _decimal(_floor(value * 10**places), places)


def upper(value: Fraction, places: int = 6) -> str:
    """Return a decimal that is at least `value`: exact if `places` digits suffice."""
    return _decimal(-_floor(-value * 10**places), places)


def nearest(value: Fraction, places: int = 6) -> str:
    """Return the nearest decimal, for what is no bound."""
    return _decimal(round(value * 10**places), places)


def lower_decibels(ratio: Fraction) -> str:
    """Return a power ratio in dB, to two digits, never more than it is."""
    return lower(_level(ratio), 2) if ratio else "-infinite"


def upper_decibels(ratio: Fraction) -> str:
    """Return a power ratio in dB, to two digits, never less than it is."""
    return upper(_level(ratio), 2) if ratio else "-infinite"


def _level(ratio: Fraction) -> Fraction:
    """Return ten times the decimal logarithm, to the nearest of thirty digits after the point.

    It is computed to fifty, so that a ratio made of a round number of dB gives it back.
    """
    power = _DIGITS.divide(Decimal(ratio.numerator), Decimal(ratio.denominator))
    level = Fraction(10 * power.log10(_DIGITS))
    return Fraction(round(level * 10**_LEVEL_PLACES), 10**_LEVEL_PLACES)


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
