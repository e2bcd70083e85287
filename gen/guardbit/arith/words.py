"""Two's complement and unsigned words: ranges, widths, wrapping, clamping."""

from guardbit.model.enums import Container
from guardbit.model.sizing import Interval

_CONTAINERS = {
    Container.U8: (8, False),
    Container.I8: (8, True),
    Container.U16: (16, False),
    Container.I16: (16, True),
    Container.U32: (32, False),
    Container.I32: (32, True),
}


def wrap(value: int, bits: int, signed: bool) -> int:
    """Return the number of `bits` bits that is congruent to `value` modulo 2**bits."""
    low = format_range(bits, signed).low
    return (value - low) % (1 << bits) + low


def clamp(value: int, low: int, high: int) -> int:
    """Return the number of low..high that is nearest to `value`."""
    return min(max(value, low), high)


def format_range(bits: int, signed: bool) -> Interval:
    """Return all numbers of a word: two's complement if `signed`."""
    if signed:
        return Interval(-(1 << (bits - 1)), (1 << (bits - 1)) - 1)
    return Interval(0, (1 << bits) - 1)


def bits_needed(low: int, high: int, signed: bool) -> int | None:
    """Return the least width, from 1, of a word that holds low..high.

    None: an unsigned word cannot hold a negative number.
    """
    if not signed:
        return None if low < 0 else max(high.bit_length(), 1)
    # ~x has the bit length of the two's complement magnitude of a negative x
    return 1 + max((v if v >= 0 else ~v).bit_length() for v in (low, high))


def container_word(container: Container) -> tuple[int, bool]:
    """Return (bits, signed) of a container."""
    return _CONTAINERS[container]


def container_range(container: Container) -> Interval:
    """Return all numbers that a container holds."""
    return format_range(*_CONTAINERS[container])


def smallest_container(bits: int, signed: bool) -> Container | None:
    """Return the smallest container of that signedness with at least `bits` bits, or None."""
    fits = (c for c, (b, s) in _CONTAINERS.items() if s == signed and b >= bits)
    return next(fits, None)
