"""What a reader of the emitted files meets: golden texts, comments, the self-check program."""

import hashlib
import os
import subprocess
import sys
from dataclasses import replace
from fractions import Fraction
from pathlib import Path

import numpy as np
import pytest

from fit.specs import EXACT, spec
from guardbit.emit.emission import emit
from guardbit.emit.kernel import kernel_lines
from guardbit.emit.layout import comment, fold, harmless, prose
from guardbit.emit.words import outward
from guardbit.fit.resolve import resolve
from guardbit.model.enums import BorderMode, Extent, First, Outside, Overflow
from guardbit.model.routine import SourceFile
from guardbit.model.sizing import Sizing
from guardbit.model.vectors import Purpose, Vector
from guardbit.plan.direct import direct
from guardbit.reference.run import respond
from guardbit.sizing.analyse import analyse

from .bench import STRICT, run
from .parts import Tables

GOLDEN = Path(__file__).with_name("golden")
ACCEPT = "GUARDBIT_ACCEPT"

BINOMIAL = [[a * b for b in (1, 4, 6, 4, 1)] for a in (1, 4, 6, 4, 1)]
READ: dict[str, Tables] = {
    "soften": {
        "taps": BINOMIAL,
        "kernel": {"divisor": (256,)},
        "accumulator": {"bits": 20},
        "border": {"mode": BorderMode.REPLICATE},
        "filter": {"summary": "5x5 binomial, unity DC gain"},
    },
    "raw_pair": {
        "column": [1, 2, 1],
        "row": [-1, 5, 5, -1],
        "kernel": {"divisor": (4, 8)},
        "coefficient": {"frac": (2, 3)},
        "input": {"bits": 12, "pedestal": 256, "outside": Outside.REJECT, "range": (0, 4000)},
        "intermediate": {"bits": 8, "signed": False, "pedestal": 16, "first": First.HORIZONTAL},
        "output": {"bits": 10, "pedestal": 64},
        "border": {"mode": BorderMode.HALF_SAMPLE},
        "image": {"step": (1, 2), "channels": 2},
    },
    "narrow": {
        "taps": [[1, -2, 1], [0, 3, 0]],
        "kernel": {"divisor": (3,)},
        "coefficient": EXACT,
        "accumulator": {"bits": 9, "overflow": Overflow.SATURATE},
        "output": {"bits": 8, "signed": True, "overflow": Overflow.WRAP},
        "image": {"extent": Extent.VALID, "width": (16, 640)},
    },
}


def sized(name: str, tables: Tables) -> Sizing:
    named = {**tables, "filter": {**tables.get("filter", {}), "name": name}}
    return analyse(resolve(spec(**named)))


def vectors(sizing: Sizing, *sizes: tuple[int, int]) -> list[Vector]:
    f = sizing.filter
    made = []
    for number, (height, width) in enumerate(sizes):
        span = f.input.high - f.input.low + 1
        frame = (np.arange(height * width * f.geometry.channels) * 97 % span + f.input.low).reshape(
            height, width, f.geometry.channels
        )
        made.append(Vector(f"ramp {number}", Purpose.STRUCTURE, frame, respond(f, frame)))
    return made


def files(name: str, *sizes: tuple[int, int]) -> tuple[SourceFile, ...]:
    sizing = sized(name, READ[name])
    return emit(sizing, direct(sizing), vectors(sizing, *sizes)).files


@pytest.mark.parametrize("name", READ)
def test_golden(name: str) -> None:
    """The texts as people read them; a change shows in review as a change of these files."""
    for file in files(name, (3, 20)):
        kept = GOLDEN / f"{file.name}.txt"
        if os.environ.get(ACCEPT) == "1":
            GOLDEN.mkdir(exist_ok=True)
            kept.write_text(file.text)
        assert kept.read_text() == file.text, f"{ACCEPT}=1 pytest tests/emit accepts the new text"


def digest() -> str:
    text = "".join(file.text for name in READ for file in files(name, (3, 20)))
    return hashlib.sha256(text.encode()).hexdigest()


@pytest.mark.parametrize("seed", ["0", "4321"])
def test_same_bytes_whatever_the_hash_seed(seed: str) -> None:
    tests = Path(__file__).parents[1]
    script = "from emit.test_emitted_text import digest; print(digest())"
    environment = {**os.environ, "PYTHONHASHSEED": seed, "PYTHONPATH": str(tests)}
    done = subprocess.run(
        [sys.executable, "-c", script], env=environment, capture_output=True, text=True, check=True
    )
    assert done.stdout.strip() == digest()


SELFCHECKS = {
    "soften": ((1, 1), (7, 5)),
    "raw_pair": ((4, 6), (1, 1)),
    "narrow": ((1, 20), (2, 16), (9, 33)),
}


@pytest.mark.parametrize("name", SELFCHECKS)
def test_selfcheck_holds(name: str, tmp_path: Path) -> None:
    """An output may be empty (one row, `valid`), which checks the status alone."""
    made = files(name, *SELFCHECKS[name])
    for file in made:
        (tmp_path / file.name).write_text(file.text)
    sources = [f"{name}.c", f"{name}_selfcheck.c"]
    for compiler in ("gcc", "clang"):
        run([compiler, *STRICT, *sources, "-o", "check"], tmp_path)
        assert run([tmp_path / "check"], tmp_path) == ""
    checks = "--enable=warning,portability,performance,style"
    stdio = f"-D{name.upper()}_SELFCHECK_STDIO"
    for define in ("-DPLAIN", stdio):
        assert run(["cppcheck", "-q", "--std=c99", checks, define, *sources], tmp_path) == ""


