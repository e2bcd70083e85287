"""Runs the examples from spec to pictures: size, emit, verify, then the C on photographs.

    python examples/demo.py [FOLDER]      (default: demo, beside examples)

Exit status: 0 if everything holds; otherwise that of the step that failed.
"""

import json
import shutil
import subprocess
import sys
import tempfile
import time
from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from pathlib import Path

import numpy as np
from pictures import Shot, photographs, saved, shot

from guardbit.build.compilation import run_tool
from guardbit.build.compiler import STRICT, Compiler, find_compiler
from guardbit.build.library import compile_library
from guardbit.cli import api
from guardbit.emit.emission import emit
from guardbit.files.images import image_bytes, read_image
from guardbit.model.decimals import lower, upper
from guardbit.model.finding import GuardbitError
from guardbit.model.routine import Call, Outcome, Routine
from guardbit.model.sizing import Sizing
from guardbit.plan.direct import direct
from guardbit.reference.run import output_positions, respond

HERE = Path(__file__).resolve().parent
RAW_FRAMES = {"raw_smooth": "shoulder.pgm"}
"""Frames of our own in examples/data, by the filter that reads them."""

FAILED, MISSING = 1, 3


class DemoError(Exception):
    """A step failed; `status` is the exit status."""

    def __init__(self, text: str, status: int) -> None:
        super().__init__(text)
        self.status = status


def main(arguments: Sequence[str]) -> int:
    """Run every step, tell how it went, and return the exit status."""
    folder = Path(arguments[0]) if arguments else HERE.parent / "demo"
    started = time.monotonic()
    try:
        run(folder.resolve())
    except DemoError as error:
        print(f"\ndemo: {error}", file=sys.stderr)
        return error.status
    except GuardbitError as error:
        print(f"\ndemo: {error}", file=sys.stderr)
        return error.status
    print(f"\nAll of it holds. {time.monotonic() - started:.0f} s in all. Left for you to look at:")
    print(f"  {folder.resolve()}")
    print("    c/           the C, self-checks and certificates")
    print("    images/      inputs and outputs; images.txt says what each is")
    print("    size.txt     every register; emit.txt every file; verify.txt every rung")
    return 0


def run(folder: Path) -> None:
    """Do the demo's steps. Raises DemoError, GuardbitError."""
    specs = sorted(HERE.glob("*.toml"))
    _emptied(folder)
    try:
        grey, colour = photographs()
    except ImportError:
        raise DemoError("needs scikit-image: pip install scikit-image", MISSING) from None
    photo = folder / "images" / f"{grey.name}.png"
    photo.write_bytes(image_bytes(grey.codes, 255, photo.name))
    print(f"{len(specs)} filters of a bottling line's inspection station, and two photographs:")
    print(f"  {grey.credit}\n  {colour.credit}\n")
    sizings = sized(folder, specs)
    command(folder, "emit", specs, "-o", folder / "c")
    climbed(folder, specs, sizings, photo)
    compiler = find_compiler()
    self_checked(folder / "c", sizings, compiler)
    shots = [(s, shot(s.filter, grey, colour)) for s in sizings]
    filtered(folder, [*shots, *_raw_frames(sizings)], compiler)


def _emptied(folder: Path) -> None:
    """Make the folder, with nothing in it that an earlier demo left."""
    for name in ("c", "images"):
        shutil.rmtree(folder / name, ignore_errors=True)
        (folder / name).mkdir(parents=True)


def command(folder: Path, name: str, specs: Sequence[Path], *options: str | Path) -> None:
    """Run a guardbit command on the specs, what it prints into NAME.txt.

    Raises DemoError if it fails.
    """
    paths = [str(spec.relative_to(HERE.parent)) for spec in specs]
    words = [name, *paths, *map(str, options)]
    with _timed(f"guardbit {name} examples/*.toml"):
        done = subprocess.run(
            [sys.executable, "-m", "guardbit.cli.main", *words],
            cwd=HERE.parent,
            capture_output=True,
            text=True,
            check=False,
        )
    (folder / f"{name}.txt").write_text(done.stdout, encoding="utf-8")
    if done.returncode:
        raise DemoError(f"guardbit {name} failed\n{done.stderr}", done.returncode)


@contextmanager
def _timed(title: str) -> Iterator[None]:
    started = time.monotonic()
    print(f"{title:<68}", end="", flush=True)
    yield
    print(f"{time.monotonic() - started:7.1f} s")


def sized(folder: Path, specs: Sequence[Path]) -> list[Sizing]:
    """Return the specs' sizings; keep the command's text and show a line of each."""
    command(folder, "size", specs)
    sizings = [api.size(spec) for spec in specs]
    print(f"  {'filter':<14}{'accumulator':<18}{'spare':<9}error in LSB, at most")
    for sizing in sizings:
        print(f"  {sizing.filter.name:<14}{_widths(sizing)}")
    return sizings


