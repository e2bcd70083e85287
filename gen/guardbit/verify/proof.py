"""Rung: the C is executed on symbols, and equals the contract for every frame of a size."""

from collections.abc import Iterator, Sequence

from guardbit.model.certificate import Figure, RungResult
from guardbit.model.filter import Filter
from guardbit.model.finding import Finding, Place, Value, finding
from guardbit.model.proof import (
    LP64,
    Assumption,
    Case,
    CaseResult,
    Codes,
    Counterexample,
    DataModel,
    Verdict,
)
from guardbit.model.routine import Routine
from guardbit.proof.coverage import cases, coverage
from guardbit.proof.prove import prove_case
from guardbit.verify.refusals import undecided

NAME = "proof"
_SHOWN_PIXELS = 60
_LISTED = 4
_HOPELESS = 6
"""Cases that a proof leaves open before it gives the others up."""


def result(f: Filter, routine: Routine) -> RungResult:
    """Return what a proof on the host's data model shows of a routine, for its short cases."""
    chosen = cases(f, routine, (host_model(),), thorough=False)
    return rung(f, routine, tuple(proved(f, routine, chosen)))


def host_model() -> DataModel:
    """Return the data model that a proof takes if none is named."""
    return LP64


def proved(f: Filter, routine: Routine, chosen: Sequence[Case]) -> Iterator[CaseResult]:
    """Yield the results of cases, up to the first that is refuted or when it is hopeless."""
    left_open = 0
    for case in chosen:
        found = prove_case(f, routine, case, not routine.foreign)
        yield found
        left_open += found.verdict in (Verdict.UNKNOWN, Verdict.REFUSED)
        if found.verdict in (Verdict.REFUTED, Verdict.BROKEN) or left_open >= _HOPELESS:
            return


def rung(f: Filter, routine: Routine, results: Sequence[CaseResult]) -> RungResult:
    """Return the rung that some cases' results make."""
    shown = [r for r in results if r.verdict is Verdict.PROVED]
    wrong = [r for r in results if r.verdict in (Verdict.REFUTED, Verdict.BROKEN)]
    open_ = [r for r in results if r.verdict in (Verdict.UNKNOWN, Verdict.REFUSED)]
    said = coverage(f, routine, [r.case for r in shown])
    models = list(dict.fromkeys(r.case.model.name for r in shown))
    covered: tuple[str, ...] = ()
    if shown:
        covered = (f"for every legal pixel value, on {', '.join(models)}:", *said.covered)
        covered = (*covered, *said.argument)
    return RungResult(
        NAME,
        ran=True,
        cases=len(results),
        covered=covered,
        not_covered=(*_open(open_), *said.remaining, *_assumed(shown)),
        figures=(
            Figure("output elements compared", sum(r.outputs for r in shown)),
            Figure("data models", len(models)),
        ),
        findings=tuple(finding_of(r) for r in wrong),
        undecided=len(open_),
    )


def _open(results: Sequence[CaseResult]) -> Iterator[str]:
    """Yield why cases stayed open, each reason once."""
    found: dict[tuple[str, str], int] = {}
    for r in results:
        where = (
            "" if r.place is None else f"{r.place.file} line {r.place.line}: {r.place.expression}"
        )
        found[r.reason, where] = found.get((r.reason, where), 0) + 1
    for (reason, where), count in list(found.items())[:_LISTED]:
        of = f"{count} case{'s' if count > 1 else ''} left open: {undecided(reason)}"
        yield f"{of}, at {where}" if where else of


def _assumed(results: Sequence[CaseResult]) -> Iterator[str]:
    """Yield what the code relies on the compiler for."""
    found: dict[tuple[str, str, int], Assumption] = {}
    for r in results:
        for a in r.assumptions:
            found.setdefault((a.reliance.value, a.place.file, a.place.line), a)
    for (reliance, file, line), a in list(found.items())[:_LISTED]:
        ends = f"{a.interval.low} to {a.interval.high}"
        yield f"assumed: {reliance} of {ends}, at {file} line {line}: {a.place.expression}"


def finding_of(r: CaseResult) -> Finding:
    """Return what is wrong in a case, as a finding at its line of C."""
    place = Place() if r.place is None else Place(r.place.file, r.place.line or None)
    example = r.counterexample
    values: dict[str, Value] = {
        "expression": r.place.expression if r.place is not None else "",
        "model": r.case.model.name,
        "size": f"{r.case.height} rows by {r.case.width} columns{_way(r.case)}",
        "values": "" if r.interval is None else f" ({r.interval.low} to {r.interval.high})",
        "shows": "" if example is None else _shows(example),
        "expected": None if example is None else example.expected,
        "got": None if example is None else example.got,
    }
    position = example.position if example is not None and example.position else (None,) * 3
    values |= dict(zip(("row", "column", "channel"), position, strict=True))
    return finding(f"proof-{r.reason}", place, **values)


def _way(case: Case) -> str:
    parts = []
    if case.bands:
        first, stop = case.bands[0]
        parts.append(f"in bands, as rows {first} to {stop}")
    if case.src_gap or case.dst_gap:
        parts.append(f"{case.src_gap} and {case.dst_gap} elements between rows")
    if case.codes is Codes.ANY:
        parts.append("any code of the container")
    if case.codes is Codes.ILLEGAL and case.illegal is not None:
        parts.append(f"an illegal code at row {case.illegal[0]} column {case.illegal[1]}")
    return f" ({'; '.join(parts)})" if parts else ""


def _shows(example: Counterexample) -> str:
    """Return the frame in words, if it is small."""
    rows = example.frame
    count = sum(len(pixel) for row in rows for pixel in row)
    taps = "" if example.taps is None else f" with the taps {list(example.taps)}"
    if count > _SHOWN_PIXELS:
        return f"A frame of that size shows it{taps}"
    said = "; ".join(" ".join("/".join(map(str, pixel)) for pixel in row) for row in rows)
    return f"Shown by the frame {said}{taps}"
