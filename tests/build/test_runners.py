"""Children that call compiled code: what they see of it, and that they outlive it."""

from collections.abc import Sequence
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from guardbit.build.compiler import find_compiler
from guardbit.build.coverage import coverage_program, measure
from guardbit.build.library import HostRunner, compile_library
from guardbit.build.processes import run_tasks
from guardbit.build.sanitized import describe, sanitized_runner
from guardbit.model.routine import UNWRITTEN, Call, Harm, Outcome, Routine
from tools import needs

from .snippets import tail, turner

FRAME = np.arange(12).reshape(3, 4, 1)
GCC = find_compiler({"CC": "gcc"})


def plain(src_gap: int = 0, dst_gap: int = 0) -> Call:
    return Call(FRAME, (3, 4), src_gap=src_gap, dst_gap=dst_gap)


def run(routine: Routine, folder: Path, calls: Sequence[Call] = (plain(),)) -> list[Outcome]:
    library = compile_library(GCC, [routine], (), folder)
    return HostRunner(library, routine).run(calls)


def edited(old: str, new: str, more: str = "") -> Routine:
    routine = turner(more=more)
    (source,) = routine.sources
    assert old in source.text
    return replace(routine, sources=(replace(source, text=source.text.replace(old, new)),))


@pytest.mark.parametrize("gaps", [(0, 0), (5, 0), (0, 7), (3, 2)])
def test_a_right_routine(gaps: tuple[int, int], tmp_path: Path) -> None:
    (outcome,) = run(turner(), tmp_path, [plain(*gaps)])
    assert outcome.harm is None
    assert outcome.statuses == (0,)
    assert outcome.output is not None
    assert np.array_equal(outcome.output, 255 - FRAME)


HARMS = {
    "reads behind the source": ("d[0] = s[(h - 1) * ss + w];", Harm.CRASH),
    "reads before the source": ("{ volatile uint8_t v = *(s - 1); (void)v; }", Harm.CRASH),
    "writes behind": ("d[(h - 1) * ds + w] = 1;", Harm.CRASH),
    "writes before": ("*(d - 1) = 1;", Harm.WROTE_OUTSIDE),
    "writes far before": ("*(d - 200) = 1;", Harm.WROTE_OUTSIDE),
    "null": ("*(volatile uint8_t *)0 = 1;", Harm.CRASH),
    "never ends": ("{ volatile int on = 1; while (on) { } }", Harm.HANG),
    "changes the source": ("*(uint8_t *)(uintptr_t)s = 77;", Harm.CHANGED_SOURCE),
}


@pytest.mark.parametrize("name", HARMS)
def test_harm_is_an_outcome(name: str, tmp_path: Path) -> None:
    more, harm = HARMS[name]
    routine = turner(more=more)
    library = compile_library(GCC, [routine], (), tmp_path)
    quick = replace(library, seconds=0.3)
    (outcome,) = HostRunner(quick, routine).run([plain()])
    assert outcome.harm is harm or (
        # a byte before the first run's buffer is a margin, before the second's a guard page
        harm is Harm.WROTE_OUTSIDE and outcome.harm is Harm.CRASH
    )


def test_gaps_of_the_destination_are_watched(tmp_path: Path) -> None:
    (outcome,) = run(turner(more="if (ds > w) { d[w] = 1; }"), tmp_path, [plain(0, 2)])
    assert outcome.harm is Harm.WROTE_OUTSIDE
    assert "row 0" in outcome.detail


def test_unwritten_cells_are_told(tmp_path: Path) -> None:
    (outcome,) = run(edited("x < w; x++", "x + 1 < w; x++"), tmp_path)
    assert outcome.output is not None
    assert (outcome.output[:, 3] == UNWRITTEN).all()
    assert np.array_equal(outcome.output[:, :3], 255 - FRAME[:, :3])
    assert outcome.harm is None


@pytest.mark.parametrize("filler", [0xA5, 0x5A])
def test_a_written_value_like_the_filler_counts_as_written(filler: int, tmp_path: Path) -> None:
    frame = np.full((2, 2, 1), 255 - filler)
    (outcome,) = run(turner(), tmp_path, [Call(frame, (2, 2))])
    assert outcome.output is not None
    assert (outcome.output == filler).all()


def test_a_result_that_depends_on_the_destination_is_unsettled(tmp_path: Path) -> None:
    other = edited("d[y * ds + x] = turn", "d[y * ds + x] ^= turn")
    (outcome,) = run(other, tmp_path)
    assert outcome.harm is Harm.UNSETTLED
    assert outcome.detail == "row 0 column 0 channel 0"


def test_calls_behind_a_crash_are_still_made(tmp_path: Path) -> None:
    routine = turner(more="if (w == 2) { *(volatile uint8_t *)(w - 2) = 1; }")
    sizes = [4, 2, 3, 2, 1]
    calls = [Call(np.zeros((2, w, 1), np.int64), (2, w)) for w in sizes]
    outcomes = run(routine, tmp_path, calls)
    assert [o.harm for o in outcomes] == [None, Harm.CRASH, None, Harm.CRASH, None]
    assert all("SIG" in o.detail for o in outcomes if o.harm)


