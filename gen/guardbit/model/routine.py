"""C code to be checked, whoever wrote it, and the calls that check it."""

from collections.abc import Sequence
from dataclasses import dataclass
from enum import StrEnum
from typing import Protocol, TypeAlias

import numpy as np
from numpy.typing import NDArray

from guardbit.model.enums import Container
from guardbit.model.sizing import Interval

Codes: TypeAlias = NDArray[np.int64]

UNWRITTEN = -(2**40)
"""Marks an output cell that was not written; outside every container."""


class Role(StrEnum):
    """What one argument of a C function means. Strides count elements, sizes pixels."""

    SRC = "src"
    SRC_STRIDE = "src_stride"
    DST = "dst"
    DST_STRIDE = "dst_stride"
    WIDTH = "width"
    HEIGHT = "height"
    FROM = "from"
    TO = "to"
    TAPS = "taps"
    SCRATCH = "scratch"
    SCRATCH_LEN = "scratch_len"


class Status(StrEnum):
    """The status codes of an emitted routine, in the order of their numbers from 0."""

    OK = "OK"
    BAD_POINTER = "BAD_POINTER"
    BAD_SIZE = "BAD_SIZE"
    BAD_STRIDE = "BAD_STRIDE"
    BAD_SCRATCH = "BAD_SCRATCH"
    BAD_CODE = "BAD_CODE"
    BAD_TAPS = "BAD_TAPS"


@dataclass(frozen=True)
class SourceFile:
    name: str
    text: str


@dataclass(frozen=True)
class Entry:
    """A C function and the roles of its arguments in order; `status` if it returns one."""

    function: str
    roles: tuple[Role, ...]
    status: bool = True


@dataclass(frozen=True)
class Taps:
    """The coefficients that each call of a routine is given, in raster order of their box.

    `word` is their C type (bits, signed); `nominal` is what is passed unless a call says else.
    """

    word: tuple[int, bool]
    nominal: tuple[int, ...]


@dataclass(frozen=True)
class Routine:
    """C sources and how to call them.

    `word` is the container of a scratch element (bits, signed); a call needs
    `scratch_per_column * width + scratch_fixed` of them, never fewer than 1. `units` are numbers
    of columns in which the code takes its steps, with another way for what is left over.
    `foreign`: it is the user's own, and need not compile without a warning.
    `output_size` names a function (width, height, *out_width, *out_height), if there is one.
    """

    name: str
    sources: tuple[SourceFile, ...]
    frame: Entry
    band: Entry | None
    output_size: str | None
    source: Container
    destination: Container
    channels: int
    word: tuple[int, bool] | None
    scratch_per_column: int
    scratch_fixed: int
    widths: tuple[int, int]
    heights: tuple[int, int]
    taps: Taps | None = None
    units: tuple[int, ...] = ()
    foreign: bool = False


@dataclass(frozen=True)
class Probe:
    """A static C function of one integer, and the arguments that can reach it.

    `requantiser` is the index of the pass whose requantiser it is. The function takes an
    integer of `bits` bits and returns the stored code minus `remove`; when `preloaded` the
    argument already holds the rounding constant.
    """

    function: str
    source: str
    bits: int
    argument: Interval
    requantiser: int
    preloaded: bool
    remove: int


@dataclass(frozen=True)
class Emission:
    """Everything `emit` writes for one filter, and how verification gets at it."""

    files: tuple[SourceFile, ...]
    routine: Routine
    probes: tuple[Probe, ...]


@dataclass(frozen=True, eq=False)
class Call:
    """One use of a routine.

    `frame` is (height, width, channels) of codes. `shape` is the (rows, columns) of the
    output buffer. `bands` are the output row ranges to ask for, in the order given; without
    them the whole frame is asked for by the frame entry.
    `src_gap`, `dst_gap`: elements of stride beyond a row. `faults` replaces arguments by
    deliberately wrong ones (a role to the value passed; None is a null pointer). `taps` are
    the coefficients, in raster order of their box; None: the routine's nominal ones, if any.
    """

    frame: Codes
    shape: tuple[int, int]
    bands: tuple[tuple[int, int], ...] = ()
    src_gap: int = 0
    dst_gap: int = 0
    faults: tuple[tuple[Role, int | None], ...] = ()
    taps: tuple[int, ...] | None = None


class Harm(StrEnum):
    """What compiled code did that no routine may do.

    `unsettled`: the result depends on what the buffers held before the call. `not-run` is no
    deed of the code: after too many crashes or hangs the remaining calls are not made.
    """

    CRASH = "crash"
    HANG = "hang"
    WROTE_OUTSIDE = "wrote-outside"
    CHANGED_SOURCE = "changed-source"
    UNSETTLED = "unsettled"
    SANITIZER = "sanitizer"
    NOT_RUN = "not-run"


@dataclass(frozen=True, eq=False)
class Outcome:
    """What a call did: the status of each C call made, the output, and any harm.

    `output` is (rows, columns, channels); cells that were not written hold UNWRITTEN. It is
    None where the child did not get so far, and after a call that was refused (a status that
    is not 0) if nothing was written. `size`
    is the (rows, columns) that the routine's `output_size` gave for the call's width and
    height. `detail` holds a signal name, a place in a buffer or a sanitizer's words.
    """

    statuses: tuple[int, ...]
    output: Codes | None
    size: tuple[int, int] | None = None
    harm: Harm | None = None
    detail: str = ""


@dataclass(frozen=True, eq=False)
class Probed:
    """A probe's results, in the order of its arguments; fewer of them if harm was done."""

    values: Codes
    harm: Harm | None = None
    detail: str = ""


class Runner(Protocol):
    """Runs calls of a routine somewhere: a child process here, a sanitized one, an emulator."""

    @property
    def name(self) -> str:
        """Return what the runner is called in reports."""
        ...

    def run(self, calls: Sequence[Call]) -> Sequence[Outcome]:
        """Return one outcome per call, in order, whatever the compiled code does."""
        ...

    def probe(self, probe: Probe, arguments: Codes) -> Probed:
        """Return the probe's result for each argument."""
        ...
