"""The ladder on routines that are given their coefficients: good ones, and ones with a fault."""

from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import pytest

from emit.registers import cases, sized
from guardbit.arith.tapset import is_member
from guardbit.build.compiler import find_compiler
from guardbit.emit.emission import emit
from guardbit.model.certificate import RungResult
from guardbit.model.filter import raster, registers_of
from guardbit.model.routine import Emission, Routine, SourceFile
from guardbit.model.sizing import End, Sizing, Witness
from guardbit.plan.direct import direct
from guardbit.verify.ladder import Options, climb
from guardbit.verify.loadings import illegal_loadings, legal_loadings, nominal


def emitted(name: str) -> tuple[Sizing, Emission]:
    sizing = sized(name)
    return sizing, emit(sizing, direct(sizing), ())


def rungs(
    sizing: Sizing, emission: Emission, routine: Routine, folder: Path | None = None
) -> dict[str, RungResult]:
    found = climb(sizing, routine, emission.probes, find_compiler(), Options(folder=folder))
    return {rung.name: rung for rung in found}


@pytest.mark.parametrize("name", ["sharp", "listed", "clamps", "wraps", "refuses", "turned"])
def test_every_rung_holds(name: str) -> None:
    sizing, emission = emitted(name)
    found = rungs(sizing, emission, emission.routine)
    for rung in found.values():
        # a frame's witness is for the nominal taps, and ends over the set are of others
        assert [f for f in rung.findings if f.kind != "witness-missed"] == [], rung.name
        assert rung.ran, rung
    said = " ".join(found["frames"].covered)
    assert "other legal taps" in said
    counted = {figure.name: figure.value for figure in found["sanitized"].figures}
    assert counted["lines executed"] == "100.0", found["sanitized"].not_covered


def spoilt(emission: Emission, change: Callable[[str], str]) -> Routine:
    header, source = emission.routine.sources
    text = change(source.text)
    assert text != source.text
    return replace(emission.routine, sources=(header, SourceFile(source.name, text)))


def test_a_tap_that_is_not_read_shows_with_other_taps_alone(tmp_path: Path) -> None:
    """The routine is right for the nominal kernel."""
    sizing, emission = emitted("sharp")
    wrong = spoilt(emission, lambda text: text.replace("taps[7] *", "-1 *"))
    found = rungs(sizing, emission, wrong, tmp_path)
    assert found["impulses"].findings == () and found["bands"].findings == ()
    assert {f.kind for f in found["frames"].findings} == {"output-differs"}
    assert {f.kind for f in found["witnesses"].findings} == {"output-differs"}
    first = dict(found["frames"].findings[0].values)
    assert "-taps-" in str(first["case"])
    kept = (tmp_path / str(first["reproducer"])).read_text()
    assert "taps = " in kept


FAULTS: dict[str, Callable[[str], str]] = {
    "takes anything": lambda text: text.replace("return sum == 4 &&", "return sum >= -9999 &&"),
    "off by one": lambda text: text.replace("size <= 300", "size <= 40000"),
    "does not look": lambda text: text.replace("!= TAPS_SHARP_OK) {", "!= TAPS_SHARP_OK && 0) {"),
    "writes first": lambda text: text.replace(
        "    if (taps_sharp_check_taps(", "    dst[0] = 1;\n    if (taps_sharp_check_taps("
    ),
    "another status": lambda text: text.replace("TAPS_SHARP_BAD_TAPS", "TAPS_SHARP_BAD_CODE"),
}


@pytest.mark.parametrize("fault", FAULTS)
def test_illegal_taps_that_are_not_refused_are_found(fault: str) -> None:
    sizing, emission = emitted("sharp")
    found = rungs(sizing, emission, spoilt(emission, FAULTS[fault]))
    kind = "destination-touched" if fault == "writes first" else "status-differs"
    assert {f.kind for f in found["calls"].findings} == {kind}


def test_a_read_behind_the_taps_is_found() -> None:
    sizing, emission = emitted("sharp")
    wrong = spoilt(emission, lambda text: text.replace("taps[8] *", "taps[9] *"))
    found = rungs(sizing, emission, wrong)
    assert any(f.kind.startswith("harm-") for f in found["frames"].findings)
    assert {f.kind for f in found["sanitized"].findings} == {"harm-sanitizer"}


@pytest.mark.parametrize("name", sorted(cases()))
def test_loadings_are_what_they_are_called(name: str) -> None:
    f = sized(name).filter
    s = registers_of(f)
    assert s is not None
    legal = legal_loadings(f)
    assert legal and nominal(f) not in legal
    assert all(is_member(s, taps) for taps in legal)
    assert legal == legal_loadings(f)
    for each in illegal_loadings(f, (16, True)):
        taps = [each.cells[cell] for cell in s.cells]
        assert not (is_member(s, taps) and raster(s, taps) == each.cells), each


def test_a_witness_is_run_with_the_taps_that_it_is_for() -> None:
    """Its value is what the reference gives with these taps, and the routine is given them."""
    sizing, _ = emitted("cross")
    f = sizing.filter
    taps = legal_loadings(f)[0]
    register = sizing.registers[0]
    frame = Witness("accumulator", End.GREATEST, False, 3, 3, 5, (), (1, 1), 5, 5 * sum(taps))
    for value, kinds in ((frame.value, set()), (frame.value + 1, {"witness-missed"})):
        shown = replace(register, witnesses=(replace(frame, taps=taps, value=value),))
        changed = replace(sizing, registers=(shown,))
        emission = emit(changed, direct(changed), ())
        rung = rungs(changed, emission, emission.routine)["witnesses"]
        assert {found.kind for found in rung.findings} == kinds
