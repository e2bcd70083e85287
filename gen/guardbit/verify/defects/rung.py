"""Rung: faults seeded in the C, and which rungs notice them (verify the verifier)."""

import tempfile
from collections.abc import Iterator, Sequence
from concurrent.futures import ThreadPoolExecutor
from pathlib import Path
from queue import Queue

from guardbit.build.compiler import Compiler
from guardbit.model.certificate import Figure, RungResult
from guardbit.model.finding import Finding, GuardbitError, Place, finding
from guardbit.verify import sanitized
from guardbit.verify.bench import Bench
from guardbit.verify.defects.court import Court, Judgement, convene, judge
from guardbit.verify.defects.mutant import Mutant
from guardbit.verify.defects.score import (
    PROOF,
    TESTING,
    Row,
    table,
    unconfirmed,
    unsound,
    untested,
)
from guardbit.verify.defects.seeding import mutants, sample
from guardbit.verify.defects.workshop import second_compiler
from guardbit.verify.wording import percent

NAME = "defects"
_LISTED = 5
_COURTS = 2
"""Mutants that are judged at a time: most of the work is in child processes."""


def result(bench: Bench, compiler: Compiler, most: int, others: Sequence[RungResult]) -> RungResult:
    """Return what the rungs notice of at most that many mutants of the routine's sources.

    `others` are the rungs that were run on the code as it is: if one of them has findings, there
    is nothing to compare mutants with.
    """
    if any(rung.findings for rung in others):
        why = "the code fails as it is: seeded defects would show nothing"
        return RungResult(NAME, False, 0, (), (why,), (), ())
    every = mutants(bench.routine)
    try:
        judged, compilers = _judged(bench, compiler, sample(every, most))
    except GuardbitError as error:
        return RungResult(NAME, False, 0, (), (sanitized.reason_of(error),), (), ())
    return summary(judged, len(every), compilers)


def _judged(
    bench: Bench, compiler: Compiler, chosen: Sequence[Mutant]
) -> tuple[list[Judgement], list[str]]:
    """Return the judgements in the order of the mutants, and the compilers that were used."""
    other = second_compiler(compiler)
    with (
        tempfile.TemporaryDirectory(prefix="guardbit-") as name,
        ThreadPoolExecutor(max_workers=_COURTS) as pool,
    ):
        courts: Queue[Court] = Queue()
        for number in range(_COURTS):
            courts.put(convene(bench, compiler, other, Path(name) / str(number)))

        def one(mutant: Mutant) -> Judgement:
            court = courts.get()
            try:
                return judge(court, mutant)
            finally:
                courts.put(court)

        compilers = [compiler, *([other] if other else [])]
        return list(pool.map(one, chosen)), [each.family.value for each in compilers]


def summary(judged: Sequence[Judgement], every: int, compilers: Sequence[str]) -> RungResult:
    """Return the rung's result for mutants that were judged, out of `every` one there is."""
    rows = table(judged)
    total = rows[-1]
    return RungResult(
        NAME,
        ran=True,
        cases=total.seeded - total.invalid,
        covered=tuple(_line(r) for r in rows),
        not_covered=tuple(_open(judged, total, every, compilers)),
        figures=tuple(_figures(total)),
        findings=tuple(_findings(judged)),
    )


def _line(r: Row) -> str:
    """Return a row of the table in words."""
    some = (f"{rung} {r.noticed[rung]}" for rung in TESTING if r.noticed[rung])
    noticed = f"; noticed by {', '.join(some)}; by any test {r.tested}" if r.shown else ""
    right = f"; proof {r.flagged} of {r.differing}" if r.on_shown else ""
    return f"{r.name}: {r.seeded - r.invalid} seeded, {r.shown} differ when run{noticed}{right}"


def _figures(total: Row) -> Iterator[Figure]:
    yield Figure("defects that differ when run", total.shown)
    yield Figure("defects never told from the sound code", total.alike)
    for rung in TESTING:
        share = percent(total.noticed[rung], total.shown)
        yield Figure(f"defects noticed by {rung}", share, "%")
    yield Figure("defects noticed by any test", percent(total.tested, total.shown), "%")
    if total.on_shown:
        share = percent(total.flagged, total.differing)
        yield Figure(f"defects noticed by {PROOF}", share, "%")


def _open(
    judged: Sequence[Judgement], total: Row, every: int, compilers: Sequence[str]
) -> Iterator[str]:
    if total.seeded < every:
        yield f"{every - total.seeded} more defects could be seeded"
    if len(compilers) < 2:
        yield f"differences were looked for with {compilers[0]} alone: no other compiler is here"
    if total.misused:
        yield f"{total.misused} differ only in what calls with wrong arguments get"
    missed = untested(judged)
    for judged_one in missed[:_LISTED]:
        yield f"no test notices {described(judged_one)}"
    if len(missed) > _LISTED:
        yield f"{len(missed) - _LISTED} more that no test notices"


def described(judged: Judgement) -> str:
    """Return a mutant in words: operator, place, the line before and after."""
    m = judged.mutant
    return f"{m.operator}, {m.file} line {m.line}: {m.before} -> {m.after}"


def _findings(judged: Sequence[Judgement]) -> Iterator[Finding]:
    for j in unsound(judged):
        assert j.seen is not None
        yield _found("defect-proved", j, call=j.seen.call, compiler=j.seen.by, how=j.seen.how)
    for j in unconfirmed(judged):
        yield _found("defect-unconfirmed", j, clause=j.clause)


def _found(kind: str, judged: Judgement, **values: str) -> Finding:
    m = judged.mutant
    place = Place(m.file, m.line)
    return finding(kind, place, operator=m.operator, before=m.before, after=m.after, **values)
