"""Sizing, plan and vectors to the files of one filter."""

from collections.abc import Sequence
from functools import cache

from jinja2 import Environment, PackageLoader, StrictUndefined

from guardbit import __version__
from guardbit.emit import expressions as c
from guardbit.emit import words
from guardbit.emit.geometry import GeometryText, geometry_text
from guardbit.emit.layout import comment, fold, initialiser, prose
from guardbit.emit.texts import StepText, step_text
from guardbit.model.enums import BorderMode, Container, Outside
from guardbit.model.filter import Filter
from guardbit.model.plan import Cell, Plan
from guardbit.model.routine import Emission, Entry, Probe, Role, Routine, SourceFile
from guardbit.model.sizing import Sizing
from guardbit.model.vectors import Vector

_FRAME = (
    Role.SRC,
    Role.SRC_STRIDE,
    Role.DST,
    Role.DST_STRIDE,
    Role.WIDTH,
    Role.HEIGHT,
    Role.SCRATCH,
    Role.SCRATCH_LEN,
)
_BAND = (*_FRAME[:6], Role.FROM, Role.TO, *_FRAME[6:])


def emit(sizing: Sizing, plan: Plan, vectors: Sequence[Vector]) -> Emission:
    """Return the C files of a filter, the routine in them and its probes.

    The same arguments give the same bytes. `vectors` go into the self-check program.
    """
    f = sizing.filter
    context = _context(sizing, plan)
    header = SourceFile(f"{f.name}.h", _render("filter.h.j2", context))
    source = SourceFile(f"{f.name}.c", _render("filter.c.j2", context))
    check = SourceFile(
        f"{f.name}_selfcheck.c",
        _render("filter_selfcheck.c.j2", context | _selfcheck(vectors)),
    )
    geometry = geometry_text(f, plan)
    return Emission(
        files=(header, source, check),
        routine=_routine(f, plan, geometry, (header, source)),
        probes=tuple(_probe(f, step, plan) for step in range(len(plan.steps))),
    )


def _routine(
    f: Filter, plan: Plan, geometry: GeometryText, sources: tuple[SourceFile, ...]
) -> Routine:
    return Routine(
        name=f.name,
        sources=sources,
        frame=Entry(f"{f.name}_frame", _FRAME),
        band=Entry(f"{f.name}_band", _BAND),
        output_size=f"{f.name}_output_size",
        source=f.input.container,
        destination=f.output.container,
        channels=f.geometry.channels,
        word=(plan.word.bits, plan.word.signed),
        scratch_per_column=geometry.units,
        scratch_fixed=geometry.units * geometry.columns.extra,
        widths=f.geometry.columns.sizes,
        heights=f.geometry.rows.sizes,
    )


def _probe(f: Filter, index: int, plan: Plan) -> Probe:
    text = step_text(f, plan, plan.steps[index])
    tail = plan.steps[index].value
    return Probe(
        function=text.tail.function,
        source=f"{f.name}.c",
        bits=tail.work.bits,
        argument=tail.argument,
        requantiser=plan.steps[index].stage,
        preloaded=f.passes[index].accumulator.preload.value == "rounding",
        remove=tail.remove,
    )


@cache
def _environment() -> Environment:
    environment = Environment(
        loader=PackageLoader("guardbit.templates", ""),
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
        keep_trailing_newline=True,
    )
    environment.filters.update(fold=fold, comment=comment, prose=prose, rows=initialiser)
    return environment


def _render(template: str, context: dict[str, object]) -> str:
    return _environment().get_template(template).render(context)


def _context(sizing: Sizing, plan: Plan) -> dict[str, object]:
    f = sizing.filter
    g = geometry_text(f, plan)
    steps = tuple(step_text(f, plan, step) for step in plan.steps)
    depth = next(rows.depth for rows in plan.rows if rows.name == "ring")
    return {
        "version": __version__,
        "digest": f.spec_digest,
        "name": f.name,
        "NAME": f.name.upper(),
        "summary": f.summary,
        "contract": words.contract(sizing),
        "src": c.container_type(f.input.container),
        "dst": c.container_type(f.output.container),
        "word": c.cell_type(plan.word),
        "range": f.input,
        "channels": f.geometry.channels,
        "geometry": g,
        "g": g,
        "mode": f.border.mode.value,
        "mode_text": words.MODES[f.border.mode],
        "constant": c.number(plan.load.constant),
        "convert": _conversion(f, plan),
        "extends": "load" if plan.rows[0].name == "ring" else "extend",
        "steps": steps,
        "step_purposes": [_step_words(f, plan, step) for step in steps],
        "tail_purposes": [
            words.tail_comment(stage, step.value)
            for stage, step in zip(f.passes, plan.steps, strict=True)
        ],
        "depth": depth,
        **_driver(f, plan, g, depth),
    }


def _step_words(f: Filter, plan: Plan, step: StepText) -> str:
    if step.name == "row":
        return "Compute one output row from the ring; e is the extended row that its top tap reads."
    if step.name == "first":
        return "The first pass, over one row."
    return "The second pass: one output row."


