"""The whole table emitted, compiled into one program, and run on frames that the reference answers.

The filters are one unit of C, so that one call of a compiler builds them all.
"""

import random
import struct
import subprocess
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from functools import cache
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from guardbit.emit import expressions as c
from guardbit.emit.emission import emit
from guardbit.fit.resolve import resolve
from guardbit.model.enums import Container, Outside
from guardbit.model.filter import Filter, loaded, raster, registers_of
from guardbit.model.plan import Cell, Plan
from guardbit.model.routine import Emission, Status
from guardbit.model.sizing import Sizing
from guardbit.plan.direct import direct
from guardbit.reference.run import rejects, respond
from guardbit.sizing.analyse import analyse

from . import registers
from .table import cases

Codes = NDArray[np.int64]

STRICT = (
    "-std=c99",
    "-pedantic",
    "-Wall",
    "-Wextra",
    "-Wconversion",
    "-Wsign-conversion",
    "-Wshadow",
    "-Wcast-qual",
    "-Werror",
)
UNIT = "all.c"
GAPS = 4
MAIN = Path(__file__).with_name("bench.c")
SIZES = ((1, 1), (1, 9), (9, 1), (2, 2), (3, 5), (7, 5), (12, 14), (45, 48))


@dataclass(frozen=True)
class Emitted:
    """One case of the table, all the way to its files; `taps` are what it is loaded with."""

    number: int
    sizing: Sizing
    plan: Plan
    emission: Emission
    taps: tuple[int, ...] | None = None

    @property
    def filter(self) -> Filter:
        f = self.sizing.filter
        return f if self.taps is None else loaded(f, self.taps)


@cache
def emitted() -> tuple[Emitted, ...]:
    """Every case of the table, then those with coefficients to load, once for each loading."""
    made = [_emit(number, name) for number, name in enumerate(cases())]
    for name in registers.cases():
        made += _loaded(len(made), registers.sized(name))
    return tuple(made)


def _emit(number: int, name: str) -> Emitted:
    sizing = analyse(resolve(cases()[name]))
    plan = direct(sizing)
    return Emitted(number, sizing, plan, emit(sizing, plan, ()))


def _loaded(first: int, sizing: Sizing) -> Iterator[Emitted]:
    plan = direct(sizing)
    emission = emit(sizing, plan, ())
    for number, taps in enumerate(registers.loads(sizing.filter), first):
        yield Emitted(number, sizing, plan, emission, taps)


def write(folder: Path, made: Sequence[Emitted]) -> None:
    """Write header and source of all filters, and the unit that holds them together."""
    for each in made:
        for file in each.emission.routine.sources:
            (folder / file.name).write_text(file.text, encoding="utf-8")
    (folder / UNIT).write_text(unit(made), encoding="utf-8")


_CALL = (
    "const void *src, size_t src_stride, void *dst, size_t dst_stride,\n"
    "    size_t width, size_t height, {}void *scratch, size_t scratch_len"
)
_BAND = f"int bench_band(int which, {_CALL.format('size_t from, size_t to, ')})"
_FRAME = f"int bench_frame(int which, {_CALL.format('')})"
_SIZE = (
    "void bench_size(int which, size_t width, size_t height,\n"
    "    size_t *out_width, size_t *out_height)"
)
_TAIL = "int64_t bench_tail(int which, int64_t acc)"
TAILS_PER_FILTER = 2


def unit(made: Sequence[Emitted]) -> str:
    """C that includes all filters and calls them, and their requantisers, by number."""
    names = [(each.number, each.filter.name) for each in made]
    calls = [(each.number, each.filter.name, _taps(each)) for each in made]
    tails = [
        (TAILS_PER_FILTER * each.number + index, f"{probe.function}(({_type(step.value.work)})acc)")
        for each in made
        for index, (step, probe) in enumerate(
            zip(each.plan.steps, each.emission.probes, strict=True)
        )
    ]
    rest = "width, height, {}$scratch, scratch_len);"
    return "\n".join(
        [
            *dict.fromkeys(f'#include "{name}.c"' for _, name in names),
            *(_constants(each) for each in made),
            *(f"{head};" for head in (_BAND, _FRAME, _SIZE, _TAIL)),
            _switch(
                _BAND,
                calls,
                "return @_band(src, src_stride, dst, dst_stride, " + rest.format("from, to, "),
                "return -1;",
            ),
            _switch(
                _FRAME,
                calls,
                "return @_frame(src, src_stride, dst, dst_stride, " + rest.format(""),
                "return -1;",
            ),
            _switch(
                _SIZE,
                calls,
                "@_output_size(width, height, out_width, out_height); break;",
                "break;",
            ),
            _switch(_TAIL, [(*tail, "") for tail in tails], "return (int64_t)@;", "return 0;"),
            "",
        ]
    )


def _taps(each: Emitted) -> str:
    return "" if each.taps is None else f"taps_{each.number}, "


def _constants(each: Emitted) -> str:
    """The taps that a case is loaded with."""
    s = registers_of(each.filter)
    if each.taps is None or s is None or each.plan.taps is None:
        return ""
    numbers = ", ".join(map(c.number, raster(s, each.taps)))
    return f"static const {_type(each.plan.taps)} taps_{each.number}[] = {{ {numbers} }};"


def _type(cell: Cell) -> str:
    return f"{'' if cell.signed else 'u'}int{cell.bits}_t"


