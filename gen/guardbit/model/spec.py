"""A spec file as written: exact rationals, defaults that are constants, nothing derived.

`None` stands for a key that was left out and whose default depends on other keys (the input's
word length, the whole range of a format, the centre of the kernel); "auto" is spelt `Auto.AUTO`.
The stage that resolves them is `fit`.
"""

from collections.abc import Mapping
from dataclasses import dataclass
from enum import StrEnum
from fractions import Fraction
from typing import TypeAlias

from guardbit.model.enums import (
    BorderMode,
    Container,
    Extent,
    First,
    FitRule,
    Grid,
    Operation,
    Outside,
    Overflow,
    Preload,
    Rounding,
    Scale,
    WordLength,
)

Matrix: TypeAlias = tuple[tuple[Fraction, ...], ...]
Vector: TypeAlias = tuple[Fraction, ...]


class Auto(StrEnum):
    AUTO = "auto"


class Sum(StrEnum):
    """`divisor = "sum"`: divide by the sum of the taps."""

    SUM = "sum"


@dataclass(frozen=True)
class FilterTable:
    name: str
    operation: Operation
    summary: str


@dataclass(frozen=True)
class KernelTable:
    """The ideal kernel before division.

    Exactly one of `taps` and the pair `column`, `row` is set, whatever the file said:
    images, tables and formulas have been evaluated to exact rationals. `source` keeps what
    the file said ("taps", "column and row", "file psf.npy", "formula gaussian").
    A scalar `divisor` is one entry; a pair [column's, row's] is two.
    """

    taps: Matrix | None
    column: Vector | None
    row: Vector | None
    divisor: tuple[Fraction | Sum, ...]
    origin: tuple[int, int] | None
    source: str


@dataclass(frozen=True)
class InputTable:
    bits: int
    signed: bool
    frac: int
    pedestal: int
    range: tuple[int, int] | None
    container: Container | None
    outside: Outside


@dataclass(frozen=True)
class Pinned:
    """Integer taps written into the spec by a search: a matrix, or column and row vectors."""

    taps: tuple[tuple[int, ...], ...] | None
    column: tuple[int, ...] | None
    row: tuple[int, ...] | None


@dataclass(frozen=True)
class Registers:
    """The integer taps that may be loaded at run time, in the kernel's rows and columns.

    Each tap is in least..greatest; all add up to `sum`, and their magnitudes to `magnitudes` at
    most (None: to anything). With `kernels` it is one of these, whose ends the limits are.
    """

    least: tuple[tuple[int, ...], ...]
    greatest: tuple[tuple[int, ...], ...]
    sum: int | None
    magnitudes: int | None
    kernels: tuple[tuple[tuple[int, ...], ...], ...]


@dataclass(frozen=True)
class CoefficientTable:
    """`frac` has one entry, or two for a pair [column's, row's]."""

    bits: int | Auto
    signed: bool
    frac: tuple[int | Auto, ...]
    fit: FitRule
    scale: Scale
    pinned: Pinned | None
    registers: Registers | None = None


@dataclass(frozen=True)
class AccumulatorTable:
    bits: int | Auto
    signed: bool
    overflow: Overflow
    preload: Preload


@dataclass(frozen=True)
class IntermediateTable:
    """`bits` and `frac` are "auto" only beside a goal: a search then finds them."""

    first: First
    bits: int | Auto
    signed: bool
    frac: int | Auto | None
    pedestal: int
    rounding: Rounding
    overflow: Overflow
    accumulator: AccumulatorTable


@dataclass(frozen=True)
class OutputTable:
    bits: int | None
    signed: bool | None
    frac: int | None
    pedestal: int
    range: tuple[int, int] | None
    container: Container | None
    rounding: Rounding
    overflow: Overflow


@dataclass(frozen=True)
class BorderTable:
    mode: BorderMode
    value: int | None
    grid: Grid


@dataclass(frozen=True)
class ImageTable:
    """Pairs are (vertical, horizontal); `width` and `height` are (least, greatest)."""

    extent: Extent
    width: tuple[int, int]
    height: tuple[int, int]
    step: tuple[int, int]
    phase: tuple[int, int]
    spacing: tuple[int, int]
    channels: int


@dataclass(frozen=True)
class GoalTable:
    """What a search has to reach: at least one of the first three is set.

    `error`: the largest |error| in LSB; `snr`: the least signal-to-noise ratio in dB on all
    `frames` together (paths from the spec's folder); `response`: the largest deviation of the
    frequency response. `minimise` has every word length once, the first one first.
    """

    error: Fraction | None
    snr: Fraction | None
    response: Fraction | None
    frames: tuple[str, ...]
    minimise: tuple[WordLength, ...]


@dataclass(frozen=True)
class Spec:
    """One spec file. `lines` maps a dotted key ("kernel.taps") to its line, from 1."""

    path: str
    digest: str
    lines: Mapping[str, int]
    filter: FilterTable
    kernel: KernelTable
    input: InputTable
    coefficient: CoefficientTable
    intermediate: IntermediateTable | None
    accumulator: AccumulatorTable
    output: OutputTable
    border: BorderTable
    image: ImageTable
    goal: GoalTable | None = None
