"""The direct plan: padded rows in a ring, every tap multiplied where it stands.

Intervals here are those of every frame that the container can hold, not only of legal ones:
that is what keeps illegal codes from being undefined behaviour.
"""

from collections.abc import Iterable, Iterator
from dataclasses import dataclass, replace
from itertools import groupby

from guardbit.arith.intervals import add, clamp_to, contains, hull, scale, shift, wrapped
from guardbit.arith.words import clamp, container_range, container_word, format_range
from guardbit.model.enums import BorderMode, Outside, Overflow
from guardbit.model.filter import Filter, Pass, TapSet, registers_of
from guardbit.model.plan import (
    Cell,
    Field,
    Group,
    Load,
    Plan,
    Product,
    Read,
    Rows,
    SaturatingSum,
    Step,
    Sum,
    Value,
)
from guardbit.model.sizing import Interval, RegisterSizing, Sizing
from guardbit.plan.cells import (
    INT16,
    UINT64,
    TooWideError,
    fits,
    storage_cell,
    work_cell,
)
from guardbit.plan.conformity import check
from guardbit.plan.evaluate import accumulator, room, start_value
from guardbit.plan.sums import coefficient_range, partial_sums, product_range
from guardbit.plan.tail import tail

OUTPUT = "output"


@dataclass(frozen=True)
class _Source:
    """The row buffer that a pass reads, what its cells can hold, and the pass's registers."""

    rows: str
    pixels: Interval
    registers: TapSet | None = None


def direct(sizing: Sizing) -> Plan:
    """Return the direct plan of a filter, checked by the evaluator.

    Codes are taken as the frame has them unless the types that this needs are wider than
    those for legal codes; then they are clamped to the range on the way in, which is one of
    the things that the contract lets happen to them. Raises TooWideError for what sizing
    reports as unmet.
    """
    f = sizing.filter
    legal = Interval(f.input.low, f.input.high)
    held = container_range(f.input.container)
    _, _, span, tap_rows = _reach(f)
    judged = f.outside is Outside.REJECT and len(tap_rows) == span[0]
    if judged or contains(legal, held):
        return _plan(sizing, None, legal)
    clamped = _plan(sizing, legal, legal)
    if f.outside is Outside.CLAMP:
        return clamped
    try:
        plain = _plan(sizing, None, held)
    except TooWideError:
        return clamped
    return clamped if _bits(clamped) < _bits(plain) else plain


def _bits(plan: Plan) -> int:
    """Return the widths of all types of a plan added up."""
    return plan.word.bits + sum(
        accumulator(step.value.of).cell.bits + step.value.work.bits for step in plan.steps
    )


def _plan(sizing: Sizing, clamped: Interval | None, codes: Interval) -> Plan:
    """Return the plan for frames of these codes, after clamping."""
    f = sizing.filter
    pedestal = f.input.pedestal
    constant = f.border.value - pedestal
    loaded = shift(codes, -pedestal)
    pixels = loaded
    if f.border.mode is BorderMode.CONSTANT:
        pixels = hull((loaded, Interval(constant, constant)))
    top, left, span, tap_rows = _reach(f)
    rows = _rows(f, span[0])
    steps, word = _steps(sizing, rows, pixels)
    plan = Plan(
        name="direct",
        word=word,
        top=top,
        left=left,
        span=span,
        tap_rows=tap_rows,
        load=Load(rows[0].name, clamped, pedestal, constant, work_cell((codes, loaded))),
        rows=rows,
        steps=steps,
        taps=tap_cell(f),
    )
    return check(plan, sizing)


def _offsets(f: Filter, axis: int) -> tuple[int, ...]:
    """Return the offsets on one axis that the passes together read, ascending.

    Only one pass moves along an axis, so that sums over the passes are its own offsets. A
    pass of zeros counts as one tap that stays: the other pass still has to find its rows.
    """
    reach = {0}
    for stage in f.passes:
        own = {(t.dy, t.dx)[axis] for t in stage.kernel.live} or {0}
        reach = {a + b for a in reach for b in own}
    return tuple(sorted(reach))