def _switch(head: str, cases: Sequence[tuple[int, str, str]], case: str, other: str) -> str:
    lines = [
        f"    case {number}: {case.replace('@', name).replace('$', taps)}"
        for number, name, taps in cases
    ]
    lines = [*lines, f"    default: {other}", "    }", "}"]
    return "\n".join([head, "{", "    switch (which) {", *lines])


@dataclass(frozen=True, eq=False)
class Question:
    """A frame for a filter; None in `wanted`: whatever comes will do."""

    case: Emitted
    frame: Codes
    status: Status
    wanted: Codes | None
    shape: tuple[int, int]

    @property
    def elements(self) -> int:
        """The longest block in elements, gaps between rows included."""
        rows, columns = self.shape
        channels = self.frame.shape[2]
        gaps = GAPS * max(rows, self.frame.shape[0])
        return int(max(self.frame.size, rows * columns * channels) + gaps)


def questions(made: Sequence[Emitted]) -> Iterator[Question]:
    """Legal frames of many sizes for every filter, and frames with other codes."""
    rng = random.Random(20)
    for each in made:
        for height, width in SIZES:
            if _is_legal(each.filter, height, width):
                yield from _of_size(each, height, width, rng)


def _is_legal(f: Filter, height: int, width: int) -> bool:
    sizes = (f.geometry.rows.sizes, f.geometry.columns.sizes)
    return all(low <= n <= high for n, (low, high) in zip((height, width), sizes, strict=True))


def _of_size(each: Emitted, height: int, width: int, rng: random.Random) -> Iterator[Question]:
    f = each.filter
    shape = (height, width, f.geometry.channels)
    legal = _codes(rng, shape, f.input.low, f.input.high)
    yield _question(each, legal)
    low, high = container_limits(f.input.container)
    if f.outside is Outside.REJECT:
        for code in (f.input.low - 1, f.input.high + 1):
            for _ in range(3 if low <= code <= high else 0):
                spoilt = legal.copy()
                spoilt.flat[rng.randrange(spoilt.size)] = code
                yield _question(each, spoilt)
    elif (low, high) != (f.input.low, f.input.high):
        yield _question(each, _codes(rng, shape, low, high))


def _codes(rng: random.Random, shape: tuple[int, ...], low: int, high: int) -> Codes:
    ends = (low, high, min(low + 1, high), max(high - 1, low))
    count = shape[0] * shape[1] * shape[2]
    picked = [
        rng.choice(ends) if rng.random() < 0.5 else rng.randint(low, high) for _ in range(count)
    ]
    return np.array(picked, np.int64).reshape(shape)


def _question(each: Emitted, frame: Codes) -> Question:
    f = each.filter
    output = respond(f, frame).output
    shape = (output.shape[0], output.shape[1])
    if rejects(f, frame):
        return Question(each, frame, Status.BAD_CODE, None, shape)
    illegal = bool(np.any((frame < f.input.low) | (frame > f.input.high)))
    if illegal and f.outside is Outside.UNDEFINED:
        return Question(each, frame, Status.OK, None, shape)
    return Question(each, frame, Status.OK, output, shape)


def container_limits(container: Container) -> tuple[int, int]:
    """The least and greatest number of a container."""
    half = 1 << (container.bits - 1)
    return (-half, half - 1) if container.signed else (0, 2 * half - 1)


def _dtype(container: Container) -> np.dtype[np.generic]:
    return np.dtype(f"<{container.value[0]}{container.bits // 8}")


def record(question: Question, number: int) -> bytes:
    """One call as bench.c reads it; strides and splits vary with the number."""
    routine = question.case.emission.routine
    height, width, channels = question.frame.shape
    rows, columns = question.shape
    source, output = _dtype(routine.source), _dtype(routine.destination)
    scratch = max(1, routine.scratch_per_column * width + routine.scratch_fixed)
    wanted = np.zeros((rows, columns, channels), output)
    if question.wanted is not None:
        wanted[...] = question.wanted
    assert routine.word is not None
    head = struct.pack(
        "<15q",
        question.case.number,
        width,
        height,
        width * channels,
        source.itemsize,
        columns,
        rows,
        columns * channels,
        output.itemsize,
        scratch,
        routine.word[0] // 8,
        number % GAPS,
        number % (rows + 1),
        list(Status).index(question.status),
        question.wanted is None,
    )
    return head + question.frame.astype(source).tobytes() + wanted.tobytes()


def run(command: Sequence[str | Path], folder: Path) -> str:
    """Run a compiler or a checker in a folder; what it says, and that must be success."""
    done = subprocess.run(command, cwd=folder, capture_output=True, text=True, check=False)
    said = done.stdout + done.stderr
    assert done.returncode == 0, said[:4000]
    return said


def complaints(program: Path, calls: bytes, made: Sequence[Emitted]) -> list[str]:
    """What the program finds wrong, with the names of the filters in front."""
    done = subprocess.run([str(program)], input=calls, capture_output=True, check=False)
    names = {str(each.number): each.filter.name for each in made}
    lines = done.stdout.decode().splitlines()
    said = [f"{names.get(line.split()[0], '?')}: {line}" for line in lines]
    if done.returncode not in (0, 1) or done.stderr:
        said.append(f"exit {done.returncode}: {done.stderr.decode()[:2000]}")
    return said
