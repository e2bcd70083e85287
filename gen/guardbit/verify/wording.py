"""Phrases that several rungs use."""

from fractions import Fraction


def left_out(count: int) -> tuple[str, ...]:
    """Return a note on calls that were not made after too many crashes; none if there are none."""
    return (f"{count} calls were not made, after too many crashes or hangs",) if count else ()


def percent(part: int, whole: int) -> str:
    """Return a share as percent, rounded down to a tenth, so that 100.0 means all."""
    tenths = Fraction(1000 * part, whole) if whole else Fraction(0)
    return f"{int(tenths) // 10}.{int(tenths) % 10}"