def _reach(f: Filter) -> tuple[int, int, tuple[int, int], tuple[int, ...]]:
    """Return (top, left, span, tap rows); where a pass is all zeros no pixel matters."""
    rows, columns = _offsets(f, 0), _offsets(f, 1)
    span = (rows[-1] - rows[0] + 1, columns[-1] - columns[0] + 1)
    reads = all(stage.kernel.live for stage in f.passes)
    return rows[0], columns[0], span, tuple(row - rows[0] for row in rows if reads)


def _rows(f: Filter, depth: int) -> tuple[Rows, ...]:
    """Return the row buffers in the order in which the passes read them."""
    if len(f.passes) == 1:
        return (Rows("ring", depth, padded=True),)
    if is_vertical_first(f):
        return (Rows("ring", depth, padded=True), Rows("middle", 1, padded=True))
    return (Rows("line", 1, padded=True), Rows("ring", depth, padded=False))


def is_vertical_first(f: Filter) -> bool:
    """Return whether the first of two passes moves along columns, the second along rows."""
    first, second = (stage.kernel.terms for stage in f.passes)
    return all(t.dx == 0 for t in first) and all(t.dy == 0 for t in second)


def _steps(
    sizing: Sizing, rows: tuple[Rows, ...], pixels: Interval
) -> tuple[tuple[Step, ...], Cell]:
    """Return the steps and the type of scratch, which is wide enough for what each leaves."""
    f = sizing.filter
    last = len(f.passes) - 1
    steps: list[Step] = []
    scratch = [pixels]
    for index, stage in enumerate(f.passes):
        remove = 0 if index == last else f.passes[index + 1].source.pedestal
        name = ("first", "second")[index] if last else "row"
        source = _Source(rows[index].name, scratch[-1])
        value, argument = _value(source, stage, sizing.registers[index])
        made, stored = tail(value, argument, stage, remove)
        target = OUTPUT if index == last else rows[index + 1].name
        steps.append(Step(name, index, target, made))
        scratch.append(stored)
    word = storage_cell(hull(scratch[:-1]))
    output = Cell(*container_word(f.output.container))
    # what does not promote to int everywhere is no operand of a 16-bit group
    narrow = _promotes(word) and _promotes(tap_cell(f) or word)
    return tuple(_typed(step, word, output, narrow) for step in steps), word


def tap_cell(f: Filter) -> Cell | None:
    """Return the type of the coefficients that are given at run time; None: they are fixed."""
    registers = registers_of(f)
    if registers is None:
        return None
    return storage_cell(Interval(min(0, *registers.least), max(0, *registers.greatest)))


def _promotes(cell: Cell) -> bool:
    """Return whether C makes an int of it, even one of 16 bits (6.3.1.1p2)."""
    return cell.bits < 16 or cell == INT16


def _typed(step: Step, word: Cell, output: Cell, narrow: bool) -> Step:
    """Return the step with the types that follow from those of scratch and output."""
    made = replace(step.value, cell=output if step.writes == OUTPUT else word)
    if not narrow:
        made = replace(made, of=_without_int(made.of))
    return replace(step, value=made)


def _without_int(value: Value) -> Value:
    if isinstance(value, Field):
        return replace(value, of=replace(value.of, groups=_widened(value.of)))
    return replace(value, groups=_widened(value))


def _widened(value: Sum | SaturatingSum) -> tuple[Group, ...]:
    return tuple(replace(g, cell=value.cell) if g.cell == INT16 else g for g in value.groups)


def _value(source: _Source, stage: Pass, register: RegisterSizing) -> tuple[Value, Interval]:
    """Return the accumulator's arithmetic and the interval of its final value."""
    word = format_range(register.bits, register.signed)
    start = start_value(stage)
    source = replace(source, registers=stage.kernel.registers)
    terms = _products(source, stage)
    match stage.accumulator.overflow:
        case Overflow.SATURATE if not contains(word, register.partial):
            return _saturating(source, start, terms, word)
        case Overflow.WRAP if not contains(word, register.final):
            return _field(source, start, terms, register)
    return _sum(source, start, terms)


