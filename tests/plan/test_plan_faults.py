"""The evaluator and the conformity check find what is wrong with a plan, whoever made it."""

from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import packaged
import randomspecs
from guardbit.model.finding import SpecError
from guardbit.model.plan import Cell, Field, Floor, Plan, SaturatingSum, Sum, Tail, TiesToEven
from guardbit.model.sizing import Interval, Sizing
from guardbit.plan.conformity import check
from guardbit.plan.direct import direct
from guardbit.plan.evaluate import PlanFaultError, evaluate

SHARPEN = """
[filter]
name = "sharpen"
[kernel]
taps = [[0, -1, 0], [-1, 8, -1], [0, -1, 0]]
divisor = 4
[input]
bits = 8
pedestal = 16
[output]
rounding = "{rounding}"
pedestal = 16
"""
TWO_PASSES = """
[filter]
name = "twice"
[kernel]
column = [1, 2, 1]
row = [-1, 2, 1]
divisor = [4, 2]
[input]
bits = 8
[intermediate]
bits = 8
signed = false
pedestal = 3
"""


def sharpen(rounding: str = "ties-to-positive") -> Sizing:
    return packaged.sized(SHARPEN.format(rounding=rounding), Path(), "sharpen")


def tail_changed(change: Callable[[Tail], Tail], step: int = -1) -> Callable[[Plan], Plan]:
    def apply(plan: Plan) -> Plan:
        steps = list(plan.steps)
        steps[step] = replace(steps[step], value=change(steps[step].value))
        return replace(plan, steps=tuple(steps))

    return apply


def sum_changed(change: Callable[[Sum], Sum]) -> Callable[[Plan], Plan]:
    def apply(tail: Tail) -> Tail:
        assert isinstance(tail.of, Sum)
        return replace(tail, of=change(tail.of))

    return tail_changed(apply)


def one_more(value: Sum) -> Sum:
    group = value.groups[1]
    term = replace(group.terms[0], coefficient=group.terms[0].coefficient + 1)
    changed = replace(group, terms=(term, *group.terms[1:]))
    return replace(value, groups=(value.groups[0], changed, *value.groups[2:]))


def moved(value: Sum) -> Sum:
    group = value.groups[0]
    read = replace(group.terms[0].of, dx=group.terms[0].of.dx + 1)
    changed = replace(group, terms=(replace(group.terms[0], of=read),))
    return replace(value, groups=(changed, *value.groups[1:]))


def added(tail: Tail, by: int) -> Tail:
    form = tail.quotient
    assert isinstance(form, Floor | TiesToEven)
    return replace(tail, quotient=replace(form, add=form.add + by))


def lift_lost(tail: Tail) -> Tail:
    assert isinstance(tail.quotient, Floor | TiesToEven)
    return added(tail, -tail.quotient.divisor)


WRONG: dict[str, Callable[[Plan], Plan]] = {
    "a coefficient one more": sum_changed(one_more),
    "a tap that reads one column on": sum_changed(moved),
    "a tap left out": sum_changed(lambda s: replace(s, groups=s.groups[1:])),
    "a start value": sum_changed(lambda s: replace(s, start=1)),
    "an accumulator of 8 bits": sum_changed(lambda s: replace(s, cell=Cell(8, True))),
    "a group of 8 bits": sum_changed(
        lambda s: replace(s, groups=tuple(replace(g, cell=Cell(8, True)) for g in s.groups))
    ),
    "a rounding constant one less": tail_changed(lambda t: added(t, -1)),
    "a dividend that may be negative": tail_changed(lift_lost),
    "an offset one more": tail_changed(lambda t: replace(t, offset=t.offset + 1)),
    "no saturation": tail_changed(lambda t: replace(t, overflow=None)),
    "limits one less": tail_changed(lambda t: replace(t, limits=Interval(0, t.limits.high - 1))),
    "an argument too narrow": tail_changed(lambda t: replace(t, argument=Interval(0, 10))),
    "a work type too narrow": tail_changed(lambda t: replace(t, work=Cell(8, True))),
    "a result too narrow": tail_changed(lambda t: replace(t, cell=Cell(8, True))),
    "a word too narrow": lambda p: replace(p, word=Cell(8, True)),
    "a pedestal forgotten": lambda p: replace(p, load=replace(p.load, pedestal=0)),
    "another border constant": lambda p: replace(p, load=replace(p.load, constant=1)),
    "codes clamped without need": lambda p: replace(
        p, load=replace(p.load, clamp=Interval(0, 100))
    ),
    "a step left out": lambda p: replace(p, steps=()),
}


