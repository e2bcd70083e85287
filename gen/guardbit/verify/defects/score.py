"""What the judgements of many mutants add up to, per operator and per rung."""

from collections import Counter
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, field

from guardbit.model.proof import Verdict
from guardbit.verify.defects.court import BUILD, RUNGS, Judgement
from guardbit.verify.defects.mutant import Operator

FLAGGED = (Verdict.REFUTED, Verdict.BROKEN)
PROOF = "proof"
TESTING = tuple(rung for rung in RUNGS if rung != BUILD)
"""The rungs that run the code. A compiler's warning is no test."""


@dataclass(frozen=True)
class Row:
    """One operator's mutants, or all.

    `invalid` are not C. `shown` differ from the sound code in a compiled call, `misused` of
    them only where arguments are wrong. `alike` were never told from the sound code.
    `noticed` counts, of those shown, what each rung notices; `tested` what any testing rung
    does. `verdicts` are the proof's, on those that differ in right calls and on those alike.
    """

    name: str
    seeded: int = 0
    invalid: int = 0
    shown: int = 0
    misused: int = 0
    alike: int = 0
    tested: int = 0
    noticed: Counter[str] = field(default_factory=Counter)
    on_shown: Counter[str] = field(default_factory=Counter)
    on_alike: Counter[str] = field(default_factory=Counter)
    on_misused: Counter[str] = field(default_factory=Counter)

    @property
    def differing(self) -> int:
        """Return how many differ where the arguments are right: what a proof speaks of."""
        return self.shown - self.misused

    @property
    def flagged(self) -> int:
        """Return how many of those the proof rung refutes, or finds to break a rule of C."""
        return _flagged(self.on_shown)


def row(name: str, judged: Iterable[Judgement]) -> Row:
    """Return what some judgements add up to."""
    every = list(judged)
    valid = [j for j in every if j.valid]
    shown = [j for j in valid if j.seen is not None]
    misused = [j for j in shown if is_misuse(j)]
    right = [j for j in shown if not is_misuse(j)]
    alike = [j for j in valid if j.seen is None]
    return Row(
        name,
        len(every),
        len(every) - len(valid),
        len(shown),
        len(misused),
        len(alike),
        sum(bool(set(j.noticed) & set(TESTING)) for j in shown),
        Counter(rung for j in shown for rung in j.noticed),
        _verdicts(right),
        _verdicts(alike),
        _verdicts(misused),
    )


def _verdicts(judged: Iterable[Judgement]) -> Counter[str]:
    return Counter("failed" if j.error else str(j.verdict) for j in judged if j.verdict)


def is_misuse(judged: Judgement) -> bool:
    """Return whether a mutant shows itself only where arguments are wrong."""
    return judged.seen is not None and judged.seen.misuse


def table(judged: Sequence[Judgement]) -> tuple[Row, ...]:
    """Return a row per operator that there are mutants of, and one of all."""
    rows = [row(o, [j for j in judged if j.mutant.operator is o]) for o in Operator]
    return (*(r for r in rows if r.seeded), row("all", judged))


def unsound(judged: Iterable[Judgement]) -> list[Judgement]:
    """Return the mutants that were proved right and yet differ in compiled code."""
    return [
        j for j in judged if j.verdict is Verdict.PROVED and j.seen is not None and not is_misuse(j)
    ]


def unconfirmed(judged: Iterable[Judgement]) -> list[Judgement]:
    """Return refutations that compiled code does not show, on this machine's data model.

    A rule of C that is broken need not show, and is no refutation.
    """
    return [
        j
        for j in judged
        if j.verdict is Verdict.REFUTED and j.host and not j.reproduced and j.seen is None
    ]


def untested(judged: Iterable[Judgement]) -> list[Judgement]:
    """Return the mutants that differ and that no testing rung notices."""
    return [j for j in judged if j.seen is not None and not set(j.noticed) & set(TESTING)]


def unclaimed(judged: Iterable[Judgement]) -> list[Judgement]:
    """Return the mutants that were proved and show themselves by what a wrong call gets."""
    return [j for j in judged if j.verdict is Verdict.PROVED and is_misuse(j)]


_HEADS = ("seeded", "no C", "differ", *TESTING, "any test")
_PROVED = ("right calls", "refuted", "broken", "refused", "unknown", "PROVED", "wrong calls")
_LAST = ("flagged", "alike", "proved", "flagged")


def table_text(rows: Sequence[Row]) -> str:
    """Return the table as lines of text: counts of mutants.

    What the proof says follows the number of mutants that it is said of: those that differ in
    right calls, those that differ in wrong calls alone, and those alike.
    """
    lines = [["", *_HEADS, *_PROVED, *_LAST], *(_cells(r) for r in rows)]
    widths = [max(len(line[k]) for line in lines) for k in range(len(lines[0]))]
    return "\n".join(
        "  ".join(cell.ljust(w) if k == 0 else cell.rjust(w) for k, (cell, w) in enumerate(pairs))
        for pairs in (list(zip(line, widths, strict=True)) for line in lines)
    )


def _cells(r: Row) -> list[str]:
    on = r.on_shown
    unknown = on[Verdict.UNKNOWN] + on["failed"]
    numbers = [r.seeded, r.invalid, r.shown, *(r.noticed[rung] for rung in TESTING), r.tested]
    numbers += [r.differing, on[Verdict.REFUTED], on[Verdict.BROKEN], on[Verdict.REFUSED]]
    numbers += [unknown, on[Verdict.PROVED], r.misused, _flagged(r.on_misused)]
    numbers += [r.alike, r.on_alike[Verdict.PROVED], _flagged(r.on_alike)]
    return [r.name, *map(str, numbers)]


def _flagged(verdicts: Counter[str]) -> int:
    return sum(verdicts[verdict] for verdict in FLAGGED)
