"""Which integers NumPy computes with, so that no result is ever inexact."""

from typing import Any, TypeAlias

import numpy as np
from numpy.typing import NDArray

Array: TypeAlias = NDArray[Any]

_WORDS = (np.dtype(np.int16), np.dtype(np.int32), np.dtype(np.int64))
_PYTHON_INTEGERS = np.dtype(object)


def word_for(bound: int) -> np.dtype[Any]:
    """Return the narrowest type that holds -bound..bound; beyond int64, Python integers."""
    for word in _WORDS:
        if bound <= np.iinfo(word).max:
            return word
    return _PYTHON_INTEGERS


def magnitude(values: Array) -> int:
    """Return the largest |value|; 0 of nothing."""
    return max(-int(values.min(initial=0)), int(values.max(initial=0)))


def limits(bits: int, signed: bool) -> tuple[int, int]:
    """Return the least and the greatest number of a format: two's complement if signed."""
    return (-(1 << (bits - 1)), (1 << (bits - 1)) - 1) if signed else (0, (1 << bits) - 1)


def wrapped(values: Array, bits: int, signed: bool) -> Array:
    """Return the numbers of the format that equal `values` modulo 2**bits."""
    low, high = limits(bits, signed)
    bound = magnitude(values)
    if bound <= min(-low, high):
        return values
    wide = values.astype(word_for(bound + (1 << bits)))
    return ((wide - low) & (high - low)) + low


def stored(values: Array) -> Array:
    """Return `values` as int64 where that holds them all, else as Python integers."""
    fits = values.dtype != _PYTHON_INTEGERS or magnitude(values) <= np.iinfo(np.int64).max
    return values.astype(np.int64 if fits else object, copy=False)