@pytest.mark.parametrize("fault", WRONG)
@pytest.mark.parametrize("rounding", ["ties-to-positive", "ties-to-even"])
def test_a_wrong_plan_is_refused(fault: str, rounding: str) -> None:
    sizing = sharpen(rounding)
    plan = direct(sizing)
    wrong = WRONG[fault](plan)
    assert wrong != plan
    with pytest.raises(PlanFaultError):
        check(wrong, sizing)


@pytest.mark.parametrize(
    "change",
    [
        tail_changed(lambda t: replace(t, remove=0), step=0),
        lambda p: replace(p, steps=p.steps[::-1]),
        lambda p: replace(p, steps=p.steps[1:]),
    ],
)
def test_a_wrong_plan_of_two_passes_is_refused(change: Callable[[Plan], Plan]) -> None:
    sizing = packaged.sized(TWO_PASSES, Path(), "twice")
    plan = check(direct(sizing), sizing)
    with pytest.raises(PlanFaultError):
        check(change(plan), sizing)


REGISTER = """
[filter]
name = "narrow"
[kernel]
taps = [[1, 2, 1, -1]]
[input]
bits = 8
[accumulator]
bits = 9
overflow = "{policy}"
[output]
bits = 16
signed = true
"""


def value_changed(**changes: object) -> Callable[[Plan], Plan]:
    def apply(tail: Tail) -> Tail:
        return replace(tail, of=replace(tail.of, **changes))  # type: ignore[arg-type]

    return tail_changed(apply)


def reversed_sum(tail: Tail) -> Tail:
    assert isinstance(tail.of, SaturatingSum)
    return replace(tail, of=replace(tail.of, groups=tail.of.groups[::-1]))


def plain_sum(tail: Tail) -> Tail:
    inner = tail.of.of if isinstance(tail.of, Field) else tail.of
    return replace(tail, of=Sum(inner.start, inner.groups, inner.cell))


@pytest.mark.parametrize(
    ("policy", "change"),
    [
        ("saturate", value_changed(limits=Interval(-256, 254))),
        ("saturate", tail_changed(reversed_sum)),
        ("saturate", tail_changed(plain_sum)),
        ("wrap", value_changed(bits=10)),
        ("wrap", value_changed(signed=False)),
        ("wrap", tail_changed(plain_sum)),
    ],
)
def test_a_register_that_is_another_is_refused(policy: str, change: Callable[[Plan], Plan]) -> None:
    sizing = packaged.sized(REGISTER.format(policy=policy), Path(), "narrow")
    plan = check(direct(sizing), sizing)
    with pytest.raises(PlanFaultError):
        check(change(plan), sizing)


@settings(max_examples=150, deadline=None)
@given(st.randoms(use_true_random=False))
def test_plans_of_random_specs_meet_their_obligations(rng: object) -> None:
    text = randomspecs.random_spec(rng, "random")  # type: ignore[arg-type]
    try:
        sizing = packaged.sized(text, Path(), "random")
    except SpecError:
        return
    plan = direct(sizing)
    evaluation = evaluate(plan, sizing.filter)
    assert evaluation.obligations
    assert all(owed.holds for owed in evaluation.obligations)
