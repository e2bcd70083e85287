"""The evaluator of plans: what every value is, and what the C types owe it.

It reads a plan as C would carry it out and knows nothing of how the plan was made. Pixels
are whatever the container can hold (or what loading clamps them to); under `reject` they are
legal where every row that is loaded is judged, since other frames are turned away before.
"""

from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass

from guardbit.arith.intervals import add, clamp_to, contains, hull, scale, shift, wrapped
from guardbit.arith.rounding import rounding_constant
from guardbit.arith.words import container_range
from guardbit.model.enums import BorderMode, Outside, Overflow, Preload
from guardbit.model.filter import Filter, Pass, TapSet, registers_of
from guardbit.model.plan import (
    Cell,
    Exact,
    Field,
    Floor,
    Group,
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
from guardbit.plan.replay import divide
from guardbit.plan.sums import Rows, coefficient_range, partial_sums, product_range
from guardbit.plan.tail import constants


@dataclass(frozen=True)
class Form:
    """start + sum of coefficient * row value at an offset: what a step's sum is.

    `registers` are the offsets whose coefficient is given at run time, each with the number
    of the kernel's term that it stands for.
    """

    start: int
    taps: tuple[tuple[tuple[int, int], int], ...]
    registers: tuple[tuple[tuple[int, int], int], ...] = ()


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
    """Return what a plan computes and what its types have to hold.

    Raises PlanFaultError where a number leaves what the plan says of it.
    """
    loaded, owed = _load(plan, f)
    obligations = list(owed)
    rows = {plan.load.into: loaded}
    obligations += _tap_type(plan, f)
    for step in plan.steps:
        stored, owed = _step(step, rows, f.passes[step.stage].kernel.registers)
        rows[step.writes] = stored
        obligations += owed
    return Evaluation(tuple(_form(step) for step in plan.steps), tuple(obligations))


def accumulator(value: Value) -> Sum | SaturatingSum:
    """Return the sum inside a value."""
    return value.of if isinstance(value, Field) else value


def start_value(stage: Pass) -> int:
    """Return what the contract adds up from: zero or the rounding constant."""
    preloaded = stage.accumulator.preload is Preload.ROUNDING
    return rounding_constant(stage.requantiser) if preloaded else 0


def room(limits: Interval, products: Interval) -> Interval:
    """Return the limits and what is left of them: high - product, or low less a negative one."""
    below = limits.high - max(products.high, 0)
    above = limits.low - min(products.low, 0)
    return Interval(min(limits.low, below), max(limits.high, above))


def _load(plan: Plan, f: Filter) -> tuple[Interval, list[Obligation]]:
    """Return what a row value can be after loading, and the obligations of loading."""
    codes = container_range(f.input.container)
    if f.outside is Outside.REJECT and plan.loads_what_is_tapped:
        # a row between the taps' rows is loaded too, but no frame is refused for its codes
        codes = Interval(f.input.low, f.input.high)
    if plan.load.clamp is not None:
        codes = clamp_to(codes, plan.load.clamp)
    loaded = shift(codes, -plan.load.pedestal)
    pixels = loaded
    if f.border.mode is BorderMode.CONSTANT:
        pixels = hull((loaded, Interval(plan.load.constant, plan.load.constant)))
    return pixels, [
        Obligation("code", codes, plan.load.work),
        Obligation("code less its pedestal", loaded, plan.load.work),
        Obligation("row value", pixels, plan.word),
    ]


def _form(step: Step) -> Form:
    inner = accumulator(step.value.of)
    taps: Counter[tuple[int, int]] = Counter()
    registers: list[tuple[tuple[int, int], int]] = []
    for term in (term for group in inner.groups for term in group.terms):
        if term.register is None:
            taps[term.of.dy, term.of.dx] += term.coefficient
        else:
            registers.append(((term.of.dy, term.of.dx), term.register))
    known = tuple(sorted((at, k) for at, k in taps.items() if k))
    return Form(inner.start, known, tuple(sorted(registers)))


def _tap_type(plan: Plan, f: Filter) -> Iterator[Obligation]:
    """Yield what the type of coefficients given at run time owes. Raises PlanFaultError."""
    registers = registers_of(f)
    if (registers is None) != (plan.taps is None):
        raise PlanFaultError("the type of the coefficients is not told, or told for none")
    if registers is not None and plan.taps is not None:
        held = Interval(min(registers.least), max(registers.greatest))
        yield Obligation("coefficient given", held, plan.taps)


def _step(step: Step, rows: Rows, registers: TapSet | None) -> tuple[Interval, list[Obligation]]:
    """Return what a step stores, and its obligations."""
    inner = accumulator(step.value.of)
    numbers = {t.register for group in inner.groups for t in group.terms} - {None}
    if numbers and (registers is None or not numbers <= {*range(len(registers.cells))}):
        raise PlanFaultError(f"{step.name}: reads registers that there are not")
    total, owed = _total(inner, rows, registers)
    if isinstance(step.value.of, Field):
        field = step.value.of
        total = wrapped(total, field.bits, field.signed)
        owed.append(Obligation("wrapped sum", total, field.cell))
    if not contains(step.value.argument, total):
        raise PlanFaultError(f"{step.name}: sums reach {total}, its tail takes them otherwise")
    stored, inside = _tail(step.value, total)
    owed += [Obligation(what, values, step.value.work) for what, values in inside]
    owed.append(Obligation("stored", stored, step.value.cell))
    return stored, [Obligation(f"{step.name}: {o.what}", o.values, o.cell) for o in owed]


def _total(
    value: Sum | SaturatingSum, rows: Rows, registers: TapSet | None
) -> tuple[Interval, list[Obligation]]:
    """Return what a sum can be at its end, and its obligations all the way."""
    total = Interval(value.start, value.start)
    owed = [Obligation("start", total, value.cell)]
    done = _sums_after_groups(value, rows, registers)
    for group, unlimited in zip(value.groups, done, strict=True):
        part, inside = _group(group, value.cell, rows, registers)
        owed += inside
        if isinstance(value, SaturatingSum):
            free = add(total, part)
            owed += _clamping(value, free, part)
            total = clamp_to(free, value.limits)
        else:
            total = unlimited
        owed.append(Obligation("sum", total, value.cell))
    return total, [] if isinstance(value, Sum) and value.modular else owed


def _sums_after_groups(
    value: Sum | SaturatingSum, rows: Rows, registers: TapSet | None
) -> Iterator[Interval]:
    """Yield what the sum reaches after each group if nothing clamps it."""
    sums = partial_sums((t for group in value.groups for t in group.terms), rows, registers)
    total = Interval(0, 0)
    for group in value.groups:
        for _ in group.terms:
            total = next(sums)
        yield shift(total, value.start)


def _group(
    group: Group, wide: Cell, rows: Rows, registers: TapSet | None
) -> tuple[Interval, list[Obligation]]:
    """Return what a group adds up to, and its obligations.

    C writes a negative coefficient as a subtraction, so that the opposite of the product is
    what has to fit as well. Operands of a 16-bit group are not cast.
    """
    part = Interval(0, 0)
    owed = []
    parts = partial_sums(group.terms, rows, registers)
    for term, part in zip(group.terms, parts, strict=True):
        pixel = rows[term.of.rows]
        product = product_range(term, pixel, registers)
        size = scale(pixel, abs(term.coefficient)) if term.register is None else product
        owed += [
            Obligation("operand", pixel, wide if group.cell == INT16 else group.cell),
            Obligation("product", product, group.cell),
            Obligation("product", size, group.cell),
            Obligation("coefficient", coefficient_range(term, registers), group.cell),
            Obligation("group", part, group.cell),
        ]
    return part, owed


def _clamping(value: SaturatingSum, free: Interval, product: Interval) -> Iterator[Obligation]:
    if not value.acts[0] and free.low < value.limits.low:
        raise PlanFaultError(f"sums reach {free}, below {value.limits}, and nothing holds them")
    if not value.acts[1] and free.high > value.limits.high:
        raise PlanFaultError(f"sums reach {free}, above {value.limits}, and nothing holds them")
    if value.guarded:
        yield Obligation("room left", room(value.limits, product), value.cell)
    else:
        yield Obligation("sum before clamping", free, value.cell)


def _tail(tail: Tail, total: Interval) -> tuple[Interval, list[tuple[str, Interval]]]:
    """Return what a tail stores, and the numbers inside it."""
    n = scale(total, tail.multiplier)
    inside, quotients = _divide(tail.quotient, n)
    code = shift(quotients, tail.offset)
    named = [("scaled sum", n), *(("dividend", v) for v in inside), ("code", code)]
    named += [("constant", v) for v in constants(tail)]
    if tail.overflow is Overflow.WRAP:
        return shift(tail.limits, -tail.remove), named
    if tail.overflow is Overflow.SATURATE:
        if not contains(tail.unlimited, code):
            raise PlanFaultError(f"codes reach {code}, and only {tail.unlimited} is held")
        return clamp_to(code, tail.limits), named
    if not contains(tail.limits, code):
        raise PlanFaultError(f"codes reach {code} and nothing holds them to {tail.limits}")
    return code, named


def _divide(form: Quotient, n: Interval) -> tuple[list[Interval], Interval]:
    """Return the numbers inside a form, and the quotients, which are monotone in n."""
    quotients = Interval(divide(form, n.low), divide(form, n.high))
    match form:
        case Exact():
            return [], quotients
        case Thresholds(up, down):
            return [Interval(t, t) for t in (up, down) if t is not None], quotients
        case Floor(add_, divisor, _, natural) | TiesToEven(add_, divisor, _, natural):
            dividend = shift(n, add_)
            if natural and dividend.low < 0:
                raise PlanFaultError(f"a negative dividend {dividend} where none is expected")
            return [dividend, Interval(divisor, divisor)], quotients
        case Truncate(divisor):
            return [Interval(divisor, divisor)], quotients
        case TiesToAway(half, divisor):
            moved = Interval(n.low - half, n.high + half)
            return [moved, Interval(divisor, divisor)], quotients
