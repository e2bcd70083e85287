"""The search for word lengths that reach a goal with the least bits.

The order of what is minimised is the goal's. Nothing is taken to be monotone, since the
greatest error is not: a finer intermediate or a wider coefficient can make it larger. So
every choice of the open words is weighed. Lower bounds of its bits and of its error (see
`screen`) put choices in an order in which the first that reach the goal settle what no
later one can undercut; each choice before that is resolved and analysed in full.
"""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from fractions import Fraction
from functools import cached_property
from typing import TypeAlias

import numpy as np
from numpy.typing import NDArray

from guardbit.fit.open import open_words
from guardbit.fit.resolve import resolve
from guardbit.model.decimals import lower_decibels, upper
from guardbit.model.enums import FitRule, Preload, WordLength
from guardbit.model.filter import Filter
from guardbit.model.finding import Finding, Place, SpecError, finding
from guardbit.model.goal import Binding, GoalSearch, Shortfall, Words
from guardbit.model.routine import Codes
from guardbit.model.sizing import Sizing
from guardbit.model.spec import Auto, GoalTable, Spec
from guardbit.sizing.frequency import frequency
from guardbit.study.goals.candidates import Candidates, as_words, candidates
from guardbit.study.goals.choices import Coefficients, coefficient_choices, with_words
from guardbit.study.goals.pins import polished, values_of
from guardbit.study.goals.screen import Screen, screen_of
from guardbit.study.goals.trials import Judge, Trial, goal_frames

COARSE, FINE = 6, 40
"""Values over the pixel range that screen all choices, and those that are left to analyse."""

MOST_ANALYSED = 20_000
# What is spent on saying what binds: looks at frames, as many of which an analysis takes.
_ANALYSIS = 20
_EFFORT = 6000
_ANYTHING = Fraction(10**12)

Lengths: TypeAlias = tuple[int, ...]


def search(spec: Spec, frames: Sequence[Codes] | None = None) -> GoalSearch:
    """Return the words that reach the spec's goal with the least bits, in the goal's order.

    `frames` are the goal's images, read from its paths if they are not given. Accumulators
    that are "auto" follow from the other words. A `response` fit is searched among the
    integers of `nearest`; the fit itself is then solved for the words found, and taken if it
    reaches the goal with no more bits. Raises SpecError where the goal cannot be reached, or
    the choices are too many; what `goal_frames` raises.
    """
    if spec.goal is None:
        raise ValueError("the spec has no goal")
    seen = goal_frames(spec) if frames is None else tuple(frames)
    choices = coefficient_choices(spec)
    template = _template(spec, choices)
    coarse, fine = (screen_of(template, choices[0], count) for count in (COARSE, FINE))
    found = candidates(spec, choices, coarse)
    judge = Judge(spec, spec.goal, seen, _power)
    return _Hunt(judge, choices, found, fine).result()


def unmet_goals(spec: Spec, sizing: Sizing, frames: Sequence[Codes] = ()) -> tuple[Finding, ...]:
    """Return a finding for each goal of the spec that a sizing misses.

    The signal-to-noise ratio is looked at only where `frames` are given: the goal's images.
    """
    if spec.goal is None:
        return ()
    shortfalls = Judge(spec, spec.goal, tuple(frames), _power).shortfalls(spec, sizing)
    return tuple(
        finding("goal-not-met", _place(spec, f"goal.{each.goal}"), **_said(each))
        for each in shortfalls
    )


def _power(f: Filter, frames: Sequence[Codes]) -> Fraction | None:
    from guardbit.study.noise import snr

    return snr(f, frames)


def _place(spec: Spec, key: str) -> Place:
    return Place(spec.path, spec.lines.get(key), key)


def _said(missed: Shortfall) -> dict[str, str]:
    """Return a shortfall in words: what it is about, and both figures with their unit."""
    figures = (missed.reached, missed.wanted)
    match missed.goal:
        case "snr":
            reached, wanted = (f"{lower_decibels(each)} dB" for each in figures)
            return {"what": "signal-to-noise ratio", "reached": reached, "wanted": wanted}
        case "error":
            reached, wanted = (f"{upper(each)} LSB" for each in figures)
            return {"what": "error", "reached": reached, "wanted": wanted}
    reached, wanted = (upper(each) for each in figures)
    return {"what": "deviation of the response", "reached": reached, "wanted": wanted}


