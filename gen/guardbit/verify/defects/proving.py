"""The proof rung on a mutant, and the frame by which it refutes one, run in compiled code."""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from threading import Lock

import numpy as np

from guardbit.arith.words import container_range
from guardbit.model.enums import Outside
from guardbit.model.filter import Filter
from guardbit.model.proof import ILP32, IP16, LLP64, LP64, Case, CaseResult, Codes, Verdict
from guardbit.model.routine import Call, Routine
from guardbit.verify.defects.calls import shape_of, small_lengths

_MOST_WORK = 400_000
_LONG = 260

# the prover keeps what it compiled: one thread at a time
_ONE = Lock()


@dataclass(frozen=True)
class Proof:
    """What came of the cases: the first that was not proved, else none.

    `cases` were tried. `error` is what the prover itself failed with, if it did.
    """

    verdict: Verdict
    cases: int
    result: CaseResult | None = None
    error: str = ""


def prove(f: Filter, routine: Routine, cases: Sequence[Case], strict: bool = True) -> Proof:
    """Return PROVED if all cases are, else what ended the first that is not.

    A case that is refused or unknown does not end it: a later one may refute.
    """
    from guardbit.proof.prove import prove_case

    open_: CaseResult | None = None
    for number, case in enumerate(cases, 1):
        try:
            with _ONE:
                found = prove_case(f, routine, case, strict)
        except Exception as error:  # a failure of the prover is a figure of its own
            return Proof(Verdict.UNKNOWN, number, None, f"{type(error).__name__}: {error}"[:200])
        if found.verdict in (Verdict.REFUTED, Verdict.BROKEN):
            return Proof(found.verdict, number, found)
        if found.verdict is Verdict.REFUSED:
            return Proof(found.verdict, number, found)
        open_ = open_ or (found if found.verdict is not Verdict.PROVED else None)
    return Proof(open_.verdict if open_ else Verdict.PROVED, len(cases), open_)


def first_cases(f: Filter, routine: Routine) -> tuple[Case, ...]:
    """Return the few cases that refute most defects: telling sizes, bands, codes, wrong calls."""
    heights, widths = small_lengths(f, 0), small_lengths(f, 1)
    taps = routine.taps.nominal if routine.taps else None
    middle = Case(LP64, widths[len(widths) // 2], heights[len(heights) // 2], taps=taps)
    made = [middle, *_sizes(heights, widths, taps)]
    made += list(_bands(f, middle))
    made += list(_codes(f, middle))
    if routine.frame.status:
        made.append(replace(middle, codes=Codes.WRONG, taps=None))
    made += list(_greatest(routine))
    made += [replace(each, model=model) for model in (IP16, ILP32, LLP64) for each in made[:2]]
    return tuple(made)


def _sizes(
    heights: Sequence[int], widths: Sequence[int], taps: tuple[int, ...] | None
) -> Iterator[Case]:
    last = heights[-1], widths[-1]
    for h, w in ((heights[0], widths[0]), last, (heights[0], last[1]), (last[0], widths[0])):
        yield Case(LP64, w, h, taps=taps)


def _bands(f: Filter, case: Case) -> Iterator[Case]:
    rows, _ = shape_of(f, case.height, case.width)
    if rows > 1:
        single = tuple((r, r + 1) for r in reversed(range(rows)))
        yield replace(case, bands=single, src_gap=2, dst_gap=3)
        yield replace(case, bands=((rows // 2, rows),), src_gap=1, dst_gap=1)


def _codes(f: Filter, case: Case) -> Iterator[Case]:
    stored = container_range(f.input.container)
    if (stored.low, stored.high) == (f.input.low, f.input.high):
        return
    yield replace(case, codes=Codes.ANY)
    if f.outside is Outside.REJECT:
        ends = case.height - 1, case.width - 1, f.geometry.channels - 1
        for place in ((0, 0, 0), ends, (ends[0], 0, 0), (0, ends[1], 0)):
            yield replace(case, codes=Codes.ILLEGAL, illegal=place)


def full_cases(f: Filter, routine: Routine) -> tuple[Case, ...]:
    """Return the cases by which the proof rung covers all sizes, for one data model.

    Where these take long, some of them: every second, every third and so on.
    """
    from guardbit.proof.coverage import cases

    every = cases(f, routine, (LP64,), thorough=False)
    pixels = sum(case.width * case.height for case in every if case.codes is not Codes.CONCRETE)
    work = pixels * f.geometry.channels * sum(len(p.kernel.live) for p in f.passes)
    return (*every[:: -(-work // _MOST_WORK)], *_long(f, routine))


def _long(f: Filter, routine: Routine) -> Iterator[Case]:
    """Yield fixed frames longer than 8 bits count, each a little more than the reach wide."""
    heights, widths = small_lengths(f, 0), small_lengths(f, 1)
    for w, h in ((_LONG, heights[len(heights) // 2]), (widths[len(widths) // 2], _LONG)):
        if w <= routine.widths[1] and h <= routine.heights[1]:
            yield Case(LP64, w, h, codes=Codes.CONCRETE)


def _greatest(routine: Routine) -> Iterator[Case]:
    """Yield the largest legal images, of which no row is asked for: they must be accepted."""
    if routine.band is None:
        return
    widths, heights = routine.widths, routine.heights
    for w, h in ((widths[1], heights[0]), (widths[0], heights[1])):
        yield Case(LP64, w, h, codes=Codes.CONCRETE, bands=((0, 0),))


def shown(f: Filter, result: CaseResult) -> Call | None:
    """Return the call that a refuted case says goes wrong; None: it gives no frame."""
    example = result.counterexample
    if example is None:
        return None
    frame = np.array(example.frame, np.int64).reshape(
        result.case.height, result.case.width, f.geometry.channels
    )
    case = result.case
    shape = shape_of(f, case.height, case.width)
    return Call(
        frame, shape, case.bands, case.src_gap, case.dst_gap, taps=example.taps or case.taps
    )
