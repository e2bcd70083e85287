"""What a search for a goal found, as the keys and values that are written into the spec."""

from dataclasses import replace

from guardbit.fit.coefficients import Fitted, fit
from guardbit.fit.factors import factors
from guardbit.fit.nearest import Integers
from guardbit.fit.open import (
    COEFFICIENT_BITS,
    COEFFICIENT_FRAC,
    INTERMEDIATE_BITS,
    INTERMEDIATE_FRAC,
    open_words,
)
from guardbit.model.finding import SpecError
from guardbit.model.goal import GoalSearch, Words
from guardbit.model.sizing import Sizing
from guardbit.model.spec import Auto, Pinned, Spec
from guardbit.spec.pinning import PinValue, pinned_text
from guardbit.study.goals.choices import with_words
from guardbit.study.goals.trials import Judge, Trial
from guardbit.study.response.fit import fit_response

SECONDS = 30.0
"""How long the `response` fit of the words found may take."""


def pin_goal(spec: Spec, text: str, found: GoalSearch) -> str:
    """Return the text of a spec with what the search found in it; its goal stays there."""
    return pinned_text(text, pins(spec, found))


def pins(spec: Spec, found: GoalSearch) -> dict[str, PinValue]:
    """Return the values to be written, by dotted key."""
    values: dict[str, PinValue] = {
        key: list(value) if isinstance(value, tuple) else value for key, value in found.values
    }
    if found.integers is not None:
        values["coefficient.pinned"] = _pinned_value(spec, found.integers)
    return values


def _pinned_value(spec: Spec, integers: tuple[Integers, ...]) -> PinValue:
    if len(integers) == 1:
        return [list(row) for row in integers[0]]
    column, row = ([tap for line in each for tap in line] for each in integers)
    return {"column": list(column), "row": list(row)}


def values_of(
    spec: Spec, words: Words, sizing: Sizing
) -> tuple[tuple[str, int | tuple[int, ...]], ...]:
    """Return the keys that the spec leaves open, with the words found for them.

    Accumulators that are "auto" are among them: a written width is checked ever after.
    """
    found: dict[str, int | tuple[int, ...] | None] = {
        COEFFICIENT_BITS: words.coefficient_bits,
        COEFFICIENT_FRAC: _one_or_two(words.coefficient_frac),
        INTERMEDIATE_BITS: words.intermediate_bits,
        INTERMEDIATE_FRAC: words.intermediate_frac,
    }
    keys = open_words(spec)
    values = [(key, value) for key, value in found.items() if key in keys and value is not None]
    tables = {"accumulator": spec.accumulator}
    if spec.intermediate is not None:
        tables["intermediate.accumulator"] = spec.intermediate.accumulator
    for register in sizing.registers:
        if isinstance(tables[register.name].bits, Auto):
            values.append((f"{register.name}.bits", register.bits))
    return tuple(values)


def _one_or_two(fracs: tuple[int, ...] | None) -> int | tuple[int, ...] | None:
    return fracs[0] if fracs is not None and len(fracs) == 1 else fracs


def polished(judge: Judge, trial: Trial) -> tuple[Trial, tuple[Integers, ...]]:
    """Return the trial with the `response` fit of its words, and the integers to be pinned.

    That fit is taken only if it reaches the goal with no more bits of anything; else the
    integers are those of `nearest`, with which the words were found.
    """
    made = with_words(judge.spec, trial.words)
    plain = _nearest_integers(made)
    solved = tuple(each.integers for each in fit_response(made, SECONDS).factors)
    table = replace(made.coefficient, pinned=_pinned(solved))
    better = judge.of(replace(made, coefficient=table), trial.words)
    if better is None or better.shortfalls or _costs_more(better, trial):
        return trial, plain
    return better, solved


def _costs_more(one: Trial, other: Trial) -> bool:
    pairs = zip(one.figures.accumulators, other.figures.accumulators, strict=True)
    return any(a > b for a, b in pairs) or one.figures.coefficient > other.figures.coefficient


def _nearest_integers(spec: Spec) -> tuple[Integers, ...]:
    made = [fit(spec, part) for part in factors(spec)[0]]
    if not all(isinstance(each, Fitted) for each in made):
        raise SpecError(*(each for each in made if not isinstance(each, Fitted)))
    return tuple(each.integers for each in made if isinstance(each, Fitted))


def _pinned(integers: tuple[Integers, ...]) -> Pinned:
    if len(integers) == 1:
        return Pinned(integers[0], None, None)
    column, row = (tuple(tap for line in each for tap in line) for each in integers)
    return Pinned(None, column, row)
