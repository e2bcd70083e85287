"""The evaluator of plans: what every value is, and what the C types owe it.

It reads a plan as C would carry it out and knows nothing of how the plan was made. Pixels
are whatever the container can hold (or what loading clamps them to); under `reject` they are
legal, since other frames are turned away before.
"""

from collections import Counter
from collections.abc import Iterator, Mapping
from dataclasses import dataclass

from guardbit.arith.intervals import add, clamp_to, contains, hull, scale, shift, wrapped
from guardbit.arith.rounding import rounding_constant
from guardbit.arith.words import clamp, container_range, format_range
from guardbit.model.enums import BorderMode, Outside, Overflow, Preload
from guardbit.model.filter import Filter, Pass
from guardbit.model.plan import (
    Cell,
    Exact,
    Field,
    Floor,
    Plan,
    Quotient,
    SaturatingSum,
    Step,
    Sum,
    Tail,
    Thresholds,
    TiesToAway,
    TiesToEven,
    Truncate,
    Value,
)
from guardbit.model.sizing import Interval
from guardbit.plan.cells import INT16, cell_range


@dataclass(frozen=True)
class Form:
    """start + sum of coefficient * row value at an offset: what a step's sum is."""

    start: int
    taps: tuple[tuple[tuple[int, int], int], ...]


@dataclass(frozen=True)
class Obligation:
    """`cell` has to hold every number of `values`."""

    what: str
    values: Interval
    cell: Cell

    @property
    def holds(self) -> bool:
        """Return whether it does."""
        return contains(cell_range(self.cell), self.values)


@dataclass(frozen=True)
class Evaluation:
    """The form of each step's sum, and all obligations."""

    forms: tuple[Form, ...]
    obligations: tuple[Obligation, ...]


class PlanFaultError(Exception):
    """A plan does not compute its filter, or a type of it is too small: a fault in guardbit."""


def evaluate(plan: Plan, f: Filter) -> Evaluation:
    """Return what a plan computes and what its types have to hold."""
    loaded = _loaded(plan, f)
    obligations = [Obligation("loaded pixel", loaded, plan.word)]
    rows = {plan.load.into: loaded}
    for step in plan.steps:
        stored, owed = _step(step, rows)
        rows[step.writes] = stored
        obligations += owed
    return Evaluation(tuple(_form(step) for step in plan.steps), tuple(obligations))


def check(plan: Plan, f: Filter) -> Plan:
    """Return the plan if it computes the filter and every type is wide enough.

    Raises PlanFaultError.
    """
    evaluation = evaluate(plan, f)
    for step, form in zip(plan.steps, evaluation.forms, strict=True):
        wanted = kernel_form(f.passes[step.stage])
        if form != wanted:
            raise PlanFaultError(f"step {step.name} sums {form}, the kernel is {wanted}")
    for obligation in evaluation.obligations:
        if not obligation.holds:
            raise PlanFaultError(f"{obligation}")
    return plan


def kernel_form(stage: Pass) -> Form:
    """Return the form that a pass's accumulator has by the contract."""
    preloaded = stage.accumulator.preload is Preload.ROUNDING
    start = rounding_constant(stage.requantiser) if preloaded else 0
    if stage.accumulator.overflow is Overflow.SATURATE:
        assert stage.accumulator.bits is not None
        limits = format_range(stage.accumulator.bits, stage.accumulator.signed)
        start = clamp(start, limits.low, limits.high)
    taps = Counter({(t.dy, t.dx): t.integer for t in stage.kernel.terms if t.integer})
    return Form(start, tuple(sorted(taps.items())))


def _loaded(plan: Plan, f: Filter) -> Interval:
    """Return what a row value can be after loading."""
    codes = container_range(f.input.container)
    if f.outside is Outside.REJECT:
        codes = Interval(f.input.low, f.input.high)
    if plan.load.clamp is not None:
        codes = clamp_to(codes, plan.load.clamp)
    pixels = shift(codes, -plan.load.pedestal)
    if f.border.mode is BorderMode.CONSTANT:
        pixels = hull((pixels, Interval(plan.load.constant, plan.load.constant)))
    return pixels


def _inner(value: Value) -> Sum | SaturatingSum:
    return value.of if isinstance(value, Field) else value


def _form(step: Step) -> Form:
    inner = _inner(step.value.of)
    taps: Counter[tuple[int, int]] = Counter()
    for group in inner.groups:
        for term in group.terms:
            taps[term.of.dy, term.of.dx] += term.coefficient
    return Form(inner.start, tuple(sorted((at, k) for at, k in taps.items() if k)))


