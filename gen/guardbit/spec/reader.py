"""From a spec file to a Spec, or to every mistake in it at once."""

import hashlib
from pathlib import Path
from typing import TypeAlias

from guardbit.files.reading import SPEC_LIMIT, decode, read_bytes, refusal
from guardbit.model.enums import (
    BorderMode,
    Container,
    Extent,
    First,
    FitRule,
    Grid,
    Operation,
    Outside,
    Overflow,
    Preload,
    Rounding,
    Scale,
)
from guardbit.model.finding import Finding, SpecError
from guardbit.model.spec import (
    AccumulatorTable,
    BorderTable,
    CoefficientTable,
    FilterTable,
    ImageTable,
    InputTable,
    IntermediateTable,
    KernelTable,
    OutputTable,
    Pinned,
    Registers,
    Spec,
)
from guardbit.spec.fitting import check_fitting, in_pairs, read_pinned
from guardbit.spec.formats import check_formats, check_image
from guardbit.spec.goal import check_goal, read_goal
from guardbit.spec.kernel import Source, read_kernel
from guardbit.spec.registers import read_registers
from guardbit.spec.sheet import Sheet, read_sheet
from guardbit.spec.toml import load


def read_spec(path: Path) -> Spec:
    """Return the spec that a file holds.

    Raises SpecError with all findings (of TOML's syntax the first), each with file, line and
    key; MachineError if the machine cannot read the file.
    """
    return _parse(read_bytes(path, SPEC_LIMIT), str(path), path.parent)


def parse_spec(text: str, path: str, folder: Path) -> Spec:
    """Return the spec that `text` holds; `path` names it, `folder` holds its kernel file.

    Raises SpecError with all findings, as `read_spec` does.
    """
    data = text.encode("utf-8", "surrogatepass")
    if len(data) > SPEC_LIMIT:
        raise refusal("file-too-large", path, size=len(data), limit=SPEC_LIMIT)
    return _parse(data, path, folder)


def _parse(data: bytes, path: str, folder: Path) -> Spec:
    document, found = load(decode(data, path), path)
    sheet = read_sheet(document, found, path)
    source = read_kernel(sheet, folder)
    ideal = source.ideal if source is not None else None
    check_formats(sheet)
    check_image(sheet, ideal)
    check_fitting(sheet, ideal)
    taps = (read_pinned(sheet, ideal), read_registers(sheet, ideal))
    check_goal(sheet, folder)
    if sheet.findings or source is None:
        raise SpecError(*sorted(sheet.findings, key=_by_place))
    digest = hashlib.sha256(data + source.content).hexdigest()
    return _spec(sheet, source, taps, path, digest)


def _by_place(found: Finding) -> int:
    return found.place.line or 0


_Taps: TypeAlias = tuple[Pinned | None, Registers | None]


def _spec(sheet: Sheet, source: Source, taps: _Taps, path: str, digest: str) -> Spec:
    return Spec(
        path=path,
        digest=digest,
        lines=dict(sheet.found.keys),
        filter=FilterTable(
            sheet.get("filter.name", str),
            sheet.get("filter.operation", Operation),
            sheet.get("filter.summary", str),
        ),
        kernel=_kernel(sheet, source),
        input=_input(sheet),
        coefficient=_coefficient(sheet, *taps),
        intermediate=_intermediate(sheet) if "intermediate" in sheet.given else None,
        accumulator=_accumulator(sheet, "accumulator"),
        output=_output(sheet),
        border=BorderTable(
            sheet.get("border.mode", BorderMode),
            sheet.maybe("border.value", int),
            sheet.get("border.grid", Grid),
        ),
        image=_image(sheet),
        goal=read_goal(sheet) if "goal" in sheet.given else None,
    )


def _kernel(sheet: Sheet, source: Source) -> KernelTable:
    ideal = source.ideal
    return KernelTable(
        taps=ideal.taps,
        column=ideal.column,
        row=ideal.row,
        divisor=in_pairs(sheet, "kernel.divisor"),
        origin=sheet.maybe("kernel.origin", tuple),
        source=source.words,
    )


def _input(sheet: Sheet) -> InputTable:
    return InputTable(
        bits=sheet.get("input.bits", int),
        signed=sheet.get("input.signed", bool),
        frac=sheet.get("input.frac", int),
        pedestal=sheet.get("input.pedestal", int),
        range=sheet.maybe("input.range", tuple),
        container=sheet.maybe("input.container", Container),
        outside=sheet.get("input.outside", Outside),
    )


def _coefficient(
    sheet: Sheet, pinned: Pinned | None, registers: Registers | None
) -> CoefficientTable:
    return CoefficientTable(
        bits=sheet.width("coefficient.bits"),
        signed=sheet.get("coefficient.signed", bool),
        frac=in_pairs(sheet, "coefficient.frac"),
        fit=sheet.get("coefficient.fit", FitRule),
        scale=sheet.get("coefficient.scale", Scale),
        pinned=pinned,
        registers=registers,
    )


def _accumulator(sheet: Sheet, table: str) -> AccumulatorTable:
    return AccumulatorTable(
        bits=sheet.width(f"{table}.bits"),
        signed=sheet.get(f"{table}.signed", bool),
        overflow=sheet.get(f"{table}.overflow", Overflow),
        preload=sheet.get(f"{table}.preload", Preload),
    )


def _intermediate(sheet: Sheet) -> IntermediateTable:
    return IntermediateTable(
        first=sheet.get("intermediate.first", First),
        bits=sheet.width("intermediate.bits"),
        signed=sheet.get("intermediate.signed", bool),
        frac=sheet.maybe_width("intermediate.frac"),
        pedestal=sheet.get("intermediate.pedestal", int),
        rounding=sheet.get("intermediate.rounding", Rounding),
        overflow=sheet.get("intermediate.overflow", Overflow),
        accumulator=_accumulator(sheet, "intermediate.accumulator"),
    )


def _output(sheet: Sheet) -> OutputTable:
    return OutputTable(
        bits=sheet.maybe("output.bits", int),
        signed=sheet.maybe("output.signed", bool),
        frac=sheet.maybe("output.frac", int),
        pedestal=sheet.get("output.pedestal", int),
        range=sheet.maybe("output.range", tuple),
        container=sheet.maybe("output.container", Container),
        rounding=sheet.get("output.rounding", Rounding),
        overflow=sheet.get("output.overflow", Overflow),
    )


def _image(sheet: Sheet) -> ImageTable:
    return ImageTable(
        extent=sheet.get("image.extent", Extent),
        width=sheet.get("image.width", tuple),
        height=sheet.get("image.height", tuple),
        step=sheet.get("image.step", tuple),
        phase=sheet.get("image.phase", tuple),
        spacing=sheet.get("image.spacing", tuple),
        channels=sheet.get("image.channels", int),
    )
