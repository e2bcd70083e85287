"""The accumulator over symbols: products added in the contract's order, and its overflow."""

from collections.abc import Iterable

from guardbit.model.enums import Overflow, Preload
from guardbit.model.filter import Pass
from guardbit.proof.algebra.space import Space
from guardbit.proof.algebra.values import Value
from guardbit.proof.contract.rounding import clamped


def accumulated(
    space: Space, each: Pass, products: Iterable[Value], *, stepped: bool = False
) -> Value:
    """Return what the accumulator of a pass holds after the products, in this order.

    With `stepped` wrapping is written as a function of the sum, with its steps, where otherwise
    taps would be taken modulo the register's size. Both are the same number.
    """
    register = each.accumulator
    assert register.bits is not None
    least = -(2 ** (register.bits - 1)) if register.signed else 0
    greatest = least + 2**register.bits - 1
    total: Value = _start(each, least, greatest)
    for product in products:
        total = space.add(total, product)
        if register.overflow is Overflow.SATURATE:
            total = clamped(space, total, least, greatest)
    if register.overflow is Overflow.WRAP:
        # adding modulo 2^bits at every step and once at the end is the same
        if stepped:
            turns = space.floor_divide(space.subtract(total, least), 2**register.bits)
            return space.subtract(total, space.multiply(turns, 2**register.bits))
        return space.wrap(total, register.bits, register.signed)
    return total


def _start(each: Pass, least: int, greatest: int) -> int:
    if each.accumulator.preload is Preload.ZERO:
        return 0
    half = 1 << -each.requantiser.exponent - 1
    if each.accumulator.overflow is Overflow.WRAP:
        return half
    return max(least, min(half, greatest))