def _products(source: _Source, stage: Pass) -> tuple[Product, ...]:
    terms = stage.kernel.terms
    reads = (Read(source.rows, t.dy, t.dx) for t in terms)
    if source.registers is not None:
        return tuple(
            Product(t.integer, read, number)
            for number, (t, read) in enumerate(zip(terms, reads, strict=True))
        )
    return tuple(
        Product(t.integer, read) for t, read in zip(terms, reads, strict=True) if t.integer
    )


def _running(start: int, terms: Iterable[Product], source: _Source) -> Iterator[Interval]:
    """Yield the intervals of the partial sums in order, the start value first."""
    yield Interval(start, start)
    for total in partial_sums(terms, {source.rows: source.pixels}, source.registers):
        yield shift(total, start)


def _operands(terms: Iterable[Product], source: _Source) -> Iterator[Interval]:
    """Yield what C needs to multiply: the magnitude of each coefficient, and of each product.

    A negative coefficient is written as a subtraction, one given at run time is added as it
    is. Pixels may be nothing but zero.
    """
    for term in terms:
        factor = coefficient_range(term, source.registers)
        made = (
            scale(source.pixels, abs(term.coefficient))
            if term.register is None
            else product_range(term, source.pixels, source.registers)
        )
        yield hull((made, factor))


def _sum(source: _Source, start: int, terms: tuple[Product, ...]) -> tuple[Sum, Interval]:
    partials = tuple(_running(start, terms, source))
    cell = work_cell((*partials, *_operands(terms, source), source.pixels))
    by_row = (tuple(group) for _, group in groupby(terms, key=lambda term: term.of.dy))
    groups = tuple(g for row in by_row for g in _groups(row, source, cell))
    return Sum(start, groups, cell), partials[-1]


def _groups(row: tuple[Product, ...], source: _Source, cell: Cell) -> tuple[Group, ...]:
    """Return the taps of one row as one group if its sum fits, else one by one."""
    inside = hull((*_running(0, row, source), *_operands(row, source)))
    if fits(inside, INT16):
        return (Group(row, INT16),)
    if fits(inside, cell):
        return (Group(row, cell),)
    return tuple(Group((term,), cell) for term in row)


def _saturating(
    source: _Source, start: int, terms: tuple[Product, ...], limits: Interval
) -> tuple[SaturatingSum, Interval]:
    total = unclamped = clamp_to(Interval(start, start), limits)
    made = [product_range(term, source.pixels, source.registers) for term in terms]
    for product in made:
        free = add(total, product)
        total = clamp_to(free, limits)
        unclamped = hull((unclamped, free))
    products = hull((Interval(0, 0), *_operands(terms, source), *made))
    try:
        cell, guarded = work_cell((unclamped, products, source.pixels)), False
    except TooWideError:
        cell, guarded = work_cell((limits, products, source.pixels, room(limits, products))), True
    small = INT16 if fits(products, INT16) else cell
    groups = tuple(Group((term,), small) for term in terms)
    acts = (unclamped.low < limits.low, unclamped.high > limits.high)
    return SaturatingSum(
        clamp(start, limits.low, limits.high), groups, limits, cell, guarded, acts
    ), total


def _field(
    source: _Source, start: int, terms: tuple[Product, ...], register: RegisterSizing
) -> tuple[Field, Interval]:
    bits, signed = register.bits, register.signed
    values = format_range(bits, signed)
    try:
        inner, final = _sum(source, start, terms)
        values = wrapped(final, bits, signed)
    except TooWideError:
        inner = Sum(start, tuple(Group((t,), UINT64) for t in terms), UINT64, modular=True)
    return Field(inner, bits, signed, work_cell((format_range(bits, signed),))), values
