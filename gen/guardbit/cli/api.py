"""guardbit from Python: what the commands do, as functions. Nothing is printed.

    from guardbit.cli import api
    sizing = api.size("soften5.toml")
    api.write(api.emit("soften5.toml"), "out")

Rooms are imported inside the functions, so that importing this module costs nothing.
"""

import os
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from pathlib import Path
from typing import TYPE_CHECKING

from guardbit import __version__
from guardbit.model.certificate import Certificate, Digest, RungResult
from guardbit.model.finding import Finding, Place, SpecError
from guardbit.model.sizing import Sizing, TapOrder
from guardbit.model.spec import Spec
from guardbit.report.cautions import CAUTIONS

if TYPE_CHECKING:
    from guardbit.model.goal import GoalSearch
    from guardbit.model.plan import Plan
    from guardbit.model.routine import Codes, Emission, Routine
    from guardbit.model.sheet import Sheet
    from guardbit.verify.bench import Options

    Against = tuple[str | Path, str, Sequence[str]]
    Frame = list[list[list[int]]]

TOOL = f"guardbit {__version__}"


@dataclass(frozen=True)
class Product:
    """What one spec gives: its certificate, and every file's text by name."""

    certificate: Certificate
    files: Mapping[str, str]

    @property
    def data(self) -> dict[str, bytes]:
        """Return the files as they are written."""
        return {name: text.encode("utf-8") for name, text in self.files.items()}


def read(spec: str | Path) -> Spec:
    """Return a spec as written. Raises SpecError with everything that is wrong with it."""
    from guardbit.spec.reader import read_spec

    return read_spec(Path(spec))


def size(spec: str | Path | Spec) -> Sizing:
    """Return every register's exact ranges and widths, and the error bound.

    Raises SpecError. A `forbid` that is not met raises nothing here: see `unmet`.
    """
    from guardbit.fit.resolve import resolve
    from guardbit.sizing.analyse import analyse

    return analyse(resolve(_spec(spec)))


def unmet(sizing: Sizing, spec: Spec) -> tuple[Finding, ...]:
    """Return a finding for every `forbid` that is not met and every width that is refused."""
    from guardbit.sizing.analyse import unmet as broken

    return tuple(_lined(found, spec) for found in broken(sizing, Place(spec.path)))


def unmet_goals(sizing: Sizing, spec: Spec, *, frames: bool = True) -> tuple[Finding, ...]:
    """Return a finding for every goal of the spec that is not met.

    A goal for the signal-to-noise ratio is looked at only with `frames`: the goal's images are
    then read. Raises SpecError, MachineError if one of them cannot be.
    """
    if spec.goal is None:
        return ()
    from guardbit.study.goals.search import unmet_goals as missed
    from guardbit.study.goals.trials import goal_frames

    return missed(spec, sizing, goal_frames(spec) if frames else ())


def search(spec: str | Path | Spec) -> "GoalSearch | None":
    """Return the word lengths that reach the spec's goal; None if it leaves none open.

    Raises SpecError, MachineError if the goal's images cannot be read.
    """
    made = _spec(spec)
    if made.goal is None:
        return None
    from guardbit.fit.open import open_words
    from guardbit.study.goals.search import search as searched

    return searched(made) if open_words(made) else None


def orders(sizing: Sizing) -> tuple[TapOrder, ...]:
    """Return what the order of the taps costs each register; nothing where taps are loaded."""
    from guardbit.sizing.order import tap_orders

    return tap_orders(sizing.filter)


def sheet(sizing: Sizing, photographs: Sequence[str | Path] = ()) -> "Sheet":
    """Return all that goes on a sizing sheet; `photographs` are image files to be filtered.

    They are scaled to the input format first. Raises SpecError, MachineError.
    """
    from guardbit.files.images import read_image
    from guardbit.study.sheet import sheet as gathered

    pictures = {Path(each).name: read_image(Path(each)) for each in photographs}
    return gathered(sizing, pictures)


def sheet_files(made: "Sheet") -> dict[str, bytes]:
    """Return a sheet as Markdown and JSON, and a frame for every end that it names."""
    from guardbit.files.writing import digest
    from guardbit.report.certificate import SCHEMA, sealed_text
    from guardbit.report.sheet import sheet_markdown
    from guardbit.study.witnesses import witness_files

    name = made.sizing.filter.name
    files = {f"{name}.sheet.md": sheet_markdown(made).encode("utf-8")}
    files |= witness_files(made.sizing)
    written = [Digest(each, digest(data)) for each, data in files.items()]
    document = {"schema": SCHEMA, "tool": TOOL, "emitted": written, "sheet": made}
    return {**files, f"{name}.sheet.json": sealed_text(document).encode("ascii")}


def emit(spec: str | Path | Spec) -> Product:
    """Return the C, its self-check and the certificate. Raises SpecError."""
    made = _spec(spec)
    sizing = _allowed(made)
    return _product(made, sizing, *_emitted(sizing))


@dataclass(frozen=True)
class Checks:
    """What `verify` may be asked for besides.

    `defects`: how many faults to seed in the C, to measure the rungs. `against`: the user's own C
    to check instead of the emitted: a file, a function in it and what its arguments are.
    """

    defects: int | None = None
    against: "Against | None" = None


