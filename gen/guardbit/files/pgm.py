"""Portable grey maps, plain (P2) and raw (P5), as the pgm(5) page of Netpbm defines them.

Codes come out as they stand in the file: general image libraries stretch them to the full
range of a byte when the file's greatest value is another, and a filter is checked to the bit.
"""

import re

import numpy as np

from guardbit.files.reading import refusal
from guardbit.model.routine import Codes

PIXEL_LIMIT = 1 << 26
MAXVAL_LIMIT = 65535

_HEADER_NUMBER = re.compile(rb"(?:[ \t\n\v\f\r]|#[^\r\n]*[\r\n])*([0-9]{1,10})(?=[ \t\n\v\f\r#])")
_COMMENT = re.compile(rb"#[^\r\n]*")
_PLAIN_NUMBER = re.compile(rb"[0-9]{1,10}")


def parse_pgm(data: bytes, name: str) -> tuple[Codes, int]:
    """Return the codes, (rows, columns, 1), and the greatest value the header states.

    Raises SpecError for a damaged or truncated file, naming `name`.
    """
    magic = data[:2]
    if magic not in (b"P2", b"P5"):
        raise refusal("pgm-magic", name, got=repr(magic)[1:])
    (columns, rows, maxval), start = _header(data, name)
    if not (columns and rows):
        raise refusal("image-empty", name)
    if rows * columns > PIXEL_LIMIT:
        raise refusal("image-too-large", name, rows=rows, columns=columns, limit=PIXEL_LIMIT)
    if not 1 <= maxval <= MAXVAL_LIMIT:
        raise refusal("pgm-maxval", name, got=maxval, limit=MAXVAL_LIMIT)
    read = _raw if magic == b"P5" else _plain
    codes = read(data[start:], rows * columns, maxval, name)
    if int(codes.max()) > maxval:
        raise refusal("pgm-code", name, got=int(codes.max()), limit=maxval)
    return codes.reshape(rows, columns, 1), maxval


def _header(data: bytes, name: str) -> tuple[list[int], int]:
    at = 2
    numbers = []
    for what in ("width", "height", "maxval"):
        match = _HEADER_NUMBER.match(data, at)
        if match is None:
            raise refusal("pgm-header", name, missing=what)
        numbers.append(int(match[1]))
        at = match.end()
    return numbers, at


def _raw(body: bytes, count: int, maxval: int, name: str) -> Codes:
    kind = np.dtype("u1") if maxval < 256 else np.dtype(">u2")
    raster = body[1:]
    needed = count * kind.itemsize
    if len(raster) < needed:
        raise refusal("image-truncated", name, expected=needed, got=len(raster), unit="bytes")
    if raster[needed:].strip():
        raise refusal("image-extra", name, got=len(raster) - needed, unit="bytes")
    return np.frombuffer(raster, kind, count).astype(np.int64)


def _plain(body: bytes, count: int, maxval: int, name: str) -> Codes:
    words = _COMMENT.sub(b"", body).split()
    for word in words:
        if not _PLAIN_NUMBER.fullmatch(word):
            raise refusal("pgm-word", name, got=repr(word[:20])[1:])
    if len(words) < count:
        raise refusal("image-truncated", name, expected=count, got=len(words), unit="codes")
    if len(words) > count:
        raise refusal("image-extra", name, got=len(words) - count, unit="codes")
    return np.array([int(word) for word in words], dtype=np.int64)


def pgm_bytes(codes: Codes, maxval: int, name: str) -> bytes:
    """Return a raw grey map of `codes`, (rows, columns, 1): one byte a code, or two.

    Two bytes, most significant first, where `maxval` is over 255. Raises SpecError for an
    empty image, several channels, and codes outside 0..maxval.
    """
    if codes.size == 0:
        raise refusal("image-empty", name)
    rows, columns, channels = codes.shape
    if channels != 1:
        raise refusal("image-channels", name, got=channels, expected="1")
    low, high = int(codes.min()), int(codes.max())
    if low < 0 or high > maxval or not 1 <= maxval <= MAXVAL_LIMIT:
        raise refusal("image-codes", name, low=low, high=high, limit=min(maxval, MAXVAL_LIMIT))
    header = f"P5\n{columns} {rows}\n{maxval}\n".encode()
    return header + codes.astype("u1" if maxval < 256 else ">u2").tobytes()
