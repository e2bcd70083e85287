"""Sizing, plan and vectors to the files of one filter."""

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cache
from hashlib import sha256

from jinja2 import Environment, PackageLoader, StrictUndefined

from guardbit import __version__
from guardbit.emit import expressions as c
from guardbit.emit import words
from guardbit.emit.driver import DriverText, driver_text
from guardbit.emit.geometry import GeometryText, geometry_text
from guardbit.emit.layout import comment, fold, harmless, initialiser, prose
from guardbit.emit.loading import IndexText, LoadText, index_text, load_text
from guardbit.emit.registers import TapsText, taps_text
from guardbit.emit.selfcheck import SelfcheckText, selfcheck_text
from guardbit.emit.steps import StepText, step_text, tail_function
from guardbit.model.enums import Preload
from guardbit.model.filter import Filter, raster, registers_of
from guardbit.model.plan import Plan, Step
from guardbit.model.routine import Emission, Entry, Probe, Role, Routine, SourceFile, Taps
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
_ROWS = (Role.FROM, Role.TO)
_PLACE = 6
"""Where in `_FRAME` the rows of a band go, and the taps behind them."""

_TEMPLATES = ("{}.h", "{}.c", "{}_selfcheck.c")


@dataclass(frozen=True)
class FilterText:
    """All that the templates print of one filter; each field is a name in them.

    `edition` is a number that tells header and source of different specs or versions apart.
    """

    version: str
    digest: str
    edition: str
    name: str
    NAME: str
    summary: str
    contract: list[str]
    src: str
    dst: str
    word: str
    low: int
    high: int
    channels: int
    g: GeometryText
    index: IndexText | None
    index_purpose: str
    load: LoadText
    steps: tuple[StepText, ...]
    driver: DriverText
    check: SelfcheckText
    taps: TapsText | None


def emit(sizing: Sizing, plan: Plan, vectors: Sequence[Vector]) -> Emission:
    """Return the C files of a filter, the routine in them and its probes.

    The same arguments give the same bytes. `vectors` go into the self-check program.
    """
    f = sizing.filter
    text = filter_text(sizing, plan, vectors)
    files = tuple(SourceFile(name.format(f.name), _render(name, text)) for name in _TEMPLATES)
    return Emission(
        files=files,
        routine=_routine(f, plan, text.g, files[:2]),
        probes=tuple(_probe(f, plan, step) for step in plan.steps),
    )


def filter_text(sizing: Sizing, plan: Plan, vectors: Sequence[Vector]) -> FilterText:
    """Return what the templates print."""
    f = sizing.filter
    g = geometry_text(f, plan)
    return FilterText(
        version=__version__,
        digest=f.spec_digest,
        edition="0x" + sha256(f"{__version__} {f.spec_digest}".encode()).hexdigest()[:8],
        name=f.name,
        NAME=f.name.upper(),
        summary=f.summary,
        contract=words.contract(sizing),
        src=c.container_type(f.input.container),
        dst=c.container_type(f.output.container),
        word=c.cell_type(plan.word),
        low=f.input.low,
        high=f.input.high,
        channels=f.geometry.channels,
        g=g,
        index=index_text(f, g),
        index_purpose=words.MODES[f.border.mode],
        load=load_text(f, plan, g),
        steps=tuple(step_text(sizing, plan, step) for step in plan.steps),
        driver=driver_text(f, plan, g),
        check=selfcheck_text(vectors),
        taps=taps_text(f, plan),
    )


def _routine(
    f: Filter, plan: Plan, geometry: GeometryText, sources: tuple[SourceFile, ...]
) -> Routine:
    taps = _taps(f, plan)
    return Routine(
        name=f.name,
        sources=sources,
        frame=Entry(f"{f.name}_frame", _roles(taps, band=False)),
        band=Entry(f"{f.name}_band", _roles(taps, band=True)),
        output_size=f"{f.name}_output_size",
        source=f.input.container,
        destination=f.output.container,
        channels=f.geometry.channels,
        word=(plan.word.bits, plan.word.signed),
        scratch_per_column=geometry.units,
        scratch_fixed=geometry.units * geometry.columns.extra,
        widths=f.geometry.columns.sizes,
        heights=f.geometry.rows.sizes,
        taps=taps,
    )


def _roles(taps: Taps | None, *, band: bool) -> tuple[Role, ...]:
    """Return the arguments of an entry in order."""
    more = (*(_ROWS if band else ()), *((Role.TAPS,) if taps else ()))
    return (*_FRAME[:_PLACE], *more, *_FRAME[_PLACE:])


def _taps(f: Filter, plan: Plan) -> Taps | None:
    registers = registers_of(f)
    if registers is None or plan.taps is None:
        return None
    nominal = raster(registers, [t.integer for t in f.passes[0].kernel.terms])
    return Taps((plan.taps.bits, plan.taps.signed), nominal)


def _probe(f: Filter, plan: Plan, step: Step) -> Probe:
    tail = step.value
    return Probe(
        function=tail_function(f, plan, step),
        source=f"{f.name}.c",
        bits=tail.work.bits,
        argument=tail.argument,
        requantiser=step.stage,
        preloaded=f.passes[step.stage].accumulator.preload is Preload.ROUNDING,
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
    environment.filters.update(
        fold=fold, comment=comment, harmless=harmless, prose=prose, rows=initialiser
    )
    return environment


def _render(name: str, text: FilterText) -> str:
    """Return one file; its template has the file's name with "filter" for the filter's."""
    template = _environment().get_template(name.format("filter") + ".j2")
    return template.render(vars(text))
