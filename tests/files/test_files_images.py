"""Image formats: codes come out as they stand in the file, or the file is refused."""

import io
import struct
import zlib
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from PIL import Image

from guardbit.files.images import image_bytes, parse_image, parse_kernel, read_image
from guardbit.files.npy import npy_bytes
from guardbit.files.pgm import parse_pgm, pgm_bytes
from guardbit.model.finding import SpecError
from guardbit.model.routine import Codes
from tools import examples


def kind_of(data: bytes, name: str) -> str:
    with pytest.raises(SpecError) as caught:
        parse_image(data, name)
    (found,) = caught.value.findings
    assert found.place.file == name == found.value("path")
    return found.kind


def plane(*rows: list[int]) -> Codes:
    return np.array(rows, dtype=np.int64)[:, :, None]


def saved(image: Image.Image, kind: str = "PNG", **options: object) -> bytes:
    stream = io.BytesIO()
    image.save(stream, kind, **options)
    return stream.getvalue()


@pytest.mark.parametrize(
    ("data", "codes", "maxval"),
    [
        (b"P5\n2 1\n255\n\x00\xff", [[0, 255]], 255),
        (b"P5 2 1 255 \n\xff", [[10, 255]], 255),  # one white space, then the raster
        (b"P5#c\n 2 #1 9\n1#\n7\n\x07\x01", [[7, 1]], 7),  # comments (pgm(5))
        (b"P5 1 2 255\r\n\x01", [[10], [1]], 255),
        # Two bytes from 256 on, the most significant first (pgm(5)).
        (b"P5 2 1 256\n\x00\x01\x01\x00", [[1, 256]], 256),
        (b"P5 1 1 65535\n\xff\xfe", [[65534]], 65535),
        (b"P5 1 1 4095\n\x0a\xbc", [[0xABC]], 4095),
        (b"P5 1 1 255\na\n", [[97]], 255),  # white space after the raster
        (b"P2 3 1 9 1 2 3", [[1, 2, 3]], 9),
        (b"P2\n# c\n3 1\n65535\n1\t65535\n# 5\n0003\n", [[1, 65535, 3]], 65535),
        (b"P2 2 2 1 0 1 1 0", [[0, 1], [1, 0]], 1),
    ],
)
def test_pgm_by_hand(data: bytes, codes: list[list[int]], maxval: int) -> None:
    found, greatest = parse_pgm(data, "a.pgm")
    assert (found[:, :, 0].tolist(), greatest) == (codes, maxval)
    assert found.dtype == np.int64


@pytest.mark.parametrize(
    ("data", "kind"),
    [
        (b"", "pgm-magic"),
        (b"P", "pgm-magic"),
        (b"P6 1 1 255\nabc", "pgm-magic"),
        (b"\x89PNG\r\n\x1a\n", "pgm-magic"),
        (b"P5", "pgm-header"),
        (b"P5 2", "pgm-header"),
        (b"P5 2 1", "pgm-header"),
        (b"P5 2 1 255", "pgm-header"),
        (b"P5 -2 1 255\nab", "pgm-header"),
        (b"P5 2.0 1 255\nab", "pgm-header"),
        (b"P5 99999999999 1 255\nab", "pgm-header"),
        (b"P5 2 1 # 255\n", "pgm-header"),
        (b"P5 0 1 255\n", "image-empty"),
        (b"P5 1 0 255\n", "image-empty"),
        (b"P5 65535 65535 255\n", "image-too-large"),
        (b"P5 2 1 0\nab", "pgm-maxval"),
        (b"P5 2 1 65536\nabcd", "pgm-maxval"),
        (b"P5 2 1 255\na", "image-truncated"),
        (b"P5 2 1 255\n", "image-truncated"),
        (b"P5 2 1 256\nabc", "image-truncated"),
        (b"P5 1 1 255\nab", "image-extra"),
        (b"P5 1 1 255\naP5 1 1 255\na", "image-extra"),
        (b"P5 1 1 9\n\x0a", "pgm-code"),
        (b"P5 1 1 256\n\x01\x01", "pgm-code"),
        (b"P2 2 1 9\n1", "image-truncated"),
        (b"P2 1 1 9\n1 1", "image-extra"),
        (b"P2 1 1 9\n10", "pgm-code"),
        (b"P2 1 1 9\n-1", "pgm-word"),
        (b"P2 1 1 9\n1x", "pgm-word"),
        (b"P2 1 1 9\n" + b"9" * 5000, "pgm-word"),
    ],
)
def test_pgm_refused(data: bytes, kind: str) -> None:
    assert kind_of(data, "a.pgm") == kind


def test_a_hostile_header_is_refused_at_once() -> None:
    for filler in (b" ", b"#", b"# \n", b"\n#"):
        assert kind_of(b"P5" + filler * 200_000 + b"x", "a.pgm") == "pgm-header"


