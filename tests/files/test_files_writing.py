"""Writing: whatever ends it, every file is the old one or the new one, and nothing else is left."""

import errno
import os
import resource
import signal
import subprocess
import sys
import tempfile
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from pathlib import Path

import pytest

from guardbit.files.writing import digest, edited, write_atomic
from guardbit.model.finding import GuardbitError, MachineError, SpecError

OLD = {"a.c": b"old a", "a.h": b"old h"}
NEW = {"a.c": b"new a" * 1000, "a.h": b"new h", "a.cert.json": b"{}"}


def contents(folder: Path) -> dict[str, bytes]:
    return {path.name: path.read_bytes() for path in folder.iterdir()}


def kind_of(work: Callable[[], None], error: type[GuardbitError] = MachineError) -> str:
    with pytest.raises(error) as caught:
        work()
    (found,) = caught.value.findings
    return found.kind


@pytest.fixture(params=["unnamed", "named"])
def folder(request: pytest.FixtureRequest, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """Return a folder with the old files, on a system with unnamed files and on one without."""
    if request.param == "named":
        monkeypatch.delattr(os, "O_TMPFILE", raising=False)
    write_atomic(tmp_path / "out", OLD)
    return tmp_path / "out"


def test_files_are_written_and_replaced(folder: Path) -> None:
    assert contents(folder) == OLD
    write_atomic(folder, NEW)
    assert contents(folder) == OLD | NEW
    write_atomic(folder, {"a.c": b""})
    assert contents(folder)["a.c"] == b""


def test_folders_are_made(tmp_path: Path) -> None:
    write_atomic(tmp_path / "x" / "y", {"a": b"1"})
    assert contents(tmp_path / "x" / "y") == {"a": b"1"}


def test_permissions_follow_the_umask(folder: Path) -> None:
    before = os.umask(0o027)
    try:
        write_atomic(folder, {"b": b""})
    finally:
        os.umask(before)
    assert (folder / "b").stat().st_mode & 0o777 == 0o640


def test_a_link_is_replaced_not_followed(folder: Path, tmp_path: Path) -> None:
    (tmp_path / "mine").write_bytes(b"mine")
    (folder / "b").symlink_to(tmp_path / "mine")
    write_atomic(folder, {"b": b"new"})
    assert (tmp_path / "mine").read_bytes() == b"mine"
    assert not (folder / "b").is_symlink() and (folder / "b").read_bytes() == b"new"


@pytest.mark.parametrize("name", ["", ".", "..", "../a", "a/b", "/a", "a\\b", "a\0"])
def test_names_are_plain(folder: Path, name: str) -> None:
    assert kind_of(lambda: write_atomic(folder, {name: b""}), SpecError) == "target-name"
    assert contents(folder) == OLD


def failing(error: BaseException, count: int, work: Callable[..., object]) -> Callable[..., object]:
    """Return `work`, which fails the `count`-th time, counted from 0."""
    calls = iter(range(1000))

    def step(*arguments: object, **options: object) -> object:
        if next(calls) == count:
            raise error
        return work(*arguments, **options)

    return step


@pytest.mark.parametrize("step", ["fsync", "fdopen"])
@pytest.mark.parametrize("count", [0, 1, 2])
@pytest.mark.parametrize(
    ("error", "kind"),
    [
        (OSError(errno.ENOSPC, "No space left on device"), "disk-full"),
        (OSError(errno.EDQUOT, "Disk quota exceeded"), "disk-full"),
        (OSError(errno.EIO, "Input/output error"), "write-failed"),
        (OSError(errno.EROFS, "Read-only file system"), "folder-unwritable"),
    ],
)
def test_a_failing_disk(
    folder: Path, monkeypatch: pytest.MonkeyPatch, step: str, count: int, error: OSError, kind: str
) -> None:
    work = getattr(os, step)
    monkeypatch.setattr(os, step, failing(error, count, work))
    assert kind_of(lambda: write_atomic(folder, NEW)) == kind
    monkeypatch.undo()
    assert contents(folder) == OLD


@pytest.mark.parametrize("count", [0, 1, 2])
def test_ctrl_c_before_the_files_take_their_places(
    folder: Path, monkeypatch: pytest.MonkeyPatch, count: int
) -> None:
    monkeypatch.setattr(os, "fsync", failing(KeyboardInterrupt(), count, os.fsync))
    with pytest.raises(KeyboardInterrupt):
        write_atomic(folder, NEW)
    assert contents(folder) == OLD


@pytest.mark.parametrize("count", [0, 1, 2])
def test_ctrl_c_while_they_do(folder: Path, monkeypatch: pytest.MonkeyPatch, count: int) -> None:
    """Each file is the old or the new one, in the order given: the certificate comes last."""
    monkeypatch.setattr(Path, "replace", failing(KeyboardInterrupt(), count, Path.replace))
    with pytest.raises(KeyboardInterrupt):
        write_atomic(folder, NEW)
    assert contents(folder) == OLD | dict(list(NEW.items())[:count])


def test_a_real_limit_on_the_size_of_files(folder: Path) -> None:
    """The system itself refuses the bytes beyond the limit (setrlimit(2))."""
    soft, hard = resource.getrlimit(resource.RLIMIT_FSIZE)
    before = signal.signal(signal.SIGXFSZ, signal.SIG_IGN)
    try:
        resource.setrlimit(resource.RLIMIT_FSIZE, (100_000, hard))
        large = {"a.c": b"x" * 50_000, "a.h": b"y" * 200_000}
        assert kind_of(lambda: write_atomic(folder, large)) == "disk-full"
    finally:
        resource.setrlimit(resource.RLIMIT_FSIZE, (soft, hard))
        signal.signal(signal.SIGXFSZ, before)
    assert contents(folder) == OLD


KILLED = """
import os, signal, sys
from pathlib import Path
from guardbit.files.writing import write_atomic
step, count = sys.argv[2], int(sys.argv[3])
owner = Path if step == "replace" else os
work, calls = getattr(owner, step), iter(range(1000))
def dying(*arguments, **options):
    if next(calls) == count:
        os.kill(os.getpid(), signal.SIGKILL)
    return work(*arguments, **options)
setattr(owner, step, dying)
write_atomic(Path(sys.argv[1]), {"a.c": b"new a" * 1000, "a.h": b"new h"})
"""


def has_unnamed_files(folder: Path) -> bool:
    try:
        os.close(os.open(folder, os.O_TMPFILE | os.O_WRONLY))
    except (AttributeError, OSError):
        return False
    return True


@pytest.mark.parametrize(
    ("step", "count", "changed"),
    [("fsync", 0, []), ("fsync", 1, []), ("link", 0, []), ("link", 1, ["a.c"])],
)
def test_killed_in_the_middle(tmp_path: Path, step: str, count: int, changed: list[str]) -> None:
    write_atomic(tmp_path, OLD)
    command = [sys.executable, "-c", KILLED, str(tmp_path), step, str(count)]
    assert subprocess.run(command, check=False).returncode == -signal.SIGKILL
    left = contents(tmp_path)
    if not has_unnamed_files(tmp_path):
        left = {name: data for name, data in left.items() if not name.startswith(".")}
    assert left == OLD | {name: NEW[name] for name in changed}


def test_killed_between_a_name_and_its_place(tmp_path: Path) -> None:
    """The one moment at which a hidden file can stay behind; the files proper are whole."""
    write_atomic(tmp_path, OLD)
    command = [sys.executable, "-c", KILLED, str(tmp_path), "replace", "0"]
    assert subprocess.run(command, check=False).returncode == -signal.SIGKILL
    left = contents(tmp_path)
    hidden = [name for name in left if name not in OLD]
    assert {name: left[name] for name in OLD} == OLD
    assert all(name.startswith(".a.c.") and left[name] == NEW["a.c"] for name in hidden)
    write_atomic(tmp_path, NEW)
    assert {name: contents(tmp_path)[name] for name in NEW} == NEW


@contextmanager
def without_privilege() -> Iterator[None]:
    """The superuser may write everywhere: be somebody else meanwhile."""
    user = os.geteuid()
    if user == 0:
        os.seteuid(65534)
    try:
        yield
    finally:
        if user == 0:
            os.seteuid(user)


def test_an_unwritable_folder_stays_as_it_was() -> None:
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        write_atomic(folder, OLD)
        folder.chmod(0o555)
        with without_privilege():
            assert kind_of(lambda: write_atomic(folder, NEW)) == "folder-unwritable"
            assert kind_of(lambda: write_atomic(folder / "new", NEW)) == "folder-unwritable"
        folder.chmod(0o755)
        assert contents(folder) == OLD


def test_a_file_where_a_folder_is_needed(folder: Path) -> None:
    assert kind_of(lambda: write_atomic(folder / "a.c", NEW)) == "folder-is-file"
    assert kind_of(lambda: write_atomic(folder / "a.c" / "deep", NEW)) == "folder-is-file"
    assert contents(folder) == OLD


def test_a_folder_where_a_file_is_needed(folder: Path) -> None:
    (folder / "a.cert.json").mkdir()
    assert kind_of(lambda: write_atomic(folder, NEW)) == "target-is-folder"
    (folder / "a.cert.json").rmdir()
    assert contents(folder) == OLD


def test_names_that_are_too_long_for_the_disk(folder: Path) -> None:
    assert kind_of(lambda: write_atomic(folder, {"a" * 300: b""})) == "write-failed"
    assert contents(folder) == OLD


def test_edited_files(folder: Path) -> None:
    recorded = {name: digest(data) for name, data in OLD.items()}
    assert edited(folder, recorded) == []
    (folder / "a.h").write_bytes(b"old h ")
    assert edited(folder, recorded) == ["a.h"]
    (folder / "a.c").unlink()
    assert edited(folder, recorded) == ["a.h"]


def test_files_with_no_record_and_files_that_cannot_be_read(folder: Path) -> None:
    assert edited(folder, {"a.c": "", "none": ""}) == ["a.c"]
    (folder / "b").mkdir()
    (folder / "c").symlink_to("nowhere")
    assert edited(folder, {"b": "", "c": "", "a.c/d": ""}) == ["b", "c"]


def test_the_digest_is_sha_256() -> None:
    """The test vector for "abc" of FIPS 180-4's examples."""
    expected = "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad"
    assert digest(b"abc") == expected
