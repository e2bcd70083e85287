"""Plans whose coefficients are given at run time: what is refused, and what sums can be."""

import random
from collections.abc import Callable
from dataclasses import replace

import pytest

from emit.registers import cases, loads, sized
from guardbit.model.plan import Cell, Group, Plan, Product, Sum
from guardbit.model.sizing import Sizing
from guardbit.plan.conformity import check
from guardbit.plan.direct import direct
from guardbit.plan.evaluate import PlanFaultError, accumulator


def made(name: str) -> tuple[Sizing, Plan]:
    sizing = sized(name)
    return sizing, direct(sizing)


def with_sum(plan: Plan, change: Callable[[Sum], Sum]) -> Plan:
    (step,) = plan.steps
    assert isinstance(step.value.of, Sum)
    tail = replace(step.value, of=change(step.value.of))
    return replace(plan, steps=(replace(step, value=tail),))


def with_products(plan: Plan, change: Callable[[int, Product], Product]) -> Plan:
    """The plan with other products; they are numbered through all groups."""

    def changed(value: Sum) -> Sum:
        numbers = iter(range(1000))
        groups = tuple(
            Group(tuple(change(next(numbers), term) for term in group.terms), group.cell)
            for group in value.groups
        )
        return replace(value, groups=groups)

    return with_sum(plan, changed)


def test_every_register_is_multiplied_once_where_it_belongs() -> None:
    sizing, plan = made("cross")
    terms = sizing.filter.passes[0].kernel.terms
    inner = accumulator(plan.steps[0].value.of)
    found = {t.register: (t.of.dy, t.of.dx) for group in inner.groups for t in group.terms}
    assert found == {n: (t.dy, t.dx) for n, t in enumerate(terms)}
    assert check(plan, sizing) == plan


WRONG: dict[str, Callable[[int, Product], Product]] = {
    "two registers exchanged": lambda n, t: replace(t, register={0: 1, 1: 0}.get(n, t.register)),
    "a register twice": lambda n, t: replace(t, register=0 if n == 1 else t.register),
    "a constant instead": lambda n, t: replace(t, register=None if n == 2 else t.register),
    "no such register": lambda n, t: replace(t, register=99 if n == 0 else t.register),
}


@pytest.mark.parametrize("name", WRONG)
def test_wrong_products_are_refused(name: str) -> None:
    sizing, plan = made("cross")
    with pytest.raises(PlanFaultError):
        check(with_products(plan, WRONG[name]), sizing)


def test_types_that_are_too_small_are_refused() -> None:
    sizing, plan = made("free")
    assert plan.taps == Cell(8, False)
    with pytest.raises(PlanFaultError, match="coefficient given"):
        check(replace(plan, taps=Cell(8, True)), sizing)
    with pytest.raises(PlanFaultError, match="type of the coefficients"):
        check(replace(plan, taps=None), sizing)
    with pytest.raises(PlanFaultError, match="row: sum"):
        check(with_sum(plan, lambda value: replace(value, cell=Cell(16, True))), sizing)
    narrow = with_sum(
        plan,
        lambda value: replace(
            value, groups=tuple(replace(g, cell=Cell(16, True)) for g in value.groups)
        ),
    )
    with pytest.raises(PlanFaultError, match="row: product"):
        check(narrow, sizing)


def test_a_type_for_registers_that_there_are_not_is_refused() -> None:
    sizing, plan = made("free")
    only = sizing.filter.passes[0]
    fixed = replace(only, kernel=replace(only.kernel, registers=None))
    other = replace(sizing, filter=replace(sizing.filter, passes=(fixed,)))
    with pytest.raises(PlanFaultError):
        check(plan, other)


@pytest.mark.parametrize("name", sorted(cases()))
def test_sums_of_legal_taps_stay_in_the_tail_s_argument(name: str) -> None:
    """Frames at random and at the ends, for each loading; wrapped or clamped as the plan says."""
    sizing, plan = made(name)
    f = sizing.filter
    value, argument = plan.steps[0].value.of, plan.steps[0].value.argument
    rng = random.Random(3)
    if not isinstance(value, Sum):
        limits = sizing.registers[0]
        low = -(1 << (limits.bits - 1)) if limits.signed else 0
        assert low <= argument.low and argument.high < low + (1 << limits.bits)
        return
    ends = (f.input.low - f.input.pedestal, f.input.high - f.input.pedestal)
    for taps in loads(f):
        for _ in range(50):
            pixels = [rng.choice((*ends, rng.randint(*ends))) for _ in taps]
            total = value.start + sum(k * x for k, x in zip(taps, pixels, strict=True))
            assert argument.low <= total <= argument.high
        for sign in (1, -1):
            worst = sum(max(sign * k * end for end in ends) for k in taps)
            assert argument.low <= value.start + sign * worst <= argument.high