@given(
    st.integers(1, 65535),
    st.tuples(st.integers(1, 5), st.integers(1, 5)),
    st.randoms(use_true_random=False),
)
@settings(max_examples=examples(60), deadline=None)
def test_pgm_there_and_back(maxval: int, shape: tuple[int, int], rng: object) -> None:
    randint = rng.randint  # type: ignore[attr-defined]
    codes = plane(*[[randint(0, maxval) for _ in range(shape[1])] for _ in range(shape[0])])
    found, greatest = parse_pgm(pgm_bytes(codes, maxval, "a.pgm"), "a.pgm")
    assert (found == codes).all() and greatest == maxval


def test_pgm_as_another_reader_sees_it() -> None:
    codes = plane([0, 100, 255], [1, 2, 3])
    with Image.open(io.BytesIO(pgm_bytes(codes, 255, "a.pgm"))) as image:
        assert np.array_equal(np.asarray(image), codes[:, :, 0])
    deep = plane([0, 256, 65535])
    with Image.open(io.BytesIO(pgm_bytes(deep, 65535, "a.pgm"))) as image:
        assert np.array_equal(np.asarray(image), deep[:, :, 0])


def test_png_8_and_16_bits_and_colour() -> None:
    grey = np.arange(256, dtype=np.uint8).reshape(16, 16)
    assert np.array_equal(parse_image(saved(Image.fromarray(grey)), "a.png")[:, :, 0], grey)
    deep = (np.arange(256, dtype=np.uint16) * 257).reshape(8, 32)
    assert np.array_equal(parse_image(saved(Image.fromarray(deep)), "a.png")[:, :, 0], deep)
    colour = np.arange(60, dtype=np.uint8).reshape(4, 5, 3)
    found = parse_image(saved(Image.fromarray(colour)), "A.PNG")
    assert found.shape == (4, 5, 3) and np.array_equal(found, colour)


@pytest.mark.parametrize("mode", ["1", "P", "LA", "RGBA"])
def test_png_kinds_whose_codes_would_change(mode: str) -> None:
    assert kind_of(saved(Image.new(mode, (3, 2))), "a.png") == "png-kind"


def test_png_with_a_transparent_grey() -> None:
    assert kind_of(saved(Image.new("L", (3, 2)), transparency=7), "a.png") == "png-kind"


def test_png_damaged_at_any_byte_or_cut_anywhere() -> None:
    """Every chunk has a check sum, so that no flipped bit passes for a code."""
    grey = np.arange(64, dtype=np.uint8).reshape(8, 8)
    data = saved(Image.fromarray(grey))
    for at in range(len(data)):
        assert kind_of(data[:at], "a.png") == "image-damaged"
        flipped = data[:at] + bytes([data[at] ^ 0x10]) + data[at + 1 :]
        assert kind_of(flipped, "a.png") == "image-damaged"


def chunk(kind: bytes, body: bytes) -> bytes:
    """A chunk as ISO/IEC 15948 lays it out."""
    check = zlib.crc32(kind + body)
    return struct.pack(">I", len(body)) + kind + body + struct.pack(">I", check)


@pytest.mark.parametrize(
    ("size", "data", "kind"),
    [
        ((2, 2), zlib.compress(b"\0ab\0cd"), None),
        ((2, 2), zlib.compress(b"\0ab\0c"), "image-damaged"),
        ((2, 2), zlib.compress(b"\0ab\0cd")[:-6], "image-damaged"),
        ((2, 2), b"not compressed", "image-damaged"),
        ((2, 2), b"", "image-damaged"),
        ((0, 2), zlib.compress(b""), "image-damaged"),
        ((2**31 - 1, 2**31 - 1), zlib.compress(b""), "image-too-large"),
    ],
)
def test_png_with_sound_check_sums(size: tuple[int, int], data: bytes, kind: str | None) -> None:
    header = chunk(b"IHDR", struct.pack(">IIBBBBB", *size, 8, 0, 0, 0, 0))
    whole = b"\x89PNG\r\n\x1a\n" + header + chunk(b"IDAT", data) + chunk(b"IEND", b"")
    if kind is None:
        assert parse_image(whole, "a.png")[:, :, 0].tolist() == [[97, 98], [99, 100]]
    else:
        assert kind_of(whole, "a.png") == kind


