"""The requantisers in C against the contract's scalar arithmetic, over whole domains."""

import ctypes
from collections.abc import Callable, Iterator
from dataclasses import replace
from itertools import product
from pathlib import Path

import pytest

from guardbit.arith.rounding import requantise
from guardbit.arith.words import wrap
from guardbit.emit import expressions as c
from guardbit.model.enums import Overflow, Preload, Rounding
from guardbit.model.plan import Cell, Thresholds
from guardbit.model.routine import Probe
from guardbit.model.sizing import Interval

from .bench import STRICT, TAILS_PER_FILTER, UNIT, Emitted, run
from .conftest import Bench

WHOLE = 2**13


@pytest.fixture(scope="module")
def tail(table: Bench) -> Callable[[int, int], int]:
    library = table.folder / "tails.so"
    run(["clang", "-std=c99", "-O0", "-shared", "-fPIC", UNIT, "-o", str(library)], table.folder)
    function = ctypes.CDLL(str(library)).bench_tail
    function.argtypes = [ctypes.c_int, ctypes.c_int64]
    function.restype = ctypes.c_int64

    def call(which: int, acc: int) -> int:
        return int(function(which, acc))

    return call


def arguments(values: Interval) -> list[int]:
    """All of a small interval; both ends, zero and a spread of a large one."""
    if values.high - values.low < WHOLE:
        return list(range(values.low, values.high + 1))
    parts = 509
    spread = [values.low + (values.high - values.low) * i // parts for i in range(parts + 1)]
    near = [a + b for a in (values.low, 0, values.high) for b in range(-300, 301)]
    return [n for n in {*spread, *near} if values.low <= n <= min(values.high, 2**63 - 1)]


def probes(made: tuple[Emitted, ...]) -> Iterator[tuple[int, Emitted, Probe]]:
    for each in made:
        for index, probe in enumerate(each.emission.probes):
            yield TAILS_PER_FILTER * each.number + index, each, probe


def test_every_requantiser(table: Bench, tail: Callable[[int, int], int]) -> None:
    compared = 0
    for which, each, probe in probes(table.made):
        stage = each.filter.passes[probe.requantiser]
        r = stage.requantiser
        if r.overflow is Overflow.FORBID:
            r = replace(r, overflow=Overflow.SATURATE)
        preloaded = stage.accumulator.preload is Preload.ROUNDING
        assert probe.preloaded == preloaded
        for acc in arguments(probe.argument):
            wanted = requantise(r, preloaded, acc) - probe.remove
            assert tail(which, acc) == wanted, (probe.function, acc)
            compared += 1
    assert compared > 300_000


def test_every_rounding_meets_every_form(table: Bench) -> None:
    """A guard of the table itself: all forms of quotients, the two commonest in each mode."""
    met = {
        (type(step.value.quotient).__name__, each.filter.passes[step.stage].requantiser.rounding)
        for each in table.made
        for step in each.plan.steps
    }
    assert {form for form, _ in met} == {
        "Exact",
        "Thresholds",
        "Floor",
        "TiesToEven",
        "Truncate",
        "TiesToAway",
    }
    assert {mode for form, mode in met if form == "Thresholds"} == set(Rounding)
    assert {mode for form, mode in met if form == "Floor"} == set(Rounding)


FORMATS = [*product((1, 2, 7, 8, 9, 15, 16, 17, 31, 32), (False, True))]
FORMATS += [(33, False), (33, True), (63, False), (63, True), (64, True)]


def test_low_bits_read_back(tmp_path: Path) -> None:
    """Two's complement by comparisons alone, without a conversion that C leaves open."""
    lines = ["#include <stdint.h>"]
    for bits, signed in FORMATS:
        work = 64 if bits > 32 else 32
        unsigned = f"uint{max(work, 32)}_t"
        result = c.holder(*ends(bits, signed))
        lines += [
            f"int64_t f{bits}_{int(signed)}(int64_t x);",
            f"int64_t f{bits}_{int(signed)}(int64_t x)",
            "{",
            f"    const {unsigned} low = {c.low_bits('x', bits, unsigned)};",
            f"    return {c.from_low_bits(bits, signed, result, unsigned)};",
            "}",
        ]
    (tmp_path / "low.c").write_text("\n".join(lines) + "\n")
    flags = [*STRICT, "-fsanitize=undefined,implicit-conversion", "-fsanitize-trap=all"]
    run(["clang", *flags, "-shared", "-fPIC", "low.c", "-o", "low.so"], tmp_path)
    library = ctypes.CDLL(str(tmp_path / "low.so"))
    for bits, signed in FORMATS:
        function = library[f"f{bits}_{int(signed)}"]
        function.argtypes, function.restype = [ctypes.c_int64], ctypes.c_int64
        around = [
            a + b for a in (-(2**bits), *ends(bits, signed), 0, 2**bits) for b in (-2, -1, 0, 1)
        ]
        values = [*range(-600, 600), *around, -(2**63), 2**63 - 1]
        for value in values:
            if -(2**63) <= value < 2**63:
                assert function(value) == wrap(value, bits, signed), (bits, signed, value)


def ends(bits: int, signed: bool) -> tuple[int, int]:
    return (-(1 << (bits - 1)), (1 << (bits - 1)) - 1) if signed else (0, (1 << bits) - 1)


@pytest.mark.parametrize(
    ("value", "text"),
    # C99 6.4.4.1: no constant is negative, and 2^63 fits no signed type
    [
        (-1, "-1"),
        (-(2**31), "INT32_MIN"),
        (-(2**31) - 1, "-2147483649"),
        (-(2**63), "INT64_MIN"),
        (2**63 - 1, "9223372036854775807"),
        (2**63, "9223372036854775808u"),
    ],
)
def test_constants(value: int, text: str) -> None:
    assert c.number(value) == text


def test_small_sums_of_comparisons_are_cast() -> None:
    """A comparison is an int, to which 32767 cannot be added where int has 16 bits."""
    form = Thresholds(5, None)
    assert c.with_offset(form, "(n >= 5)", 7, Cell(32, True)) == "(n >= 5) + 7"
    assert c.with_offset(form, "(n >= 5)", 32767, Cell(32, True)) == "(int32_t)(n >= 5) + 32767"
