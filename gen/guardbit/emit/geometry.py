"""Sizes of a plan, as constants and C expressions for the templates."""

from dataclasses import dataclass

from guardbit.emit import expressions as c
from guardbit.model.enums import Extent
from guardbit.model.filter import Axis, Filter
from guardbit.model.plan import Plan

# C99 promises no more than this of size_t (7.18.3)
_SIZE_LIMIT = 65535


@dataclass(frozen=True)
class AxisText:
    """One direction: extended positions run from `first` to size - 1 + `after`.

    `extra` is how many more of them there are than pixels; `is_illegal` tests a size, and
    `outputs` is the number of output positions, both C expressions.
    """

    size: str
    first: int
    extra: int
    after: int
    spacing: int
    limits: tuple[int, int]
    is_illegal: str
    outputs: str

    @property
    def outputs_as_size(self) -> str:
        """Return the number of output positions as a size_t."""
        plain = self.outputs == f"(uint32_t){self.size}"
        return self.size if plain else f"(size_t){c.grouped(self.outputs)}"


@dataclass(frozen=True)
class GeometryText:
    """Both directions.

    `units` is the scratch elements per extended column, `wide` whether the size of the
    output may be more than size_t holds somewhere, `may_be_empty` whether there may be none.
    """

    rows: AxisText
    columns: AxisText
    units: int
    scratch_len: str
    wide: bool
    may_be_empty: bool


def geometry_text(f: Filter, plan: Plan) -> GeometryText:
    """Return the geometry of a plan as the templates print it."""
    g = f.geometry
    columns = _axis("width", g.columns, g.extent, plan.left, plan.span[1])
    units = sum(r.depth for r in plan.rows) * g.channels
    axes = (g.rows, g.columns)
    return GeometryText(
        rows=_axis("height", g.rows, g.extent, plan.top, plan.span[0]),
        columns=columns,
        units=units,
        scratch_len=_scratch_len(columns, units),
        wide=max(a.sizes[1] + _growth(a, g.extent) for a in axes) > _SIZE_LIMIT,
        may_be_empty=g.columns.sizes[0] + _growth(g.columns, g.extent) <= g.columns.phase,
    )


def _growth(axis: Axis, extent: Extent) -> int:
    """Return how many more positions than pixels an extent has."""
    box = axis.greatest - axis.least
    return {Extent.SAME: 0, Extent.FULL: box, Extent.VALID: -box}[extent]


def _first_position(axis: Axis, extent: Extent) -> int:
    return {Extent.SAME: 0, Extent.FULL: axis.least, Extent.VALID: axis.greatest}[extent]


def _axis(size: str, axis: Axis, extent: Extent, least_offset: int, span: int) -> AxisText:
    first = _first_position(axis, extent) + least_offset
    extra = _growth(axis, extent) + span - 1
    return AxisText(
        size=size,
        first=first,
        extra=extra,
        after=first + extra,
        spacing=axis.spacing,
        limits=axis.sizes,
        is_illegal=_illegal(size, axis.sizes),
        outputs=_outputs(size, axis, extent),
    )


def _illegal(size: str, limits: tuple[int, int]) -> str:
    """Return the test of a size, one comparison: below the least it wraps round.

    The constant is unsigned, since size_t may be narrower than int.
    """
    least, greatest = limits
    if least == greatest:
        return f"{size} != {least}"
    return f"{size} - {least}u > {greatest - least}u"


def _outputs(size: str, axis: Axis, extent: Extent) -> str:
    """Return ceil((size + growth - phase) / step), 0 if that is negative."""
    more = _growth(axis, extent)
    if axis.sizes[1] + more <= axis.phase:
        return "0"
    ahead = axis.step - 1 - axis.phase
    wide = f"(uint32_t){size}"
    if axis.sizes[0] + more >= 0:
        length = c.plus(wide, more + ahead)
    else:
        length = f"({size} > {-more} ? {c.plus(wide, more)} : 0)"
        length = c.plus(length, ahead)
    return length if axis.step == 1 else f"{c.grouped(length)} / {axis.step}"


def _scratch_len(columns: AxisText, units: int) -> str:
    """Return the macro body: constant for a constant width, never less than 1."""
    each = f"(size_t){units} * " if units > 1 else ""
    if columns.extra >= 0:
        return f"({each}{c.grouped(c.plus('(size_t)(width)', columns.extra))})"
    less = -columns.extra
    return f"((width) > {less} ? {each}((size_t)(width) - {less}) : (size_t)1)"
