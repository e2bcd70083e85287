"""The emitted C: warning-free everywhere, and equal to the reference to the last bit.

Expected responses come from the reference, which shares nothing with the generator but the
types of the model. The program is built with the strict flags of gcc and of clang, run under
AddressSanitizer and UndefinedBehaviorSanitizer, and run with the integer types of machines
with 16- and 32-bit int and of 64-bit ones whose long has 32 bits.
"""

import re
from dataclasses import dataclass

import pytest

from guardbit.model.routine import Status
from tools import needs

from .bench import MAIN, STRICT, UNIT, complaints, run
from .conftest import Bench


def test_table_asks_for_everything(table: Bench) -> None:
    asked = table.questions
    assert len(asked) > 2000
    assert sum(q.status is Status.BAD_CODE for q in asked) > 100
    assert any(q.wanted is None and q.status is Status.OK for q in asked)
    assert {q.case.number for q in asked} == set(range(len(table.made)))
    assert any(0 in q.shape for q in asked)


def test_gcc_optimised(table: Bench) -> None:
    needs("gcc")
    program = table.folder / "optimised"
    run(["gcc", *STRICT, "-O1", UNIT, str(MAIN), "-o", str(program)], table.folder)
    assert complaints(program, table.job(), table.made) == []


def test_clang_sanitized(table: Bench) -> None:
    """Conversions without a cast must keep the value as well, which C does not ask for."""
    needs("clang")
    program = table.folder / "sanitized"
    checks = "-fsanitize=address,undefined,implicit-conversion"
    command = ["clang", *STRICT, "-O0", checks, "-fno-sanitize-recover=all"]
    run([*command, UNIT, str(MAIN), "-o", str(program)], table.folder)
    assert complaints(program, table.job(), table.made) == []


@dataclass(frozen=True)
class DataModel:
    """A target of clang whose types are compiled for, and what its int and size_t are."""

    name: str
    target: str
    integer: str
    size: str


DATA_MODELS = (
    DataModel("IP16", "msp430", "int16_t", "uint16_t"),
    DataModel("ILP32", "i686-linux-gnu", "int32_t", "uint32_t"),
    DataModel("LLP64", "x86_64-w64-windows-gnu", "int32_t", "uint64_t"),
)
TRAPS = ",".join(
    f"{check}"
    for check in (
        "signed-integer-overflow",
        "shift-base",
        "shift-exponent",
        "integer-divide-by-zero",
        "implicit-signed-integer-truncation",
        "implicit-unsigned-integer-truncation",
        "implicit-integer-sign-change",
        "array-bounds",
    )
)


@pytest.mark.parametrize("model", DATA_MODELS, ids=lambda model: model.name)
def test_other_data_models(table: Bench, model: DataModel) -> None:
    """Compiled for the other machine's types, then run on this one.

    The intermediate code holds all promotions and conversions of the target, and traps where
    a number leaves its type. What is left out are blocks that need an index beyond 15 bits.
    """
    needs("clang")
    code, program = table.folder / f"{model.name}.ll", table.folder / model.name
    traps = ["-Xclang", f"-fsanitize={TRAPS}", "-Xclang", f"-fsanitize-trap={TRAPS}"]
    front = ["clang", f"--target={model.target}", "-ffreestanding", *STRICT, "-O0", *traps]
    run([*front, "-S", "-emit-llvm", UNIT, "-o", str(code)], table.folder)
    code.write_text(_without_target(code.read_text()))
    types = [f"-DBENCH_INT={model.integer}", f"-DBENCH_SIZE={model.size}"]
    back = ["clang", "-std=c99", "-Wno-override-module", "-O0", *types, str(code), str(MAIN)]
    run([*back, "-o", str(program)], table.folder)
    assert complaints(program, table.job(most_elements=32767), table.made) == []


def _without_target(code: str) -> str:
    code = re.sub(r"^target (datalayout|triple).*$", "", code, flags=re.MULTILINE)
    return re.sub(r'"(target|tune)-(cpu|features)"="[^"]*"', "", code)


def test_cppcheck_is_silent(table: Bench) -> None:
    needs("cppcheck")
    checks = "--enable=warning,portability,performance,style"
    names = [*dict.fromkeys(f"{each.filter.name}.c" for each in table.made)]
    assert run(["cppcheck", "-q", "-j2", "--std=c99", checks, *names], table.folder) == ""


def test_headers_are_cpp(table: Bench) -> None:
    needs("g++")
    every = "".join(f'#include "{each.filter.name}.h"\n' for each in table.made)
    (table.folder / "all.cpp").write_text(every)
    flags = ["-std=c++17", "-fsyntax-only", "-Wall", "-Wextra", "-pedantic", "-Werror"]
    run(["g++", *flags, "all.cpp"], table.folder)


def test_only_prefixed_symbols_are_visible(table: Bench) -> None:
    needs("clang", "nm")
    run(["clang", "-std=c99", "-ffreestanding", "-c", UNIT, "-o", "all.o"], table.folder)
    symbols = set(run(["nm", "-g", "all.o"], table.folder).split()[2::3])
    wanted = {
        f"{each.filter.name}_{entry}"
        for each in table.made
        for entry in ("frame", "band", "output_size", *(["check_taps"] * (each.taps is not None)))
    }
    assert {s for s in symbols if not s.startswith("bench_")} == wanted


def test_text_is_tidy(table: Bench) -> None:
    for each in table.made:
        for file in each.emission.files:
            assert file.text.isascii(), file.name
            assert file.text.endswith("\n"), file.name
            assert not file.text.endswith("\n\n"), file.name
            assert "\n\n\n" not in file.text, file.name
            for line in file.text.split("\n"):
                assert len(line) <= 100, (file.name, line)
                assert line == line.rstrip(), (file.name, line)
                assert "\t" not in line, (file.name, line)


def test_sources_are_freestanding(table: Bench) -> None:
    for each in table.made:
        name = each.filter.name
        header, source = (file.text for file in each.emission.routine.sources)
        assert re.findall(r"#include (.*)", header) == ["<stddef.h>", "<stdint.h>"]
        assert re.findall(r"#include (.*)", source) == [f'"{name}.h"']
        assert not re.search(r"\b(float|double|malloc|long|short|unsigned|goto)\b", _code(source))


def _code(text: str) -> str:
    return re.sub(r"/\*.*?\*/", "", text, flags=re.DOTALL)
