"""The requantiser over symbols: the exact quotient, one of six roundings, pedestal, overflow."""

from guardbit.model.enums import Overflow, Preload, Rounding
from guardbit.model.filter import Pass, Requantiser
from guardbit.proof.algebra.space import Space
from guardbit.proof.algebra.values import Value


def requantised(space: Space, each: Pass, total: Value) -> Value:
    """Return the code that a pass makes of what its accumulator holds at the end."""
    q = each.requantiser
    numerator, denominator = _fraction(space, q, total)
    if denominator == 1:
        code = numerator
    elif each.accumulator.preload is Preload.ROUNDING:
        # half a step is in the register already
        code = space.floor_divide(numerator, denominator)
    else:
        code = _rounded(space, q.rounding, numerator, denominator)
    return _limited(space, q, space.add(code, q.to.pedestal))


def _fraction(space: Space, q: Requantiser, total: Value) -> tuple[Value, int]:
    up = q.exponent if q.exponent > 0 else 0
    down = -q.exponent if q.exponent < 0 else 0
    return space.multiply(total, 2**up), q.divisor * 2**down


def _rounded(space: Space, rounding: Rounding, n: Value, d: int) -> Value:
    """Return n / d rounded to a whole number."""
    match rounding:
        case Rounding.TOWARD_NEGATIVE:
            return space.floor_divide(n, d)
        case Rounding.TOWARD_POSITIVE:
            return _ceiling(space, n, d)
        case Rounding.TOWARD_ZERO:
            return _by_sign(space, n, _ceiling(space, n, d), space.floor_divide(n, d))
        case Rounding.TIES_TO_POSITIVE:
            return _half_up(space, n, d)
        case Rounding.TIES_TO_AWAY:
            return _by_sign(space, n, _half_down(space, n, d), _half_up(space, n, d))
        case Rounding.TIES_TO_EVEN:
            return _half_even(space, n, d)


def _ceiling(space: Space, n: Value, d: int) -> Value:
    return space.floor_divide(space.add(n, d - 1), d)


def _half_up(space: Space, n: Value, d: int) -> Value:
    """Return the nearest whole number to n / d, the greater of two."""
    return space.floor_divide(space.add(space.multiply(n, 2), d), 2 * d)


def _half_down(space: Space, n: Value, d: int) -> Value:
    """Return the nearest whole number to n / d, the lesser of two."""
    return space.floor_divide(space.add(space.multiply(n, 2), d - 1), 2 * d)


def _half_even(space: Space, n: Value, d: int) -> Value:
    up, down = _half_up(space, n, d), _half_down(space, n, d)
    # they differ at ties only, by one: the even of both is the greater with its last bit off
    even = space.multiply(space.floor_divide(up, 2), 2)
    return space.where(space.compare("==", up, down), up, even)


def _by_sign(space: Space, n: Value, below: Value, other: Value) -> Value:
    return space.where(space.compare("<", n, 0), below, other)


def _limited(space: Space, q: Requantiser, code: Value) -> Value:
    if q.overflow is Overflow.WRAP:
        return space.wrap(code, q.to.bits, q.to.signed)
    if q.overflow is Overflow.SATURATE:
        return clamped(space, code, q.to.low, q.to.high)
    return code


def clamped(space: Space, value: Value, low: int, high: int) -> Value:
    """Return the value held to low..high."""
    value = space.where(space.compare("<", value, low), low, value)
    return space.where(space.compare(">", value, high), high, value)
