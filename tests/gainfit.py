"""The coefficient fit `gain` by dynamic programming over partial sums, for the oracle alone.

Integers of a given sum, least sum of |integer - ideal|; then least sum of squares of those
differences; then lexicographically smallest in raster order. Vectors with all of the ideal's
symmetry (flips, transpose, and what they compose to) come first.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass
from fractions import Fraction

Matrix = list[list[Fraction]]
Cell = tuple[int, int]
WIDEST = 600


class ContradictionError(ValueError):
    """A spec that the contract refuses."""


@dataclass(frozen=True)
class Orbit:
    """Cells tied by symmetry, each with its sign; the first in raster order has sign +1."""

    cells: tuple[tuple[Cell, int], ...]
    ideal: Fraction
    least: int
    greatest: int

    @property
    def weight(self) -> int:
        """What the sum of all taps gains when the orbit's value grows by one."""
        return sum(sign for _, sign in self.cells)

    @property
    def centre(self) -> int:
        """The legal value nearest to the ideal."""
        return min(max(nearest_even(self.ideal), self.least), self.greatest)


def nearest_even(value: Fraction) -> int:
    """The nearest integer, ties to even."""
    below = value.numerator // value.denominator
    rest = value - below
    return below + (rest > Fraction(1, 2) or (rest == Fraction(1, 2) and below % 2 == 1))


def symmetries(ideal: Matrix) -> Iterator[tuple[dict[Cell, Cell], int]]:
    """The flips and transpositions (with sign) that map the ideal to plus or minus itself."""
    rows, columns = len(ideal), len(ideal[0])
    cells = [(i, j) for i in range(rows) for j in range(columns)]
    for transposed in (False, True) if rows == columns else (False,):
        for upright in (False, True):
            for sideways in (False, True):
                moved = {}
                for i, j in cells:
                    to = (rows - 1 - i if upright else i, columns - 1 - j if sideways else j)
                    moved[i, j] = to[::-1] if transposed else to
                for sign in (1, -1):
                    if all(
                        ideal[i][j] == sign * ideal[moved[i, j][0]][moved[i, j][1]]
                        for i, j in cells
                    ):
                        yield moved, sign


def symmetric_orbits(ideal: Matrix, low: int, high: int) -> list[Orbit]:
    """The orbits of the ideal's symmetries, by first cell in raster order."""
    known = list(symmetries(ideal))
    seen: set[Cell] = set()
    orbits = []
    for i, row in enumerate(ideal):
        for j, tap in enumerate(row):
            if (i, j) in seen:
                continue
            images = {(moved[i, j], sign) for moved, sign in known}
            cells = {cell for cell, _ in images}
            seen |= cells
            signs = {sign for _, sign in images}
            least, greatest = low, high
            if len(images) > len(cells):
                least, greatest = max(low, 0), min(high, 0)
                images = {(cell, 1) for cell in cells}
            elif -1 in signs:
                least, greatest = max(low, -high), min(high, -low)
            orbits.append(Orbit(tuple(sorted(images)), tap, least, greatest))
    return orbits


def single_orbits(ideal: Matrix, low: int, high: int) -> list[Orbit]:
    """Each cell on its own."""
    return [
        Orbit((((i, j), 1),), tap, low, high)
        for i, row in enumerate(ideal)
        for j, tap in enumerate(row)
    ]


Choice = tuple[int, int, tuple[int, ...]]


def best_within(orbits: list[Orbit], target: int, window: int, unit: int) -> Choice | None:
    """The best values at most `window` from each centre: (cost, squares, values), in 1/unit."""
    best: dict[int, Choice] = {0: (0, 0, ())}
    for orbit in orbits:
        ideal = int(orbit.ideal * unit)
        lowest = max(orbit.least, orbit.centre - window)
        highest = min(orbit.greatest, orbit.centre + window)
        grown: dict[int, Choice] = {}
        for value in range(lowest, highest + 1):
            off, many = abs(value * unit - ideal), len(orbit.cells)
            for total, (cost, squares, values) in best.items():
                key = total + orbit.weight * value
                choice = cost + many * off, squares + many * off * off, (*values, value)
                if key not in grown or choice < grown[key]:
                    grown[key] = choice
        best = grown
    return best.get(target)


def search(orbits: list[Orbit], target: int) -> tuple[int, ...] | None:
    """The values of the best fit, or None where no legal values have that sum."""
    ends = [[orbit.weight * end for end in (orbit.least, orbit.greatest)] for orbit in orbits]
    step = math.gcd(*(orbit.weight for orbit in orbits))
    if any(orbit.least > orbit.greatest for orbit in orbits):
        return None
    if not sum(map(min, ends)) <= target <= sum(map(max, ends)) or target % (step or 1):
        return None
    if not step and target:
        return None
    unit = math.lcm(*(orbit.ideal.denominator for orbit in orbits))
    floor = sum(len(o.cells) * abs(o.centre - o.ideal) for o in orbits) * unit
    window = 2
    while True:
        found = best_within(orbits, target, window, unit)
        # One step further from a centre costs at least 1, after the first: beyond `enough`
        # nothing can be as cheap as what was found.
        enough = window * 3 if found is None else int(found[0] - floor) // unit + 2
        if found is not None and window >= enough:
            return found[2]
        widest = max(max(o.greatest - o.centre, o.centre - o.least) for o in orbits)
        if window >= widest:
            return None if found is None else found[2]
        if enough > WIDEST:
            raise NotImplementedError("too long a search for the oracle")
        window = enough


def gain(ideal: Matrix, low: int, high: int) -> list[list[int]]:
    """Integer taps in low..high whose sum is the ideal's, rounded; or ContradictionError."""
    target = nearest_even(sum((tap for row in ideal for tap in row), Fraction(0)))
    for orbits in (symmetric_orbits(ideal, low, high), single_orbits(ideal, low, high)):
        values = search(orbits, target)
        if values is not None:
            taps = [[0] * len(row) for row in ideal]
            for orbit, value in zip(orbits, values, strict=True):
                for (i, j), sign in orbit.cells:
                    taps[i][j] = sign * value
            return taps
    raise ContradictionError(f"no taps in {low}..{high} have the sum {target}")
