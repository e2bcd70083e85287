"""Reading the bytes and the text of a file that a person named."""

import stat
from pathlib import Path

from guardbit.model.finding import GuardbitError, MachineError, Place, SpecError, Value, finding

SPEC_LIMIT = 1 << 20
IMAGE_LIMIT = 1 << 28

_BOM = b"\xef\xbb\xbf"


def label(path: Path | str) -> str:
    """Return a path as it can be printed on any terminal: odd characters are escaped."""
    return "".join(c if c.isprintable() else c.encode("unicode_escape").decode() for c in str(path))


def refusal(kind: str, name: str, /, line: int | None = None, **values: Value) -> SpecError:
    """Return a SpecError about the file `name`, whose first value is `path`."""
    return SpecError(finding(kind, Place(label(name), line), path=label(name), **values))


def read_bytes(path: Path, limit: int, name: str | None = None) -> bytes:
    """Return the bytes of a regular file of at most `limit` bytes; findings say `name`.

    Raises SpecError where the path leads to no such file, MachineError where the machine
    cannot read it. Devices and pipes are refused unopened: reading one may never end.
    """
    called = str(path) if name is None else name
    try:
        return _read_regular(path, limit, called)
    except (FileNotFoundError, NotADirectoryError):
        raise refusal("file-missing", called) from None
    except ValueError:
        raise refusal("path-nul", called) from None
    except OSError as error:
        raise _unreadable(called, error) from None


def _read_regular(path: Path, limit: int, called: str) -> bytes:
    about = path.stat()
    if stat.S_ISDIR(about.st_mode):
        raise refusal("file-is-folder", called)
    if not stat.S_ISREG(about.st_mode):
        raise refusal("file-not-regular", called)
    with path.open("rb") as stream:
        data = stream.read(limit + 1)
    if len(data) > limit:
        raise refusal("file-too-large", called, size=about.st_size, limit=limit)
    return data


def _unreadable(called: str, error: OSError) -> GuardbitError:
    name = label(called)
    reason = error.strerror or type(error).__name__
    return MachineError(finding("file-unreadable", Place(name), path=name, reason=reason))


def decode(data: bytes, name: str) -> str:
    """Return the text that `data` holds as UTF-8, line ends untouched.

    Raises SpecError for a byte-order mark, a NUL, and bytes that are not UTF-8. `name` is
    the file's, for the message.
    """
    if data.startswith(_BOM):
        raise refusal("file-bom", name, line=1)
    if b"\0" in data:
        raise refusal("file-nul", name, line=_line_at(data, data.index(b"\0")))
    try:
        return data.decode("utf-8")
    except UnicodeDecodeError as error:
        at = error.start
        raise refusal(
            "file-not-utf8", name, line=_line_at(data, at), offset=at, byte=f"0x{data[at]:02x}"
        ) from None


def _line_at(data: bytes, offset: int) -> int:
    return data.count(b"\n", 0, offset) + 1


def read_text(path: Path, limit: int = SPEC_LIMIT) -> str:
    """Return the text of a UTF-8 file. Raises what `read_bytes` and `decode` raise."""
    return decode(read_bytes(path, limit), str(path))
