"""Outcomes against what the contract says, as findings that a person can work with."""

from collections.abc import Iterator, Sequence
from typing import TypeAlias

import numpy as np

from guardbit.build.reproducer import keep
from guardbit.model.filter import Filter, loaded, registers_of
from guardbit.model.finding import Finding, Place, finding
from guardbit.model.routine import UNWRITTEN, Codes, Harm, Outcome
from guardbit.vectors.classes import labels, named
from guardbit.verify.bench import Bench, Trials
from guardbit.verify.cases import NUMBERS, Case, has_status
from guardbit.verify.explain import Mismatch, explanation, window

MOST_FINDINGS = 3
"""Findings listed a rung and kind; the number of failing cases is a figure."""

NOT_KEPT = "none kept"
_LARGEST = 4096


def findings(bench: Bench, trials: Trials) -> tuple[tuple[Finding, ...], int, int]:
    """Return (findings, cases that failed, cases that were not run).

    The smallest frames are reported: they are the easiest to follow.
    """
    pairs = sorted(
        zip(trials.cases, trials.outcomes, strict=True), key=lambda pair: pair[0].call.frame.size
    )
    failed: dict[str, list[tuple[Case, Outcome]]] = {}
    for case, outcome in pairs:
        if kind := fault(bench, case, outcome):
            failed.setdefault(kind, []).append((case, outcome))
    others = _mismatches(failed.get("output-differs", []))
    found = [
        _described(bench, trials.runner, kind, pair, others)
        for kind, some in failed.items()
        for pair in some[:MOST_FINDINGS]
    ]
    left = sum(outcome.harm is Harm.NOT_RUN for outcome in trials.outcomes)
    return tuple(found), sum(map(len, failed.values())), left


def fault(bench: Bench, case: Case, outcome: Outcome) -> str | None:
    """Return the kind of what is wrong with an outcome; None: nothing, or it was not run."""
    if outcome.harm is not None:
        return None if outcome.harm is Harm.NOT_RUN else f"harm-{outcome.harm}"
    if not case.specified:
        return None
    if has_status(bench.routine) and set(outcome.statuses) != {NUMBERS[case.status]}:
        return "status-differs"
    if case.size is not None and outcome.size is not None and not _same_size(case, outcome):
        return "size-differs"
    if case.output is None:
        written = outcome.output is not None and (outcome.output != UNWRITTEN).any()
        return "destination-touched" if written else None
    if outcome.output is not None and case.output.size and not _equal(case, outcome):
        return "output-differs"
    return None


def _same_size(case: Case, outcome: Outcome) -> bool:
    """Return whether sizes agree; an output without pixels may be told in either way."""
    assert case.size is not None and outcome.size is not None
    empty = 0 in case.size and 0 in outcome.size
    return empty or case.size == outcome.size


def _equal(case: Case, outcome: Outcome) -> bool:
    return bool(np.array_equal(_expected(case), _got(outcome)))


def _expected(case: Case) -> Codes:
    """Return the rows that were asked for; rows of no band are expected to stay unwritten."""
    assert case.output is not None
    if not case.call.bands:
        return case.output
    wanted = np.full(case.output.shape, UNWRITTEN, np.int64)
    for first, last in case.call.bands:
        wanted[first:last] = case.output[first:last]
    return wanted


def _got(outcome: Outcome) -> Codes:
    assert outcome.output is not None
    return outcome.output


_Others: TypeAlias = Sequence[tuple[Mismatch, tuple[int, ...] | None]]


def _mismatches(failed: Sequence[tuple[Case, Outcome]]) -> _Others:
    """Return a few whole-frame mismatches, small and large, that one cause has to explain.

    Each comes with the taps of its call, None for the filter's own.
    """
    whole = [p for p in failed if not p[0].call.bands and p[0].call.frame.size <= _LARGEST]
    chosen = whole[:2] + whole[-2:] if len(whole) > 4 else whole
    return [(Mismatch(c.call.frame, _expected(c), _got(o)), c.call.taps) for c, o in chosen]


def _described(
    bench: Bench,
    runner: str,
    kind: str,
    pair: tuple[Case, Outcome],
    others: _Others,
) -> Finding:
    """Return the finding of a failed case, and keep its reproducer if a folder is given."""
    case, _ = pair
    values = dict(_values(bench, kind, pair, others))
    return finding(
        kind,
        Place(source_name(bench)),
        runner=runner,
        case=case.name,
        size=_size_text(case),
        **values,
        reproducer=_kept(bench, runner, case, values),
    )


def _values(
    bench: Bench, kind: str, pair: tuple[Case, Outcome], others: _Others
) -> Iterator[tuple[str, str | int]]:
    case, outcome = pair
    match kind:
        case "status-differs":
            yield "expected", f"{NUMBERS[case.status]} ({case.status})"
            yield "got", ", ".join(map(str, outcome.statuses))
        case "size-differs":
            yield "expected", "{} rows of {}".format(*(case.size or (0, 0)))
            yield "got", "{} rows of {}".format(*(outcome.size or (0, 0)))
        case "output-differs":
            wrong = Mismatch(case.call.frame, _expected(case), _got(outcome))
            alike = [each for each, taps in others if taps == case.call.taps]
            yield from _mismatch(_filter(bench, case), wrong, alike)
        case "destination-touched":
            yield "status", case.status
        case _:
            yield "detail", outcome.detail or "no more is known"


def _filter(bench: Bench, case: Case) -> Filter:
    """Return the filter with the taps that a case was given."""
    registers = registers_of(bench.filter)
    if registers is None or case.call.taps is None:
        return bench.filter
    return loaded(bench.filter, [case.call.taps[cell] for cell in registers.cells])


def _mismatch(
    f: Filter, wrong: Mismatch, others: Sequence[Mismatch]
) -> Iterator[tuple[str, str | int]]:
    expected, got = wrong.expected, wrong.got
    row, column, channel = wrong.first
    yield "row", row
    yield "column", column
    yield "channel", channel
    height, width, _ = wrong.frame.shape
    across = labels(f, 1, width)[column]
    yield "position", named((labels(f, 0, height)[row], across))
    yield "expected", _cell(expected[row, column, channel])
    yield "got", _cell(got[row, column, channel])
    yield "count", int((expected != got).sum())
    yield "of", int(expected.size)
    yield "window", window(f, wrong.frame, (row, column, channel))
    yield "explains", explanation(f, wrong, others)


def _cell(value: int) -> str:
    return "nothing written" if value == UNWRITTEN else str(value)


def _size_text(case: Case) -> str:
    height, width, channels = case.call.frame.shape
    return f"{width}x{height}" + (f", {channels} channels" if channels > 1 else "")


def _kept(bench: Bench, runner: str, case: Case, values: dict[str, str | int]) -> str:
    folder = bench.options.folder
    if folder is None:
        return NOT_KEPT
    # the name alone: findings go into certificates, which record no paths
    return keep(folder, bench.routine, f"{runner}-{case.name}", case.call, values).name


def source_name(bench: Bench) -> str | None:
    """Return the name of the routine's first C file."""
    return next((s.name for s in bench.routine.sources if s.name.endswith(".c")), None)
