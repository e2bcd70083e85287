"""Files that a spec names, and files that are named as a spec."""

import hashlib
import io
import os
import pickle
import struct
import zlib
from collections.abc import Iterator
from contextlib import contextmanager
from fractions import Fraction
from pathlib import Path

import numpy as np
import pytest

from guardbit.model.finding import Finding, GuardbitError, MachineError, SpecError
from guardbit.spec.reader import parse_spec, read_spec

SPEC = '[filter]\nname = "psf"\n[kernel]\nfile = "{file}"\n[input]\nbits = 8\n'
PLAIN = '[filter]\nname = "psf"\n[kernel]\ntaps = [[1]]\n[input]\nbits = 8\n'


def finding_of(path: Path, error: type[GuardbitError] = SpecError) -> Finding:
    with pytest.raises(error) as caught:
        read_spec(path)
    (found,) = caught.value.findings
    return found


def spec_with(folder: Path, file: str, data: bytes | None = None) -> Path:
    path = folder / "psf.toml"
    path.write_text(SPEC.format(file=file), encoding="utf-8")
    if data is not None:
        (folder / file).write_bytes(data)
    return path


def npy(array: object) -> bytes:
    stream = io.BytesIO()
    np.save(stream, np.asarray(array), allow_pickle=True)
    return stream.getvalue()


def png(rows: int, columns: int, depth: int = 8, colour: int = 0, data: bytes = b"") -> bytes:
    """A PNG written by hand, from the chunk layout of ISO/IEC 15948."""

    def chunk(kind: bytes, body: bytes) -> bytes:
        check = zlib.crc32(kind + body)
        return struct.pack(">I", len(body)) + kind + body + struct.pack(">I", check)

    header = struct.pack(">IIBBBBB", columns, rows, depth, colour, 0, 0, 0)
    parts = chunk(b"IHDR", header), chunk(b"IDAT", zlib.compress(data)), chunk(b"IEND", b"")
    return b"\x89PNG\r\n\x1a\n" + b"".join(parts)


def test_a_float_array_gives_the_exact_values_of_its_doubles(tmp_path: Path) -> None:
    spec = read_spec(spec_with(tmp_path, "a.npy", npy([[0.1, 2.0], [-0.5, 1e-310]])))
    # IEEE 754 double nearest to 0.1: 0x1.999999999999ap-4.
    assert spec.kernel.taps == (
        (Fraction(0x1999999999999A, 2**56), Fraction(2)),
        (Fraction(-1, 2), Fraction(*(1e-310).as_integer_ratio())),
    )
    assert spec.kernel.source == "file a.npy"


def test_a_picture_gives_its_codes(tmp_path: Path) -> None:
    data = png(2, 2, 16, 0, b"\0\x00\x01\xff\xff\0\x01\x00\x00\x02")
    spec = read_spec(spec_with(tmp_path, "a.png", data))
    assert [[int(tap) for tap in row] for row in spec.kernel.taps or ()] == [[1, 65535], [256, 2]]


def test_the_digest_is_of_the_spec_and_of_its_kernel_file(tmp_path: Path) -> None:
    path = spec_with(tmp_path, "a.csv", b"1,2,1\n")
    first = read_spec(path).digest
    assert first == hashlib.sha256(path.read_bytes() + b"1,2,1\n").hexdigest()
    (tmp_path / "a.csv").write_bytes(b"1,3,1\n")
    assert read_spec(path).digest != first
    text = path.read_text() + "# note\n"
    assert parse_spec(text, "psf.toml", tmp_path).digest != read_spec(path).digest
    plain = parse_spec(PLAIN, "x.toml", tmp_path)
    assert plain.digest == hashlib.sha256(PLAIN.encode()).hexdigest()


