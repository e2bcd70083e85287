"""The `gain` fit: integers of an exact sum, as near to the ideal taps as that allows."""

from collections.abc import Sequence
from fractions import Fraction
from math import lcm

from guardbit.fit.apportion import Slots, apportion
from guardbit.fit.nearest import FRACS, Integers, register, scaled
from guardbit.fit.symmetry import Orbit, orbits, single
from guardbit.model.spec import Matrix

# An unlimited fit stays within 9.5 of each target: the threshold of `apportion` lies between
# -3/2 and 1/2, and a value leaves it by less than one largest weight.
_REACH = 10


def gain_sum(targets: Matrix) -> int:
    """Return the sum that the integers must have: the targets' sum, ties to even."""
    return round(sum((tap for row in targets for tap in row), Fraction(0)))


def gain(targets: Matrix, low: int, high: int) -> Integers | None:
    """Return integers in low..high of sum `gain_sum(targets)`, or None if there are none.

    Of those with the full symmetry and antisymmetry of the targets about the centre of their
    box, if there are any, else of all: least sum of |integer - target|, then least sum of
    squares of the same, then lexicographically smallest in raster order. `low` <= 0 <= `high`.
    """
    unit = lcm(*(tap.denominator for row in targets for tap in row))
    whole = tuple(tuple(int(tap * unit) for tap in row) for row in targets)
    total = gain_sum(targets)
    groups = orbits(whole)
    if any(orbit.forced or orbit.balance == 0 for orbit in groups):
        return _opposed(whole, unit, groups, min(high, -low))
    found = _balanced(whole, unit, groups, (low, high), total)
    if found is None and len(groups) < len(whole) * len(whole[0]):
        found = _balanced(whole, unit, single(len(whole), len(whole[0])), (low, high), total)
    return found


def _balanced(
    whole: Integers, unit: int, groups: Sequence[Orbit], limits: tuple[int, int], total: int
) -> Integers | None:
    """Return the fit where tied taps are equal."""
    targets = tuple(_first(whole, orbit) for orbit in groups)
    weights = tuple(orbit.balance for orbit in groups)
    values = apportion(Slots(targets, weights, unit, *limits), total)
    return None if values is None else _spread(whole, groups, values)


def _opposed(whole: Integers, unit: int, groups: Sequence[Orbit], most: int) -> Integers:
    """Return the fit where each orbit holds as many taps of one sign as of the other.

    Targets and integers then sum to zero whatever the values, so each orbit is rounded
    alone; of two equally near values the smaller at its first position comes first.
    """
    values = [
        0 if orbit.forced else min(max(_half_down(_first(whole, orbit), unit), -most), most)
        for orbit in groups
    ]
    return _spread(whole, groups, values)


def _half_down(value: int, unit: int) -> int:
    """Return value / unit rounded to the nearest integer, a tie to the smaller."""
    return -((unit - 2 * value) // (2 * unit))


def _first(whole: Integers, orbit: Orbit) -> int:
    y, x = orbit.positions[0]
    return whole[y][x]


def _spread(whole: Integers, groups: Sequence[Orbit], values: Sequence[int]) -> Integers:
    """Return the matrix in which every orbit has its value, with its signs."""
    placed = {
        position: sign * value
        for orbit, value in zip(groups, values, strict=True)
        for position, sign in zip(orbit.positions, orbit.signs, strict=True)
    }
    return tuple(tuple(placed[y, x] for x in range(len(row))) for y, row in enumerate(whole))


def largest_gain_frac(ideal: Matrix, bits: int, signed: bool) -> int | None:
    """Return the largest frac in -64..64 at which the fit without limits fits the register.

    The limits must not bend the fit, or "auto" would pick a frac far too large and clamp the
    large taps; at the frac returned they change nothing.
    """
    low, high = register(bits, signed)
    taps = [tap for row in ideal for tap in row]
    least, greatest = min(taps), max(taps)
    for frac in reversed(FRACS):
        factor = Fraction(2) ** frac
        if least * factor < low - _REACH or greatest * factor > high + _REACH:
            continue
        fitted = _unlimited(scaled(ideal, frac))
        if all(low <= tap <= high for row in fitted for tap in row):
            return frac
    return None


def _unlimited(targets: Matrix) -> Integers:
    most = max(abs(round(tap)) for row in targets for tap in row) + _REACH
    fitted = gain(targets, -most, most)
    if fitted is None:
        raise AssertionError("taps of weight 1 reach every sum")
    return fitted