def _template(spec: Spec, choices: Sequence[Coefficients]) -> Filter:
    """Return a filter that has all that does not depend on the words.

    Rounding constants, which some words rule out, are put back after it is resolved.
    """
    table = spec.intermediate
    if table is not None:
        bits = 32 if isinstance(table.bits, Auto) else table.bits
        register = replace(table.accumulator, preload=Preload.ZERO)
        frac = table.frac if isinstance(table.frac, int) else 0
        table = replace(table, bits=bits, frac=frac, accumulator=register)
    words = Words(choices[0].bits, choices[0].fracs)
    plain = replace(
        with_words(spec, words),
        intermediate=table,
        accumulator=replace(spec.accumulator, preload=Preload.ZERO),
    )
    f = resolve(plain)
    tables = [spec.intermediate.accumulator] if spec.intermediate is not None else []
    passes = tuple(
        replace(p, accumulator=replace(p.accumulator, preload=each.preload))
        for p, each in zip(f.passes, [*tables, spec.accumulator], strict=True)
    )
    return replace(f, passes=passes)


@dataclass(frozen=True)
class _Best:
    """A trial that reaches the goal, with what the order of minimising makes of it."""

    trial: Trial
    lengths: Lengths

    @property
    def rank(self) -> tuple[Lengths, Fraction, tuple[int, ...]]:
        """Return what the best has the least of: bits, then error, then fraction bits."""
        words = self.trial.words
        fracs = (*(words.coefficient_frac or ()), words.intermediate_frac or 0)
        return self.lengths, self.trial.figures.error, fracs


