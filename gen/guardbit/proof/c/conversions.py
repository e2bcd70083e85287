"""Conversions between types, and arithmetic in a type, as C defines them."""

import operator
from collections.abc import Callable, Mapping

from guardbit.model.proof import Reliance
from guardbit.proof.algebra.space import Space
from guardbit.proof.algebra.values import InexpressibleError, Value
from guardbit.proof.c.scope import Frame, Number
from guardbit.proof.c.types import Integer
from guardbit.proof.machine.context import Site

_OnSpace = Mapping[str, Callable[[Space, Value, Value], Value]]
_OnNumbers = Mapping[str, Callable[[int, int], int]]


def converted(site: Site, run: Number, source: Integer, target: Integer) -> Number:
    """Return the run whose result is converted to another integer type (C99 6.3.1.3)."""
    if target.boolean:
        return comparison(site, "!=", run, lambda _: 0)
    if target.low <= source.low and source.high <= target.high:
        return run
    return _narrowed(site, run, target) if target.signed else _wrapped(site, run, target)


def _wrapped(site: Site, run: Number, target: Integer) -> Number:
    bits, most, cx = target.bits, target.high, site.cx

    def wrapped(frame: Frame) -> Value:
        value = run(frame)
        if type(value) is int:
            return value & most
        return cx.space.wrap(value, bits, signed=False)

    return wrapped


def _narrowed(site: Site, run: Number, target: Integer) -> Number:
    low, high, bits, cx = target.low, target.high, target.bits, site.cx

    def narrowed(frame: Frame) -> Value:
        value = run(frame)
        if type(value) is int and low <= value <= high:
            return value
        made = cx.space.wrap(value, bits, signed=True)
        if made is not value:
            site.relies(Reliance.NARROWING, value, (low, high))
        return made

    return narrowed


def arithmetic(site: Site, op: str, kind: Integer, left: Number, right: Number) -> Number:
    """Return the run of +, - or * on operands that both have the type `kind`."""
    on_space, on_numbers = _SUMS[op], _SUMS_OF_NUMBERS[op]
    low, high, bits, signed, cx = kind.low, kind.high, kind.bits, kind.signed, site.cx

    def run(frame: Frame) -> Value:
        a, b = left(frame), right(frame)
        value: Value
        if type(a) is int and type(b) is int:
            value = on_numbers(a, b)
            if low <= value <= high:
                return value
            if not signed:
                return value & high
        else:
            try:
                value = on_space(cx.space, a, b)
            except InexpressibleError as error:
                site.refused(error.reason)
        if signed:
            return site.within(value, kind, "signed-overflow")
        return cx.space.wrap(value, bits, signed)

    return run


def division(site: Site, op: str, kind: Integer, left: Number, right: Number) -> Number:
    """Return the run of / or %."""
    cx = site.cx

    def run(frame: Frame) -> Value:
        a, b = left(frame), right(frame)
        space = cx.space
        try:
            if space.both(cx.mask, space.compare("==", b, 0)) != 0:
                site.broken("division-by-zero", b, (1, kind.high))
            quotient = space.quotient(a, b)
            if kind.signed:
                quotient = site.within(quotient, kind, "signed-overflow")
            return quotient if op == "/" else space.remainder(a, b)
        except InexpressibleError as error:
            site.refused(error.reason)

    return run


def bitwise(site: Site, op: str, left: Number, right: Number) -> Number:
    """Return the run of &, | or ^ on operands of one type."""
    on_space, on_numbers, cx = _BITS[op], _BITS_OF_NUMBERS[op], site.cx

    def run(frame: Frame) -> Value:
        a, b = left(frame), right(frame)
        if type(a) is int and type(b) is int:
            return on_numbers(a, b)
        try:
            return on_space(cx.space, a, b)
        except InexpressibleError as error:
            site.refused(error.reason)

    return run


def complement(site: Site, kind: Integer, run: Number) -> Number:
    """Return the run of ~ on an operand of promoted type."""
    cx, most, signed = site.cx, kind.high, kind.signed

    def flipped(frame: Frame) -> Value:
        value, space = run(frame), cx.space
        return space.complement(value) if signed else space.subtract(most, value)

    return flipped


def shift(site: Site, op: str, kind: Integer, left: Number, right: Number) -> Number:
    """Return the run of << or >>; `kind` is the promoted left operand's type (C99 6.5.7)."""
    shifted = _shifted_up if op == "<<" else _shifted_down

    def run(frame: Frame) -> Value:
        value = left(frame)
        count = _count(site, kind, right(frame))
        try:
            return shifted(site, kind, value, count)
        except InexpressibleError as error:
            site.refused(error.reason)

    return run


def _count(site: Site, kind: Integer, value: Value) -> int:
    if not isinstance(value, int):
        low, high = site.cx.space.bounds(value)
        if not 0 <= low <= high < kind.bits:
            site.broken("shift-count", value, (0, kind.bits - 1))
        site.refused("shift-by-pixel")
    if not 0 <= value < kind.bits:
        site.broken("shift-count")
    return value


def _shifted_up(site: Site, kind: Integer, value: Value, count: int) -> Value:
    space = site.cx.space
    if not kind.signed:
        return space.wrap(space.multiply(value, 1 << count), kind.bits, signed=False)
    if space.bounds(value)[0] < 0:
        # the type's own numbers without those below 0
        value = site.within(value, Natural(kind.bits, 0, kind.high), "shift-of-negative")
    return site.within(space.multiply(value, 1 << count), kind, "signed-overflow")


class Natural:
    """The numbers of a signed type that are not negative."""

    def __init__(self, bits: int, low: int, high: int) -> None:
        self.bits = bits
        self.low = low
        self.high = high


def _shifted_down(site: Site, kind: Integer, value: Value, count: int) -> Value:
    space = site.cx.space
    if kind.signed and space.bounds(value)[0] < 0:
        site.relies(Reliance.ARITHMETIC_SHIFT, value, (0, kind.high))
    return space.shift_down(value, count)


def comparison(site: Site, op: str, left: Number, right: Number) -> Number:
    """Return the run of a comparison of two integers of one type."""
    on_numbers, cx = _COMPARED[op], site.cx

    def run(frame: Frame) -> Value:
        a, b = left(frame), right(frame)
        if type(a) is int and type(b) is int:
            return int(on_numbers(a, b))
        try:
            return cx.space.compare(op, a, b)
        except InexpressibleError as error:
            site.refused(error.reason)

    return run


_SUMS: _OnSpace = {"+": Space.add, "-": Space.subtract, "*": Space.multiply}
_SUMS_OF_NUMBERS: _OnNumbers = {"+": operator.add, "-": operator.sub, "*": operator.mul}
_BITS: _OnSpace = {"&": Space.bits_and, "|": Space.bits_or, "^": Space.bits_xor}
_BITS_OF_NUMBERS: _OnNumbers = {"&": operator.and_, "|": operator.or_, "^": operator.xor}
_COMPARED: Mapping[str, Callable[[int, int], bool]] = {
    "<": operator.lt,
    "<=": operator.le,
    ">": operator.gt,
    ">=": operator.ge,
    "==": operator.eq,
    "!=": operator.ne,
}
