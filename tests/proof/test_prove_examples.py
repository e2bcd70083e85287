"""Every example's C is proved, in strict mode; faulty C is refuted by a frame that shows it."""

from dataclasses import replace
from functools import cache
from pathlib import Path

import pytest

from guardbit.cli import api
from guardbit.model.filter import Filter
from guardbit.model.proof import DATA_MODELS, IP16, LP64, Case, Codes, DataModel, Verdict
from guardbit.model.routine import Routine, SourceFile
from guardbit.proof.coverage import cases, coverage, lengths
from guardbit.proof.prove import prove_case

EXAMPLES = Path(__file__).parents[2] / "examples"
NAMES = sorted(path.stem for path in EXAMPLES.glob("*.toml"))


@cache
def subject(name: str) -> tuple[Filter, Routine]:
    sizing, routine = api.subject(EXAMPLES / f"{name}.toml")
    return sizing.filter, routine


@pytest.mark.parametrize("name", NAMES)
def test_an_example_is_proved_where_int_has_16_bits(name: str) -> None:
    """Strict: nothing is relied on that C leaves open. `make prove` does the other data models."""
    f, routine = subject(name)
    open_ = [
        (case, found.verdict, found.reason, found.place)
        for case in cases(f, routine, (IP16,), thorough=False)
        if (found := prove_case(f, routine, case, strict=True)).verdict is not Verdict.PROVED
    ]
    assert open_ == []


@pytest.mark.parametrize("model", DATA_MODELS, ids=lambda m: m.name)
def test_every_data_model(model: DataModel) -> None:
    for name in ("soften5", "align6", "seam"):
        f, routine = subject(name)
        height, width = lengths(f, routine, 0)[0], lengths(f, routine, 1)[0]
        found = prove_case(f, routine, Case(model, width + 2, height + 2), strict=True)
        assert found.verdict is Verdict.PROVED and found.outputs > 0


def changed(name: str, old: str, new: str) -> tuple[Filter, Routine]:
    """An example's routine with one place of its C changed."""
    f, routine = subject(name)
    assert any(old in s.text for s in routine.sources), old
    sources = tuple(SourceFile(s.name, s.text.replace(old, new, 1)) for s in routine.sources)
    return f, replace(routine, sources=sources)


FAULTS = [
    ("soften5", "36 * r2[i + 2]", "35 * r2[i + 2]", "output"),
    ("soften5", "acc + 128", "acc + 127", "output"),
    ("soften5", ">> 8", ">> 7", "output"),
    ("soften5", "at < length ? at : length - 1", "at <= length ? at : length - 1", "output"),
    ("soften5", "(int32_t)width + 4;", "(int32_t)width + 5;", "out-of-bounds-write"),
    ("soften5", "row[x] = line[x - 2];", "row[x] = line[x - 1];", "output"),
    ("soften5", "for (x = 0; x < 2; x++)", "for (x = 0; x < 1; x++)", "output"),
    ("soften5", "i < count", "i + 1 < count", "not-written"),
    ("soften5", "dst_stride < out_width", "dst_stride <= out_width", "status"),
    ("soften5", "(row - from) * dst_stride", "(row - from) * out_width", "written-between-rows"),
    ("seam", "return 0;", "return 1;", "output"),
]


@pytest.mark.parametrize(("name", "old", "new", "reason"), FAULTS)
def test_a_fault_is_refuted_by_a_frame(name: str, old: str, new: str, reason: str) -> None:
    """The frame is small, was run on numbers, and its codes are legal."""
    f, routine = changed(name, old, new)
    for case in cases(f, routine, (LP64,), thorough=False):
        found = prove_case(f, routine, case, strict=True)
        if found.verdict is not Verdict.PROVED:
            break
    assert found.verdict in (Verdict.REFUTED, Verdict.BROKEN), found
    assert reason in (found.reason, "output", "written-between-rows"), found
    if case.codes is Codes.WRONG:
        return
    assert found.counterexample is not None
    frame = found.counterexample.frame
    assert (len(frame), len(frame[0])) == (case.height, case.width)
    assert all(f.input.low <= c <= f.input.high for row in frame for p in row for c in p)


def test_an_int16_overflow_that_only_narrow_int_shows() -> None:
    """255 * 200 fits an int of 32 bits, not one of 16."""
    f, routine = changed("soften5", "36 * r2[i + 2]", "(int32_t)(200 * r2[i + 2])")
    found = prove_case(f, routine, Case(IP16, 3, 3), strict=True)
    assert (found.verdict, found.reason) == (Verdict.BROKEN, "signed-overflow")
    assert found.place is not None and "200 * r2" in found.place.expression
    assert prove_case(f, routine, Case(LP64, 3, 3), strict=True).verdict is Verdict.REFUTED


def test_what_a_proof_covers_is_said() -> None:
    f, routine = subject("soften5")
    chosen = cases(f, routine, (LP64,), thorough=True)
    said = coverage(f, routine, chosen)
    assert said.covered[0].startswith("every pair of heights 1 to 6")
    assert "reach 2 rows and 2 columns" in said.argument[0]
    assert any("65535" in line for line in said.remaining)
    kinds = {case.codes for case in chosen}
    assert kinds == {Codes.LEGAL, Codes.WRONG, Codes.BREAKPOINTS, Codes.CONCRETE}
    rejecting = {case.codes for case in cases(*subject("raw_smooth"), (LP64,), thorough=False)}
    assert Codes.ILLEGAL in rejecting and Codes.ANY not in rejecting
    assert Codes.ANY in {case.codes for case in cases(*subject("sharpen"), (LP64,), thorough=False)}
