"""NumPy's array files (numpy.lib.format, versions 1.0 and 2.0), without pickles."""

import io
import math
import warnings
from typing import Any

import numpy as np
from numpy.typing import NDArray

from guardbit.files.reading import refusal

_NUMBERS = ("i1", "i2", "i4", "i8", "u1", "u2", "u4", "u8", "f2", "f4", "f8")


def parse_npy(data: bytes, name: str) -> NDArray[Any]:
    """Return the array of an .npy file, of whatever shape, as integers or binary floats.

    Raises SpecError for pickled objects, other types, and damaged or truncated files. The
    length is compared with the header before anything is allocated.
    """
    stream = io.BytesIO(data)
    shape, fortran, kind = _header(stream, name)
    if kind.hasobject:
        raise refusal("npy-pickled", name)
    if kind.str[1:] not in _NUMBERS:
        raise refusal("npy-type", name, got=str(kind)[:60], expected="integers or floats")
    body = data[stream.tell() :]
    needed = math.prod(shape) * kind.itemsize
    if len(body) < needed:
        raise refusal("image-truncated", name, expected=needed, got=len(body), unit="bytes")
    if len(body) > needed:
        raise refusal("image-extra", name, got=len(body) - needed, unit="bytes")
    return np.frombuffer(body, kind).reshape(shape, order="F" if fortran else "C")


def _header(stream: io.BytesIO, name: str) -> tuple[tuple[int, ...], bool, np.dtype[Any]]:
    readers = {
        (1, 0): np.lib.format.read_array_header_1_0,
        (2, 0): np.lib.format.read_array_header_2_0,
    }
    try:
        with warnings.catch_warnings():
            warnings.simplefilter("error")
            shape, fortran, kind = readers[np.lib.format.read_magic(stream)](stream)
        if any(length < 0 for length in shape):
            raise ValueError("a negative length")
        return shape, fortran, kind
    except Exception:
        # The header is Python text that NumPy evaluates: damaged, it may raise anything.
        raise refusal("image-damaged", name, reason="its header is not readable") from None


def npy_bytes(array: NDArray[Any]) -> bytes:
    """Return `array` as a version 1.0 file, little-endian and in row order on any machine."""
    plain = np.ascontiguousarray(array, dtype=array.dtype.newbyteorder("<"))
    stream = io.BytesIO()
    np.lib.format.write_array(stream, plain, version=(1, 0), allow_pickle=False)
    return stream.getvalue()