OBJECTS = np.array([[1, None]], dtype=object)
BAD_FILES = {
    "pickled.npy": (npy(OBJECTS), "npy-pickled"),
    "pickle.npy": (pickle.dumps([1]), "image-damaged"),
    "cut.npy": (npy([[1.0, 2.0]])[:-1], "image-truncated"),
    "long.npy": (npy([[1.0, 2.0]]) + b"x", "image-extra"),
    "header.npy": (npy([[1.0]])[:50], "image-damaged"),
    "vast.npy": (npy([[1]]).replace(b"(1, 1)", b"(9999999, 99999999)"), "image-truncated"),
    "bool.npy": (npy([[True]]), "npy-type"),
    "complex.npy": (npy([[1j]]), "npy-type"),
    "text.npy": (npy([["a"]]), "npy-type"),
    "dates.npy": (npy(np.array([["2024-01-01"]], dtype="datetime64[D]")), "npy-type"),
    "row.npy": (npy([1, 2, 1]), "npy-shape"),
    "cube.npy": (npy([[[1]]]), "npy-shape"),
    "none.npy": (npy(np.zeros((0, 3))), "image-empty"),
    "nan.npy": (npy([[1, np.nan]]), "array-not-finite"),
    "inf.npy": (npy([[1], [-np.inf]]), "array-not-finite"),
    "large.npy": (npy(np.zeros((4000, 4000), np.uint8)), "array-too-large"),
    "large.png": (png(4000, 4000, 8, 0, bytes(4000 * 4001)), "array-too-large"),
    "large.csv": (b"\n".join([b"1," * 3999 + b"1"] * 300), "array-too-large"),
    "large.pgm": (b"P5 4000 4000 255\n" + bytes(16_000_000), "array-too-large"),
    "cut.pgm": (b"P5 3 3 255\n12345678", "image-truncated"),
    "cut.png": (png(2, 2, 8, 0, b"\0ab\0cd")[:-5], "image-damaged"),
    "colour.png": (png(1, 1, 8, 2, b"\0abc"), "image-channels"),
    "empty.csv": (b"", "csv-empty"),
    "comment.csv": (b"# nothing\n\n", "csv-empty"),
    "ragged.csv": (b"1,2\n3\n", "csv-ragged"),
    "semicolon.csv": (b"1;2\n", "csv-cell"),
    "trailing.csv": (b"1,2,\n", "csv-cell"),
    "nan.csv": (b"1,nan\n", "csv-cell"),
    "zero.csv": (b"1,1/0\n", "csv-cell"),
    "huge.csv": (b"1e999999999\n", "csv-cell"),
    "bom.csv": (b"\xef\xbb\xbf1,2\n", "file-bom"),
    "nul.csv": (b"1,\0\n", "file-nul"),
    "latin.csv": (b"1,\xff\n", "file-not-utf8"),
    "a.txt": (b"1", "format-unknown"),
    "none": (b"1", "format-unknown"),
}


@pytest.mark.parametrize("file", sorted(BAD_FILES))
def test_bad_kernel_files(tmp_path: Path, file: str) -> None:
    data, kind = BAD_FILES[file]
    found = finding_of(spec_with(tmp_path, file, data))
    assert found.kind == kind
    assert (found.place.file, found.place.line) == (str(tmp_path / "psf.toml"), 4)
    assert (found.place.key, found.value("path")) == ("kernel.file", file)


def test_a_bad_kernel_file_does_not_hide_other_mistakes(tmp_path: Path) -> None:
    path = spec_with(tmp_path, "a.csv", b"1;2")
    path.write_text(path.read_text().replace("bits = 8", "bits = 0\nfrac = 1.5"))
    with pytest.raises(SpecError) as caught:
        read_spec(path)
    assert [f.place.key for f in caught.value.findings] == [
        "kernel.file",
        "input.bits",
        "input.frac",
    ]


@pytest.mark.parametrize("target", ["../secret.csv", "/dev/zero", "folder/../../secret.csv"])
def test_a_link_that_leads_out(tmp_path: Path, target: str) -> None:
    home = tmp_path / "home"
    (home / "folder").mkdir(parents=True)
    (tmp_path / "secret.csv").write_text("1\n")
    (home / "a.csv").symlink_to(target)
    assert finding_of(spec_with(home, "a.csv")).kind == "path-link-out"


