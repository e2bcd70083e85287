"""Sizes and border reads of a plan, as constants and C expressions for the templates."""

from dataclasses import dataclass

from guardbit.emit import expressions as c
from guardbit.model.enums import BorderMode, Extent, Grid
from guardbit.model.filter import Axis, Filter
from guardbit.model.plan import Plan

# C99 promises no more than this of size_t
_SIZE_LIMIT = 65535


@dataclass(frozen=True)
class AxisText:
    """One direction: extended positions run from `first` to size - 1 + `after`.

    `extra` is how many more of them there are than pixels; `is_legal` tests a size, and
    `outputs` is the number of output positions, both C expressions.
    """

    size: str
    first: int
    extra: int
    after: int
    spacing: int
    is_legal: str
    limits: tuple[int, int]
    outputs: str


@dataclass(frozen=True)
class GeometryText:
    """Both directions, and what the border has to answer for."""

    rows: AxisText
    columns: AxisText
    units: int
    scratch_len: str
    mode: BorderMode
    constant: int
    site: bool
    below: bool
    above: bool
    mapped: bool
    needs_length: bool
    lacks_sites: bool
    wide: bool


def growth(axis: Axis, extent: Extent) -> int:
    """Return how many more positions than pixels an extent has."""
    box = axis.greatest - axis.least
    return {Extent.SAME: 0, Extent.FULL: box, Extent.VALID: -box}[extent]


def first_position(axis: Axis, extent: Extent) -> int:
    """Return the first position of an extent."""
    return {Extent.SAME: 0, Extent.FULL: axis.least, Extent.VALID: axis.greatest}[extent]


def _legal(size: str, limits: tuple[int, int]) -> str:
    """Return the test of a size; below the least it wraps round to more than the difference."""
    least, greatest = limits
    if least == greatest:
        return f"{size} == {least}"
    return f"{size} - {least} <= {greatest - least}"


def _outputs(size: str, axis: Axis, extent: Extent) -> str:
    more = growth(axis, extent)
    if more < 0:
        length = f"({size} > {-more} ? (uint32_t){size} - {-more} : 0)"
    else:
        length = c.plus(f"(uint32_t){size}", more)
    if axis.step == 1:
        return length
    ahead = axis.step - 1 - axis.phase
    if more < 0 or not ahead:
        return f"{c.grouped(c.plus(length, ahead)) if ahead else c.grouped(length)} / {axis.step}"
    return f"({c.plus(f'(uint32_t){size}', more + ahead)}) / {axis.step}"


def _axis(size: str, axis: Axis, extent: Extent, least_offset: int, span: int) -> AxisText:
    first = first_position(axis, extent) + least_offset
    extra = growth(axis, extent) + span - 1
    return AxisText(
        size=size,
        first=first,
        extra=extra,
        after=first + extra,
        spacing=axis.spacing,
        is_legal=_legal(size, axis.sizes),
        limits=axis.sizes,
        outputs=_outputs(size, axis, extent),
    )


def _scratch_len(columns: AxisText, units: int) -> str:
    """Return the macro body: constant for a constant width, never less than 1."""
    if columns.extra >= 0:
        return f"((size_t){units} * {c.grouped(c.plus('(size_t)(width)', columns.extra))})"
    less = -columns.extra
    return f"((width) > {less} ? (size_t){units} * ((size_t)(width) - {less}) : (size_t)1)"


def geometry_text(f: Filter, plan: Plan) -> GeometryText:
    """Return the geometry of a plan as the templates print it."""
    g = f.geometry
    rows = _axis("height", g.rows, g.extent, plan.top, plan.span[0])
    columns = _axis("width", g.columns, g.extent, plan.left, plan.span[1])
    units = sum(r.depth for r in plan.rows) * g.channels
    below = rows.first < 0 or columns.first < 0
    above = rows.after > 0 or columns.after > 0
    constant = f.border.mode is BorderMode.CONSTANT
    spaced = (g.rows.spacing, g.columns.spacing) != (1, 1)
    site = f.border.grid is Grid.SITE and not constant and spaced
    largest = max(a.sizes[1] + max(growth(a, g.extent), 0) for a in (g.rows, g.columns))
    return GeometryText(
        rows=rows,
        columns=columns,
        units=units,
        scratch_len=_scratch_len(columns, units),
        mode=f.border.mode,
        constant=plan.load.constant,
        site=site,
        below=below,
        above=above,
        mapped=(below or above) and not constant,
        needs_length=above or site or f.border.mode is not BorderMode.REPLICATE,
        lacks_sites=any(a.sizes[0] < a.spacing for a in (g.rows, g.columns)),
        wide=largest > _SIZE_LIMIT,
    )
