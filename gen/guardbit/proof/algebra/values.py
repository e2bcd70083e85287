"""What a C object can hold while the code is executed on symbols."""

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import TypeAlias

from guardbit.proof.algebra.pieces import Pieces


class InexpressibleError(Exception):
    """The algebra has no value for this; `reason` says why."""

    def __init__(self, reason: str) -> None:
        super().__init__(reason)
        self.reason = reason


@dataclass(frozen=True, eq=False, slots=True)
class Base:
    """The form that a table is a function of: coefficients without a common factor, no constant.

    The first coefficient is positive. `low`..`high` is what it can be; functions of it are worked
    out on `domain`, which may be more.
    """

    number: int
    terms: Mapping[int, int]
    low: int
    high: int
    domain: tuple[int, int]


@dataclass(frozen=True, eq=False, slots=True)
class Table:
    """A function of one base; low..high is its range over what the base can be."""

    base: Base
    function: Pieces
    low: int
    high: int


@dataclass(eq=False, slots=True)
class Form:
    """constant + the sum of coefficient * variable over `terms`. Never changed once made.

    With `modulus` 0 the value is that number. With k > 0 it is only known to be congruent to it
    modulo 2**k. In any case it lies in low..high for every input. `based` remembers the base of
    which the terms are a multiple, and the factor; `table` the form as a table. (Not frozen: that
    makes it three times as slow to make, and forms are made by the million.)
    """

    terms: Mapping[int, int]
    constant: int
    modulus: int
    low: int
    high: int
    based: tuple[Base, int] | None = field(default=None, repr=False)
    table: Table | None = field(default=None, repr=False)


Value: TypeAlias = int | Form | Table
