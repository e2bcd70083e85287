"""One row step: the rows that it reads, and what it computes at each output."""

from dataclasses import dataclass

from guardbit.emit import expressions as c
from guardbit.emit import words
from guardbit.emit.kernel import kernel_lines
from guardbit.emit.tails import (
    RegisterText,
    SaturationText,
    TailText,
    register_text,
    saturation_text,
    tail_text,
)
from guardbit.model.filter import Filter
from guardbit.model.plan import Cell, Field, Group, Plan, Product, SaturatingSum, Step, Sum
from guardbit.model.sizing import Sizing

_WIDTH = 74


@dataclass(frozen=True)
class StatementText:
    """`acc` op the lines of an expression; op "add" calls the register's own function."""

    op: str
    lines: tuple[str, ...]


@dataclass(frozen=True)
class PointerText:
    """A row pointer of a step: it points at row `row` of the span of a ring."""

    name: str
    row: int


@dataclass(frozen=True)
class StepText:
    """One row step.

    `target` is what its output parameter is called, of type `type`; `stride` how many inputs
    further the next output reads; `sum` what the requantiser is called with.
    """

    function: str
    purpose: str
    kernel: tuple[str, ...]
    from_ring: bool
    pointers: tuple[PointerText, ...]
    target: str
    type: str
    accumulator: str
    start: str
    ranges: str
    statements: tuple[StatementText, ...]
    saturates: SaturationText | None
    wraps: RegisterText | None
    sum: str
    tail: TailText
    stride: int


@dataclass(frozen=True)
class _Context:
    """A step and all that its text depends on."""

    sizing: Sizing
    plan: Plan
    step: Step

    @property
    def filter(self) -> Filter:
        return self.sizing.filter

    @property
    def sum(self) -> Sum | SaturatingSum:
        value = self.step.value.of
        return value.of if isinstance(value, Field) else value

    @property
    def is_last(self) -> bool:
        return self.step.writes == "output"

    @property
    def moves(self) -> bool:
        """Whether it goes from extended columns to output columns."""
        padded = {rows.name: rows.padded for rows in self.plan.rows}
        return padded[self.plan.rows[self.step.stage].name] and not padded.get(
            self.step.writes, False
        )


def step_text(sizing: Sizing, plan: Plan, step: Step) -> StepText:
    """Return the text of one row step."""
    x = _Context(sizing, plan, step)
    f, tail = x.filter, step.value
    stage = f.passes[step.stage]
    prefix = f.name if len(plan.steps) == 1 else f"{f.name}_{step.name}"
    wraps = register_text(f"{prefix}_wrap", tail.of) if isinstance(tail.of, Field) else None
    return StepText(
        function=step_function(f, plan, step),
        purpose=words.step_words(step.name, vertical=_is_vertical(x), widens=_widens(x)),
        kernel=kernel_lines(stage.kernel, f.geometry),
        from_ring=plan.rows[step.stage].depth > 1,
        pointers=_pointers(x),
        target="dst" if x.is_last else "row",
        type=_type(x),
        accumulator=c.cell_type(x.sum.cell),
        start=c.number(x.sum.start),
        ranges=words.ranges(sizing.registers[step.stage], stage),
        statements=tuple(_statement(x, group) for group in x.sum.groups),
        saturates=saturation_text(f"{prefix}_add", x.sum)
        if isinstance(x.sum, SaturatingSum)
        else None,
        wraps=wraps,
        sum=c.cast(
            c.cell_type(tail.work),
            "acc" if wraps is None else f"{wraps.function}(acc)",
            c.cell_type(tail.of.cell),
        ),
        tail=tail_text(
            tail_function(f, plan, step), words.tail_comment(stage, tail), tail, _type(x)
        ),
        stride=f.geometry.columns.step if x.moves and x.sum.groups else 1,
    )


def step_function(f: Filter, plan: Plan, step: Step) -> str:
    """Return the name of a step's function; "row" is what makes an output row from the ring."""
    alone = step.writes == "output" and plan.rows[step.stage].name == "ring"
    return f"{f.name}_row" if alone else f"{f.name}_{step.name}"


def tail_function(f: Filter, plan: Plan, step: Step) -> str:
    """Return the name of the function that requantises a step's sums."""
    prefix = f.name if len(plan.steps) == 1 else f"{f.name}_{step.name}"
    return f"{prefix}_requantise"


def _type(x: _Context) -> str:
    """Return the type of what a step writes."""
    f = x.filter
    return c.container_type(f.output.container) if x.is_last else f"{f.name}_word"


def _is_vertical(x: _Context) -> bool:
    """Return whether one of two passes reads a column of the ring, the other a row."""
    return x.plan.rows[x.step.stage].name == "ring"


def _widens(x: _Context) -> bool:
    """Return whether operands are cast to a wider type before they are multiplied."""
    return any(group.cell.bits > 16 and group.cell != x.plan.word for group in x.sum.groups)


def _row_of(plan: Plan, term: Product) -> int:
    """Return the row of the span, from 0, that a tap reads; a buffer of one row has just 0."""
    depth = next(rows.depth for rows in plan.rows if rows.name == term.of.rows)
    return term.of.dy - plan.top if depth > 1 else 0


def _pointers(x: _Context) -> tuple[PointerText, ...]:
    terms = (term for group in x.sum.groups for term in group.terms)
    return tuple(PointerText(f"r{row}", row) for row in sorted({_row_of(x.plan, t) for t in terms}))


def _read(x: _Context, term: Product) -> str:
    """Return the C lvalue that a tap reads, in elements from index `i`."""
    g = x.filter.geometry
    column = g.columns.phase + term.of.dx - x.plan.left if x.moves else 0
    return f"r{_row_of(x.plan, term)}[{c.plus('i', column * g.channels)}]"


def _statement(x: _Context, group: Group) -> StatementText:
    if isinstance(x.sum, SaturatingSum):
        return StatementText("add", tuple(_products(x, group)))
    (first, *rest) = group.terms
    if x.sum.modular and first.register is not None:
        value = f"(uint64_t){_tap(x, first.register)} * (uint64_t){_read(x, first)}"
        return StatementText("+=", (value,))
    if x.sum.modular:
        value = f"UINT64_C({abs(first.coefficient)}) * (uint64_t){_read(x, first)}"
        return StatementText("-=" if first.coefficient < 0 else "+=", (value,))
    lines = c.total(_products(x, group), _WIDTH)
    if not rest and lines[0].startswith("-"):
        return StatementText("-=", (lines[0][1:],))
    return StatementText("+=", tuple(lines))


def _products(x: _Context, group: Group) -> list[str]:
    return [_product(x, term, group.cell) for term in group.terms]


def _product(x: _Context, term: Product, cell: Cell) -> str:
    if term.register is None or x.plan.taps is None:
        return c.product(term, _read(x, term), cell, x.plan.word)
    cells = (cell, x.plan.taps, x.plan.word)
    return c.loaded_product(_tap(x, term.register), _read(x, term), cells)


def _tap(x: _Context, number: int) -> str:
    """Return the C lvalue of a coefficient that is given at run time."""
    registers = x.filter.passes[x.step.stage].kernel.registers
    assert registers is not None
    return f"taps[{registers.cells[number]}]"
