"""Portable network graphics (ISO/IEC 15948): grey of 8 or 16 bits, and RGB of 8."""

import io
import struct
import zlib

import numpy as np

from guardbit.files.pgm import PIXEL_LIMIT
from guardbit.files.reading import refusal
from guardbit.model.routine import Codes

_SIGNATURE = b"\x89PNG\r\n\x1a\n"
_COLOURS = {0: "grey", 2: "RGB", 3: "palette", 4: "grey with alpha", 6: "RGB with alpha"}
_WANTED = ("8-bit grey", "16-bit grey", "8-bit RGB")


def parse_png(data: bytes, name: str) -> tuple[Codes, int]:
    """Return the codes, (rows, columns, 1 or 3), and the greatest value of the depth.

    Raises SpecError for a damaged or truncated file, and for a kind whose codes would have
    to be changed to be read: palettes, transparency, other depths.
    """
    chunks = _chunks(data, name)
    header = chunks.get(b"IHDR", b"")
    if len(header) != 13 or b"IEND" not in chunks:
        raise refusal("image-damaged", name, reason="it ends before its last chunk")
    columns, rows, depth, colour = struct.unpack(">IIBB", header[:10])
    kind = f"{depth}-bit {_COLOURS.get(colour, 'unknown')}"
    if kind not in _WANTED:
        raise refusal("png-kind", name, got=kind, expected=_wanted())
    if b"tRNS" in chunks:
        raise refusal("png-kind", name, got=kind + " with transparency", expected=_wanted())
    if rows * columns > PIXEL_LIMIT:
        raise refusal("image-too-large", name, rows=rows, columns=columns, limit=PIXEL_LIMIT)
    return _decoded(data, name).reshape(rows, columns, -1), (1 << depth) - 1


def _wanted() -> str:
    return ", ".join(_WANTED)


def _chunks(data: bytes, name: str) -> dict[bytes, bytes]:
    """Return the chunks by type, each one's check sum compared."""
    if not data.startswith(_SIGNATURE):
        raise refusal("image-damaged", name, reason="it does not begin as a PNG file")
    found: dict[bytes, bytes] = {}
    at = len(_SIGNATURE)
    while at + 12 <= len(data) and b"IEND" not in found:
        (length,) = struct.unpack_from(">I", data, at)
        kind, body = data[at + 4 : at + 8], data[at + 8 : at + 8 + length]
        check = data[at + 8 + length : at + 12 + length]
        if len(check) == 4 and zlib.crc32(kind + body) != int.from_bytes(check, "big"):
            raise refusal("image-damaged", name, reason="a check sum does not match")
        if len(check) == 4:
            found.setdefault(kind, body)
        at += 12 + length
    return found


def _decoded(data: bytes, name: str) -> Codes:
    from PIL import Image

    try:
        with Image.open(io.BytesIO(data), formats=["PNG"]) as image:
            return np.asarray(image).astype(np.int64)
    except Exception as error:
        # A decoder may raise anything at all on damaged bytes.
        raise refusal("image-damaged", name, reason=str(error) or "decoding failed") from None


def png_bytes(codes: Codes, maxval: int, name: str) -> bytes:
    """Return `codes`, (rows, columns, 1 or 3), as grey of 8 or 16 bits or RGB of 8 bits.

    16 bits where `maxval` is over 255. Raises SpecError for an empty image, other channel
    counts, and codes outside 0..maxval.
    """
    if codes.size == 0:
        raise refusal("image-empty", name)
    deep = maxval > 255
    channels = codes.shape[2]
    if channels not in ((1,) if deep else (1, 3)):
        raise refusal("image-channels", name, got=channels, expected="1" if deep else "1 or 3")
    low, high = int(codes.min()), int(codes.max())
    if low < 0 or high > min(maxval, 65535):
        raise refusal("image-codes", name, low=low, high=high, limit=min(maxval, 65535))
    return _encoded(codes[:, :, 0] if channels == 1 else codes, deep)


def _encoded(codes: Codes, deep: bool) -> bytes:
    from PIL import Image

    stream = io.BytesIO()
    Image.fromarray(codes.astype(np.uint16 if deep else np.uint8)).save(stream, format="PNG")
    return stream.getvalue()
