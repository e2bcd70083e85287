"""Emitted C whose coefficients are given at run time: its text, and the check of what is given.

That its outputs are the reference's is shown with those of all other filters, in
test_emitted_c.py.
"""

import itertools
import os
import random
from functools import cache
from pathlib import Path

import pytest
from cffi import FFI

from guardbit.arith.tapset import is_member
from guardbit.build.compiler import Compiler, identify
from guardbit.build.library import Library, compile_library
from guardbit.emit.emission import emit
from guardbit.emit.expressions import loaded_product
from guardbit.model.filter import Filter, TapSet, raster, registers_of
from guardbit.model.plan import Cell
from guardbit.model.routine import Call, Emission, Status
from guardbit.plan.direct import direct
from guardbit.reference.run import respond
from guardbit.vectors.selfcheck import selfcheck
from guardbit.verify.loadings import illegal_loadings, legal_loadings, nominal
from tools import needs

from .bench import STRICT, run
from .registers import SHARP, Loadable, cases, sized
from .test_emitted_text import ACCEPT, GOLDEN, vectors

LIMITED = sorted(set(cases()) - {name for name in cases() if name.startswith(("same", "full"))})


@cache
def emitted(name: str) -> tuple[Filter, Emission]:
    sizing = sized(name)
    return sizing.filter, emit(sizing, direct(sizing), vectors(sizing, (5, 9)))


def files(name: str) -> dict[str, str]:
    return {file.name: file.text for file in emitted(name)[1].files}


def test_golden() -> None:
    for name, text in files("sharp").items():
        kept = GOLDEN / f"{name}.txt"
        if os.environ.get(ACCEPT) == "1":
            kept.write_text(text)
        assert kept.read_text() == text, f"{ACCEPT}=1 pytest tests/emit accepts the new text"


@pytest.mark.parametrize("compiler", ["gcc", "clang"])
def test_selfcheck_holds_for_the_nominal_taps(compiler: str, tmp_path: Path) -> None:
    needs(compiler, "cppcheck")
    for name in ("sharp", "listed", "unsigned_taps", "own"):
        sizing = sized(name)
        for file in emit(sizing, direct(sizing), selfcheck(sizing)).files:
            (tmp_path / file.name).write_text(file.text)
        sources = [f"taps_{name}.c", f"taps_{name}_selfcheck.c"]
        run([compiler, *STRICT, *sources, "-o", "check"], tmp_path)
        assert run([tmp_path / "check"], tmp_path) == ""
        checks = "--enable=warning,portability,performance,style"
        assert run(["cppcheck", "-q", "--std=c99", checks, *sources], tmp_path) == ""


def check_of(name: str, folder: Path) -> object:
    """The compiled check of a filter, and a function that calls it with cells."""
    f, emission = emitted(name)
    library = folder / f"{name}.so"
    for file in emission.routine.sources:
        (folder / file.name).write_text(file.text)
    run(["gcc", *STRICT, "-fPIC", "-shared", f"{f.name}.c", "-o", str(library)], folder)
    ffi = FFI()
    taps = emission.routine.taps
    assert taps is not None
    kind = f"{'' if taps.word[1] else 'u'}int{taps.word[0]}_t"
    ffi.cdef(f"int {f.name}_check_taps(const {kind} *taps);")
    opened = ffi.dlopen(str(library))
    function = getattr(opened, f"{f.name}_check_taps")
    return lambda cells, _=opened: function(ffi.new(f"{kind}[]", list(cells)))


def tried(s: TapSet, word: tuple[int, bool], rng: random.Random) -> list[tuple[int, ...]]:
    """Cells at random about what may be loaded, and at the ends of the type."""
    bits, signed = word
    low, high = (-(1 << bits - 1), (1 << bits - 1) - 1) if signed else (0, (1 << bits) - 1)
    found = []
    for _ in range(300):
        taps = [
            rng.choice((a, b, rng.randint(a, b), rng.randint(max(low, a - 1), min(high, b + 1))))
            for a, b in zip(s.least, s.greatest, strict=True)
        ]
        cells = list(raster(s, taps))
        if rng.random() < 0.2:
            cells[rng.randrange(s.count)] = rng.choice((low, high, 0, 1))
        found.append(tuple(cells))
    return found


@pytest.mark.parametrize("name", LIMITED)
def test_check_is_that_of_the_set(name: str, tmp_path: Path) -> None:
    f, emission = emitted(name)
    s, given = registers_of(f), emission.routine.taps
    assert s is not None and given is not None
    check = check_of(name, tmp_path)
    assert callable(check)
    legal = [raster(s, taps) for taps in (nominal(f), *legal_loadings(f))]
    illegal = [each.cells for each in illegal_loadings(f, given.word)]
    bad = list(Status).index(Status.BAD_TAPS)
    assert {check(cells) for cells in legal} == {0}
    assert {check(cells) for cells in illegal} <= {bad}
    for cells in tried(s, given.word, random.Random(7)):
        taps = [cells[cell] for cell in s.cells]
        member = raster(s, taps) == cells and is_member(s, taps)
        assert check(cells) == (0 if member else bad), cells


