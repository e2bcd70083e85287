"""The `response` fit: integers whose frequency response is nearest to the ideal one.

Nearest means the least largest |fitted - ideal| over all frequencies, among integers that the
coefficient register holds and that have every flip, turn and transpose of the ideal, with its
sign: so a filter of linear phase keeps it. What is found is measured by `sizing.peak`, so its
deviation is guaranteed; how good it is says the bound of `study.tangents`.

The search starts from the `nearest` and `gain` fits and what changes of one or two unknowns
make of them, so that it ends no worse than `nearest`. Then frequencies are exchanged (E. Ya.
Remez's idea): solve on some, add those where the solution deviates most, solve again.
"""

from dataclasses import dataclass, replace
from fractions import Fraction
from math import isqrt
from time import monotonic
from typing import TYPE_CHECKING

from guardbit.fit.coefficients import Fitted, chosen_frac, fit
from guardbit.fit.factors import Factor, factors
from guardbit.fit.gain import gain
from guardbit.fit.nearest import nearest, register, scaled
from guardbit.model.enums import FitRule, Scale
from guardbit.model.finding import Finding, Place, SpecError, finding
from guardbit.model.frequency import FactorFit, Integers, ResponseFit
from guardbit.model.spec import Auto, Spec
from guardbit.study.response.tied import Tied, deviation, gathered, spread, tied

if TYPE_CHECKING:
    from guardbit.study.response.tangents import Conditions, Outcome

TOLERANCE = Fraction(1, 1000)
"""A fit counts as proved when no other can undercut its deviation by more than this share."""

# Programmes beyond these sizes do not get anywhere in minutes.
_MOST_UNKNOWNS = 400
_MOST_STEPS = 1000
_SHARE = 0.75
_WALK = 0.1


def fit_response(spec: Spec, seconds: float = 60.0) -> ResponseFit:
    """Return the best fit found in about `seconds`, and a bound on what others could reach.

    `coefficient.fit` and `coefficient.pinned` are not looked at; an automatic frac is that of
    `nearest`, and with `bits = "auto"` the taps are exact or refused. Raises SpecError where
    the other fits would: a pair without vectors, no frac that fits, a scale that is exact.
    """
    began = monotonic()
    if spec.coefficient.scale is Scale.EXACT:
        where = Place(spec.path, spec.lines.get("coefficient.scale"), "coefficient.scale")
        raise SpecError(finding("pinned-with-exact", where))
    table = replace(spec.coefficient, fit=FitRule.NEAREST, pinned=None)
    plain = replace(spec, coefficient=table)
    parts, found = factors(plain)
    goals = [_goal(plain, part) for part in parts]
    found = (*found, *(goal for goal in goals if isinstance(goal, Finding)))
    if found:
        raise SpecError(*found)
    share = seconds / len(goals)
    fits = tuple(_fit(goal, share) for goal in goals if isinstance(goal, _Goal))
    return ResponseFit(fits, f"{monotonic() - began:.1f}")


@dataclass(frozen=True)
class _Goal:
    """One factor with its frac resolved, and the register's limits."""

    name: str
    tied: Tied
    frac: int


def _goal(spec: Spec, part: Factor) -> _Goal | Finding:
    if isinstance(spec.coefficient.bits, Auto):
        fitted = fit(spec, part)
        if not isinstance(fitted, Fitted):
            return fitted
        return _goal(_with_bits(spec, fitted.bits), replace(part, frac=fitted.frac))
    frac = chosen_frac(spec, part)
    if isinstance(frac, Finding):
        return frac
    low, high = register(spec.coefficient.bits, spec.coefficient.signed)
    return _Goal(part.name, tied(scaled(part.ideal, frac), low, high), frac)


def _with_bits(spec: Spec, bits: int) -> Spec:
    return replace(spec, coefficient=replace(spec.coefficient, bits=bits))


@dataclass(frozen=True)
class _Found:
    """Unknowns with their deviation, in integer steps."""

    values: tuple[int, ...]
    deviation: Fraction


def _found(t: Tied, values: tuple[int, ...]) -> _Found:
    return _Found(values, deviation(t, values).guaranteed)


def _better(one: _Found, other: _Found) -> _Found:
    """Return the one that deviates less, the first if they are alike."""
    return other if other.deviation < one.deviation else one


def _fit(goal: _Goal, seconds: float) -> FactorFit:
    t, unit = goal.tied, Fraction(2) ** goal.frac
    rounded = nearest(t.targets)
    fits = all(t.low <= tap <= t.high for row in rounded for tap in row)
    start = _found(t, tuple(t.clamped(j, round(x)) for j, x in enumerate(t.firsts)))
    best, bound, floor = _search(t, start, seconds)
    return FactorFit(
        name=goal.name,
        integers=spread(t, best.values),
        frac=goal.frac,
        deviation=best.deviation / unit,
        bound=bound / unit,
        floor=floor / unit,
        nearest=_nearest_deviation(t, rounded, start) / unit if fits else None,
        proved=_is_close(best, bound, TOLERANCE),
    )


