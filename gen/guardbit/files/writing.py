"""Writing a set of files so that nobody ever meets half of one.

Every file is written whole and flushed to the disk under no name, or a hidden temporary
one, before the first of them is renamed to its place; a rename replaces a file in one step
(POSIX.1-2017, rename()). Whatever ends the work, each file is the old one or the new one.
Where the system can (Linux, open(2) O_TMPFILE), an unfinished file has no name at all, so
that even a killed process leaves nothing behind.
"""

import errno
import hashlib
import os
import secrets
from collections.abc import Mapping
from contextlib import ExitStack, suppress
from dataclasses import dataclass
from pathlib import Path
from typing import BinaryIO

from guardbit.files.reading import label
from guardbit.model.finding import MachineError, Place, SpecError, Value, finding

_FULL = (errno.ENOSPC, errno.EDQUOT, errno.EFBIG)
_FORBIDDEN = (errno.EACCES, errno.EPERM, errno.EROFS)
_NO_UNNAMED = (errno.EOPNOTSUPP, errno.EISDIR, errno.ENOENT, errno.EINVAL, errno.ENOSYS)


@dataclass(frozen=True)
class _Staged:
    """One file, complete on the disk, not yet in its place. `named`: it has a name already."""

    stream: BinaryIO
    temporary: Path
    target: Path
    named: bool


def write_atomic(folder: Path, files: Mapping[str, bytes]) -> None:
    """Write `files` (a plain name to its bytes) into `folder`, made if it is not there.

    They take their places in the order given: put last the one that vouches for the others.
    Raises MachineError when the machine cannot (no permission, no space, a file where a
    folder is needed), and then nothing temporary is left; the same holds for Ctrl-C.
    """
    for name in files:
        _refuse_name(name)
    try:
        folder.mkdir(parents=True, exist_ok=True)
        _refuse_folders(folder, files)
        with ExitStack() as stack:
            staged = [_stage(stack, folder / name, data) for name, data in files.items()]
            for each in staged:
                _publish(each)
        _flush_folder(folder)
    except OSError as error:
        raise _machine(folder, error) from None


def digest(data: bytes) -> str:
    """Return the SHA-256 of `data` in hexadecimal."""
    return hashlib.sha256(data).hexdigest()


def edited(folder: Path, expected: Mapping[str, str]) -> list[str]:
    """Return the names whose file in `folder` is no longer what was written there.

    `expected` holds, by name, the SHA-256 that the certificate (NAME.cert.json) recorded for
    each emitted file; "" for a file with no record, which then counts as edited if it exists.
    A file that is gone is not edited. One that cannot be read is: nobody may overwrite what
    nobody could compare. The names come in the order of `expected`.
    """
    return [name for name, recorded in expected.items() if _differs(folder / name, recorded)]


def _differs(path: Path, recorded: str) -> bool:
    try:
        return digest(path.read_bytes()) != recorded
    except (FileNotFoundError, NotADirectoryError):
        return path.is_symlink()
    except OSError:
        return True


def _refuse_name(name: str) -> None:
    if name in ("", ".", "..") or "/" in name or "\\" in name or "\0" in name:
        raise SpecError(finding("target-name", Place(label(name)), path=label(name)))


def _refuse_folders(folder: Path, files: Mapping[str, bytes]) -> None:
    for name in files:
        if (folder / name).is_dir():
            raise _problem("target-is-folder", folder / name)


def _stage(stack: ExitStack, target: Path, data: bytes) -> _Staged:
    mark = f".{target.name}.{os.getpid()}-{secrets.token_hex(4)}.part"
    temporary = target.with_name(mark)
    stack.callback(_remove, temporary)
    descriptor, named = _open(temporary)
    stream = stack.enter_context(os.fdopen(descriptor, "wb"))
    stream.write(data)
    stream.flush()
    os.fsync(stream.fileno())
    return _Staged(stream, temporary, target, named)


def _open(temporary: Path) -> tuple[int, bool]:
    """Return a descriptor to write to, and whether its file has a name."""
    unnamed = getattr(os, "O_TMPFILE", None)
    if unnamed is not None and Path("/proc/self/fd").is_dir():
        try:
            return os.open(temporary.parent, unnamed | os.O_WRONLY, 0o666), False
        except OSError as error:
            if error.errno not in _NO_UNNAMED:
                raise
    return os.open(temporary, os.O_WRONLY | os.O_CREAT | os.O_EXCL, 0o666), True


def _publish(staged: _Staged) -> None:
    if staged.named:
        staged.stream.close()  # some systems rename no open file
    else:
        _give_name(staged)
    staged.temporary.replace(staged.target)


def _give_name(staged: _Staged) -> None:
    # Only with a folder descriptor does Python call linkat(), which can follow the link in
    # /proc to a file that has no name.
    folder = os.open(staged.temporary.parent, os.O_RDONLY | os.O_DIRECTORY)
    try:
        source = f"/proc/self/fd/{staged.stream.fileno()}"
        os.link(source, staged.temporary.name, dst_dir_fd=folder, follow_symlinks=True)
    finally:
        os.close(folder)


def _remove(temporary: Path) -> None:
    with suppress(OSError):
        temporary.unlink(missing_ok=True)


def _flush_folder(folder: Path) -> None:
    """Make the renames last through a power cut, where a folder can be flushed at all."""
    with suppress(OSError):
        descriptor = os.open(folder, os.O_RDONLY)
        try:
            os.fsync(descriptor)
        finally:
            os.close(descriptor)


def _machine(folder: Path, error: OSError) -> MachineError:
    if error.errno in _FULL:
        return _problem("disk-full", folder)
    if error.errno in _FORBIDDEN:
        return _problem("folder-unwritable", folder)
    if error.errno in (errno.ENOTDIR, errno.EEXIST):
        return _problem("folder-is-file", folder)
    return _problem("write-failed", folder, reason=error.strerror or type(error).__name__)


def _problem(kind: str, path: Path, **values: Value) -> MachineError:
    name = label(path)
    return MachineError(finding(kind, Place(name), path=name, **values))
