"""Paths that a file names stay in its folder; numbers and text are read exactly or refused."""

from fractions import Fraction
from pathlib import Path

import pytest

from guardbit.files.numbers import NotExactError, exact
from guardbit.files.paths import safe_path
from guardbit.files.reading import decode, read_text
from guardbit.model.finding import SpecError


def kind_of(folder: Path, relative: str) -> str:
    with pytest.raises(SpecError) as caught:
        safe_path(folder, relative)
    return caught.value.findings[0].kind


@pytest.mark.parametrize("relative", ["a", "a/b.npy", "./a", "a/../b", "a//b", "..a", "a b", "~/a"])
def test_paths_that_stay(tmp_path: Path, relative: str) -> None:
    assert safe_path(tmp_path, relative).is_relative_to(tmp_path.resolve())


@pytest.mark.parametrize(
    ("relative", "kind"),
    [
        ("", "path-empty"),
        ("/a", "path-absolute"),
        ("//server/a", "path-absolute"),
        ("C:\\a", "path-absolute"),
        ("c:a", "path-absolute"),
        ("\\\\server\\a", "path-absolute"),
        ("\\a", "path-absolute"),
        ("a\\b", "path-backslash"),
        ("..", "path-climbs-out"),
        ("../a", "path-climbs-out"),
        ("a/../../b", "path-climbs-out"),
        ("a/b/../../../c/d", "path-climbs-out"),
        ("a\0b", "path-nul"),
        ("a\udce4", "path-nul"),
    ],
)
def test_paths_that_do_not(tmp_path: Path, relative: str, kind: str) -> None:
    assert kind_of(tmp_path, relative) == kind


def test_links(tmp_path: Path) -> None:
    home = tmp_path / "home"
    (home / "in").mkdir(parents=True)
    (home / "out").symlink_to(tmp_path)
    (home / "inside").symlink_to("in")
    (home / "neighbour").symlink_to(tmp_path / "home2")
    assert safe_path(home, "inside/a") == home.resolve() / "in" / "a"
    assert kind_of(home, "out") == kind_of(home, "out/a") == "path-link-out"
    # A folder whose name merely begins like ours is another folder.
    assert kind_of(home, "neighbour") == "path-link-out"


def test_a_folder_reached_by_a_link_is_still_home(tmp_path: Path) -> None:
    (tmp_path / "home").mkdir()
    (tmp_path / "link").symlink_to("home")
    assert safe_path(tmp_path / "link", "a") == tmp_path.resolve() / "home" / "a"


@pytest.mark.parametrize(
    ("data", "kind", "line"),
    [
        (b"\xef\xbb\xbfa", "file-bom", 1),
        (b"a\nb\0", "file-nul", 2),
        (b"\0", "file-nul", 1),
        (b"a\n\nb\xff", "file-not-utf8", 3),
        (b"\xc0\x80", "file-not-utf8", 1),  # an overlong NUL (RFC 3629, section 3)
        (b"\xed\xa0\x80", "file-not-utf8", 1),  # a surrogate (same section)
        ("a".encode("utf-16"), "file-nul", 1),
    ],
)
def test_text_that_is_none(data: bytes, kind: str, line: int) -> None:
    with pytest.raises(SpecError) as caught:
        decode(data, "a.toml")
    (found,) = caught.value.findings
    assert (found.kind, found.place.file, found.place.line) == (kind, "a.toml", line)


def test_line_ends_are_left_alone(tmp_path: Path) -> None:
    (tmp_path / "a").write_bytes("é\r\n\n\r".encode())
    assert read_text(tmp_path / "a") == "é\r\n\n\r"


@pytest.mark.parametrize(
    ("text", "value"),
    [
        ("0", Fraction(0)),
        ("-7", Fraction(-7)),
        ("+.5", Fraction(1, 2)),
        ("5.", Fraction(5)),
        ("0.1", Fraction(1, 10)),
        ("1e-3", Fraction(1, 1000)),
        ("-2.50E+2", Fraction(-250)),
        ("1/16", Fraction(1, 16)),
        (" -6 / 4 ", Fraction(-3, 2)),
        ("1e400", Fraction(10) ** 400),
        ("9" * 400, Fraction(10**400 - 1)),
    ],
)
def test_exact_numbers(text: str, value: Fraction) -> None:
    assert exact(text) == value


@pytest.mark.parametrize(
    ("text", "kind"),
    [
        ("", "number-malformed"),
        ("a", "number-malformed"),
        ("1,5", "number-malformed"),
        ("1_0", "number-malformed"),
        ("0x10", "number-malformed"),
        ("1/2/3", "number-malformed"),
        ("1.5/2", "number-malformed"),
        ("1/-2", "number-malformed"),
        ("\u0661", "number-malformed"),  # a digit in Arabic script
        ("e5", "number-malformed"),
        (".", "number-malformed"),
        ("nan", "number-not-finite"),
        ("-Infinity", "number-not-finite"),
        ("1/0", "number-over-zero"),
        ("1e401", "number-too-long"),
        ("1e-999999999", "number-too-long"),
        ("1e" + "9" * 300, "number-too-long"),
        ("9" * 401, "number-too-long"),
    ],
)
def test_what_is_no_exact_number(text: str, kind: str) -> None:
    with pytest.raises(NotExactError) as caught:
        exact(text)
    assert caught.value.kind == kind
    assert caught.value.reason
