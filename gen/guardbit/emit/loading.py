"""Loading one row of the source, extended by the border, into scratch."""

from dataclasses import dataclass

from guardbit.emit import expressions as c
from guardbit.emit.geometry import AxisText, GeometryText
from guardbit.model.enums import BorderMode, Grid
from guardbit.model.filter import Filter
from guardbit.model.plan import Cell, Load, Plan


@dataclass(frozen=True)
class IndexText:
    """The index map of the border.

    `mode` as the user spells it; `below`, `above`: positions on that side are asked for.
    `site`: the map acts within sublattices, of which small images may lack some if `lacks`.
    `folds_length`: the map depends on how long the image is; `needs_length`: what calls it does.
    """

    mode: str
    folds_length: bool
    needs_length: bool
    site: bool
    below: bool
    above: bool
    lacks: bool


@dataclass(frozen=True)
class ConversionText:
    """The function that turns a code into the number that is summed."""

    purpose: str
    low: str | None
    high: str | None
    value: str


@dataclass(frozen=True)
class FillText:
    """row[at] = `value` while x < `end`, from `start` or where the last one ended.

    A single element has no `end`.
    """

    at: str
    start: str
    end: str
    value: str


@dataclass(frozen=True)
class LoadText:
    """The function that loads extended row e.

    `line` is the C expression of the source row, with `y` to be computed first unless that is
    empty. With a constant border a row for which `outside` holds is filled with `constant`.
    `fills` make up the row. `reads` is False if no output is near enough to the image for that.
    """

    function: str
    extent: str
    needs_height: bool
    y: str
    line: str
    outside: str
    constant: str
    columns: str
    needs_columns: bool
    reads: bool
    conversion: ConversionText | None
    fills: tuple[FillText, ...]


def index_text(f: Filter, g: GeometryText) -> IndexText | None:
    """Return the index map that a filter needs; None: every read is inside or a constant."""
    mode = f.border.mode
    site = _is_site(f)
    axes = [g.rows, g.columns] if site or mode is not BorderMode.REPLICATE else [g.rows]
    below = any(axis.first < 0 for axis in axes)
    above = any(axis.after > 0 for axis in axes)
    if mode is BorderMode.CONSTANT or not (below or above):
        return None
    lacks = site and any(axis.limits[0] < axis.spacing for axis in axes)
    folds = above or mode is not BorderMode.REPLICATE
    return IndexText(mode.value, folds, folds or lacks, site, below, above, lacks)


def load_text(f: Filter, plan: Plan, g: GeometryText) -> LoadText:
    """Return the text of loading."""
    load = _Loading(f, plan, g)
    leaves = _outside("y", "height", g.rows)
    constant = f.border.mode is BorderMode.CONSTANT
    fills = load.fills()
    reads = any("line[" in fill.value for fill in fills)
    return LoadText(
        function=f"{f.name}_load" if plan.rows[0].name == "ring" else f"{f.name}_extend",
        extent=_extent(g, bool(leaves) or g.columns.first < 0 or g.columns.after > 0),
        needs_height=bool(leaves) and load.needs_length(g.rows),
        y=load.row_index() if leaves else "",
        line="y" if leaves else c.grouped(c.plus("e", g.rows.first)),
        outside=" || ".join(leaves) if constant else "",
        constant=c.number(plan.load.constant),
        columns=load.elements(c.plus("(int32_t)width", g.columns.extra)),
        needs_columns=bool(leaves and constant) or any("columns" in x.end for x in fills),
        reads=reads,
        conversion=_conversion(f, plan) if reads else None,
        fills=fills,
    )


def _is_site(f: Filter) -> bool:
    """Return whether the index map acts within sublattices; a constant needs no map."""
    spacings = (f.geometry.rows.spacing, f.geometry.columns.spacing)
    site = f.border.grid is Grid.SITE and f.border.mode is not BorderMode.CONSTANT
    return site and spacings != (1, 1)


def _outside(at: str, size: str, axis: AxisText) -> list[str]:
    below = [f"{at} < 0"] if axis.first < 0 else []
    return below + ([f"{at} >= (int32_t){size}"] if axis.after > 0 else [])


def _extent(g: GeometryText, leaves: bool) -> str:
    row = c.plus("e", g.rows.first)
    last = c.plus("width", g.columns.after - 1)
    border = ", extended by the border" if leaves else ""
    return f"Fill `row` with row {row} of the source, columns {g.columns.first} to {last}{border}."


