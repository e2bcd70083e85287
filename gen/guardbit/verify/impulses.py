"""Rung: every tap at every border class, on frames where a step of one would show."""

from guardbit.model.certificate import Figure, RungResult
from guardbit.verify.bench import Bench, Trials
from guardbit.verify.cases import Case, from_vectors
from guardbit.verify.compare import findings
from guardbit.verify.wording import left_out

NAME = "impulses"


def cases(bench: Bench) -> list[Case]:
    """Return a case per frame that shows a change of a tap."""
    return from_vectors(bench.probing)


def result(bench: Bench, trials: Trials) -> RungResult:
    """Return what the frames showed of the routine, and how much of it they can show."""
    power = bench.power
    if not trials.cases:
        return RungResult(NAME, False, 0, (), ("no size that was tried has an output",), (), ())
    found, failed, left = findings(bench, trials)
    seen = power.checks - sum(count for _, count in power.unobservable)
    covered = (
        f"{power.taps} taps, each by +1 and by -1, at {power.classes} border classes: "
        f"{power.shown} of {seen} observable changes would show",
    )
    hidden = tuple(
        f"{count} changes of a tap are unobservable: {why}" for why, count in power.unobservable
    )
    others = power.not_shown_count - len(power.not_shown)
    open_ones = (*power.not_shown, *([f"{others} more"] if others > 0 else []))
    unseen = (
        (f"{power.not_shown_count} changes not shown: " + "; ".join(open_ones),)
        if power.not_shown_count
        else ()
    )
    return RungResult(
        NAME,
        ran=True,
        cases=trials.made,
        covered=covered,
        not_covered=(*hidden, *unseen, *power.notes, *left_out(left)),
        figures=(
            Figure("single-tap changes tried", power.checks),
            Figure("single-tap changes shown", power.shown),
            Figure("single-tap changes unobservable", power.checks - seen),
            Figure("impulse frames that failed", failed),
        ),
        findings=found,
    )
