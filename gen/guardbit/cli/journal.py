"""The journal of a sweep: every finished point on a line of its own, so that none is done twice.

A file of JSON lines that is only ever appended to. The first line says which sweep it is of:
a digest of the spec, the grid and the version of the tool. Whatever ended the work, at most
the last line is torn, and then it is dropped.
"""

import fcntl
import hashlib
import json
import os
import stat
from collections.abc import Generator, Mapping, Sequence
from contextlib import contextmanager
from dataclasses import dataclass
from fractions import Fraction
from pathlib import Path
from typing import Any, BinaryIO

from guardbit.model.canonical import dumps, plain
from guardbit.model.finding import Finding, GuardbitError, MachineError, Place, SpecError, finding
from guardbit.model.sweep import Cost, Grid, Row

_LAYOUT = 1


def sweep_digest(tool: str, spec_digest: str, grid: Grid) -> str:
    """Return what tells one sweep from another: SHA-256 of version, spec and grid."""
    text = dumps({"tool": tool, "spec": spec_digest, "grid": grid})
    return hashlib.sha256(text.encode("ascii")).hexdigest()


@dataclass(frozen=True)
class Journal:
    """An open journal, and the rows that it held when it was opened, by number."""

    path: Path
    rows: Mapping[int, Row]
    stream: BinaryIO

    def append(self, rows: Sequence[Row]) -> None:
        """Write rows, and hand them to the system, so that a crash of ours loses none.

        Raises MachineError.
        """
        text = "".join(f"{_line(entry(row))}\n" for row in rows)
        try:
            self.stream.write(text.encode("ascii"))
            self.stream.flush()
        except OSError as error:
            raise _failed(self.path, error) from None


@contextmanager
def journal(path: Path, digest: str, grid: Grid) -> Generator[Journal, None, None]:
    """Yield the journal of a sweep, begun if it is not there. Nobody else may have it open.

    Raises SpecError if the file is the journal of another sweep, damaged, or in use by
    another process; MachineError if it cannot be read or written.
    """
    try:
        path.parent.mkdir(parents=True, exist_ok=True)
        stream = path.open("a+b")
    except OSError as error:
        raise _failed(path, error) from None
    with stream:
        if not stat.S_ISREG(os.fstat(stream.fileno()).st_mode):
            # reading one may never end
            raise SpecError(finding("file-not-regular", Place(str(path)), path=str(path)))
        try:
            fcntl.flock(stream, fcntl.LOCK_EX | fcntl.LOCK_NB)
        except OSError:
            raise SpecError(finding("journal-busy", Place(str(path)))) from None
        try:
            rows = _read(path, stream, digest, grid)
        except OSError as error:
            raise _failed(path, error) from None
        yield Journal(path, rows, stream)


def _failed(path: Path, error: OSError) -> GuardbitError:
    reason = error.strerror or type(error).__name__
    return MachineError(finding("journal-failed", Place(str(path)), reason=reason))


def _read(path: Path, stream: BinaryIO, digest: str, grid: Grid) -> dict[int, Row]:
    """Return the rows of a journal, after cutting off a torn last line or writing its head."""
    stream.seek(0)
    data = stream.read()
    whole = data[: data.rfind(b"\n") + 1]
    lines = whole.splitlines()
    if not lines and _line(_head(digest)).encode().startswith(data):
        stream.truncate(0)
        stream.write(f"{_line(_head(digest))}\n".encode("ascii"))
        stream.flush()
        return {}
    if not lines or _parsed(lines[0]) != _head(digest):
        raise SpecError(_foreign(path, _parsed(lines[0]) if lines else {}))
    stream.truncate(len(whole))
    rows: dict[int, Row] = {}
    for number, line in enumerate(lines[1:], 2):
        try:
            row = row_of(_parsed(line), grid)
        except (KeyError, TypeError, ValueError, AttributeError, ZeroDivisionError):
            raise SpecError(finding("journal-damaged", Place(str(path), number))) from None
        rows[row.index] = row
    return rows


def _foreign(path: Path, head: Mapping[str, Any]) -> Finding:
    if head.get("journal") == _head("")["journal"]:
        return finding("journal-of-another", Place(str(path)))
    return finding("journal-not-one", Place(str(path)))


def _head(digest: str) -> dict[str, object]:
    return {"journal": "guardbit sweep", "layout": _LAYOUT, "sweep": digest}


def _line(value: object) -> str:
    return json.dumps(plain(value), sort_keys=True, separators=(",", ":"), ensure_ascii=True)


def _parsed(line: bytes) -> dict[str, Any]:
    """Return the object on a line; an empty one if there is none."""
    try:
        value = json.loads(line)
    except ValueError:
        return {}
    return value if isinstance(value, dict) else {}


def entry(row: Row) -> dict[str, object]:
    """Return a row as it stands in a journal: without what the grid tells about it."""
    return {"index": row.index, "cost": row.cost, "refused": row.refused}


def row_of(content: Mapping[str, Any], grid: Grid) -> Row:
    """Return the row that a journal's line holds.

    Raises ValueError, TypeError, KeyError or AttributeError if it holds none.
    """
    index = _whole(content["index"])
    if not 0 <= index < len(grid) or (content["cost"] is None) is (content["refused"] is None):
        raise ValueError(f"no point {index}")
    cost = None if content["cost"] is None else _cost(content["cost"])
    refused = None if content["refused"] is None else _refused(content["refused"])
    return Row(index, grid.point(index), cost, refused)


def _cost(content: Mapping[str, Any]) -> Cost:
    frac, response = content["intermediate_frac"], content["response"]
    return Cost(
        coefficient_bits=_whole(content["coefficient_bits"]),
        coefficient_frac=tuple(map(_whole, content["coefficient_frac"])),
        intermediate_bits=_whole(content["intermediate_bits"]),
        intermediate_frac=None if frac is None else _whole(frac),
        accumulators=tuple(map(_whole, content["accumulators"])),
        bits=_whole(content["bits"]),
        low=Fraction(content["low"]),
        high=Fraction(content["high"]),
        error=Fraction(content["error"]),
        response=None if response is None else Fraction(response),
    )


def _refused(content: Mapping[str, Any]) -> Finding:
    values = tuple((str(name), value) for name, value in content["values"])
    return Finding(str(content["kind"]), Place(**content["place"]), values)


def _whole(value: object) -> int:
    if not isinstance(value, int) or isinstance(value, bool):
        raise TypeError(f"{value!r} is no whole number")
    return value


def remove(path: Path) -> None:
    """Remove a journal that is no longer needed. Raises MachineError."""
    try:
        path.unlink(missing_ok=True)
    except OSError as error:
        raise _failed(path, error) from None
