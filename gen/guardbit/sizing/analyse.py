"""Exact range analysis of a filter: every width resolved, with the evidence for it."""

from collections.abc import Sequence
from dataclasses import dataclass, replace

from guardbit.model.filter import Filter, Pass, registers_of
from guardbit.model.sizing import RegisterSizing, RequantiserSizing, Sizing
from guardbit.sizing.error.bound import error_bound
from guardbit.sizing.loadable import loadable_sizing
from guardbit.sizing.passes import (
    ACCUMULATOR,
    FIRST_ACCUMULATOR,
    INTERMEDIATE,
    OUTPUT,
    first_problem,
    second_problem,
    single_problem,
    stages,
)
from guardbit.sizing.register import Register, measure, sized
from guardbit.sizing.requantisers import Requantised, size_requantiser
from guardbit.sizing.unmet import unmet
from guardbit.sizing.witness import (
    Painter,
    code_witnesses,
    held_witnesses,
    plain_painter,
    result_painter,
    witnesses,
)

__all__ = ["analyse", "unmet"]


def analyse(f: Filter) -> Sizing:
    """Return the sizing of a filter; `Sizing.filter` has every accumulator width resolved.

    Ranges hold for legal codes. They are exact, with a frame that attains each end, unless
    `exact` says otherwise. With coefficients that are loaded at run time they are over all that
    may be loaded, and the error is the kernel's own. A width that "auto" resolves to may exceed
    64 bits: `unmet` says so.
    """
    s = registers_of(f)
    return _sizing(f, measured(f)) if s is None else loadable_sizing(f, s)


@dataclass(frozen=True)
class Measured:
    """A register, whether its pixels' range is exact, how to paint them, and what follows it."""

    register: Register
    exact: bool
    paint: Painter
    requantiser: str


def measured(f: Filter) -> tuple[Measured, ...]:
    """Return the accumulators of a filter, of resolved widths, in the order of its passes."""
    return _measured_single(f) if len(f.passes) == 1 else _measured_two(f)


def _measured_single(f: Filter) -> tuple[Measured, ...]:
    register = measure(ACCUMULATOR, f.passes[0].accumulator, single_problem(f))
    return (Measured(register, True, plain_painter(f), OUTPUT),)


def _measured_two(f: Filter) -> tuple[Measured, ...]:
    s = stages(f)
    first = measure(FIRST_ACCUMULATOR, f.passes[0].accumulator, first_problem(f, s))
    results = second_problem(f, s, first)
    second = measure(ACCUMULATOR, f.passes[1].accumulator, results.problem)
    return (
        Measured(first, True, plain_painter(f), INTERMEDIATE),
        Measured(second, results.exact, result_painter(f, s.vertical), OUTPUT),
    )


def _sizing(f: Filter, all_measured: Sequence[Measured]) -> Sizing:
    registers = tuple(m.register for m in all_measured)
    passes = tuple(
        replace(p, accumulator=register.accumulator)
        for p, register in zip(f.passes, registers, strict=True)
    )
    resolved = replace(f, passes=passes)
    rows = tuple(_register(resolved, index, m) for index, m in enumerate(all_measured))
    requantisers = tuple(
        _requantiser(resolved, p, m) for p, m in zip(passes, all_measured, strict=True)
    )
    return Sizing(resolved, rows, requantisers, error_bound(f, registers, requantisers))


def _register(f: Filter, index: int, m: Measured) -> RegisterSizing:
    if not m.exact:
        return sized(m.register, False, (), ())
    found = witnesses(f, m.register, m.paint)
    return sized(m.register, True, found, held_witnesses(f, index, m.register, found, m.paint))


def _requantiser(f: Filter, p: Pass, m: Measured) -> RequantiserSizing:
    made = Requantised(p, m.register, m.exact)
    found = code_witnesses(f, m.requantiser, made, m.paint)
    return replace(size_requantiser(m.requantiser, made), witnesses=found)