def test_a_folder_that_is_a_link_out(tmp_path: Path) -> None:
    home = tmp_path / "home"
    home.mkdir()
    (tmp_path / "a.csv").write_text("1\n")
    (home / "sub").symlink_to(tmp_path)
    assert finding_of(spec_with(home, "sub/a.csv")).kind == "path-link-out"


def test_a_link_inside_is_followed(tmp_path: Path) -> None:
    (tmp_path / "real.csv").write_text("1,2\n")
    (tmp_path / "a.csv").symlink_to("real.csv")
    taps = read_spec(spec_with(tmp_path, "a.csv")).kernel.taps
    assert taps == ((Fraction(1), Fraction(2)),)


def test_links_in_a_circle(tmp_path: Path) -> None:
    (tmp_path / "a.csv").symlink_to("b.csv")
    (tmp_path / "b.csv").symlink_to("a.csv")
    assert finding_of(spec_with(tmp_path, "a.csv")).kind == "path-loops"


def test_a_pipe_is_not_opened(tmp_path: Path) -> None:
    os.mkfifo(tmp_path / "a.csv")
    assert finding_of(spec_with(tmp_path, "a.csv")).kind == "file-not-regular"
    assert finding_of(tmp_path / "a.csv").kind == "file-not-regular"


def test_what_is_no_spec_file(tmp_path: Path) -> None:
    assert finding_of(tmp_path).kind == "file-is-folder"
    assert finding_of(tmp_path / "none.toml").kind == "file-missing"
    assert finding_of(Path("/dev/zero")).kind == "file-not-regular"
    (tmp_path / "a.toml").write_text(PLAIN)
    assert finding_of(tmp_path / "a.toml" / "b.toml").kind == "file-missing"
    assert finding_of(tmp_path / "a\0.toml").kind == "path-nul"
    long = finding_of(tmp_path / ("a" * 300), MachineError)
    assert long.kind == "file-unreadable"


def test_a_spec_of_the_greatest_size_and_one_byte_more(tmp_path: Path) -> None:
    path = tmp_path / "a.toml"
    path.write_text(PLAIN + "#" * (2**20 - len(PLAIN)))
    assert read_spec(path).filter.name == "psf"
    path.write_text(PLAIN + "#" * (2**20 - len(PLAIN) + 1))
    found = finding_of(path)
    assert (found.kind, found.value("limit")) == ("file-too-large", 2**20)
    with pytest.raises(SpecError):
        parse_spec(path.read_text(), "a.toml", tmp_path)


@contextmanager
def without_privilege() -> Iterator[None]:
    """The superuser may read everything: be somebody else meanwhile."""
    user = os.geteuid()
    if user == 0:
        os.seteuid(65534)
    try:
        yield
    finally:
        if user == 0:
            os.seteuid(user)


def test_no_permission_to_read(tmp_path: Path) -> None:
    path = tmp_path / "a.toml"
    path.write_text(PLAIN)
    path.chmod(0)
    with without_privilege():
        found = finding_of(path, MachineError)
    assert found.kind == "file-unreadable" and found.value("reason") == "Permission denied"


def test_a_link_to_a_spec_names_its_own_folder(tmp_path: Path) -> None:
    (tmp_path / "there").mkdir()
    (tmp_path / "there" / "a.csv").write_text("1\n")
    path = spec_with(tmp_path / "there", "a.csv")
    (tmp_path / "link.toml").symlink_to(path)
    assert finding_of(tmp_path / "link.toml").kind == "file-missing"


def test_lone_surrogates_are_refused() -> None:
    with pytest.raises(SpecError) as caught:
        parse_spec(PLAIN + "# \udce4\n", "a.toml", Path())
    assert caught.value.findings[0].kind == "file-not-utf8"
