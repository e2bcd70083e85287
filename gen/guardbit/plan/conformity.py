"""Whether a plan computes its filter: forms, order, limits, tails, loading and types."""

from collections.abc import Callable, Iterator

from guardbit.arith.intervals import contains
from guardbit.arith.rounding import requantise, unlimited
from guardbit.arith.words import clamp, container_range, format_range
from guardbit.model.enums import Outside, Overflow, Preload
from guardbit.model.filter import Filter, Pass
from guardbit.model.plan import Field, Plan, SaturatingSum, Step, Tail
from guardbit.model.sizing import Interval, RegisterSizing, Sizing
from guardbit.plan.evaluate import Form, PlanFaultError, accumulator, evaluate, start_value
from guardbit.plan.replay import carry_out


def check(plan: Plan, sizing: Sizing) -> Plan:
    """Return the plan if it computes the filter and every type is wide enough.

    Raises PlanFaultError with everything that is wrong.
    """
    f = sizing.filter
    if faults := [*_chain_faults(plan, f)]:
        raise PlanFaultError("; ".join(faults))  # rows that are not made have no values
    evaluation = evaluate(plan, f)
    faults = [f"{owed} does not hold" for owed in evaluation.obligations if not owed.holds]
    faults += _load_faults(plan, f)
    for step, form in zip(plan.steps, evaluation.forms, strict=True):
        stage = f.passes[step.stage]
        found = (
            *_form_faults(form, stage),
            *_register_faults(step, stage, sizing.registers[step.stage]),
            *_tail_faults(step, f),
        )
        faults += [f"{step.name}: {fault}" for fault in found]
    if faults:
        raise PlanFaultError("; ".join(faults))
    return plan


def kernel_form(stage: Pass) -> Form:
    """Return the form that a pass's accumulator has by the contract."""
    start = start_value(stage)
    register = stage.accumulator
    if register.overflow is Overflow.SATURATE and register.bits is not None:
        word = format_range(register.bits, register.signed)
        start = clamp(start, word.low, word.high)
    terms = stage.kernel.terms
    if stage.kernel.registers is not None:
        return Form(start, (), tuple(sorted(((t.dy, t.dx), n) for n, t in enumerate(terms))))
    return Form(start, tuple(sorted(((t.dy, t.dx), t.integer) for t in terms if t.integer)))


def _chain_faults(plan: Plan, f: Filter) -> Iterator[str]:
    """Yield what is wrong with the steps as a whole: each pass once, each row made before read."""
    if [step.stage for step in plan.steps] != list(range(len(f.passes))):
        yield "the steps are not the passes in order"
    made = {plan.load.into}
    depths = {rows.name: rows.depth for rows in plan.rows}
    for step in plan.steps:
        for group in accumulator(step.value.of).groups:
            for term in group.terms:
                if term.of.rows not in made:
                    yield f"{step.name}: reads {term.of.rows} before it is made"
                if depths[term.of.rows] > 1 and not (0 <= term.of.dy - plan.top < plan.span[0]):
                    yield f"{step.name}: reads row {term.of.dy}, which is not kept"
        made.add(step.writes)
    if not plan.steps or plan.steps[-1].writes != "output":
        yield "the last step does not write the output"


def _load_faults(plan: Plan, f: Filter) -> Iterator[str]:
    legal = Interval(f.input.low, f.input.high)
    needed = f.outside is Outside.CLAMP and not contains(legal, container_range(f.input.container))
    if plan.load.clamp not in ((legal,) if needed else (legal, None)):
        yield f"codes are clamped to {plan.load.clamp} instead of {legal}"
    if plan.load.pedestal != f.input.pedestal:
        yield f"pedestal {plan.load.pedestal} instead of {f.input.pedestal}"
    if plan.load.constant != f.border.value - f.input.pedestal:
        yield f"border constant {plan.load.constant} instead of {f.border.value}, less the pedestal"


