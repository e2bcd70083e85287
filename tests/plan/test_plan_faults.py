"""A plan that does not compute its filter, or whose types are too small, is refused."""

from collections.abc import Callable, Iterator
from dataclasses import fields, is_dataclass, replace
from typing import Any

import pytest

from emit.table import cases
from guardbit.fit.resolve import resolve
from guardbit.model.enums import Overflow
from guardbit.model.plan import (
    Cell,
    Field,
    Floor,
    Group,
    Load,
    Plan,
    Product,
    SaturatingSum,
    Step,
    Sum,
    Tail,
    Thresholds,
    TiesToAway,
    TiesToEven,
    Truncate,
)
from guardbit.model.sizing import Interval, Sizing
from guardbit.plan.conformity import check
from guardbit.plan.direct import direct
from guardbit.plan.evaluate import PlanFaultError, evaluate
from guardbit.sizing.analyse import analyse

Change = Callable[[Any], Any]


def sized(name: str) -> Sizing:
    return analyse(resolve(cases()[name]))


Node = Any


def changed(node: Node, kind: type, change: Change, path: str = "") -> Iterator[tuple[str, Node]]:
    """Copies of a plan in which one node of that kind is another, with the node's path."""
    if isinstance(node, kind):
        other = change(node)
        if other != node:
            yield path, other
    if isinstance(node, tuple):
        for i, item in enumerate(node):
            for where, other in changed(item, kind, change, f"{path}[{i}]"):
                yield where, (*node[:i], other, *node[i + 1 :])
    elif is_dataclass(node) and not isinstance(node, type):
        for field in fields(node):
            value = getattr(node, field.name)
            for where, other in changed(value, kind, change, f"{path}.{field.name}"):
                yield where, replace(node, **{field.name: other})


def refused(name: str, kind: type, change: Change) -> int:
    """Apply a change at every place it fits, one at a time; each must be refused."""
    sizing = sized(name)
    plan = direct(sizing)
    assert check(plan, sizing) == plan
    count = 0
    for path, other in changed(plan, kind, change):
        with pytest.raises(PlanFaultError):
            check(other, sizing)
            pytest.fail(f"{name}{path} was taken")
        count += 1
    return count


def coefficient(by: int) -> Change:
    return lambda node: replace(node, coefficient=node.coefficient + by)


def regrouped(groups: tuple[Group, ...]) -> Change:
    return lambda node: replace(node, groups=groups)


def started(by: int) -> Change:
    return lambda node: replace(node, start=node.start + by)


def moved(dy: int, dx: int) -> Change:
    return lambda node: replace(node, of=replace(node.of, dy=node.of.dy + dy, dx=node.of.dx + dx))


EVERYWHERE = ("edge_constant", "down_pixels", "across_wraps", "clamp_s9", "wrap_s9", "modular_64")


@pytest.mark.parametrize("name", EVERYWHERE)
def test_wrong_taps(name: str) -> None:
    for change in (coefficient(1), coefficient(-1), moved(1, 0), moved(0, -1)):
        assert refused(name, Product, change) >= 5


def test_lost_and_doubled_taps() -> None:
    sizing = sized("edge_constant")
    (step,) = direct(sizing).steps
    assert isinstance(step.value.of, Sum)
    groups = step.value.of.groups
    for wrong in (groups[1:], groups[:-1], (*groups, groups[0]), ()):
        plan = with_sum(direct(sizing), regrouped(wrong))
        with pytest.raises(PlanFaultError):
            check(plan, sizing)


def with_sum(plan: Plan, change: Change) -> Plan:
    (step,) = plan.steps
    value = step.value.of
    of = replace(value, of=change(value.of)) if isinstance(value, Field) else change(value)
    return replace(plan, steps=(replace(step, value=replace(step.value, of=of)),))


@pytest.mark.parametrize("name", ["start", "start_wrap", "start_clamp", "start_beyond"])
def test_wrong_start(name: str) -> None:
    for by in (1, -1):
        for kind in (Sum, SaturatingSum):
            refused(name, kind, started(by))
    assert any(
        refused(name, kind, lambda node: replace(node, start=0)) for kind in (Sum, SaturatingSum)
    )