@dataclass
class _Hunt:
    """One search; `analysed` counts the choices that bounds did not settle."""

    judge: Judge
    choices: Sequence[Coefficients]
    found: Candidates
    screen: Screen | None
    analysed: int = 0

    @property
    def spec(self) -> Spec:
        """Return the spec whose words are open."""
        return self.judge.spec

    @property
    def goal(self) -> GoalTable:
        """Return what is to be reached."""
        return self.judge.goal

    def result(self) -> GoalSearch:
        """Return the best choice and what binds it. Raises SpecError if there is none."""
        best = self._best()
        if best is None:
            raise SpecError(self._unreachable())
        trial, integers = best.trial, None
        if self.spec.coefficient.fit is FitRule.RESPONSE and self.spec.coefficient.pinned is None:
            trial, integers = polished(self.judge, best.trial)
        bindings = tuple(
            self._binding(best.lengths, at)
            for at, word in enumerate(self.goal.minimise)
            if word in self._open
        )
        deviation = frequency(trial.sizing.filter).deviation
        return GoalSearch(
            words=trial.words,
            figures=replace(trial.figures, response=deviation),
            values=values_of(self.spec, trial.words, trial.sizing),
            integers=integers,
            bindings=bindings,
            choices=len(self.found),
            analysed=self.analysed,
        )

    @cached_property
    def _open(self) -> frozenset[WordLength]:
        """Return the lengths that the search chooses, or that follow from what it chooses."""
        keys = open_words(self.spec)
        found = {word for word in WordLength if f"{word.value}.bits" in keys}
        tables = [self.spec.accumulator]
        if self.spec.intermediate is not None:
            tables.append(self.spec.intermediate.accumulator)
        if any(isinstance(table.bits, Auto) for table in tables):
            found.add(WordLength.ACCUMULATOR)
        return frozenset(found)

    def _lengths(self, trial: Trial) -> Lengths:
        return tuple(trial.figures.bits(word) for word in self.goal.minimise)

    def _best(self) -> _Best | None:
        best: _Best | None = None
        for at, least in self._promising():
            if best is not None and least > best.lengths:
                break
            alike = best is not None and least == best.lengths
            limit = best.trial.figures.error if best is not None and alike else self.goal.error
            trial = self._trial(at, limit)
            if trial is None or trial.shortfalls:
                continue
            new = _Best(trial, self._lengths(trial))
            best = new if best is None or new.rank < best.rank else best
        return best

    def _promising(self) -> Iterator[tuple[int, Lengths]]:
        """Yield the candidates that may reach the goal, those with the least bits first."""
        few = self.found
        kept = np.arange(len(few))
        if self.goal.error is not None:
            kept = kept[few.error <= float(self.goal.error)]
        if self.goal.response is not None:
            reaching = np.array([self._reaches(choice) for choice in self.choices])
            kept = kept[reaching[few.choice[kept]]]
        columns = [few.bits(word)[kept] for word in self.goal.minimise]
        for at in np.lexsort((few.error[kept], *columns[::-1])):
            yield int(kept[at]), tuple(int(column[at]) for column in columns)

    def _reaches(self, choice: Coefficients) -> bool:
        """Return whether coefficients reach the goal for the response, whatever the rest."""
        f = _template(self.spec, [choice])
        return self.goal.response is None or frequency(f).deviation <= self.goal.response

    def _trial(
        self, at: int, limit: Fraction | None, beyond: Fraction | None = None
    ) -> Trial | None:
        """Return a candidate held against the goal; None if a frame shows more than `limit`."""
        choice = self.choices[self.found.choice[at]]
        bits, frac = int(self.found.between_bits[at]), int(self.found.between_frac[at])
        words = as_words(self.spec, choice, bits, frac)
        between = Words(intermediate_bits=bits, intermediate_frac=frac)
        if limit is not None and self._shown(choice, between) > limit:
            return None
        self.analysed += 1
        if self.analysed > MOST_ANALYSED:
            where = _place(self.spec, "goal")
            raise SpecError(finding("goal-too-long", where, most=MOST_ANALYSED))
        return self.judge.trial(words, beyond)

    def _shown(self, choice: Coefficients, between: Words) -> Fraction:
        """Return an error that some frame shows; 0 where there is no screen."""
        return self.screen.shown_error(choice, between) if self.screen else Fraction(0)

    def _binding(self, lengths: Lengths, at: int) -> Binding:
        """Return what stands against fewer bits of the word that is minimised `at`-th."""
        columns = [self.found.bits(word) for word in self.goal.minimise]
        which = columns[at] < lengths[at]
        for column, length in zip(columns[:at], lengths[:at], strict=True):
            which &= column <= length
        word = self.goal.minimise[at]
        nearest, proved = self._nearest(np.nonzero(which)[0], lengths[:at], lengths[at])
        if nearest is None:
            return Binding(word, None, None, proved)
        return Binding(word, nearest.figures.bits(word), nearest.missed, proved)

    def _nearest(
        self, which: NDArray[np.intp], before: Lengths, below: float
    ) -> tuple[Trial | None, bool]:
        """Return the candidate that misses the goal least, and whether that is proved.

        Only those count whose first lengths are `before` and whose next is less than `below`.
        """
        best: Trial | None = None
        effort, begun = 0, self.analysed
        for at in self._nearest_first(which):
            limit = self.goal.error * best.share if best and self.goal.error else None
            if limit is not None and self.found.error[at] > float(limit):
                break
            if effort + _ANALYSIS * (self.analysed - begun) > _EFFORT:
                return best, False
            effort += 1
            trial = self._trial(int(at), limit, best.share if best else _ANYTHING)
            if trial is None:
                continue
            found = self._lengths(trial)
            fewer = found[: len(before)] == before and found[len(before)] < below
            best = trial if fewer and (best is None or trial.share < best.share) else best
        return best, True

    def _nearest_first(self, which: NDArray[np.intp]) -> NDArray[np.intp]:
        """Return candidates in the order of what their frames show; of equals the finest first."""
        few = self.found.only(which)
        return which[np.lexsort((-few.coefficient, -few.between_bits, few.error))]

    def _unreachable(self) -> Finding:
        nearest, _ = self._nearest(np.arange(len(self.found)), (), float("inf"))
        missed = nearest.missed if nearest is not None else None
        if missed is None:
            return finding("goal-no-choice", _place(self.spec, "goal"), choices=len(self.found))
        return finding(
            "goal-unreachable", _place(self.spec, f"goal.{missed.goal}"), **_said(missed)
        )
