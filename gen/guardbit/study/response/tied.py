"""A matrix of integers to be found, as one unknown for each orbit of the ideal's symmetry."""

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction
from functools import cached_property
from math import lcm

from guardbit.fit.symmetry import Orbit, orbits
from guardbit.model.frequency import Integers, Peak
from guardbit.model.spec import Matrix
from guardbit.sizing.peak import peak


@dataclass(frozen=True)
class Tied:
    """Integers within low..high that have every symmetry and antisymmetry of the targets.

    `targets` are the ideal taps times 2**frac, so that everything counts in integer steps.
    `orbits` are the free ones: where symmetry forces zeros, target and integer are zero.
    """

    targets: Matrix
    low: int
    high: int
    orbits: tuple[Orbit, ...]

    @property
    def shape(self) -> tuple[int, int]:
        """Return rows and columns."""
        return len(self.targets), len(self.targets[0])

    @cached_property
    def firsts(self) -> tuple[Fraction, ...]:
        """Return the target at each orbit's first position."""
        return tuple(self.targets[y][x] for (y, x), *_ in (o.positions for o in self.orbits))

    @property
    def weights(self) -> tuple[int, ...]:
        """Return how many taps each orbit ties together."""
        return tuple(len(orbit.positions) for orbit in self.orbits)

    def limits(self, j: int) -> tuple[int, int]:
        """Return the least and the greatest value of unknown j."""
        if -1 in self.orbits[j].signs:
            most = min(self.high, -self.low)
            return -most, most
        return self.low, self.high

    def sum_limits(self, j: int) -> tuple[int, int]:
        """Return the same for the sum, with signs, of integers that are not tied."""
        plus, minus = (self.orbits[j].signs.count(sign) for sign in (1, -1))
        return plus * self.low - minus * self.high, plus * self.high - minus * self.low

    def clamped(self, j: int, value: int) -> int:
        """Return the legal value of unknown j that is nearest to `value`."""
        low, high = self.limits(j)
        return min(max(value, low), high)

    @cached_property
    def parity(self) -> int:
        """Return 1 if a half turn keeps the targets, -1 if it negates them, else 0.

        The response about the centre of the box is then real, imaginary, or neither.
        """
        flat = [tap for row in self.targets for tap in row]
        return next((s for s in (1, -1) if flat == [s * tap for tap in reversed(flat)]), 0)


def tied(targets: Matrix, low: int, high: int) -> Tied:
    """Return the unknowns of a matrix. `low` <= 0 <= `high`."""
    unit = lcm(*(tap.denominator for row in targets for tap in row))
    whole = tuple(tuple(int(tap * unit) for tap in row) for row in targets)
    free = tuple(orbit for orbit in orbits(whole) if not orbit.forced)
    return Tied(targets, low, high, free)


def spread(t: Tied, values: Sequence[int]) -> Integers:
    """Return the matrix in which every orbit has its value, with its signs."""
    placed = {
        place: sign * value
        for orbit, value in zip(t.orbits, values, strict=True)
        for place, sign in zip(orbit.positions, orbit.signs, strict=True)
    }
    rows, columns = t.shape
    return tuple(tuple(placed.get((y, x), 0) for x in range(columns)) for y in range(rows))


def gathered(t: Tied, integers: Integers) -> tuple[int, ...] | None:
    """Return the unknowns of a matrix, or None if it lacks the symmetry or leaves the range."""
    values = tuple(integers[y][x] for (y, x), *_ in (o.positions for o in t.orbits))
    legal = all(t.clamped(j, value) == value for j, value in enumerate(values))
    return values if legal and spread(t, values) == integers else None


def deviation(t: Tied, values: Sequence[int]) -> Peak:
    """Return the largest |response of (integers - targets)|, in integer steps."""
    integers = spread(t, values)
    return peak(
        {
            (y, x): integer - target
            for y, (line, targets) in enumerate(zip(integers, t.targets, strict=True))
            for x, (integer, target) in enumerate(zip(line, targets, strict=True))
        }
    )
