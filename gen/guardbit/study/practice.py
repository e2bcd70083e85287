"""Overflow in practice: what registers that are too narrow do to real frames.

The bounds of sizing are for every legal frame. How often a frame of the field comes near
them is measured here, so that a person can choose to live with a narrower register.
"""

from collections.abc import Sequence
from dataclasses import replace
from typing import TypeAlias

import numpy as np

from guardbit.model.enums import Overflow
from guardbit.model.filter import Accumulator, Filter
from guardbit.model.practice import Narrowed, Practice, RegisterPractice
from guardbit.model.routine import Codes
from guardbit.model.sizing import RegisterSizing, Sizing
from guardbit.model.vectors import Response
from guardbit.reference.run import respond

Run: TypeAlias = tuple[Codes, Response]

BELOW = 6
LEAST_BITS = 2


def practice(sizing: Sizing, frames: Sequence[Codes]) -> Practice:
    """Return what each register does at each width from its safe one less six up to that.

    Frames are (rows, columns, channels) of legal codes. Each register is narrowed alone.
    """
    f = _safe(sizing)
    runs = [(frame, respond(f, frame)) for frame in frames]
    registers = enumerate(sizing.registers)
    return Practice(tuple(_register(f, which, register, runs) for which, register in registers))


def _safe(sizing: Sizing) -> Filter:
    """Return the filter with accumulators that hold every sum."""
    f = sizing.filter
    passes = tuple(
        replace(p, accumulator=replace(p.accumulator, bits=r.bits_forbid, overflow=Overflow.FORBID))
        for p, r in zip(f.passes, sizing.registers, strict=True)
    )
    return replace(f, passes=passes)


def _register(
    f: Filter, which: int, register: RegisterSizing, runs: Sequence[Run]
) -> RegisterPractice:
    safe = register.bits_forbid
    rows = []
    for bits in range(max(LEAST_BITS, safe - BELOW), safe + 1):
        for policy in (Overflow.WRAP, Overflow.SATURATE):
            accumulator = replace(f.passes[which].accumulator, bits=bits, overflow=policy)
            narrow = _with(f, which, accumulator)
            rows.append(_narrowed(narrow, which, runs))
    return RegisterPractice(register.name, safe, tuple(rows), register.is_never_safe)


def _narrowed(narrow: Filter, which: int, runs: Sequence[Run]) -> Narrowed:
    sums = overflowed = outputs = differing = largest = total = 0
    for frame, safe in runs:
        made = respond(narrow, frame)
        held, exact = made.accumulators[which], safe.accumulators[which]
        away = np.abs(made.output.astype(np.int64) - safe.output.astype(np.int64))
        sums += held.size
        overflowed += int(np.count_nonzero(held != exact))
        outputs += away.size
        differing += int(np.count_nonzero(away))
        largest = max(largest, int(away.max(initial=0)))
        total += int(away.sum())
    accumulator = narrow.passes[which].accumulator
    assert accumulator.bits is not None
    return Narrowed(
        accumulator.bits,
        accumulator.overflow,
        sums,
        overflowed,
        outputs,
        differing,
        largest,
        total,
    )


def _with(f: Filter, which: int, accumulator: Accumulator) -> Filter:
    passes = list(f.passes)
    passes[which] = replace(passes[which], accumulator=accumulator)
    return replace(f, passes=tuple(passes))
