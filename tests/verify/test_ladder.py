"""The ladder on a routine that a person wrote: a right one holds, each wrong one is found."""

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from guardbit.build.compiler import Compiler, find_compiler
from guardbit.build.library import HostRunner, compile_library
from guardbit.model.certificate import RungResult
from guardbit.model.finding import Finding
from guardbit.model.routine import Routine
from guardbit.report.words_verify import WORDS
from guardbit.verify import bands, calls, frames, impulses, requantiser, witnesses
from guardbit.verify.bench import Bench, Options, Trials, prepare, run
from guardbit.verify.ladder import climb

from .handmade import DEFECTS, OVERFLOWING, PROBE, SOURCE, broken, routine, sizing

COMPARED = (impulses, witnesses, frames, bands, calls)
RUNGS = ["build", *(rung.NAME for rung in COMPARED), "requantiser", "sanitized", "error", "proof"]


@pytest.fixture(scope="module")
def compiler() -> Compiler:
    return find_compiler({"CC": "gcc"})


@pytest.fixture(scope="module")
def bench() -> Bench:
    return prepare(sizing(), routine(), (PROBE,), Options())


@pytest.fixture(scope="module")
def good(compiler: Compiler) -> dict[str, RungResult]:
    photograph = np.add.outer(np.arange(90) * 3, np.arange(80) * 2) % 200
    rungs = climb(sizing(), routine(), (PROBE,), compiler, Options(photograph=photograph))
    return {rung.name: rung for rung in rungs}


def figures(rung: RungResult) -> dict[str, str | int]:
    return {figure.name: figure.value for figure in rung.figures}


def test_right_routine_holds_on_every_rung(good: dict[str, RungResult]) -> None:
    assert list(good) == RUNGS
    for rung in good.values():
        assert rung.holds, (rung.name, rung.findings)


def test_every_observable_change_of_a_tap_would_show(good: dict[str, RungResult]) -> None:
    told = figures(good["impulses"])
    # 9 taps, 2 signs; reads outside per axis: none, either side, both (an image of one pixel)
    assert told["single-tap changes tried"] == 9 * 2 * 16
    assert told["single-tap changes shown"] == 9 * 2 * 16


def test_every_argument_of_the_tail_is_tried(good: dict[str, RungResult]) -> None:
    assert good["requantiser"].cases == 4081


def test_every_line_is_executed(good: dict[str, RungResult]) -> None:
    assert figures(good["sanitized"])["lines executed"] == "100.0"


def test_scipy_confirms_every_sum(good: dict[str, RungResult]) -> None:
    told = figures(good["frames"])
    assert told["accumulators confirmed by SciPy"] == told["output values compared"]
    assert int(told["output values compared"]) > 5000


def test_sampled_positions_are_said_to_be_not_covered(good: dict[str, RungResult]) -> None:
    assert any("border classes" in note for note in good["frames"].not_covered)


def one_rung(
    bench: Bench, compiler: Compiler, tested: Routine, rung: str, folder: Path
) -> tuple[Finding, ...]:
    """Return the findings of one rung for a routine, built for it alone."""
    kept = folder / "kept"
    trial = replace(bench, routine=tested, options=Options(folder=kept))
    made = compile_library(compiler, [tested], (PROBE,), folder)
    host = HostRunner(replace(made, seconds=0.2), tested)
    if rung == "requantiser":
        return requantiser.result(trial, host).findings
    module = next(module for module in COMPARED if rung == module.NAME)
    result: RungResult = module.result(trial, run(host, module.cases(trial)))
    return result.findings


@pytest.mark.parametrize("name", DEFECTS)
def test_defect_is_a_finding(name: str, bench: Bench, compiler: Compiler, tmp_path: Path) -> None:
    _, _, kind, rung = DEFECTS[name]
    found = one_rung(bench, compiler, broken(name), rung, tmp_path)
    assert found
    assert kind == "*" or kind in {f.kind for f in found}
    for finding in found:
        values = dict(finding.values)
        assert all(text.format_map(values) for text in WORDS[finding.kind])
        if "reproducer" in values:
            path = tmp_path / "kept" / str(values["reproducer"])
            assert "blur3_" in path.read_text("utf-8")
            assert np.load(path.with_suffix(".npy")).dtype == np.uint8


def test_a_mismatch_says_where_and_why(bench: Bench, compiler: Compiler, tmp_path: Path) -> None:
    found = one_rung(bench, compiler, broken("wrong border"), "impulses", tmp_path)
    values = dict(found[0].values)
    assert (values["row"], values["column"]) == (0, 0)
    assert values["position"] != "interior"
    assert "border whole-sample" in str(values["explains"])


def test_a_wrong_tap_is_named(bench: Bench, compiler: Compiler, tmp_path: Path) -> None:
    source = SOURCE.replace("dst[(y - from)", "sum += src[y * src_stride + x]; dst[(y - from)")
    found = one_rung(bench, compiler, routine(source), "impulses", tmp_path)
    explains = str(dict(found[0].values)["explains"])
    assert explains.startswith("every pixel of")
    assert explains.endswith("tap 4 reading (0, 0) +1")


def test_undefined_behaviour_without_effect_is_found_by_sanitizers(compiler: Compiler) -> None:
    rungs = {r.name: r for r in climb(sizing(), routine(OVERFLOWING), (PROBE,), compiler)}
    assert rungs["frames"].holds
    finding = rungs["sanitized"].findings[0]
    assert finding.kind == "harm-sanitizer"
    line = OVERFLOWING[: OVERFLOWING.index("big +=")].count("\n") + 1
    assert "signed integer overflow" in str(dict(finding.values)["detail"])
    assert f"blur3.c line {line}" in str(dict(finding.values)["detail"])


def test_sanitizers_name_the_line_of_a_crash(compiler: Compiler) -> None:
    rungs = climb(sizing(), broken("crash"), (PROBE,), compiler, Options(seconds=0.3))
    found = {r.name: r for r in rungs}["sanitized"].findings
    assert any("blur3.c line" in str(dict(f.values).get("detail")) for f in found)


def test_code_that_does_not_compile_is_a_finding(compiler: Compiler) -> None:
    source = SOURCE.replace("size_t x, y, k;", "size_t x, y, k, unused;")
    rungs = climb(sizing(), routine(source), (PROBE,), compiler, Options())
    build = rungs[0]
    assert [f.kind for f in build.findings] == ["compile-error"]
    place = build.findings[0].place
    assert place.file == "blur3.c"
    assert place.line == 1 + source[: source.index("unused")].count("\n")
    assert not any(rung.ran for rung in rungs[1:])
    assert [rung.name for rung in rungs] == RUNGS


def test_a_function_that_is_not_there_is_a_finding(compiler: Compiler) -> None:
    tested = replace(routine(), output_size="blur3_size")
    rungs = climb(sizing(), tested, (PROBE,), compiler, Options())
    assert [f.kind for f in rungs[0].findings] == ["link-failed"]
    assert "blur3_size" in str(dict(rungs[0].findings[0].values)["message"])


def test_no_rung_passes_without_cases(bench: Bench) -> None:
    bare = replace(bench, routine=replace(routine(), band=None), probes=())
    nothing = Trials("host")
    assert not bands.result(bare, nothing).holds
    for rung in COMPARED:
        assert not rung.result(replace(bare, attained=(), witnessing=()), nothing).holds
