"""A tail carried out on one number, step for step as the C does it."""

from guardbit.arith.words import clamp, wrap
from guardbit.model.enums import Overflow
from guardbit.model.plan import (
    Exact,
    Floor,
    Quotient,
    Tail,
    Thresholds,
    TiesToAway,
    TiesToEven,
    Truncate,
)


def carry_out(tail: Tail, acc: int) -> int:
    """Return the number that a tail stores for a sum."""
    code = divide(tail.quotient, acc * tail.multiplier) + tail.offset
    match tail.overflow:
        case Overflow.SATURATE:
            return clamp(code, tail.limits.low, tail.limits.high)
        case Overflow.WRAP:
            bits = (tail.limits.high - tail.limits.low).bit_length()
            return wrap(code, bits, tail.limits.low < 0) - tail.remove
        case _:
            return code


def divide(form: Quotient, n: int) -> int:
    """Return the rounded quotient of n, still with the lift of its dividend."""
    match form:
        case Exact():
            return n
        case Thresholds(up, down):
            return (up is not None and n >= up) - (down is not None and n <= down)
        case Floor(add, divisor, _, _):
            return (n + add) // divisor
        case TiesToEven(add, divisor, _, _):
            floor, rest = divmod(n + add, divisor)
            return floor - (rest == 0 and floor % 2 != 0)
        case Truncate(divisor):
            return _toward_zero(n, divisor)
        case TiesToAway(half, divisor):
            return _toward_zero(n - half if n < 0 else n + half, divisor)


def _toward_zero(n: int, divisor: int) -> int:
    """Return the quotient as C rounds it (C99 6.5.5p6)."""
    return n // divisor if n >= 0 else -(-n // divisor)
