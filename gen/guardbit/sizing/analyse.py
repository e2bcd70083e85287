"""Exact range analysis of a filter: every width resolved, with the evidence for it."""

from dataclasses import replace

from guardbit.model.filter import Filter
from guardbit.model.sizing import RegisterSizing, Sizing
from guardbit.sizing.error import error_bound
from guardbit.sizing.passes import (
    ACCUMULATOR,
    FIRST_ACCUMULATOR,
    INTERMEDIATE,
    OUTPUT,
    first_problem,
    is_preloaded,
    second_problem,
    single_problem,
    stages,
)
from guardbit.sizing.register import Register, measure, sized
from guardbit.sizing.requantisers import size_requantiser
from guardbit.sizing.unmet import unmet
from guardbit.sizing.witness import first_pass_painter, plain_painter, witnesses

__all__ = ["analyse", "unmet"]


def analyse(f: Filter) -> Sizing:
    """Return the sizing of a filter; `Sizing.filter` has every accumulator width resolved.

    Ranges hold for legal codes. They are exact, with a frame that attains each end, unless
    `exact` says otherwise. A width that "auto" resolves to may exceed 64 bits: `unmet` says so.
    """
    return _analyse_single(f) if len(f.passes) == 1 else _analyse_two(f)


def _analyse_single(f: Filter) -> Sizing:
    register = measure(ACCUMULATOR, f.passes[0].accumulator, single_problem(f))
    found = witnesses(f, register, plain_painter(f))
    return _sizing(f, (register,), (sized(register, True, found),), (OUTPUT,))


def _analyse_two(f: Filter) -> Sizing:
    s = stages(f)
    first = measure(FIRST_ACCUMULATOR, f.passes[0].accumulator, first_problem(f, s))
    results = second_problem(f, s, first)
    second = measure(ACCUMULATOR, f.passes[1].accumulator, results.problem)
    paint = first_pass_painter(f, first.problem, s.vertical)
    found = witnesses(f, second, paint) if results.exact else ()
    rows = (
        sized(first, True, witnesses(f, first, plain_painter(f))),
        sized(second, results.exact, found),
    )
    return _sizing(f, (first, second), rows, (INTERMEDIATE, OUTPUT))


def _sizing(
    f: Filter,
    registers: tuple[Register, ...],
    rows: tuple[RegisterSizing, ...],
    names: tuple[str, ...],
) -> Sizing:
    requantisers = tuple(
        size_requantiser(name, p.requantiser, is_preloaded(p), register.held.range)
        for name, p, register in zip(names, f.passes, registers, strict=True)
    )
    passes = tuple(
        replace(p, accumulator=register.accumulator)
        for p, register in zip(f.passes, registers, strict=True)
    )
    error = error_bound(f, registers, requantisers)
    return Sizing(replace(f, passes=passes), rows, requantisers, error)
