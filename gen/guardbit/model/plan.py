"""A plan: the way the integer arithmetic is carried out, as data.

A plan is steps over row buffers. Each step computes one row from rows already there. The
evaluator in `plan` gives every value its affine form over pixels and its exact interval; the
obligations that the C types must meet come from these, never from the plan's author.
"""

from dataclasses import dataclass
from typing import TypeAlias

from guardbit.model.enums import Overflow
from guardbit.model.sizing import Interval


@dataclass(frozen=True)
class Cell:
    """A C integer: 8, 16, 32 or 64 bits wide."""

    bits: int
    signed: bool


@dataclass(frozen=True)
class Rows:
    """Row buffers in scratch: a ring of `depth` rows.

    Row r of the image, extended by the border, is in slot r mod depth. With `padded` a row
    holds every extended column that a tap reads, else one value per output column.
    """

    name: str
    depth: int
    padded: bool


@dataclass(frozen=True)
class Load:
    """Bring one row of the image, extended by the border, into the row buffer `into`.

    Each code is clamped to `clamp` where that is set, then `pedestal` is subtracted in `work`;
    reads that the border turns into a constant get `constant`, which is used as it is.
    """

    into: str
    clamp: Interval | None
    pedestal: int
    constant: int
    work: Cell = Cell(32, True)


@dataclass(frozen=True)
class Read:
    """A row buffer's value at an offset from the position that is computed."""

    rows: str
    dy: int
    dx: int


@dataclass(frozen=True)
class Product:
    """A coefficient times a row value.

    `register` is the number of the kernel's term whose coefficient is given at run time, from
    0; `coefficient` is then only its nominal value.
    """

    coefficient: int
    of: Read
    register: int | None = None


@dataclass(frozen=True)
class Group:
    """Products summed apart, in `cell`, before they are added to the accumulator.

    In a 16-bit cell C's own int will do on any machine.
    """

    terms: tuple[Product, ...]
    cell: Cell


@dataclass(frozen=True)
class Sum:
    """start + the groups in the order given: exactly, or modulo 2**64 if `modular`."""

    start: int
    groups: tuple[Group, ...]
    cell: Cell
    modular: bool = False


@dataclass(frozen=True)
class SaturatingSum:
    """start, then the groups, of one product each, clamped to `limits` at every add.

    `guarded`: the cell cannot hold an unclamped sum, so the room left is compared first.
    `acts` says which of the limits, lower and upper, a sum can pass at all.
    """

    start: int
    groups: tuple[Group, ...]
    limits: Interval
    cell: Cell
    guarded: bool
    acts: tuple[bool, bool] = (True, True)


@dataclass(frozen=True)
class Field:
    """The number of `bits` bits that a sum stands for modulo 2**bits: a register that wraps."""

    of: Sum
    bits: int
    signed: bool
    cell: Cell


Value: TypeAlias = Sum | SaturatingSum | Field


@dataclass(frozen=True)
class Exact:
    """The number itself: nothing to divide by."""


@dataclass(frozen=True)
class Thresholds:
    """(n >= up) - (n <= down): the quotient when it rounds to -1, 0 or 1. None: never."""

    up: int | None
    down: int | None


@dataclass(frozen=True)
class Floor:
    """floor((n + add) / divisor) - less; the dividend is never negative if `natural`."""

    add: int
    divisor: int
    less: int
    natural: bool


@dataclass(frozen=True)
class TiesToEven:
    """As Floor with half the divisor in `add`, less one where that is a tie and odd.

    `less` is even, so that taking it off later does not change which quotients are odd.
    """

    add: int
    divisor: int
    less: int
    natural: bool


@dataclass(frozen=True)
class Truncate:
    """C's own quotient, toward zero."""

    divisor: int


@dataclass(frozen=True)
class TiesToAway:
    """C's quotient of n moved away from zero by `half`."""

    half: int
    divisor: int


Quotient: TypeAlias = Exact | Thresholds | Floor | TiesToEven | Truncate | TiesToAway


@dataclass(frozen=True)
class Tail:
    """What happens to a sum: n = sum * multiplier; code = quotient(n) + offset, then overflow.

    `argument` is what reaches it, `unlimited` what `code` can be. `overflow` is None where
    that lies in `limits`. `remove` is a pedestal that the next pass would subtract: it is
    taken off the stored code, and already off `offset`, `unlimited` and `limits` unless the
    code wraps. `work` holds every number inside, `cell` the result.
    """

    of: Value
    multiplier: int
    quotient: Quotient
    offset: int
    overflow: Overflow | None
    limits: Interval
    remove: int
    argument: Interval
    unlimited: Interval
    work: Cell
    cell: Cell


@dataclass(frozen=True)
class Step:
    """Compute one row of `writes` ("output" or a row buffer's name) by pass number `stage`."""

    name: str
    stage: int
    writes: str
    value: Tail


@dataclass(frozen=True)
class Plan:
    """`word` is the one cell type of scratch.

    `top` and `left` are the row and column of the least offsets that any tap reads, `span` the
    number of rows and columns from there to the greatest: what a padded row has to cover.
    `tap_rows` are the rows of that span, from 0, which some tap reads. `taps` is the type of
    the coefficients that are given at run time, if they are.
    """

    name: str
    word: Cell
    top: int
    left: int
    span: tuple[int, int]
    tap_rows: tuple[int, ...]
    load: Load
    rows: tuple[Rows, ...]
    steps: tuple[Step, ...]
    taps: Cell | None = None

    @property
    def loads_what_is_tapped(self) -> bool:
        """Return whether every row that is loaded is one that some tap reads."""
        return len(self.tap_rows) == self.span[0]