@dataclass(frozen=True)
class _Loading:
    """What the reads of one row depend on."""

    filter: Filter
    plan: Plan
    geometry: GeometryText

    @property
    def channels(self) -> int:
        return self.filter.geometry.channels

    def elements(self, pixels: str) -> str:
        return c.times(self.channels, pixels)

    def row_index(self) -> str:
        """Return the row of the source that extended row e shows, which may be outside."""
        rows = self.geometry.rows
        y = c.plus("(int32_t)e", rows.first)
        return self._index(y, rows) if self._maps else y

    @property
    def _maps(self) -> bool:
        return self.filter.border.mode is not BorderMode.CONSTANT

    def _index(self, at: str, axis: AxisText) -> str:
        length = f", (int32_t){axis.size}" if self.needs_length(axis) else ""
        spacing = f", {axis.spacing}" if _is_site(self.filter) else ""
        return f"{self.filter.name}_index({at}{length}{spacing})"

    def needs_length(self, axis: AxisText) -> bool:
        """Return whether a read on an axis depends on how long the image is."""
        index = index_text(self.filter, self.geometry)
        return axis.after > 0 if index is None else index.needs_length

    def fills(self) -> tuple[FillText, ...]:
        """Return the pieces of a row: before the image, inside, behind it."""
        columns = self.geometry.columns
        before, behind = max(-columns.first, 0), columns.after > 0
        made = [self._before(before)] if before else []
        start = "" if made and made[0].end else f"x = {len(made)}"
        if not before or columns.limits[1] + columns.extra > before:
            inside_end = self.elements(c.plus("(int32_t)width", -columns.first))
            code = f"line[{c.plus('x', columns.first * self.channels)}]"
            end = inside_end if behind else "columns"
            made.append(FillText("x", start, end, self._number(code)))
        return (*made, self._behind()) if behind else tuple(made)

    def _before(self, count: int) -> FillText:
        """Return the piece before the image, which may be all of the row, and more."""
        if self.geometry.columns.after < 0:
            end = f"{count * self.channels} && x < columns"
        elif count * self.channels == 1:
            return FillText("0", "", "", self._edge("-1", is_low=True))
        else:
            end = str(count * self.channels)
        return FillText("x", "x = 0", end, self._edge(self._position(), is_low=True))

    def _behind(self) -> FillText:
        columns = self.geometry.columns
        if self.channels == columns.after == 1 and columns.first <= 0:
            return FillText("x", "", "", self._edge("(int32_t)width", is_low=False))
        return FillText("x", "", "columns", self._edge(self._position(), is_low=False))

    def _position(self) -> str:
        """Return the column of the source that extended element x shows."""
        x = f"x / {self.channels}" if self.channels > 1 else "x"
        return c.plus(x, self.geometry.columns.first)

    def _edge(self, position: str, *, is_low: bool) -> str:
        """Return the number at extended element x, whose column is outside the image."""
        if not self._maps:
            return c.number(self.plan.load.constant)
        pixel = self._index(position, self.geometry.columns)
        if self.filter.border.mode is BorderMode.REPLICATE and not _is_site(self.filter):
            pixel = "0" if is_low else "width - 1"
        if self.channels == 1:
            return self._number(f"line[{pixel}]")
        channel = f"x % {self.channels}"
        pixel = pixel.replace("width - 1", "(int32_t)width - 1")
        element = channel if pixel == "0" else f"{self.elements(pixel)} + {channel}"
        return self._number(f"line[{element}]")

    def _number(self, code: str) -> str:
        return f"{self.filter.name}_number({code})" if self._converts else code

    @property
    def _converts(self) -> bool:
        return _conversion(self.filter, self.plan) is not None


def _conversion(f: Filter, plan: Plan) -> ConversionText | None:
    """Return what is done to a code on the way in; None if it is stored as it is."""
    load, stored = plan.load, Cell(f.input.container.bits, f.input.container.signed)
    if load.clamp is None and load.pedestal == 0 and _holds(plan.word, stored):
        return None
    low, high = _clamps(load, stored)
    return ConversionText(_purpose(load), low, high, _converted(f, plan, stored))


def _purpose(load: Load) -> str:
    steps = [] if load.clamp is None else [f"held to {load.clamp.low} to {load.clamp.high}"]
    steps += [f"less the pedestal {load.pedestal}"] if load.pedestal else []
    return ", ".join(steps) if steps else "the code itself"


def _clamps(load: Load, stored: Cell) -> tuple[str | None, str | None]:
    """Return the limits that a code in its container can pass."""
    if load.clamp is None:
        return None, None
    low, high = limits(stored)
    return (
        c.number(load.clamp.low) if load.clamp.low > low else None,
        c.number(load.clamp.high) if load.clamp.high < high else None,
    )


def _holds(word: Cell, stored: Cell) -> bool:
    low, high = limits(stored)
    least, greatest = limits(word)
    return least <= low and high <= greatest


def limits(stored: Cell) -> tuple[int, int]:
    """Return the least and the greatest number of a C integer."""
    half = 1 << (stored.bits - 1)
    return (-half, half - 1) if stored.signed else (0, 2 * half - 1)


def _converted(f: Filter, plan: Plan, stored: Cell) -> str:
    """Return the number as an element of scratch."""
    value, held = "code", stored
    if plan.load.pedestal:
        held = plan.load.work
        value = c.plus(c.cast(c.cell_type(held), "code", c.cell_type(stored)), -plan.load.pedestal)
    return value if held == plan.word else c.cast(f"{f.name}_word", value, "")