def verify(
    spec: str | Path | Spec,
    compiler: str | None = None,
    photograph: str | Path | None = None,
    keep: str | Path | None = None,
    more: Checks | None = None,
) -> Product:
    """Return what `emit` does, with the evidence of every rung in the certificate.

    `compiler` is a command ($CC's words, else the machine's own); `photograph` an image that
    is run as well; `keep` a folder for what reproduces a mismatch. A check that failed raises
    nothing: its findings are in the rungs. Raises SpecError, MachineError.
    """
    from guardbit.files.images import read_image
    from guardbit.verify.bench import Options

    made, more = _spec(spec), more or Checks()
    sizing = _allowed(made)
    plan, emission = _emitted(sizing)
    if more.against is not None:
        emission = replace(emission, routine=_foreign(sizing, more.against), probes=())
    options = Options(
        photograph=read_image(Path(photograph)) if photograph is not None else None,
        folder=Path(keep) if keep is not None else None,
        defects=more.defects,
    )
    rungs = _climbed(sizing, emission, compiler, options)
    return _product(made, sizing, plan, emission, rungs)


def subject(spec: str | Path | Spec, against: "Against | None" = None) -> "tuple[Sizing, Routine]":
    """Return the sizing, and the routine that is to be checked: the emitted, or the user's own.

    `against` is a C file, a function in it and what its arguments are. Raises SpecError.
    """
    sizing = _allowed(_spec(spec))
    if against is None:
        return sizing, _emitted(sizing)[1].routine
    return sizing, _foreign(sizing, against)


def filtered(
    spec: str | Path | Spec,
    frame: "Frame",
    against: "Against | None" = None,
    taps: Sequence[int] | None = None,
) -> "Frame | str":
    """Return what the compiled C makes of a frame, as rows of pixels of channels.

    A sanitizer's words, or what else went wrong, come back as text. Raises SpecError,
    MachineError.
    """
    import tempfile

    from guardbit.build.compiler import find_compiler
    from guardbit.build.sanitized import sanitized_runner
    from guardbit.model.routine import Call
    from guardbit.reference.run import output_positions

    sizing, routine = subject(spec, against)
    codes = _codes(frame)
    rows, columns = output_positions(sizing.filter, *codes.shape[:2])
    call = Call(codes, (len(rows), len(columns)), taps=None if taps is None else tuple(taps))
    with tempfile.TemporaryDirectory(prefix="guardbit-") as folder:
        runner = sanitized_runner(find_compiler(), routine, (), Path(folder))
        (outcome,) = runner.run([call])
    if outcome.harm is not None or outcome.output is None:
        return f"{outcome.harm or 'refused'}: {outcome.statuses} {outcome.detail}".strip()
    made: Frame = outcome.output.tolist()
    return made


def expected(spec: str | Path | Spec, frame: "Frame", taps: Sequence[int] | None = None) -> "Frame":
    """Return what the contract makes of a frame, as rows of pixels of channels."""
    from guardbit.model.filter import holding, registers_of
    from guardbit.reference.run import respond

    f = _allowed(_spec(spec)).filter
    s = registers_of(f)
    if s is not None and taps is not None:
        f = holding(f, tuple(taps[cell] for cell in s.cells))
    made: Frame = respond(f, _codes(frame)).output.tolist()
    return made


def write(product: Product, folder: str | Path, force: bool = False) -> tuple[Digest, ...]:
    """Write the files of a product into `folder`, all or none, and return their digests.

    Raises SpecError if one of them was edited since it was written, unless `force`.
    """
    from guardbit.cli.output import write_files

    return write_files(Path(folder), product.data, force)


def _spec(spec: str | Path | Spec) -> Spec:
    return spec if isinstance(spec, Spec) else read(spec)


def _lined(found: Finding, spec: Spec) -> Finding:
    """Return the finding with the line of its key, if the file has the key."""
    line = spec.lines.get(found.place.key or "")
    return replace(found, place=replace(found.place, line=line))


def _allowed(spec: Spec) -> Sizing:
    sizing = size(spec)
    if findings := (*unmet(sizing, spec), *unmet_goals(sizing, spec, frames=False)):
        raise SpecError(*findings)
    return sizing


def _emitted(sizing: Sizing) -> "tuple[Plan, Emission]":
    from guardbit.emit.emission import emit as texts
    from guardbit.plan.direct import direct
    from guardbit.vectors.selfcheck import selfcheck

    plan = direct(sizing)
    return plan, texts(sizing, plan, selfcheck(sizing))


def _foreign(sizing: Sizing, against: "Against") -> "Routine":
    from guardbit.emit.adapter import foreign_routine
    from guardbit.files.sources import read_sources

    file, function, arguments = against
    return foreign_routine(sizing.filter, read_sources(Path(file)), function, arguments)


def _codes(frame: "Frame") -> "Codes":
    import numpy as np

    return np.array(frame, np.int64)


def _climbed(
    sizing: Sizing, emission: "Emission", command: str | None, options: "Options"
) -> tuple[RungResult, ...]:
    from guardbit.build.compiler import find_compiler
    from guardbit.verify.ladder import climb

    found = find_compiler({**os.environ, "CC": command} if command else None)
    return climb(sizing, emission.routine, emission.probes, found, options)


def _product(
    spec: Spec,
    sizing: Sizing,
    plan: "Plan",
    emission: "Emission",
    rungs: tuple[RungResult, ...] = (),
) -> Product:
    from guardbit.files.writing import digest
    from guardbit.report.certificate import SCHEMA, certificate_text

    texts = {file.name: file.text for file in emission.files}
    certificate = Certificate(
        schema=SCHEMA,
        tool=TOOL,
        cautions=CAUTIONS,
        spec=Digest(Path(spec.path).name, spec.digest),
        emitted=tuple(Digest(name, digest(text.encode("utf-8"))) for name, text in texts.items()),
        plan=plan.name,
        sizing=sizing,
        rungs=rungs,
    )
    name = f"{spec.filter.name}.cert.json"
    return Product(certificate, {**texts, name: certificate_text(certificate)})
