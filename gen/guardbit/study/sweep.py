"""What the points of a sweep come to, each on its own and in any order."""

from collections.abc import Sequence
from dataclasses import dataclass, replace
from fractions import Fraction
from math import ceil, floor

from guardbit.fit.resolve import resolve
from guardbit.model.enums import FitRule, Scale
from guardbit.model.filter import Filter
from guardbit.model.finding import Finding, Place, SpecError, finding
from guardbit.model.sizing import Sizing
from guardbit.model.spec import Auto, Spec
from guardbit.model.sweep import AXES, ERROR_PLACES, Cost, Grid, Point, Row, Sweep
from guardbit.sizing.analyse import analyse, unmet
from guardbit.sizing.frequency import frequency
from guardbit.study.goals.trials import coefficient_bits, greatest_error

MOST_POINTS = 1_000_000

_FITTED = ("coefficient_frac", "fit")
_COEFFICIENT = ("coefficient_bits", *_FITTED)
_BETWEEN = ("intermediate_bits", "intermediate_frac")


def check_grid(spec: Spec, grid: Grid) -> None:
    """Raise SpecError for axes that change nothing, open words without one, too many points."""
    found = [*_idle_axes(spec, grid), *_missing_axes(spec, grid)]
    if len(grid) > MOST_POINTS:
        found.append(finding("sweep-too-large", points=len(grid), most=MOST_POINTS))
    if found:
        raise SpecError(*found)


def _idle_axes(spec: Spec, grid: Grid) -> list[Finding]:
    """Return findings on axes that would change nothing."""
    place, found = Place(spec.path), []
    for axis in AXES:
        if not getattr(grid, axis):
            continue
        if axis in _BETWEEN and spec.intermediate is None:
            found.append(finding("sweep-one-pass", place, option=_option(axis)))
        elif axis in _COEFFICIENT and spec.coefficient.pinned is not None:
            found.append(finding("sweep-pinned", place, option=_option(axis)))
        elif axis in _FITTED and spec.coefficient.scale is Scale.EXACT:
            found.append(finding("sweep-exact", place, option=_option(axis)))
    return found


def _missing_axes(spec: Spec, grid: Grid) -> list[Finding]:
    """Return findings on words that neither the spec nor the grid settles."""
    found = []
    table = spec.intermediate
    open_keys = {
        "intermediate_bits": table is not None and isinstance(table.bits, Auto),
        "intermediate_frac": table is not None and isinstance(table.frac, Auto),
    }
    for axis, is_open in open_keys.items():
        if is_open and not getattr(grid, axis):
            key = axis.replace("_", ".")
            where = Place(spec.path, spec.lines.get(key), key)
            found.append(finding("sweep-open", where, option=_option(axis)))
    searched = spec.coefficient.fit is FitRule.RESPONSE and spec.coefficient.pinned is None
    if searched and not grid.fit:
        key = "coefficient.fit"
        found.append(finding("sweep-response", Place(spec.path, spec.lines.get(key), key)))
    return found


def _option(axis: str) -> str:
    return "--" + {"coefficient_frac": "frac"}.get(axis, axis).replace("_", "-")


@dataclass(frozen=True)
class Batch:
    """Rows that one call made, and the version that made them."""

    tool: str
    rows: tuple[Row, ...]


@dataclass(frozen=True)
class Evaluation:
    """Points of one sweep evaluated, wherever that is done: sent once, then given numbers."""

    tool: str
    spec: Spec
    grid: Grid

    def __call__(self, numbers: Sequence[int]) -> Batch:
        """Return the rows of the points with these numbers."""
        return Batch(self.tool, tuple(self.row(index) for index in numbers))

    def row(self, index: int) -> Row:
        """Return what a point comes to, or why it is refused."""
        point = self.grid.point(index)
        try:
            made = at_point(self.spec, point)
            sizing = analyse(resolve(made))
            found = unmet(sizing)
        except SpecError as error:
            found = error.findings
        if found:
            return Row(index, point, None, replace(found[0], place=Place(key=found[0].place.key)))
        return Row(index, point, cost_of(made, sizing, response=self.grid.response), None)


def at_point(spec: Spec, point: Point) -> Spec:
    """Return the spec with a point's words put in, and without its goal."""
    table, between, out = spec.coefficient, spec.intermediate, spec.output
    if point.coefficient_bits is not None:
        table = replace(table, bits=point.coefficient_bits)
    if point.coefficient_frac is not None:
        table = replace(table, frac=(point.coefficient_frac,) * len(table.frac))
    if point.fit is not None:
        table = replace(table, fit=point.fit)
    if between is not None:
        between = replace(
            between,
            bits=between.bits if point.intermediate_bits is None else point.intermediate_bits,
            frac=between.frac if point.intermediate_frac is None else point.intermediate_frac,
            rounding=point.rounding or between.rounding,
        )
    return replace(
        spec,
        coefficient=table,
        intermediate=between,
        output=replace(out, rounding=point.rounding or out.rounding),
        goal=None,
    )


def cost_of(spec: Spec, sizing: Sizing, *, response: bool) -> Cost:
    """Return what a spec with everything settled comes to."""
    f, error = sizing.filter, sizing.error
    width = coefficient_bits(spec, sizing)
    middle = f.passes[0].requantiser.to if len(f.passes) == 2 else None
    accumulators = tuple(register.bits for register in sizing.registers)
    between = middle.bits if middle is not None else 0
    low, high = error.overall or (error.low, error.high)
    return Cost(
        coefficient_bits=width,
        coefficient_frac=_fracs(f),
        intermediate_bits=between,
        intermediate_frac=middle.frac if middle is not None else None,
        accumulators=accumulators,
        bits=len(f.passes) * width + sum(accumulators) + between,
        low=_down(low),
        high=_up(high),
        error=_up(greatest_error(error)),
        response=_up(frequency(f).deviation) if response else None,
    )


def _fracs(f: Filter) -> tuple[int, ...]:
    """Return the fracs of the kernels: of the column's and the row's where each has its pass."""
    fracs = tuple(p.kernel.frac for p in f.passes)
    vertical = all(term.dx == 0 for term in f.passes[0].kernel.terms)
    return fracs if vertical else fracs[::-1]


def _up(value: Fraction) -> Fraction:
    return Fraction(ceil(value * 10**ERROR_PLACES), 10**ERROR_PLACES)


def _down(value: Fraction) -> Fraction:
    return Fraction(floor(value * 10**ERROR_PLACES), 10**ERROR_PLACES)


def swept(spec: Spec, grid: Grid, rows: Sequence[Row]) -> Sweep:
    """Return the sweep of rows that came in any order, one for each point."""
    ordered = tuple(sorted(rows, key=lambda row: row.index))
    assert [row.index for row in ordered] == list(range(len(grid)))
    return Sweep(spec.filter.name, spec.digest, grid, ordered, front(ordered))


def front(rows: Sequence[Row]) -> tuple[int, ...]:
    """Return the numbers of the rows that no other beats: in bits and error, both the least.

    Rows that are alike in both are all on the front.
    """
    costs = sorted(
        (row.cost.bits, row.cost.error, row.index) for row in rows if row.cost is not None
    )
    found: list[int] = []
    bits, least = -1, None
    for each, error, index in costs:
        if least is None or error < least or (error == least and each == bits):
            found.append(index)
            bits, least = each, error
    return tuple(sorted(found))
