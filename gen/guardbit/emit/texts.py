"""What the templates print: every decision taken, every expression spelt."""

from dataclasses import dataclass

from guardbit.emit import expressions as c
from guardbit.model.enums import Overflow
from guardbit.model.filter import Filter
from guardbit.model.plan import (
    Cell,
    Field,
    Group,
    Plan,
    Product,
    SaturatingSum,
    Step,
    Sum,
    Tail,
    Thresholds,
)
from guardbit.model.sizing import Interval

_WIDTH = 74


@dataclass(frozen=True)
class WrapText:
    """Reduce to the lowest bits, then read them as a number."""

    unsigned: str
    low: str
    result: str


@dataclass(frozen=True)
class TailText:
    """The function that ends a pass."""

    function: str
    result: str
    work: str
    argument: Interval
    multiplier: str | None
    variables: tuple[tuple[str, str], ...]
    code: str | None
    subject: str
    clamp_low: str | None
    clamp_high: str | None
    wrap: WrapText | None
    returned: str
    ignores: bool


@dataclass(frozen=True)
class StatementText:
    """`acc` op the lines of an expression, or acc = function(acc, expression)."""

    op: str
    lines: tuple[str, ...]


@dataclass(frozen=True)
class RegisterText:
    """The helper of an accumulator that wraps or saturates."""

    function: str
    type: str
    limits: Interval
    low: str
    high: str
    wrap: WrapText | None
    guarded: bool
    bits: int
    argument: str


@dataclass(frozen=True)
class PointerText:
    """A row pointer of a step: rN points at row `row` of the span of a ring."""

    name: str
    row: int


@dataclass(frozen=True)
class StepText:
    """One row step: the function, what it reads and writes, and its statements."""

    function: str
    name: str
    from_ring: bool
    writes: str
    pointers: tuple[PointerText, ...]
    accumulator: str
    start: str
    statements: tuple[StatementText, ...]
    saturates: RegisterText | None
    wraps: RegisterText | None
    sum: str
    tail: TailText
    writes_padded: bool
    step: int


def tail_text(function: str, tail: Tail) -> TailText:
    """Return the text of a requantiser."""
    variables, expression = c.quotient(tail.quotient, "acc" if tail.multiplier == 1 else "n")
    code = c.with_offset(tail.quotient, expression, tail.offset)
    subject = "acc" if code == "acc" else "code"
    cell, work = c.cell_type(tail.cell), c.cell_type(tail.work)
    saturates = tail.overflow is Overflow.SATURATE
    return TailText(
        function=function,
        result=cell,
        work=work,
        argument=tail.argument,
        multiplier=c.number(tail.multiplier) if tail.multiplier > 1 else None,
        variables=variables,
        code=None if subject == "acc" else code,
        subject=subject,
        clamp_low=c.number(tail.limits.low)
        if saturates and tail.unlimited.low < tail.limits.low
        else None,
        clamp_high=c.number(tail.limits.high)
        if saturates and tail.unlimited.high > tail.limits.high
        else None,
        wrap=_tail_wrap(tail, subject) if tail.overflow is Overflow.WRAP else None,
        returned=subject if cell == work else f"({cell}){subject}",
        ignores=tail.quotient == Thresholds(None, None),
    )


def _format_bits(limits: Interval) -> int:
    """Return the word length whose whole range the limits are."""
    return (limits.high - limits.low).bit_length()


def _tail_wrap(tail: Tail, subject: str) -> WrapText:
    """Return how a code wraps; limits are the whole format, since a range forbids wrapping."""
    unsigned = f"uint{max(tail.work.bits, 32)}_t"
    bits, signed = _format_bits(tail.limits), tail.limits.low < 0
    result, wide = c.cell_type(tail.cell), c.cell_type(tail.work)
    low = c.low_bits(subject, bits, unsigned)
    if tail.remove:
        number = c.from_low_bits(bits, signed, wide, wide)
        number = number if " " not in number else f"({number})"
        text = c.plus(number, -tail.remove)
        return WrapText(unsigned, low, text if result == wide else f"({result})({text})")
    return WrapText(unsigned, low, c.from_low_bits(bits, signed, result, wide))


def register_text(function: str, value: Sum | SaturatingSum | Field) -> RegisterText | None:
    """Return the helper that a register with a policy needs; None: a plain sum."""
    match value:
        case Sum():
            return None
        case SaturatingSum():
            return RegisterText(
                function=f"{function}_add",
                type=c.cell_type(value.cell),
                limits=value.limits,
                low=c.number(value.limits.low),
                high=c.number(value.limits.high),
                wrap=None,
                guarded=value.guarded,
                bits=_format_bits(value.limits),
                argument=c.cell_type(value.cell),
            )
        case Field():
            return _field_text(f"{function}_wrap", value)