def _form_faults(form: Form, stage: Pass) -> Iterator[str]:
    wanted = kernel_form(stage)
    if form != wanted:
        yield f"sums {form}, the kernel is {wanted}"


def _register_faults(step: Step, stage: Pass, register: RegisterSizing) -> Iterator[str]:
    """Yield how a sum departs from the register: its width, its limits, the order of adding."""
    value = step.value.of
    word = format_range(register.bits, register.signed)
    policy = stage.accumulator.overflow
    if isinstance(value, SaturatingSum):
        order = [(t.of.dy, t.of.dx) for group in value.groups for t in group.terms]
        if policy is not Overflow.SATURATE or value.limits != word:
            yield f"clamped to {value.limits}, the register holds {word}"
        if order != sorted(order) or any(len(group.terms) != 1 for group in value.groups):
            yield "clamped sums that are not added one by one in raster order"
    elif isinstance(value, Field):
        if policy is not Overflow.WRAP or (value.bits, value.signed) != _word(register):
            yield f"wraps as {value.bits} bits, the register has {register.bits}"
        if value.of.modular and value.bits > value.of.cell.bits:
            yield "more bits than the modulus of the sum"
    elif value.modular:
        yield "a modular sum that is not reduced to a register"
    elif policy is Overflow.SATURATE and not contains(word, register.partial):
        yield f"sums reach {register.partial}, and nothing clamps them to {word}"
    elif policy is Overflow.WRAP and not contains(word, register.final):
        yield f"sums reach {register.final}, and nothing wraps them to {word}"


def _word(register: RegisterSizing) -> tuple[int, bool]:
    return register.bits, register.signed


def _tail_faults(step: Step, f: Filter) -> Iterator[str]:
    """Yield the first sum whose code is not the contract's.

    Both are step functions that repeat, but for their limits, from one even quotient to the
    next on either side of zero: it is enough to look where the contract's steps, at the ends
    of the argument, about zero and about the limits.
    """
    stage = f.passes[step.stage]
    remove = 0 if step.stage + 1 == len(f.passes) else f.passes[step.stage + 1].source.pedestal
    if step.value.remove != remove:
        yield f"takes off {step.value.remove}, the next pass's pedestal is {remove}"
    preloaded = stage.accumulator.preload is Preload.ROUNDING
    limits = Interval(stage.requantiser.to.low, stage.requantiser.to.high)
    for acc in _places(step.value, stage):
        wanted = requantise(stage.requantiser, preloaded, acc)
        got = carry_out(step.value, acc) + remove
        # under `forbid` only illegal codes go beyond the limits, and may give anything there
        free = stage.requantiser.overflow is Overflow.FORBID and not (
            limits.low <= wanted <= limits.high
        )
        if got != wanted and not free:
            yield f"sum {acc} gives code {got} instead of {wanted}"
            return


_AROUND = range(-3, 4)


def _places(tail: Tail, stage: Pass) -> list[int]:
    """Return the sums at which the rounded quotient steps, each with the one before it."""
    r = stage.requantiser
    preloaded = stage.accumulator.preload is Preload.ROUNDING
    argument = tail.argument

    def code(acc: int) -> int:
        return unlimited(r, preloaded, acc)

    middles = (code(argument.low), code(argument.high), r.to.pedestal, r.to.low, r.to.high)
    targets = {middle + by for middle in middles for by in _AROUND}
    edges = {_first(argument, code, target) for target in targets}
    places = {argument.low, argument.high, *edges, *(edge - 1 for edge in edges)}
    return sorted(acc for acc in places if argument.low <= acc <= argument.high)


def _first(within: Interval, code: Callable[[int], int], target: int) -> int:
    """Return the first sum whose code is not below the target, or the one behind the last."""
    low, high = within.low, within.high + 1
    while low < high:
        middle = (low + high) // 2
        if code(middle) < target:
            low = middle + 1
        else:
            high = middle
    return low