def test_after_many_crashes_the_rest_is_not_run(tmp_path: Path) -> None:
    outcomes = run(turner(more="*(volatile uint8_t *)0 = 1;"), tmp_path, [plain()] * 30)
    assert len(outcomes) == 30
    assert outcomes[0].harm is Harm.CRASH
    assert outcomes[-1].harm is Harm.NOT_RUN


def test_code_that_ends_the_process_is_an_outcome(tmp_path: Path) -> None:
    other = edited("#include <stddef.h>", "#include <stddef.h>\n#include <stdlib.h>", "_Exit(0);")
    (outcome,) = run(other, tmp_path)
    assert outcome.harm is Harm.CRASH
    assert "status 0" in outcome.detail


def test_many_routines_share_a_library(tmp_path: Path) -> None:
    routines = [turner(f"turn{level}", level) for level in (255, 200, 100)]
    probes = [tail(routine.name) for routine in routines]
    library = compile_library(GCC, routines, probes, tmp_path)
    outcomes = library.run([(routine, plain()) for routine in routines for _ in range(4)])
    for level, outcome in zip([255] * 4 + [200] * 4 + [100] * 4, outcomes, strict=True):
        assert outcome.output is not None
        assert np.array_equal(outcome.output, level - FRAME)
    assert library.probe(probes[1], np.array([0, 50])).values.tolist() == [200, 150]


def test_probes_answer_in_order_and_outlive_harm(tmp_path: Path) -> None:
    crash = "if (code == 9) { *(volatile uint8_t *)0 = 1; }\n    "
    other = edited("return (uint8_t)(255", crash + "return (uint8_t)(255")
    host = HostRunner(compile_library(GCC, [other], [tail()], tmp_path), other)
    good = host.probe(tail(), np.arange(9))
    assert good.harm is None
    assert good.values.tolist() == [255 - i for i in range(9)]
    assert host.probe(tail(), np.arange(20)).harm is Harm.CRASH


@pytest.mark.parametrize("compiler", ["gcc", "clang"])
def test_sanitizers_name_kind_and_line(compiler: str, tmp_path: Path) -> None:
    needs(compiler)
    more = "if (w == 3) { d[h * ds] = 1; } if (w == 2) { int32_t b = 2147483647; b += (int32_t)h; }"
    routine = turner(more=more)
    runner = sanitized_runner(find_compiler({"CC": compiler}), routine, [tail()], tmp_path)
    calls = [Call(np.zeros((2, w, 1), np.int64), (2, w)) for w in (4, 3, 2, 1)]
    outcomes = runner.run(calls)
    assert [o.harm for o in outcomes] == [None, Harm.SANITIZER, Harm.SANITIZER, None]
    line = routine.sources[0].text[: routine.sources[0].text.index("if (w")].count("\n") + 1
    assert outcomes[1].detail == f"heap-buffer-overflow, WRITE of size 1, turn.c line {line}"
    assert "signed integer overflow" in outcomes[2].detail
    assert outcomes[2].detail.endswith(f"turn.c line {line}")
    assert runner.probe(tail(), np.array([5])).values.tolist() == [250]


def test_a_sanitizer_report_without_place_is_kept() -> None:
    assert describe("==1==ERROR: AddressSanitizer: SEGV on unknown address 0x0") == "SEGV"


@pytest.mark.parametrize("compiler", ["gcc", "clang"])
def test_what_is_not_executed_is_listed(compiler: str, tmp_path: Path) -> None:
    needs(compiler)
    routine = turner(more="if (w == 9) {\n        d[0] = 1;\n    }")
    found = find_compiler({"CC": compiler})
    program = coverage_program(found, routine, [], tmp_path)
    assert run_tasks([(0, routine, plain())], program.launch)[0].harm is None
    coverage = measure(found, program)
    assert coverage.branches - coverage.branches_taken == 1
    # clang counts the closing brace as a line, too
    assert [gap.text for gap in coverage.gaps][:2] == ["if (w == 9) {", "d[0] = 1;"]
    assert coverage.lines - coverage.lines_run == len(coverage.gaps) - 1 <= 2
    assert {gap.file for gap in coverage.gaps} == {"turn.c"}


def test_the_report_of_another_runtime_is_read() -> None:
    words = (
        "thread 485 panic: signed integer overflow: 2147483647 + 2 cannot be represented\n"
        "lib/ubsan_rt.zig:156:20: 0x10872f8 in abort (ubsan_rt)\n"
        "/tmp/x/turn.c:21:45: 0x102280d in turn_frame (turn.c)\n"
    )
    kind = "signed integer overflow: 2147483647 + 2 cannot be represented"
    assert describe(words) == f"{kind}, turn.c line 21"
