"""Mutants of a blur written by hand, judged by the rungs, the proof and the referee."""

from collections.abc import Iterator
from dataclasses import replace

import numpy as np
import pytest

from guardbit.build.compiler import find_compiler
from guardbit.model.proof import Verdict
from guardbit.model.routine import SourceFile
from guardbit.verify.bench import Bench, Options, prepare
from guardbit.verify.defects.calls import quick, thorough
from guardbit.verify.defects.court import RUNGS, Court, Judgement, convene, judge
from guardbit.verify.defects.mutant import Mutant, Operator
from guardbit.verify.defects.rung import result, summary
from guardbit.verify.defects.score import row, table, table_text, unconfirmed, unsound, untested
from guardbit.verify.defects.sweep import sweeps
from guardbit.verify.defects.workshop import second_compiler

from . import handmade


@pytest.fixture(scope="module")
def bench() -> Bench:
    routine = handmade.routine()
    return prepare(handmade.sizing(), routine, (handmade.PROBE,), Options())


@pytest.fixture(scope="module")
def court(bench: Bench, tmp_path_factory: pytest.TempPathFactory) -> Iterator[Court]:
    compiler = find_compiler()
    folder = tmp_path_factory.mktemp("court")
    yield convene(bench, compiler, second_compiler(compiler), folder / "it", proving=False)


def mutant(before: str, after: str) -> Mutant:
    assert handmade.SOURCE.count(before) >= 1
    text = handmade.SOURCE.replace(before, after, 1)
    return Mutant(Operator.TAP, "blur3.c", "", 1, before, after, text)


def judged(court: Court, before: str, after: str) -> Judgement:
    return judge(court, mutant(before, after))


@pytest.mark.parametrize(
    ("before", "after", "rungs"),
    [
        ("(sum + 8) / 16", "(sum + 7) / 16", {"impulses", "frames", "requantiser"}),
        ("{ 1, 2, 1 }", "{ 1, 2, 2 }", {"impulses", "witnesses", "frames", "sanitized"}),
        ("length - 1 : at - 1", "length - 2 : at - 1", {"frames", "bands"}),
        ("if (scratch_len < width) {", "if (0) {", {"calls"}),
        ("x < width; x++", "x <= width; x++", {"sanitized"}),
    ],
)
def test_defects_are_noticed_and_seen(
    court: Court, before: str, after: str, rungs: set[str]
) -> None:
    found = judged(court, before, after)
    assert found.valid and rungs <= set(found.noticed) <= set(RUNGS)
    assert found.seen is not None
    assert found.seen.misuse == (rungs == {"calls"})


def test_what_changes_nothing_is_never_seen(court: Court) -> None:
    found = judged(court, "(sum + 8) / 16", "(8 + sum) / 16")
    assert found.valid and found.noticed == () and found.seen is None


def test_what_is_no_c_is_not_judged(court: Court) -> None:
    assert not judged(court, "(sum + 8) / 16", "(sum + nothing) / 16").valid


def test_a_hang_is_seen(court: Court) -> None:
    found = judged(court, "y < to; y++", "y < to; y += 0")
    assert found.seen is not None and "hang" in found.seen.how
    assert "frames" in found.noticed


def test_the_referees_calls_reach_every_boundary(bench: Bench) -> None:
    sums = set()
    taps = ((1, 2, 1), (2, 4, 2), (1, 2, 1))
    for frame in sweeps(bench.sizing, 1 << 13):
        plane = frame[:, :, 0]
        h, w = plane.shape
        parts = [
            taps[r][c] * plane[r : h - 2 + r, c : w - 2 + c] for r in range(3) for c in range(3)
        ]
        total = np.add.reduce(parts)
        sums |= set(total.ravel().tolist())
    # every code's boundary at 16 k + 8, and the sums beside it
    wanted = {16 * k + 8 + d for k in range(255) for d in (-1, 0, 1)}
    assert wanted <= sums and {0, 4080} <= sums


def test_the_referees_calls_are_the_same_each_time(bench: Bench) -> None:
    for make in (quick, lambda b: thorough(b, 1)):
        one, two = make(bench), make(bench)
        assert len(one) > 100
        assert [t.name for t in one] == [t.name for t in two]
        assert all((a.call.frame == b.call.frame).all() for a, b in zip(one, two, strict=True))


def judgement(verdict: Verdict | None, seen: bool, noticed: tuple[str, ...] = ()) -> Judgement:
    from guardbit.verify.defects.court import Seen

    some = mutant("sum + 8", "sum + 7")
    shown = Seen("gcc", "frame", "1 for 2", misuse=False) if seen else None
    return Judgement(some, True, noticed, verdict, seen=shown)


def test_the_score_tells_sound_from_unsound() -> None:
    every = [
        judgement(Verdict.PROVED, seen=True, noticed=("frames",)),
        judgement(Verdict.REFUTED, seen=False),
        replace(judgement(Verdict.REFUTED, seen=False), host=False),
        judgement(Verdict.REFUTED, seen=True, noticed=("build",)),
        judgement(Verdict.PROVED, seen=False),
        replace(judgement(None, seen=False), valid=False),
    ]
    assert unsound(every) == every[:1]
    assert unconfirmed(every) == every[1:2]
    assert untested(every) == every[3:4]
    total = row("all", every)
    assert (total.seeded, total.invalid, total.shown, total.alike) == (6, 1, 2, 3)
    assert (total.tested, total.flagged, total.differing) == (1, 1, 2)
    kinds = [found.kind for found in summary(every, 9, ["gcc"]).findings]
    assert kinds == ["defect-proved", "defect-unconfirmed"]
    text = table_text(table(every))
    assert len({len(line) for line in text.splitlines()}) == 1


def test_the_rung_tells_what_it_measured(bench: Bench) -> None:
    found = result(bench, find_compiler(), 8, ())
    assert found.ran and found.cases > 4
    assert found.covered[-1].startswith("all: ")
    assert any("more defects could be seeded" in note for note in found.not_covered)
    shares = {f.name: f.value for f in found.figures if f.unit == "%"}
    assert shares["defects noticed by any test"] == "100.0"


def test_code_that_fails_as_it_is_has_no_mutants(bench: Bench) -> None:
    wrong = replace(summary([judgement(Verdict.PROVED, seen=True)], 1, ["gcc"]), name="frames")
    assert not result(bench, find_compiler(), 12, (wrong,)).ran


def test_a_mutant_replaces_its_own_file(bench: Bench) -> None:
    from guardbit.verify.defects.mutant import with_mutant

    made = with_mutant(bench.routine, mutant("sum + 8", "sum + 7"))
    assert SourceFile("blur3.c", handmade.SOURCE.replace("sum + 8", "sum + 7")) in made.sources