def test_npy_with_too_many_pixels(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("guardbit.files.images.PIXEL_LIMIT", 5)
    assert parse_image(npy_bytes(np.zeros((5, 1), np.uint8)), "a.npy").size == 5
    assert kind_of(npy_bytes(np.zeros((2, 3), np.uint8)), "a.npy") == "image-too-large"


def test_npy_of_every_integer_type_and_order() -> None:
    for kind in ("u1", "i1", "<u2", ">u2", "<i4", ">i4", "u4", "i8", ">u8"):
        array = np.array([[1, 2, 3], [4, 5, 6]], dtype=kind)
        for laid in (array, np.asfortranarray(array), array[:, ::-1], array.T):
            stream = io.BytesIO()
            np.save(stream, laid)
            found = parse_image(stream.getvalue(), "a.npy")
            assert np.array_equal(found[:, :, 0], laid) and found.dtype == np.int64


def test_npy_channels_and_extremes() -> None:
    codes = np.array([[[-(2**31), 2**32 - 1]]], dtype=np.int64)
    assert np.array_equal(parse_image(npy_bytes(codes), "a.npy"), codes)
    assert kind_of(npy_bytes(codes - 1), "a.npy") == "image-codes"
    assert kind_of(npy_bytes(codes + 1), "a.npy") == "image-codes"
    assert kind_of(npy_bytes(np.array([[2**64 - 1]], np.uint64)), "a.npy") == "image-codes"


@pytest.mark.parametrize(
    ("array", "kind"),
    [
        (np.zeros((2, 2)), "npy-type"),
        (np.zeros((2, 2), bool), "npy-type"),
        (np.zeros(3, np.uint8), "npy-shape"),
        (np.zeros((), np.uint8), "npy-shape"),
        (np.zeros((1, 1, 1, 1), np.uint8), "npy-shape"),
        (np.zeros((0, 4), np.uint8), "image-empty"),
        (np.zeros((4, 4, 0), np.uint8), "image-empty"),
    ],
)
def test_npy_refused(array: Codes, kind: str) -> None:
    assert kind_of(npy_bytes(array), "a.npy") == kind


def test_npy_cut_anywhere() -> None:
    data = npy_bytes(np.arange(6, dtype=np.int64).reshape(2, 3))
    kinds = {kind_of(data[:at], "a.npy") for at in range(len(data))}
    assert kinds == {"image-damaged", "image-truncated"}


@pytest.mark.parametrize(
    "header",
    [
        "{'descr': '|u1', 'fortran_order': False, 'shape': (9999999999, 9999999999), }",
        "{'descr': '|u1', 'fortran_order': False, 'shape': (-1, -4), }",
        "{'descr': '|u1', 'fortran_order': 1, 'shape': (2, 2), }",
        "{'descr': '|u1', 'shape': (2, 2), }",
        "{'descr': [('a', '|u1')], 'fortran_order': False, 'shape': (2, 2), }",
        "__import__('os').abort()",
        "(" * 3000,
    ],
)
def test_npy_with_a_hostile_header(header: str) -> None:
    text = header.ljust(117).encode() + b"\n"
    data = b"\x93NUMPY\x01\x00" + len(text).to_bytes(2, "little") + text + b"abcd"
    assert kind_of(data, "a.npy") in ("image-damaged", "image-truncated", "npy-type")


@given(st.binary(max_size=80), st.sampled_from(["pgm", "png", "npy", "csv"]))
@settings(max_examples=examples(300), deadline=None)
def test_any_bytes_are_a_kernel_or_a_finding(data: bytes, suffix: str) -> None:
    starts = {
        "pgm": b"P2 2 1 ",
        "png": b"\x89PNG\r\n\x1a\n",
        "npy": b"\x93NUMPY\x01\0",
        "csv": b"1",
    }
    for whole in (data, starts[suffix] + data):
        try:
            assert parse_kernel(whole, f"a.{suffix}", 255)
        except SpecError as error:
            assert len(error.findings) == 1


def test_reading_a_file_and_suffixes(tmp_path: Path) -> None:
    path = tmp_path / "a.PGM"
    path.write_bytes(b"P5 1 1 255\n\x2a")
    assert read_image(path).tolist() == [[[42]]]
    assert kind_of(b"", "a.jpg") == kind_of(b"", "a") == kind_of(b"", ".pgm") == "format-unknown"


@pytest.mark.parametrize("name", ["a.pgm", "a.png", "a.npy"])
@pytest.mark.parametrize("maxval", [255, 4095, 65535])
def test_images_there_and_back(name: str, maxval: int) -> None:
    codes = plane([0, 1, maxval], [maxval // 2, 7, 255])
    assert np.array_equal(parse_image(image_bytes(codes, maxval, name), name), codes)


def test_what_a_format_cannot_hold() -> None:
    def refused(codes: Codes, maxval: int, name: str) -> str:
        with pytest.raises(SpecError) as caught:
            image_bytes(codes, maxval, name)
        return caught.value.findings[0].kind

    for name in ("a.pgm", "a.png"):
        assert refused(plane([-1]), 255, name) == "image-codes"
        assert refused(plane([256]), 255, name) == "image-codes"
        assert refused(plane([65536]), 2**17, name) == "image-codes"
        assert refused(np.zeros((0, 3, 1), np.int64), 255, name) == "image-empty"
        assert refused(np.zeros((1, 1, 2), np.int64), 255, name) == "image-channels"
    assert refused(np.zeros((1, 1, 3), np.int64), 4095, "a.png") == "image-channels"
    assert refused(plane([0]), 255, "a.bmp") == "format-unknown"
    for codes in (plane([-5, 2**31]), np.zeros((0, 3, 2), np.int64)):
        stream = io.BytesIO(image_bytes(codes, 255, "a.npy"))
        assert np.array_equal(np.load(stream, allow_pickle=False), codes)


def test_the_same_array_gives_the_same_bytes() -> None:
    codes = plane([1, 2], [3, 4])
    swapped = np.asfortranarray(codes).astype(">i8")
    assert npy_bytes(codes) == npy_bytes(swapped)
    assert image_bytes(codes, 255, "a.png") == image_bytes(codes.copy(), 255, "a.png")
