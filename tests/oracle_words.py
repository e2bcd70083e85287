"""Words of numbers, and how the oracle's readers complain."""

from __future__ import annotations

from gainfit import ContradictionError


def limits(bits: int, signed: bool) -> tuple[int, int]:
    """The least and greatest number of a two's complement or unsigned word."""
    return (-(2 ** (bits - 1)), 2 ** (bits - 1) - 1) if signed else (0, 2**bits - 1)


def need(holds: bool, complaint: str) -> None:
    """Nothing; ContradictionError where `holds` is false."""
    if not holds:
        raise ContradictionError(complaint)


def between(low: int, high: int, *numbers: object) -> bool:
    """Whether each of the numbers is an integer from low to high."""
    return all(type(number) is int and low <= number <= high for number in numbers)
