"""The drivers: which rows a band reads, and how scratch is laid out."""

from dataclasses import dataclass

from guardbit.emit import expressions as c
from guardbit.emit.geometry import GeometryText
from guardbit.emit.loading import limits
from guardbit.model.enums import BorderMode, Outside
from guardbit.model.filter import Filter
from guardbit.model.plan import Cell, Plan


@dataclass(frozen=True)
class ScanText:
    """How the rows that a band reads are searched for illegal codes.

    `test` is the C condition on line[x]; `tap_rows` the rows of the span that taps read,
    empty if they read all of it; `skips`: rows outside the image show a constant.
    """

    test: str
    tap_rows: tuple[int, ...]
    skips: bool


@dataclass(frozen=True)
class DriverText:
    """The band.

    `shape`: one pass ("direct"), or two by the one that runs first. `depth` is the rows of
    the ring, `top` the extended row that the uppermost tap reads for output row `row`.
    """

    shape: str
    depth: int
    needs_pitch: bool
    top: str
    extended_width: str
    pitch: str
    count: str
    per_pixel: str
    scan: ScanText | None


def driver_text(f: Filter, plan: Plan, g: GeometryText) -> DriverText:
    """Return the text of the drivers."""
    channels = f.geometry.channels
    rows = f.geometry.rows
    depth = next(buffer.depth for buffer in plan.rows if buffer.name == "ring")
    return DriverText(
        shape=_shape(plan),
        depth=depth,
        needs_pitch=depth > 1 or len(plan.steps) > 1,
        top=c.plus(c.times(rows.step, "(uint32_t)row"), rows.phase),
        extended_width=c.plus("(uint32_t)width", g.columns.extra),
        pitch=c.times(channels, c.plus("width", g.columns.extra)),
        count=c.times(channels, "out_width"),
        per_pixel=f" / {channels}" if channels > 1 else "",
        scan=_scan(f, plan, g),
    )


def _shape(plan: Plan) -> str:
    if len(plan.steps) == 1:
        return "direct"
    return "vertical" if plan.rows[0].name == "ring" else "horizontal"


def _scan(f: Filter, plan: Plan, g: GeometryText) -> ScanText | None:
    """Return the search for `outside = "reject"`; None if no code that is read is illegal."""
    container = f.input.container
    low, high = limits(Cell(container.bits, container.signed))
    tests = [f"line[x] < {c.number(f.input.low)}"] if f.input.low > low else []
    tests += [f"line[x] > {c.number(f.input.high)}"] if f.input.high < high else []
    if f.outside is not Outside.REJECT or not tests or not plan.tap_rows:
        return None
    is_whole = plan.tap_rows == tuple(range(plan.span[0]))
    leaves = g.rows.first < 0 or g.rows.after > 0
    return ScanText(
        test=" || ".join(tests),
        tap_rows=() if is_whole else plan.tap_rows,
        skips=leaves and f.border.mode is BorderMode.CONSTANT,
    )
