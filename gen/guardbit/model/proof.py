"""What a proof of C code is about and what comes of it."""

from dataclasses import dataclass
from enum import StrEnum
from typing import TypeAlias

from guardbit.model.sizing import Interval

Position: TypeAlias = tuple[int, int, int]
"""Row, column and channel."""


@dataclass(frozen=True)
class DataModel:
    """Widths in bits of C's types where they differ; char has 8, short 16, long long 64.

    Plain char is signed if `char_signed`; `pointer` is the width of size_t and ptrdiff_t too.
    """

    name: str
    int_bits: int
    long_bits: int
    pointer: int
    char_signed: bool = True


IP16 = DataModel("IP16", 16, 32, 16)
ILP32 = DataModel("ILP32", 32, 32, 32)
LP64 = DataModel("LP64", 32, 64, 64)
LLP64 = DataModel("LLP64", 32, 32, 64)
DATA_MODELS = (IP16, ILP32, LP64, LLP64)


class Codes(StrEnum):
    """Which pixels a case leaves open.

    LEGAL: each any legal code; the output must be the contract's. ANY: each any code of the
    container; nothing undefined may be done, and with a clamp the output is the contract's.
    ILLEGAL: as LEGAL but for one pixel, which is any illegal code: the frame must be refused.
    CONCRETE: a fixed frame, at sizes too large for open pixels: index arithmetic is what counts.
    BREAKPOINTS: fixed frames that put each sum where the code after it changes, once more in
    plain integers. WRONG: fixed frames with one wrong argument each, which must be refused.
    """

    LEGAL = "legal"
    ANY = "any"
    ILLEGAL = "illegal"
    CONCRETE = "concrete"
    BREAKPOINTS = "breakpoints"
    WRONG = "wrong"


@dataclass(frozen=True)
class Case:
    """One run of the machine: a size, how the routine is called, which pixels are open.

    Without `bands` the frame entry is called, else the band entry for each in the order given.
    `taps` are the loaded coefficients in raster order. `illegal` is the pixel of ILLEGAL.
    """

    model: DataModel
    width: int
    height: int
    codes: Codes = Codes.LEGAL
    bands: tuple[tuple[int, int], ...] = ()
    src_gap: int = 0
    dst_gap: int = 0
    taps: tuple[int, ...] | None = None
    illegal: Position | None = None


class Verdict(StrEnum):
    """REFUTED: another output than the contract's. BROKEN: a rule of C, on some frame.

    REFUSED: a construct that the machine does not take. UNKNOWN: neither shown nor refuted.
    """

    PROVED = "proved"
    REFUTED = "refuted"
    BROKEN = "broken"
    REFUSED = "refused"
    UNKNOWN = "unknown"


@dataclass(frozen=True)
class Place:
    """Where in the C code: a file, a line from 1 and the expression as it stands there."""

    file: str
    line: int
    expression: str


class Reliance(StrEnum):
    """What C leaves to the implementation and the code relies on."""

    ARITHMETIC_SHIFT = "arithmetic-shift"
    NARROWING = "narrowing"


@dataclass(frozen=True)
class Assumption:
    """`interval` is what is shifted or narrowed there."""

    reliance: Reliance
    place: Place
    interval: Interval


@dataclass(frozen=True)
class Counterexample:
    """A frame, as rows of pixels of channels, on which the code goes wrong.

    `position` is the output that differs from what is `expected`; None where a rule of C is
    broken before any does. `got` is None where nothing was stored.
    """

    frame: tuple[tuple[tuple[int, ...], ...], ...]
    taps: tuple[int, ...] | None
    position: Position | None
    expected: int | None
    got: int | None


@dataclass(frozen=True)
class Coverage:
    """Which sizes are proved, why they stand for all others, and what they do not show."""

    covered: tuple[str, ...]
    argument: tuple[str, ...]
    remaining: tuple[str, ...]


@dataclass(frozen=True)
class CaseResult:
    """What came of one case.

    `reason` is the kind of what is wrong (a key of the report's wording), `place` where,
    `interval` the values there. `outputs` counts the positions at which the store was compared.
    """

    case: Case
    verdict: Verdict
    reason: str = ""
    place: Place | None = None
    interval: Interval | None = None
    counterexample: Counterexample | None = None
    assumptions: tuple[Assumption, ...] = ()
    outputs: int = 0
    seconds: float = 0.0
