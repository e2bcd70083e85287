"""Calls a shared library in a process of its own, since the library may crash or hang.

Run as `python -m guardbit.build.child job.json`. The buffers of each case end (first run) or
begin (second run) at a page that cannot be touched, so that an access outside ends the
process; margins on the other side are compared afterwards. Results are flushed case by case.
It imports nothing heavy: starting it is most of its cost.
"""

import json
import mmap
import resource
import signal
import struct
import sys
from pathlib import Path
from typing import IO, Any

from cffi import FFI

_HEAD = struct.Struct("=10Q")
_RESULT = struct.Struct("=4Q")
_FILLERS = (b"\xa5", b"\x5a")
_WROTE_OUTSIDE = 1
_CHANGED_SOURCE = 2
_ARGUMENTS = 16
_KINDS = ("src", "dst", "scratch", "taps")
_PAGE = mmap.PAGESIZE
_MARGIN = 256
_BLOCK = 1 << 16
_DECLARATIONS = """
void *mmap(void *, size_t, int, int, int, long);
int munmap(void *, size_t);
int mprotect(void *, size_t, int);
"""


class Arena:
    """Memory between two pages that cannot be touched."""

    def __init__(self, ffi: FFI, libc: object) -> None:
        self._ffi = ffi
        self._libc: Any = libc
        self._size = 0
        self._base: Any = None
        self._view: Any = None

    def place(self, length: int, filler: bytes, at_end: bool) -> int:
        """Return the address of `length` bytes, all else filled, flush with one guard."""
        need = -(-(length + _MARGIN) // _PAGE) * _PAGE
        if need != self._size:
            self._map(need)
        self._view[:] = filler * self._size
        self._length, self._filler = length, filler
        self._at = self._size - length if at_end else 0
        start: int = self._address() + self._at
        return start

    def content(self) -> bytes:
        """Return the bytes placed last."""
        return bytes(self._view[self._at : self._at + self._length])

    def store(self, data: bytes) -> None:
        """Set the bytes placed last."""
        self._view[self._at : self._at + self._length] = data

    def intact(self) -> bool:
        """Return whether all else still holds the filler."""
        end = self._at + self._length
        before = self._view[: self._at] == self._filler * self._at
        return bool(before and self._view[end:] == self._filler * (self._size - end))

    def _address(self) -> int:
        return int(self._ffi.cast("uintptr_t", self._base)) + _PAGE

    def _map(self, size: int) -> None:
        if self._base is not None:
            self._libc.munmap(self._base, self._size + 2 * _PAGE)
        kind = mmap.MAP_PRIVATE | mmap.MAP_ANONYMOUS
        base = self._libc.mmap(self._ffi.NULL, size + 2 * _PAGE, 0, kind, -1, 0)
        if int(self._ffi.cast("intptr_t", base)) == -1:
            raise MemoryError(f"{size} bytes")
        self._base, self._size = base, size
        inside = self._ffi.cast("void *", self._address())
        if self._libc.mprotect(inside, size, mmap.PROT_READ | mmap.PROT_WRITE) != 0:
            raise MemoryError("mprotect")
        self._view = self._ffi.buffer(inside, size)


class Routine:
    """The functions of one routine, looked up in the library."""

    def __init__(self, ffi: FFI, library: object, data: dict[str, Any]) -> None:
        self._ffi = ffi
        self._entries = [(getattr(library, e["function"]), e) for e in data["entries"]]
        name = data["output_size"]
        self._size = getattr(library, name) if name else None

    def call(self, words: tuple[int, ...], bases: dict[str, int]) -> int:
        """Return the status of one call, 0 if there is none."""
        function, entry = self._entries[words[0]]
        pairs = zip(entry["kinds"], words[1:], strict=False)
        arguments = [self._argument(kind, word, bases) for kind, word in pairs]
        return int(function(*arguments) or 0)

    def _argument(self, kind: str, word: int, bases: dict[str, int]) -> object:
        if kind not in bases:
            return word % (1 << 64)
        address = 0 if word < 0 else bases[kind] + word
        return self._ffi.cast("void *", address)

    def output_size(self, width: int, height: int) -> tuple[int, int]:
        """Return (width, height) of the output; zeros if the routine does not tell."""
        if self._size is None:
            return 0, 0
        pair = self._ffi.new("size_t[2]")
        self._size(width, height, pair, pair + 1)
        return int(pair[0]), int(pair[1])


class Child:
    """One process's state: the library, its routines, an arena for each kind of pointer."""

    def __init__(self, job: dict[str, Any]) -> None:
        ffi = FFI()
        ffi.cdef(_DECLARATIONS + "".join(job["declarations"]))
        libc = ffi.dlopen(None)
        self._ffi = ffi
        self.library: Any = ffi.dlopen(job["library"])
        self._routines = [Routine(ffi, self.library, data) for data in job["routines"]]
        self._seconds = float(job["seconds"])
        self._arenas = {kind: Arena(ffi, libc) for kind in _KINDS}

    def run_job(self, source: IO[bytes], results: IO[bytes]) -> None:
        """Run every case of a job file."""
        (count,) = struct.unpack("=Q", source.read(8))
        for index in range(count):
            head = _HEAD.unpack(source.read(_HEAD.size))
            size = 8 * (1 + _ARGUMENTS)
            calls = [struct.unpack("=17q", source.read(size)) for _ in range(head[1])]
            given = source.read(head[2] * head[3]), source.read(head[9])
            results.write(self._case(index, head, calls, given))
            results.flush()

    def run_probe(self, name: str, source: IO[bytes], results: IO[bytes]) -> None:
        """Give every argument in the file to one probe."""
        function = getattr(self.library, "guardbit_probe_" + name)
        source.read(8)
        while block := source.read(8 * _BLOCK):
            arguments = self._ffi.from_buffer("int64_t[]", block)
            answers = self._ffi.new("int64_t[]", len(block) // 8)
            self._allow(self._seconds)
            function(arguments, answers, len(block) // 8)
            self._allow(0)
            results.write(bytes(self._ffi.buffer(answers)))
            results.flush()

    def _case(
        self,
        index: int,
        head: tuple[int, ...],
        calls: list[tuple[int, ...]],
        given: tuple[bytes, bytes],
    ) -> bytes:
        routine = self._routines[head[0]]
        self._allow(self._seconds)
        runs = [self._run(run, routine, head, calls, given) for run in (0, 1)]
        size = routine.output_size(head[7], head[8])
        self._allow(0)
        harm = runs[0][0] | runs[1][0]
        return _RESULT.pack(index, harm, *size) + runs[0][1] + runs[1][1]

    def _run(
        self,
        run: int,
        routine: Routine,
        head: tuple[int, ...],
        calls: list[tuple[int, ...]],
        given: tuple[bytes, bytes],
    ) -> tuple[int, bytes]:
        filler = _FILLERS[run]
        src, taps = _lay(given[0], head, filler), given[1]
        lengths = {"src": len(src), "dst": head[5], "scratch": head[6], "taps": len(taps)}
        bases = {k: self._arenas[k].place(n, filler, run == 0) for k, n in lengths.items()}
        self._arenas["src"].store(src)
        self._arenas["taps"].store(taps)
        statuses = [routine.call(words, bases) for words in calls]
        harm = 0 if all(a.intact() for a in self._arenas.values()) else _WROTE_OUTSIDE
        kept = self._arenas["src"].content() == src and self._arenas["taps"].content() == taps
        harm |= 0 if kept else _CHANGED_SOURCE
        packed = struct.pack(f"={len(statuses)}q", *statuses)
        return harm, packed + self._arenas["dst"].content()

    def _allow(self, seconds: float) -> None:
        """Set the processor time after which the kernel ends this process; 0: no limit."""
        signal.setitimer(signal.ITIMER_VIRTUAL, seconds)


def _lay(frame: bytes, head: tuple[int, ...], filler: bytes) -> bytes:
    """Return the rows of the frame with the stride's gaps between them."""
    _, _, rows, row_bytes, stride_bytes = head[:5]
    if row_bytes == stride_bytes:
        return frame
    gap = filler * (stride_bytes - row_bytes)
    return gap.join(frame[r * row_bytes : (r + 1) * row_bytes] for r in range(rows))


def main() -> int:
    """Run the job that the file in the first argument describes.

    Returns 0; 98 if a function is not in the library; 99 if this process could not do its part.
    """
    job = json.loads(Path(sys.argv[1]).read_text(encoding="utf-8"))
    resource.setrlimit(resource.RLIMIT_CORE, (0, 0))
    try:
        child = Child(job)
    except (OSError, AttributeError) as error:
        print(error, file=sys.stderr)
        return 98
    try:
        _run(child, job)
    except (OSError, MemoryError, struct.error) as error:
        print(f"{type(error).__name__}: {error}", file=sys.stderr)
        return 99
    return 0


def _run(child: Child, job: dict[str, Any]) -> None:
    with Path(job["input"]).open("rb") as source, Path(job["output"]).open("wb") as results:
        if job["probe"] is None:
            child.run_job(source, results)
        else:
            child.run_probe(job["probe"], source, results)


if __name__ == "__main__":
    sys.exit(main())