def test_magnitudes_are_checked_alone(tmp_path: Path) -> None:
    """A set whose sum and limits hold everywhere that its magnitudes do not."""
    check = check_of("sharp", tmp_path)
    assert callable(check)
    for by, status in ((73, 0), (74, 0), (75, 6), (99, 6)):
        assert check((by, -by, by, -by, 4, 0, 0, 0, 0)) == status


def test_taps_of_any_type_need_no_check(tmp_path: Path) -> None:
    check = check_of("free", tmp_path)
    assert callable(check)
    assert check((255,) * 9) == 0
    assert "(void)taps;" in files("free")["taps_free.c"]


CELLS = [Cell(bits, signed) for bits in (8, 16, 32) for signed in (False, True)]


def test_operands_are_cast_where_c_would_not_convert_them() -> None:
    """What the arithmetic's type is by C99 6.3.1.8, with an int of 16 and of 32 bits."""
    for wide, tap, word in itertools.product(
        (Cell(32, True), Cell(64, True), Cell(64, False)), CELLS, [*CELLS, Cell(64, True)]
    ):
        text = loaded_product("t", "r", (wide, tap, word))
        left, right = text.split(" * ")
        types = [wide if "(" in side else own for side, own in ((left, tap), (right, word))]
        for integer in (16, 32):
            assert arithmetic(types[0], types[1], integer) == wide, (text, wide, tap, word)


def arithmetic(a: Cell, b: Cell, integer: int) -> Cell:
    """The type of a product by the usual arithmetic conversions; ranks go by width."""
    a, b = (
        Cell(integer, True)
        if each.bits < integer or (each.bits == integer and each.signed)
        else each
        for each in (a, b)
    )
    if a.bits != b.bits:
        return max(a, b, key=lambda each: each.bits)
    return Cell(a.bits, a.signed and b.signed)


def libraries(tmp_path: Path, emissions: list[Emission]) -> list[Library]:
    found: list[Library] = []
    for name in ("gcc", "clang"):
        compiler = identify((name,))
        assert isinstance(compiler, Compiler)
        folder = tmp_path / name
        folder.mkdir()
        routines = [emission.routine for emission in emissions]
        found.append(compile_library(compiler, routines, (), folder))
    return found


def test_calls_without_taps_pass_the_nominal_ones(tmp_path: Path) -> None:
    needs("gcc", "clang")
    f, emission = emitted("sharp")
    (vector,) = vectors(sized("sharp"), (6, 8))
    s = registers_of(f)
    assert s is not None
    given = raster(s, nominal(f))
    for library in libraries(tmp_path, [emission]):
        calls = [Call(vector.frame, (6, 8), taps=taps) for taps in (None, given)]
        outcomes = library.run([(emission.routine, call) for call in calls])
        for outcome in outcomes:
            assert outcome.statuses == (0,) and outcome.harm is None and outcome.output is not None
            assert (outcome.output == respond(f, vector.frame).output).all()


def test_header_says_what_may_be_loaded() -> None:
    said = " ".join(files("sharp")["taps_sharp.h"].replace(" * ", " ").split())
    assert "each is -128 to 127;" in said
    assert "their sum is 4;" in said
    assert "their magnitudes add up to at most 300; no others are legal" in said
    assert "#define TAPS_SHARP_TAPS 9" in said
    assert "TAPS_SHARP_BAD_TAPS /*" in said
    assert "in cells that the kernel leaves out are zero" in files("cross")["taps_cross.h"]
    assert "one of the 2 kernels that the spec lists" in files("listed")["taps_listed.h"]


def test_taps_are_printed_where_they_multiply() -> None:
    """A convolution reads the pixels from last tap to first, a correlation in order."""
    text = files("sharp")["taps_sharp.c"]
    assert " *   8   7   6\n *   5   4   3\n *   2   1   0\n" in text
    assert "taps[8] * (int32_t)r0[i]" in text
    assert "taps[0] * (int32_t)r0[i]" in files("turned")["taps_turned.c"]
    assert " *   .   7   .\n" in files("cross")["taps_cross.c"]


def test_a_kernel_of_one_tap(tmp_path: Path) -> None:
    one = Loadable(((3,),), "divisor = 4\n[input]\nbits = 8", 0, 9)
    sizing = sized("one", one)
    emission = emit(sizing, direct(sizing), ())
    frame = vectors(sizing, (2, 3))[0].frame
    for library in libraries(tmp_path, [emission]):
        (outcome,) = library.run([(emission.routine, Call(frame, (2, 3), taps=(8,)))])
        assert outcome.output is not None
        assert (outcome.output == (frame * 2).clip(0, 255)).all()


def test_the_set_of_sharp_is_what_these_tests_think() -> None:
    f, _ = emitted("sharp")
    assert nominal(f) == tuple(tap for row in SHARP for tap in row)