def _field_text(function: str, value: Field) -> RegisterText:
    inner, result = value.of.cell, c.cell_type(value.cell)
    unsigned = f"uint{max(inner.bits, value.cell.bits)}_t"
    half = 1 << (value.bits - 1)
    limits = Interval(-half, half - 1) if value.signed else Interval(0, 2 * half - 1)
    wrap = WrapText(
        unsigned,
        c.low_bits("sum", value.bits, unsigned),
        c.from_low_bits(value.bits, value.signed, result, result),
    )
    return RegisterText(
        function=function,
        type=result,
        limits=limits,
        low=c.number(limits.low),
        high=c.number(limits.high),
        wrap=wrap,
        guarded=False,
        bits=value.bits,
        argument=c.cell_type(inner),
    )


def step_text(f: Filter, plan: Plan, step: Step) -> StepText:
    """Return the text of one row step."""
    tail = step.value
    whole = len(plan.steps) == 1
    prefix = f.name if whole else f"{f.name}_{step.name}"
    inner = tail.of.of if isinstance(tail.of, Field) else tail.of
    register = register_text(prefix, tail.of)
    acc_type = c.cell_type(tail.of.cell)
    sum_ = "acc"
    if isinstance(tail.of, Field):
        assert register is not None
        sum_ = f"{register.function}(acc)"
    if acc_type != c.cell_type(tail.work):
        sum_ = f"({c.cell_type(tail.work)}){sum_}"
    return StepText(
        function=f"{f.name}_row" if _is_row(plan, step) else prefix,
        name=step.name,
        from_ring=plan.rows[step.stage].depth > 1,
        writes=step.writes,
        pointers=_pointers(plan, inner),
        accumulator=c.cell_type(inner.cell),
        start=c.number(inner.start),
        statements=tuple(_statements(f, plan, step, inner)),
        saturates=register if isinstance(inner, SaturatingSum) else None,
        wraps=register if isinstance(tail.of, Field) else None,
        sum=sum_,
        tail=tail_text(f"{prefix}_requantise", tail),
        writes_padded=_writes_padded(plan, step),
        step=f.geometry.columns.step if _moves(plan, step) and inner.groups else 1,
    )


def _is_row(plan: Plan, step: Step) -> bool:
    """Return whether the step alone makes an output row from the ring."""
    return step.writes == "output" and plan.rows[step.stage].name == "ring"


def _writes_padded(plan: Plan, step: Step) -> bool:
    return any(rows.padded for rows in plan.rows if rows.name == step.writes)


def _moves(plan: Plan, step: Step) -> bool:
    """Return whether a step goes from extended columns to output columns."""
    return plan.rows[step.stage].padded and not _writes_padded(plan, step)


def _row_of(plan: Plan, term: Product) -> int:
    """Return the row of the span, from 0, that a tap reads; a buffer of one row has just 0."""
    depth = next(rows.depth for rows in plan.rows if rows.name == term.of.rows)
    return term.of.dy - plan.top if depth > 1 else 0


def _pointers(plan: Plan, value: Sum | SaturatingSum) -> tuple[PointerText, ...]:
    rows = sorted({_row_of(plan, term) for group in value.groups for term in group.terms})
    return tuple(PointerText(f"r{row}", row) for row in rows)


def _read(f: Filter, plan: Plan, step: Step, term: Product) -> str:
    """Return the C lvalue that a tap reads, in elements from index `i`."""
    column = f.geometry.columns.phase + term.of.dx - plan.left if _moves(plan, step) else 0
    index = c.plus("i", column * f.geometry.channels)
    return f"r{_row_of(plan, term)}[{index}]"


def _statements(
    f: Filter, plan: Plan, step: Step, value: Sum | SaturatingSum
) -> list[StatementText]:
    def products(group: Group, cell: Cell) -> list[str]:
        return [
            c.product(term, _read(f, plan, step, term), cell, plan.word) for term in group.terms
        ]

    made: list[StatementText] = []
    for group in value.groups:
        if isinstance(value, Sum) and value.modular:
            (term,) = group.terms
            op = "-=" if term.coefficient < 0 else "+="
            text = f"UINT64_C({abs(term.coefficient)}) * (uint64_t){_read(f, plan, step, term)}"
            made.append(StatementText(op, (text,)))
        else:
            op = "add" if isinstance(value, SaturatingSum) else "+="
            lines = c.total(products(group, group.cell), _WIDTH)
            made.append(StatementText(op, tuple(lines)))
    return made
