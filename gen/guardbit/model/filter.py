"""The arithmetic contract of one filter with nothing left open: what every later stage reads.

Offsets `(dy, dx)` say where a tap reads: the pixel at the output position plus the offset.
For convolution that is minus the tap's displacement, for correlation plus its scaled index.
"""

from collections.abc import Sequence
from dataclasses import dataclass, replace
from fractions import Fraction

from guardbit.model.enums import (
    BorderMode,
    Container,
    Extent,
    FitRule,
    Grid,
    Operation,
    Outside,
    Overflow,
    Preload,
    Rounding,
    Scale,
)


@dataclass(frozen=True)
class PixelFormat:
    """How a pixel is stored. Its real value is (code - pedestal) * 2**-frac.

    `low`..`high` are the legal codes: the range, or all codes of the format.
    """

    bits: int
    signed: bool
    frac: int
    pedestal: int
    low: int
    high: int
    container: Container


@dataclass(frozen=True)
class Term:
    """One tap: the offset it reads, its ideal value and the integer that stands for it."""

    dy: int
    dx: int
    ideal: Fraction
    integer: int


@dataclass(frozen=True)
class TapSet:
    """The coefficients that may be loaded at run time; the kernel's own are the nominal ones.

    `cells` gives for each term of the kernel, in its order, the tap's place in raster order of
    the box, which has `count` cells; every other cell must be loaded with zero. A legal loading
    has each tap in least..greatest of its term, `sum` as the sum of all and at most
    `magnitudes` as that of their magnitudes (None: any), and is one of `kernels`, written in the
    terms' order, if there are any.
    """

    count: int
    cells: tuple[int, ...]
    least: tuple[int, ...]
    greatest: tuple[int, ...]
    sum: int | None
    magnitudes: int | None
    kernels: tuple[tuple[int, ...], ...]


@dataclass(frozen=True)
class Kernel:
    """The fitted taps of one pass, in the contract's order of accumulation.

    The order is raster order of the offset: smaller dy first, then smaller dx. Taps whose
    ideal and integer are both zero are left out; a tap fitted to zero is kept for the error
    analysis (it adds nothing to an accumulator).

    With `scale` binary, integer stands for ideal * 2**frac and `divisor` is 1. With exact,
    integer / divisor equals ideal, and `frac` is 0. `bits` and `signed` are the coefficient
    register's. `rule` is how the integers were found (None: pinned in the spec), and
    `residual` is sum(integer) - 2**frac * divisor * sum(ideal). With
    `registers` the coefficients are loaded at run time: the terms then are all cells of the box
    that can be other than zero, with their nominal integers.
    """

    terms: tuple[Term, ...]
    scale: Scale
    frac: int
    divisor: int
    bits: int
    signed: bool
    rule: FitRule | None
    residual: Fraction
    registers: TapSet | None = None

    @property
    def live(self) -> tuple[Term, ...]:
        """Return the terms that may add something to a sum: all that registers hold."""
        return tuple(t for t in self.terms if t.integer or self.registers is not None)


@dataclass(frozen=True)
class Accumulator:
    """The register that sums coefficient * (code - pedestal).

    `bits` is None between fitting and sizing when the spec says "auto".
    """

    bits: int | None
    signed: bool
    overflow: Overflow
    preload: Preload


@dataclass(frozen=True)
class Requantiser:
    """value = acc * 2**exponent / divisor, rounded, plus the pedestal of `to`, then overflow.

    For a binary scale divisor is 1 and exponent is minus the contract's shift s.
    """

    exponent: int
    divisor: int
    rounding: Rounding
    overflow: Overflow
    to: PixelFormat


@dataclass(frozen=True)
class Pass:
    """One convolution: pixels of `source`, summed in `accumulator`, then requantised."""

    source: PixelFormat
    kernel: Kernel
    accumulator: Accumulator
    requantiser: Requantiser


@dataclass(frozen=True)
class Border:
    """`value` is the code that reads outside the image return when `mode` is constant."""

    mode: BorderMode
    value: int
    grid: Grid


@dataclass(frozen=True)
class Axis:
    """One direction of the geometry.

    `least`, `greatest`: ends of the box's displacements, zero taps included. `sizes`: the
    legal image lengths. Positions kept are number phase, phase + step, ... of the extent.
    """

    least: int
    greatest: int
    sizes: tuple[int, int]
    step: int
    phase: int
    spacing: int


@dataclass(frozen=True)
class Geometry:
    extent: Extent
    rows: Axis
    columns: Axis
    channels: int


@dataclass(frozen=True)
class Filter:
    """The whole contract. One pass, or two with an intermediate between them.

    With two passes `passes[0]` runs first on the input extended by the border; the terms of
    one have dx == 0 and of the other dy == 0.
    """

    name: str
    summary: str
    operation: Operation
    outside: Outside
    passes: tuple[Pass, ...]
    border: Border
    geometry: Geometry
    spec_digest: str

    @property
    def input(self) -> PixelFormat:
        """Return the format of the source."""
        return self.passes[0].source

    @property
    def output(self) -> PixelFormat:
        """Return the format of the result."""
        return self.passes[-1].requantiser.to


def registers_of(f: Filter) -> TapSet | None:
    """Return the set of coefficients that may be loaded; None: they are fixed."""
    return f.passes[0].kernel.registers


def loaded(f: Filter, taps: Sequence[int]) -> Filter:
    """Return the filter with other integers in its coefficient registers.

    `taps` are in the order of the kernel's terms. The ideal taps stay those of the nominal
    kernel. The registers are kept: what they may hold decides which rows a frame is judged by.
    """
    (only,) = f.passes
    kernel = only.kernel
    terms = tuple(replace(t, integer=k) for t, k in zip(kernel.terms, taps, strict=True))
    moved = sum(taps) - sum(t.integer for t in kernel.terms)
    changed = replace(kernel, terms=terms, residual=kernel.residual + moved)
    return replace(f, passes=(replace(only, kernel=changed),))


def holding(f: Filter, taps: Sequence[int] | None) -> Filter:
    """Return the filter with these taps loaded; None: with its own."""
    return f if taps is None else loaded(f, taps)


def raster(s: TapSet, taps: Sequence[int]) -> tuple[int, ...]:
    """Return a loading, given in the order of the terms, as all cells of the box."""
    cells = [0] * s.count
    for cell, tap in zip(s.cells, taps, strict=True):
        cells[cell] = tap
    return tuple(cells)