def test_selfcheck_counts_mismatches(tmp_path: Path) -> None:
    sizing = sized("soften", READ["soften"])
    (vector,) = vectors(sizing, (6, 7))
    output = vector.response.output.copy()
    output[2, 3] ^= 1
    output[5, 6] ^= 1
    wrong = replace(vector, response=replace(vector.response, output=output))
    for file in emit(sizing, direct(sizing), [wrong]).files:
        (tmp_path / file.name).write_text(file.text)
    (tmp_path / "own.c").write_text(
        "long soften_selfcheck(void);\nint main(void) { return (int)soften_selfcheck(); }\n"
    )
    defines = ["-DSOFTEN_SELFCHECK_NO_MAIN", "-DSOFTEN_SELFCHECK_STDIO"]
    sources = ["soften.c", "soften_selfcheck.c", "own.c"]
    run(["gcc", *STRICT, *defines, *sources, "-o", "own"], tmp_path)
    done = subprocess.run([tmp_path / "own"], capture_output=True, text=True, check=False)
    assert done.returncode == 2
    assert done.stdout.count("expected") == 2
    assert "element 17: got" in done.stdout


def test_selfcheck_without_vectors(tmp_path: Path) -> None:
    for file in files("soften"):
        (tmp_path / file.name).write_text(file.text)
    sources = ["soften.c", "soften_selfcheck.c"]
    run(["gcc", *STRICT, *sources, "-o", "check"], tmp_path)
    assert run([tmp_path / "check"], tmp_path) == ""
    checks = "--enable=warning,portability,performance,style"
    assert run(["cppcheck", "-q", "--std=c99", checks, *sources], tmp_path) == ""


def test_mixed_files_do_not_compile(tmp_path: Path) -> None:
    """A header of another spec is found by the compiler, not on the part."""
    sizing = sized("soften", READ["soften"])
    other = replace(sizing, filter=replace(sizing.filter, spec_digest="e" * 64))
    header = emit(other, direct(other), ()).files[0]
    source = emit(sizing, direct(sizing), ()).files[1]
    (tmp_path / header.name).write_text(header.text)
    (tmp_path / source.name).write_text(source.text)
    with pytest.raises(AssertionError, match="not emitted together"):
        run(["gcc", *STRICT, "-c", source.name], tmp_path)


HOSTILE = "ends */ int x; /* opens // ??/ \\ it all"


def test_summary_stays_in_its_comment(tmp_path: Path) -> None:
    sizing = sized("soften", {**READ["soften"], "filter": {"summary": HOSTILE + " and so on" * 20}})
    for file in emit(sizing, direct(sizing), ()).files:
        (tmp_path / file.name).write_text(file.text)
    run(["gcc", *STRICT, "-Wtrigraphs", "-c", "soften.c"], tmp_path)
    run(["clang", *STRICT, "-c", "soften.c"], tmp_path)


def test_harmless_text() -> None:
    for text in ("*/", "/*", "/*/", "**//**", "??/"):
        kept = harmless(text)
        assert "*/" not in kept
        assert "/*" not in kept
        assert "??" not in kept


def test_bounds_are_rounded_outward() -> None:
    third = Fraction(1, 3)
    assert outward(third, up=True) == "0.3334"
    assert outward(third, up=False) == "0.3333"
    assert outward(-third, up=True) == "-0.3333"
    assert outward(-third, up=False) == "-0.3334"
    assert outward(Fraction(1, 2), up=True) == "0.5"
    assert outward(Fraction(-7), up=False) == "-7"
    assert outward(Fraction(0), up=False) == "0"


def test_kernel_is_laid_out_as_it_is_read() -> None:
    """A convolution reads the pixel to the left with the tap to the right."""
    f = resolve(spec(taps=[[1, 2, 30], [0, -5, 0]], image={"spacing": (2, 1)}))
    head, *rows = kernel_lines(f.passes[0].kernel, f.geometry)
    assert head == (
        "Coefficients of the pixels about the output, rows -2 to 0 by 2, columns -1 to 1:"
    )
    assert [row.split() for row in rows] == [["0", "-5", "0"], ["30", "2", "1"]]
    assert len({len(row) for row in rows}) == 1


def test_large_kernel_is_not_laid_out() -> None:
    for taps in ([[1] * 16], [[1]] * 32, [[123456789] * 9]):
        f = resolve(spec(taps=taps))
        assert kernel_lines(f.passes[0].kernel, f.geometry) == ()


def test_long_lines_are_broken() -> None:
    call = "    x = function(" + ", ".join(f"argument_{i}" for i in range(12)) + ");"
    assert all(len(line) <= 96 for line in fold(call).split("\n"))
    assert fold(call).replace("\n        ", " ") == call
    choice = "    return " + "a" * 50 + " ? b : " + "c" * 50 + ";"
    assert fold(choice).split("\n")[1].startswith("        : c")
    assert comment("word " * 40).count("\n") == 2
    assert prose(["key   " + "word " * 30]).split("\n")[1].startswith(" *       word")
