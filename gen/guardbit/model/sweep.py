"""A sweep: the grid of words that is gone through, and what each of its points comes to."""

from dataclasses import dataclass, fields
from fractions import Fraction
from math import prod
from typing import Any

from guardbit.model.enums import FitRule, Rounding
from guardbit.model.finding import Finding
from guardbit.model.spec import Auto

ERROR_PLACES = 9
"""Decimals of the errors and responses of a sweep; they are rounded outward to these."""


@dataclass(frozen=True)
class Point:
    """One choice of words; None: as the spec says."""

    coefficient_bits: int | None
    coefficient_frac: int | Auto | None
    intermediate_bits: int | None
    intermediate_frac: int | None
    rounding: Rounding | None
    fit: FitRule | None


@dataclass(frozen=True)
class Grid:
    """Values for each word, all of which are combined; none: the spec's own.

    A number for the coefficients' frac holds for column and row alike. `rounding` is that of
    every requantiser. `response`: the deviation of the frequency response is asked for too.
    """

    coefficient_bits: tuple[int, ...] = ()
    coefficient_frac: tuple[int | Auto, ...] = ()
    intermediate_bits: tuple[int, ...] = ()
    intermediate_frac: tuple[int, ...] = ()
    rounding: tuple[Rounding, ...] = ()
    fit: tuple[FitRule, ...] = ()
    response: bool = False

    def __len__(self) -> int:
        return prod(len(axis) for axis in self.axes)

    @property
    def axes(self) -> tuple[tuple[Any, ...], ...]:
        """Return the values of each axis; None alone where the spec's own is taken."""
        return tuple(getattr(self, name) or (None,) for name in AXES)

    def point(self, index: int) -> Point:
        """Return a point by its number from 0; the last axis varies fastest."""
        values = []
        for axis in reversed(self.axes):
            index, at = divmod(index, len(axis))
            values.append(axis[at])
        return Point(*reversed(values))


AXES = tuple(each.name for each in fields(Point))


@dataclass(frozen=True)
class Cost:
    """What a point comes to.

    `bits`: the words of every pass added up: a coefficient and an accumulator for each pass,
    and the intermediate between two (`intermediate_bits`, else 0). `low`..`high` bounds output
    code minus ideal in LSB for every legal input, `error` is the greater magnitude.
    """

    coefficient_bits: int
    coefficient_frac: tuple[int, ...]
    intermediate_bits: int
    intermediate_frac: int | None
    accumulators: tuple[int, ...]
    bits: int
    low: Fraction
    high: Fraction
    error: Fraction
    response: Fraction | None


@dataclass(frozen=True)
class Row:
    """A point by its number in the grid, with its cost, or why the contract refuses it."""

    index: int
    point: Point
    cost: Cost | None
    refused: Finding | None


@dataclass(frozen=True)
class Sweep:
    """All rows in the grid's order; `front` are the numbers of the points of the Pareto front.

    A point is on it if no other has as few bits and as little error, and less of one of them.
    """

    name: str
    spec_digest: str
    grid: Grid
    rows: tuple[Row, ...]
    front: tuple[int, ...]