def _step(step: Step, rows: Mapping[str, Interval]) -> tuple[Interval, list[Obligation]]:
    """Return what a step stores, and its obligations."""
    inner = _inner(step.value.of)
    owed = [Obligation(f"{step.name}: {o.what}", o.values, o.cell) for o in _sums(inner, rows)]
    total = _total(inner, rows)
    if isinstance(step.value.of, Field):
        field = step.value.of
        total = wrapped(total, field.bits, field.signed)
        owed.append(Obligation(f"{step.name}: wrapped sum", total, field.cell))
    if not contains(step.value.argument, total):
        raise PlanFaultError(f"{step.name}: sums reach {total}, its tail takes them otherwise")
    stored, inside = _tail(step.value, total)
    owed += [Obligation(f"{step.name}: {what}", values, step.value.work) for what, values in inside]
    owed.append(Obligation(f"{step.name}: stored", stored, step.value.cell))
    return stored, owed


def _sums(value: Sum | SaturatingSum, rows: Mapping[str, Interval]) -> Iterator[Obligation]:
    """Yield the obligations of a sum: products, groups, and the accumulator after each."""
    if isinstance(value, Sum) and value.modular:
        return
    total = Interval(value.start, value.start)
    yield Obligation("start", total, value.cell)
    for group in value.groups:
        part = Interval(0, 0)
        for term in group.terms:
            pixel = rows[term.of.rows]
            product = scale(pixel, term.coefficient)
            part = add(part, product)
            yield Obligation("operand", pixel, group.cell if group.cell != INT16 else value.cell)
            constant = Interval(term.coefficient, term.coefficient)
            yield Obligation("coefficient", constant, group.cell)
            yield Obligation("product", product, group.cell)
            yield Obligation("group", part, group.cell)
        if isinstance(value, SaturatingSum):
            if not value.guarded:
                yield Obligation("sum before clamping", add(total, part), value.cell)
            total = clamp_to(add(total, part), value.limits)
        else:
            total = add(total, part)
        yield Obligation("sum", total, value.cell)


def _total(value: Sum | SaturatingSum, rows: Mapping[str, Interval]) -> Interval:
    total = Interval(value.start, value.start)
    for group in value.groups:
        for term in group.terms:
            total = add(total, scale(rows[term.of.rows], term.coefficient))
        if isinstance(value, SaturatingSum):
            total = clamp_to(total, value.limits)
    return total


def _tail(tail: Tail, total: Interval) -> tuple[Interval, list[tuple[str, Interval]]]:
    """Return what a tail stores, and the numbers inside it."""
    n = scale(total, tail.multiplier)
    inside, quotients = _divide(tail.quotient, n)
    code = shift(quotients, tail.offset)
    named = [("scaled sum", n), *(("dividend", v) for v in inside), ("code", code)]
    if tail.overflow is Overflow.WRAP:
        return shift(tail.limits, -tail.remove), named
    if tail.overflow is Overflow.SATURATE:
        return clamp_to(code, tail.limits), named
    if not contains(tail.limits, code):
        raise PlanFaultError(f"codes reach {code} and nothing holds them to {tail.limits}")
    return code, named


def _divide(form: Quotient, n: Interval) -> tuple[list[Interval], Interval]:
    """Return the dividends and the quotients of a form; each is monotone in n."""
    match form:
        case Exact():
            return [], n
        case Thresholds(up, down):
            ends = [_beyond(v, up, down) for v in (n.low, n.high)]
            return [], Interval(*ends)
        case Floor(add_, divisor, _, natural) | TiesToEven(add_, divisor, _, natural):
            dividend = shift(n, add_)
            if natural and dividend.low < 0:
                raise PlanFaultError(f"a negative dividend {dividend} where none is expected")
            return [dividend], Interval(*(_floored(form, v) for v in (dividend.low, dividend.high)))
        case Truncate(divisor):
            return [], Interval(_toward_zero(n.low, divisor), _toward_zero(n.high, divisor))
        case TiesToAway(half, divisor):
            moved = [v - half if v < 0 else v + half for v in (n.low, n.high)]
            ends = [_toward_zero(v, divisor) for v in moved]
            return [Interval(n.low - half, n.high + half)], Interval(*ends)


def _beyond(n: int, up: int | None, down: int | None) -> int:
    return int(up is not None and n >= up) - int(down is not None and n <= down)


def _floored(form: Floor | TiesToEven, dividend: int) -> int:
    """Return the quotient of a dividend; without a rest, ties to even takes the even one."""
    quotient, rest = divmod(dividend, form.divisor)
    return quotient - quotient % 2 if isinstance(form, TiesToEven) and not rest else quotient


def _toward_zero(n: int, divisor: int) -> int:
    return n // divisor if n >= 0 else -(-n // divisor)