def _widths(sizing: Sizing) -> str:
    registers, error = sizing.registers, sizing.error
    bits = ", ".join(f"{r.bits} bits{'' if r.signed else ' unsigned'}" for r in registers)
    spare = ", ".join(str(r.spare) for r in registers)
    unless = ", where no sum saturates" if error.assumes_no_wrap else ""
    return f"{bits:<18}{spare:<9}{lower(error.low, 3)} .. {upper(error.high, 3)}{unless}"


def climbed(folder: Path, specs: Sequence[Path], sizings: Sequence[Sizing], photo: Path) -> None:
    """Verify the specs; keep the command's text and show a line of each certificate."""
    command(folder, "verify", specs, "-o", folder / "c", "--photo", photo)
    for name in [s.filter.name for s in sizings]:
        path = folder / "c" / f"{name}.cert.json"
        rungs = json.loads(path.read_text(encoding="ascii"))["rungs"]
        cases = sum(rung["cases"] for rung in rungs)
        print(f"  {name:<14}{len(rungs)} rungs hold, {cases:>9,} cases")


def self_checked(folder: Path, sizings: Sequence[Sizing], compiler: Compiler) -> None:
    """Build and run every self-check program as a user would. Raises DemoError."""
    with _timed("self-check programs, compiled and run"), tempfile.TemporaryDirectory() as made:
        for sizing in sizings:
            name = sizing.filter.name
            program = str(Path(made) / name)
            sources = (f"{name}.c", f"{name}_selfcheck.c")
            built = run_tool((*compiler.command, *STRICT, "-O2", *sources, "-o", program), folder)
            if built.returncode or run_tool((program,)).returncode:
                raise DemoError(f"{name}: the self-check fails\n{built.stderr}", FAILED)


def _raw_frames(sizings: Sequence[Sizing]) -> Iterator[tuple[Sizing, Shot]]:
    for sizing in sizings:
        name = sizing.filter.name
        if file := RAW_FRAMES.get(name):
            frame = read_image(HERE / "data" / file)
            yield sizing, Shot(f"{name}_{Path(file).stem}", frame, f"examples/data/{file}")


def filtered(folder: Path, shots: Sequence[tuple[Sizing, Shot]], compiler: Compiler) -> None:
    """Run the compiled C on every shot, compare with the reference, and write the images."""
    title = f"{len(shots)} frames through the compiled C, compared with the reference"
    with _timed(title), tempfile.TemporaryDirectory() as made:
        sizings = {s.filter.name: s for s, _ in shots}
        routines = {name: _routine(s, folder / "c") for name, s in sizings.items()}
        library = compile_library(compiler, list(routines.values()), (), Path(made))
        calls = [(routines[s.filter.name], _call(s, each)) for s, each in shots]
        outcomes = library.run(calls)
    notes = [
        note
        for (sizing, each), outcome in zip(shots, outcomes, strict=True)
        for note in _kept(folder / "images", sizing, each, outcome)
    ]
    (folder / "images.txt").write_text("\n".join(notes) + "\n", encoding="utf-8")
    pixels = sum(o.output.size for o in outcomes if o.output is not None)
    print(f"  {pixels:,} output codes, all equal")


def _routine(sizing: Sizing, folder: Path) -> Routine:
    """Return the routine whose sources are the files that `guardbit emit` wrote."""
    routine = emit(sizing, direct(sizing), ()).routine
    for source in routine.sources:
        if (folder / source.name).read_text(encoding="utf-8") != source.text:
            raise DemoError(f"{source.name} is not what guardbit emit wrote", FAILED)
    return routine


def _call(sizing: Sizing, each: Shot) -> Call:
    rows, columns = output_positions(sizing.filter, *each.frame.shape[:2])
    return Call(each.frame, (len(rows), len(columns)))


def _kept(folder: Path, sizing: Sizing, each: Shot, outcome: Outcome) -> Iterator[str]:
    """Write a shot's input and output, and yield a line on each. Raises DemoError."""
    f = sizing.filter
    expected = respond(f, each.frame).output
    if outcome.harm or outcome.output is None or any(outcome.statuses):
        what = f"{outcome.harm or 'refused'} {outcome.statuses} {outcome.detail}"
        raise DemoError(f"{each.name}: {what}", FAILED)
    if not np.array_equal(outcome.output, expected):
        raise DemoError(f"{each.name}: the C and the reference differ", FAILED)
    yield f"{each.name} (input: {each.made})"
    sides = (("input", each.frame, f.input), ("output", expected, f.output))
    for side, codes, kind in sides:
        files, said = saved(codes, kind, f"{each.name}_{side}")
        for name, data in files.items():
            (folder / name).write_bytes(data)
        yield f"  {said}"


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