def _conversion(f: Filter, plan: Plan) -> dict[str, str | None] | None:
    """Return what is done to a code on the way in; None if it is stored as it is."""
    load = plan.load
    low, high = _container_limits(f.input.container)
    stored, word = c.container_type(f.input.container), c.cell_type(plan.word)
    purposes = []
    if load.clamp is not None:
        purposes.append(f"held to {load.clamp.low} to {load.clamp.high}")
    if load.pedestal:
        purposes.append(f"the pedestal {load.pedestal} taken off")
    if not purposes and _holds(plan.word, low, high):
        return None
    value = c.plus("(int32_t)code" if load.pedestal else "code", -load.pedestal)
    have = "int32_t" if load.pedestal else stored
    return {
        "low": c.number(load.clamp.low) if load.clamp and load.clamp.low > low else None,
        "high": c.number(load.clamp.high) if load.clamp and load.clamp.high < high else None,
        "purpose": ", ".join(purposes) or "legal codes fit the word",
        "value": value if have == word else f"({word}){c.grouped(value)}",
    }


def _holds(cell: Cell, low: int, high: int) -> bool:
    """Return whether a cell holds every number from low to high."""
    least = -(1 << (cell.bits - 1)) if cell.signed else 0
    return least <= low and high <= least + (1 << cell.bits) - 1


def _container_limits(container: Container) -> tuple[int, int]:
    bits, signed = int(container.value[1:]), container.value[0] == "i"
    return (-(1 << (bits - 1)), (1 << (bits - 1)) - 1) if signed else (0, (1 << bits) - 1)


def _driver(f: Filter, plan: Plan, g: GeometryText, depth: int) -> dict[str, object]:
    channels = f.geometry.channels
    rows = f.geometry.rows
    leaves_rows = g.rows.first < 0 or g.rows.after > 0
    e = "(uint32_t)row" if rows.step == 1 else f"{rows.step} * (uint32_t)row"
    return {
        "shape": {1: "direct"}.get(
            len(plan.steps), "horizontal" if plan.rows[0].name == "line" else "vertical"
        ),
        "needs_height": leaves_rows
        and (g.rows.after > 0 if f.border.mode is BorderMode.CONSTANT else g.needs_length),
        "needs_pitch": depth > 1 or len(plan.steps) > 1,
        "e_of_row": c.plus(e, rows.phase),
        "tap_rows": plan.tap_rows,
        "tap_rows_gap": plan.tap_rows != tuple(range(depth)),
        "per_pixel": f" / {channels}" if channels > 1 else "",
        "extended_width": c.plus("(uint32_t)width", g.columns.extra),
        "pitch": _pitch(channels, g.columns.extra),
        "count": f"{channels} * (size_t)out_columns" if channels > 1 else "out_columns",
        "may_be_empty": _may_be_empty(f),
        **_legality(f, plan, g),
    }


def _pitch(channels: int, extra: int) -> str:
    """Return the elements between rows of scratch, which fit size_t once scratch is long enough."""
    columns = c.plus("width", extra)
    return f"{channels} * {c.grouped(columns)}" if channels > 1 else columns


def _may_be_empty(f: Filter) -> bool:
    axis = f.geometry.columns
    least = axis.sizes[0] + {"same": 0, "full": 1, "valid": -1}[f.geometry.extent.value] * (
        axis.greatest - axis.least
    )
    return least <= axis.phase


def _legality(f: Filter, plan: Plan, g: GeometryText) -> dict[str, object]:
    """Return how a source row's codes are told legal, for `outside = "reject"`."""
    low, high = _container_limits(f.input.container)
    tests = []
    if f.input.low > low:
        tests.append(f"line[x] < {c.number(f.input.low)}")
    if f.input.high < high:
        tests.append(f"line[x] > {c.number(f.input.high)}")
    y = c.plus("(int32_t)e", g.rows.first)
    outside = []
    if g.rows.first < 0:
        outside.append("y < 0")
    if g.rows.after > 0:
        outside.append("y >= (int32_t)height")
    spacing = f", {g.rows.spacing}" if g.site else ""
    length = ", (int32_t)height" if g.needs_length else ""
    index = (
        f"{f.name}_index({y}{length}{spacing})"
        if outside
        else c.grouped(y)
        if g.rows.first
        else "e"
    )
    return {
        "rejects": f.outside is Outside.REJECT and bool(tests) and bool(plan.tap_rows),
        "legal_line": {
            "leaves_constant": bool(outside) and f.border.mode is BorderMode.CONSTANT,
            "y": y,
            "outside": " || ".join(outside),
            "expression": f"src + (size_t){index} * src_stride",
            "test": " || ".join(tests),
        },
    }


def _selfcheck(vectors: Sequence[Vector]) -> dict[str, object]:
    return {
        "vectors": [
            {
                "name": v.name,
                "purpose": v.purpose.value,
                "width": v.frame.shape[1],
                "height": v.frame.shape[0],
                "out_width": v.response.output.shape[1],
                "out_height": v.response.output.shape[0],
                "source": [int(x) for x in v.frame.ravel()],
                "output": [int(x) for x in v.response.output.ravel()],
            }
            for v in vectors
        ],
        "largest_output": max([1, *(v.response.output.size for v in vectors)]),
        "largest_width": max([1, *(v.frame.shape[1] for v in vectors)]),
    }