@pytest.mark.parametrize(
    ("name", "least"),
    [("edge_constant", 3), ("out_s32", 3), ("clamp_wide", 3), ("wrap_wide", 3), ("down_32", 5)],
)
def test_narrow_cells(name: str, least: int) -> None:
    """Every type but those that have room to spare is needed; half of each must not do."""
    sizing = sized(name)
    plan = direct(sizing)
    needed = {o.cell for o in evaluate(plan, sizing.filter).obligations}
    assert needed
    caught = 0
    for _, other in changed(plan, Cell, lambda cell: Cell(max(8, cell.bits // 2), cell.signed)):
        owed = evaluate(other, sizing.filter).obligations
        if all(o.holds for o in owed):
            continue
        with pytest.raises(PlanFaultError):
            check(other, sizing)
        caught += 1
    assert caught >= least


def test_unsigned_cells_hold_no_negative_number() -> None:
    for name in ("edge_constant", "signed_pedestal", "down"):
        sizing = sized(name)
        plan = direct(sizing)
        caught = 0
        for _, other in changed(plan, Sum, lambda s: replace(s, cell=Cell(s.cell.bits, False))):
            if any(not o.holds for o in evaluate(other, sizing.filter).obligations):
                with pytest.raises(PlanFaultError):
                    check(other, sizing)
                caught += 1
        assert caught


QUOTIENTS: dict[type, tuple[Change, ...]] = {
    Floor: (
        lambda q: replace(q, add=q.add + 1),
        lambda q: replace(q, add=q.add - 1),
        lambda q: replace(q, add=q.add - q.less * q.divisor) if q.less else q,
        lambda q: replace(q, divisor=q.divisor + 1),
    ),
    TiesToEven: (
        lambda q: replace(q, add=q.add + 1),
        lambda q: replace(q, add=q.add + q.divisor),
        lambda q: replace(q, divisor=2 * q.divisor),
    ),
    Thresholds: (
        lambda q: replace(q, up=q.up + 1) if q.up is not None else q,
        lambda q: replace(q, up=q.up - 1) if q.up is not None else q,
        lambda q: replace(q, down=q.down + 1) if q.down is not None else q,
        lambda q: replace(q, down=None),
        lambda q: replace(q, up=None),
    ),
    Truncate: (
        lambda q: replace(q, divisor=q.divisor + 1),
        lambda q: Floor(0, q.divisor, 0, False),
    ),
    TiesToAway: (
        lambda q: replace(q, half=q.half + 1),
        lambda q: replace(q, half=q.half - 1),
        lambda q: Truncate(q.divisor),
    ),
}


def test_wrong_quotients() -> None:
    """Every form of quotient in the table, with each of its constants one off, or another form."""
    tried = dict.fromkeys(QUOTIENTS, 0)
    for name, spec in cases().items():
        if not name.endswith(("_shift", "_unit", "_by_25", "_wide", "_half")):
            continue
        sizing = analyse(resolve(spec))
        if sizing.filter.output.bits > 1:
            kind = type(direct(sizing).steps[-1].value.quotient)
            for change in QUOTIENTS.get(kind, ()):
                tried[kind] += refused(name, kind, change)
    assert min(tried.values()) >= 3


TAILS: tuple[Change, ...] = (
    lambda t: replace(t, offset=t.offset + 1),
    lambda t: replace(t, multiplier=2 * t.multiplier),
    lambda t: replace(t, remove=t.remove + 1),
    lambda t: replace(t, argument=Interval(t.argument.low, t.argument.high - 1)),
)
TAILS_THAT_LIMIT: tuple[Change, ...] = (
    lambda t: replace(t, overflow=None),
    lambda t: replace(t, limits=_crossed(t, -1, 0)),
    lambda t: replace(t, limits=_crossed(t, 1, 0)),
    lambda t: replace(t, limits=_crossed(t, 0, -1)),
    lambda t: replace(t, limits=_crossed(t, 0, 1)),
)


def _crossed(t: Tail, low: int, high: int) -> Interval:
    """The limits moved, where codes pass them at all."""
    low = low if t.unlimited.low < t.limits.low - 1 else 0
    high = high if t.unlimited.high > t.limits.high + 1 else 0
    return Interval(t.limits.low + low, t.limits.high + high)


@pytest.mark.parametrize("name", ["down", "across", "tw_negative_by_25", "out_u8", "clamp_s9"])
def test_wrong_tails(name: str) -> None:
    for change in TAILS:
        assert refused(name, Tail, change) == len(direct(sized(name)).steps)


@pytest.mark.parametrize("name", ["down", "across", "tw_negative_by_25", "out_u8"])
def test_wrong_limits(name: str) -> None:
    sizing = sized(name)
    plan = direct(sizing)
    acting = [step for step in plan.steps if step.value.overflow is not None]
    tried = 0
    for step in acting:
        for change in TAILS_THAT_LIMIT:
            if change(step.value) != step.value:
                with pytest.raises(PlanFaultError):
                    check(with_tail(plan, step, change), sizing)
                tried += 1
    assert tried >= 3


def with_tail(plan: Plan, step: Step, change: Change) -> Plan:
    steps = tuple(replace(s, value=change(s.value)) if s == step else s for s in plan.steps)
    return replace(plan, steps=steps)


@pytest.mark.parametrize("name", ["clamp_s9", "clamp_u10", "clamp_wide", "guarded_64"])
def test_wrong_register_that_saturates(name: str) -> None:
    changes: tuple[Change, ...] = (
        lambda s: replace(s, limits=Interval(s.limits.low, s.limits.high - 1)),
        lambda s: replace(s, limits=Interval(s.limits.low + 1, s.limits.high)),
        lambda s: replace(s, acts=(False, s.acts[1])),
        lambda s: replace(s, acts=(s.acts[0], False)),
        lambda s: replace(s, groups=s.groups[::-1]),
        lambda s: Sum(s.start, s.groups, s.cell),
    )
    value = direct(sized(name)).steps[-1].value.of
    for change in changes:
        assert refused(name, SaturatingSum, change) == (change(value) != value)


@pytest.mark.parametrize("name", ["wrap_s9", "wrap_u10", "modular_40"])
def test_wrong_register_that_wraps(name: str) -> None:
    changes: tuple[Change, ...] = (
        lambda v: replace(v, bits=v.bits + 1),
        lambda v: replace(v, bits=v.bits - 1),
        lambda v: replace(v, signed=not v.signed),
        lambda v: v.of,
    )
    for change in changes:
        assert refused(name, Field, change) == 1


def test_policies_are_not_exchanged() -> None:
    sizing = sized("clamp_s9")
    plan = direct(sizing)
    (step,) = plan.steps
    value = step.value.of
    assert isinstance(value, SaturatingSum)
    wraps = Field(Sum(value.start, value.groups, value.cell), 9, True, Cell(32, True))
    with pytest.raises(PlanFaultError, match="wraps"):
        check(replace(plan, steps=(replace(step, value=replace(step.value, of=wraps)),)), sizing)


@pytest.mark.parametrize("name", ["constant_value", "black_level", "clamp_video", "reject_video"])
def test_wrong_loading(name: str) -> None:
    changes: tuple[Change, ...] = (
        lambda x: replace(x, pedestal=x.pedestal + 1),
        lambda x: replace(x, constant=x.constant + 1),
        lambda x: replace(x, clamp=Interval(17, 234)),
        lambda x: replace(x, work=Cell(8, True)),
    )
    for change in changes:
        assert refused(name, Load, change) == 1


def test_clamping_is_not_forgotten() -> None:
    assert refused("clamp_video", Load, lambda x: replace(x, clamp=None)) == 1


@pytest.mark.parametrize("name", ["down", "across"])
def test_wrong_order_of_steps(name: str) -> None:
    sizing = sized(name)
    plan = direct(sizing)
    first, second = plan.steps
    for steps in ((second, first), (first,), (second,), (first, first, second), ()):
        with pytest.raises(PlanFaultError):
            check(replace(plan, steps=steps), sizing)


def test_rows_out_of_the_ring() -> None:
    for name in ("edge_constant", "down", "across"):
        sizing = sized(name)
        plan = direct(sizing)
        for other in (
            replace(plan, top=plan.top + 1),
            replace(plan, span=(plan.span[0] - 1, plan.span[1])),
        ):
            with pytest.raises(PlanFaultError):
                check(other, sizing)


def test_wrap_is_the_only_overflow_without_limits() -> None:
    """A guard of the changes above: the cases have tails that saturate and that wrap."""
    met = {
        step.value.overflow
        for name in (*EVERYWHERE, "wraps_s8", "one_tap")
        for step in direct(sized(name)).steps
    }
    assert met == {None, Overflow.SATURATE, Overflow.WRAP}