def _nearest_deviation(t: Tied, rounded: Integers, start: _Found) -> Fraction:
    # -8 has no opposite in four bits: then the start is not the rounded taps.
    if spread(t, start.values) == rounded:
        return start.deviation
    whole = replace(t, low=min(t.low, -t.high), high=max(t.high, -t.low))
    values = gathered(whole, rounded)
    if values is None:
        raise AssertionError("rounding keeps every symmetry")
    return deviation(whole, values).guaranteed


def _search(t: Tied, start: _Found, seconds: float) -> tuple[_Found, Fraction, Fraction]:
    """Return the best found, and what no integers with the symmetry, and none at all, beat."""
    least = _parseval(t)
    if start.deviation == 0 or not t.orbits:
        return start, start.deviation, start.deviation
    best = _polished(t, start)
    balanced = gain(t.targets, t.low, t.high)
    other = None if balanced is None else gathered(t, balanced)
    if other is not None:
        best = _better(best, _polished(t, _found(t, other)))
    if best.deviation > _MOST_STEPS:
        return best, least, least
    if len(t.orbits) > _MOST_UNKNOWNS:
        return _wandered(t, best, _WALK * seconds), least, least
    free = max(t.weights) == 1
    share = seconds if free else _SHARE * seconds
    best, bound = _exchange(t, best, monotonic() + share, average=False)
    floor = bound
    if not free:
        floor = _exchange(t, best, monotonic() + seconds - share, average=True)[1]
    return best, max(bound, floor, least), max(floor, least)


def _parseval(t: Tied) -> Fraction:
    """Return a bound that rests on nothing but arithmetic.

    The mean square of a response is the sum of the squares of its taps, and no integer is
    nearer to a target than its nearest legal one.
    """
    squares = sum(
        ((min(max(round(tap), t.low), t.high) - tap) ** 2 for row in t.targets for tap in row),
        Fraction(0),
    )
    scale = 1 << 80
    return Fraction(isqrt(squares * scale * scale // 1), scale)


def _polished(t: Tied, start: _Found) -> _Found:
    """Return the start, or what changes of one or two unknowns by one make of it."""
    from guardbit.study.response.polish import polished

    return _better(start, _found(t, polished(t, start.values)))


def _wandered(t: Tied, start: _Found, seconds: float) -> _Found:
    """Return the start, or what a walk from it finds."""
    from guardbit.study.response.polish import wandered

    return _better(start, _found(t, wandered(t, start.values, seconds)))


def _exchange(t: Tied, best: _Found, until: float, *, average: bool) -> tuple[_Found, Fraction]:
    """Return the best found, and the bound of the programme.

    `average`: for a bound over integers without the symmetry; what is found then is no fit.
    """
    from guardbit.study.response.tangents import first_conditions, solve

    conditions, bound = first_conditions(t), Fraction(0)
    hard = False
    while (left := until - monotonic()) > 0:
        budget = left if hard else left / 3
        outcome = solve(t, conditions, float(best.deviation), budget, average=average)
        bound = max(bound, min(Fraction(outcome.bound), best.deviation))
        if outcome.values is not None and not average:
            best = _better(best, _polished(t, _found(t, outcome.values)))
        stuck = outcome.values is None and (outcome.finished or hard)
        if stuck or _is_close(best, bound, TOLERANCE / 2):
            break
        if not (hard or outcome.finished):
            hard = True
            if not average:
                best = _wandered(t, best, _WALK * (until - monotonic()))
        more = _touching(t, outcome, average)
        if outcome.finished and not len(more.places):
            break
        conditions = conditions.joined(more)
    return best, bound


def _is_close(best: _Found, bound: Fraction, share: Fraction) -> bool:
    return best.deviation - bound <= share * best.deviation


def _touching(t: Tied, outcome: "Outcome", average: bool) -> "Conditions":
    """Return where, and in which direction, a solution leaves the level that was claimed."""
    from guardbit.study.response.tangents import Conditions, nothing
    from guardbit.study.response.waves import peaks

    if outcome.values is None:
        return nothing()
    values = outcome.values
    parts = t.weights if average else (1,) * len(values)
    off = [float(Fraction(v, n) - x) for v, n, x in zip(values, parts, t.firsts, strict=True)]
    return Conditions(*peaks(t, off, outcome.level * (1 + 1e-4)))
