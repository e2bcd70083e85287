"""Images and kernels by the format that a file's suffix names."""

from collections.abc import Callable
from fractions import Fraction
from pathlib import Path, PurePath
from typing import Any, TypeAlias

import numpy as np
from numpy.typing import NDArray

from guardbit.files.npy import npy_bytes, parse_npy
from guardbit.files.pgm import PIXEL_LIMIT, parse_pgm, pgm_bytes
from guardbit.files.png import parse_png, png_bytes
from guardbit.files.reading import IMAGE_LIMIT, read_bytes, refusal
from guardbit.files.table import parse_csv
from guardbit.model.routine import Codes
from guardbit.model.spec import Matrix

LEAST_CODE = -(2**31)
GREATEST_CODE = 2**32 - 1

_Parser: TypeAlias = Callable[[bytes, str], tuple[Codes, int]]


def read_image(path: Path) -> Codes:
    """Return the codes of a .pgm, .png or .npy file as int64, (rows, columns, channels).

    Raises SpecError for a file that is not such an image, MachineError for one that the
    machine cannot read.
    """
    return parse_image(read_bytes(path, IMAGE_LIMIT), str(path))


def parse_image(data: bytes, name: str) -> Codes:
    """Return the codes of an image's bytes; the suffix of `name` tells the format."""
    return _parser(name, ".pgm, .png, .npy")(data, name)[0]


def _parser(name: str, expected: str) -> _Parser:
    parsers: dict[str, _Parser] = {".pgm": parse_pgm, ".png": parse_png, ".npy": _npy_image}
    suffix = PurePath(name).suffix.lower()
    if suffix not in parsers:
        raise refusal("format-unknown", name, got=suffix or "no suffix", expected=expected)
    return parsers[suffix]


def _npy_image(data: bytes, name: str) -> tuple[Codes, int]:
    array = parse_npy(data, name)
    if array.dtype.kind not in "iu":
        raise refusal("npy-type", name, got=str(array.dtype), expected="integers")
    if array.ndim not in (2, 3):
        raise refusal("npy-shape", name, got=array.ndim, expected="2 or 3")
    if array.size == 0:
        raise refusal("image-empty", name)
    if array.size > PIXEL_LIMIT:
        rows, columns = array.shape[:2]
        raise refusal("image-too-large", name, rows=rows, columns=columns, limit=PIXEL_LIMIT)
    low, high = int(array.min()), int(array.max())
    if low < LEAST_CODE or high > GREATEST_CODE:
        raise refusal("image-codes", name, low=low, high=high, limit=GREATEST_CODE)
    return array.astype(np.int64).reshape(*array.shape[:2], -1), high


def image_bytes(codes: Codes, maxval: int, name: str) -> bytes:
    """Return `codes`, (rows, columns, channels), in the format of `name`'s suffix.

    `maxval` is the greatest code of the pixel format; it chooses 8 or 16 bits in .pgm and
    .png. An .npy file takes any codes. Raises SpecError for what the format cannot hold.
    """
    suffix = PurePath(name).suffix.lower()
    if suffix == ".pgm":
        return pgm_bytes(codes, maxval, name)
    if suffix == ".png":
        return png_bytes(codes, maxval, name)
    if suffix == ".npy":
        return npy_bytes(codes)
    expected = ".pgm, .png, .npy"
    raise refusal("format-unknown", name, got=suffix or "no suffix", expected=expected)


def parse_kernel(data: bytes, name: str, limit: int) -> Matrix:
    """Return the taps that a .npy, .csv, .pgm or .png file holds, exactly.

    A binary float is its exact value, a pixel its code. Raises SpecError for a file of
    another kind, one over `limit` rows or columns, several channels, NaN and infinities.
    """
    suffix = PurePath(name).suffix.lower()
    if suffix == ".csv":
        return parse_csv(data, name, limit)
    if suffix == ".npy":
        return _taps(parse_npy(data, name), name, limit)
    codes, _ = _parser(name, ".npy, .csv, .pgm, .png")(data, name)
    if codes.shape[2] != 1:
        raise refusal("image-channels", name, got=codes.shape[2], expected="1")
    return _taps(codes[:, :, 0], name, limit)


def _taps(array: NDArray[Any], name: str, limit: int) -> Matrix:
    if array.ndim != 2:
        raise refusal("npy-shape", name, got=array.ndim, expected="2")
    if array.size == 0:
        raise refusal("image-empty", name)
    rows, columns = array.shape
    if rows > limit or columns > limit:
        raise refusal("array-too-large", name, rows=rows, columns=columns, limit=limit)
    bad = np.argwhere(~np.isfinite(array))
    if len(bad):
        row, column = (int(index) for index in bad[0])
        got = str(array[row, column])
        raise refusal("array-not-finite", name, row=row + 1, column=column + 1, got=got)
    return tuple(tuple(Fraction(value) for value in row) for row in array.tolist())
