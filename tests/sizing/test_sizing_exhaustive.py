"""Ranges against every frame of every legal size of small filters."""

import random
from collections import defaultdict
from collections.abc import Iterable
from dataclasses import replace
from fractions import Fraction

import numpy as np
import pytest
from numpy.typing import NDArray

from guardbit.model.enums import BorderMode, Extent, Grid, Overflow, Preload, Rounding
from guardbit.model.filter import Accumulator, Axis, Border, Filter, Pass, PixelFormat, Requantiser
from guardbit.model.sizing import End, Interval, RegisterSizing, Sizing, Witness
from guardbit.sizing.analyse import analyse

from .shown import attained, left_holding
from .small import (
    Run,
    Seen,
    all_frames,
    axis,
    code,
    double,
    ideal_codes,
    kept,
    kernel,
    pixels,
    run,
    single,
    sizes,
    to_output,
    unlimited,
)

Bools = NDArray[np.bool_]


def label(f: Filter, offsets: Iterable[int], word: str, position: int, length: int) -> str:
    reads = [position + offset for offset in offsets]
    first, last = min(reads) < 0, max(reads) >= length
    if first and last:
        return "both ends"
    return f"near the first {word}" if first else f"near the last {word}" if last else "interior"


def hull(values: Iterable[int]) -> Interval:
    items = list(values)
    return Interval(min(items), max(items))


def runs(f: Filter) -> list[tuple[tuple[int, int], Run]]:
    return [(size, run(f, all_frames(f, size), size)) for size in sizes(f)]


def ends_of(which: Interval) -> dict[End, int]:
    return {End.LEAST: which.low, End.GREATEST: which.high}


def check_register(f: Filter, made: RegisterSizing, found: list[Run], which: int) -> None:
    seen = [s for r in found for s in r.registers[which]]
    final = hull(int(v) for s in seen for v in (s.sums[:, -1].min(), s.sums[:, -1].max()))
    partial = hull(int(v) for s in seen for v in (s.sums.min(), s.sums.max()))
    held = hull(int(v) for s in seen for v in (s.held.min(), s.held.max()))
    assert made.exact
    assert made.held_exact
    assert (made.final, made.partial, made.held) == (final, partial, held)
    assert len(made.witnesses) == 4
    for witness in made.witnesses:
        ends = ends_of(partial if witness.partial else final)
        assert witness.value == ends[witness.end] == attained(f, witness, which)
    check_held(f, made, which)


def ending(made: RegisterSizing) -> dict[End, Witness]:
    """The frames in which the register ends at the ends of what it holds."""
    finals = [w for w in made.witnesses if not w.partial]
    return {w.end: w for w in (*finals, *made.held_witnesses)}


def check_held(f: Filter, made: RegisterSizing, which: int) -> None:
    """Assert that a frame is named for each end of what the register holds."""
    for end, witness in ending(made).items():
        assert left_holding(f, witness, which) == ends_of(made.held)[end]
    for witness in made.held_witnesses:
        assert witness.value == ends_of(made.held)[witness.end]


def check_requantisers(f: Filter, made: Sizing, found: list[Run]) -> None:
    for which, p in enumerate(f.passes):
        held = {int(v) for r in found for s in r.registers[which] for v in s.held}
        row, register = made.requantisers[which], made.registers[which]
        assert row.unlimited == hull(unlimited(p, v) for v in held)
        assert row.output == hull(code(p, v) for v in held)
        assert row.exact
        assert row.output_exact
        for witness in row.witnesses or ending(register).values():
            made_of_it = code(p, left_holding(f, witness, which))
            assert made_of_it == ends_of(row.output)[witness.end]
        assert len(row.witnesses) in (0, 2)


def is_calm(p: Pass, seen: Seen) -> Bools:
    """Return which frames make neither the register nor its requantiser wrap or saturate."""
    calm: Bools = np.equal(seen.held, seen.sums[:, -1])
    if p.accumulator.overflow is Overflow.SATURATE:
        bits, signed = p.accumulator.bits or 0, p.accumulator.signed
        low = -(2 ** (bits - 1)) if signed else 0
        calm = ((seen.sums >= low) & (seen.sums < low + 2**bits)).all(axis=1)
    if p.requantiser.overflow is Overflow.WRAP:
        calm = calm & np.array([unlimited(p, int(v)) == code(p, int(v)) for v in seen.held])
    return calm


def check_error(f: Filter, made: Sizing) -> int:
    """Assert that the bound holds for every output of every frame; return the calm ones."""
    compared = 0
    for size in sizes(f):
        frames = all_frames(f, size)
        if len(frames) > 81:
            continue
        ran, ideals = run(f, frames, size), ideal_codes(f, frames, size)
        calm = np.ones(len(frames), dtype=bool)
        for p, register in zip(f.passes, ran.registers, strict=True):
            calm &= np.all([is_calm(p, seen) for seen in register] or [calm], axis=0)
        for place, column in enumerate(ideals):
            for ideal, output, still in zip(column, ran.outputs[:, place], calm, strict=True):
                clamped = min(max(ideal, Fraction(f.output.low)), Fraction(f.output.high))
                error = int(output) - clamped
                if still or not made.error.assumes_no_wrap:
                    assert made.error.low <= error <= made.error.high
                    compared += 1
                if made.error.overall is not None:
                    assert made.error.overall[0] <= error <= made.error.overall[1]
    return compared


def random_geometry(rng: random.Random) -> tuple[list[int], list[int], list[int], Border, Extent]:
    spacing = [rng.choice([1, 1, 2]), rng.choice([1, 1, 2])]
    shape = rng.choice([(1, 3), (2, 2), (3, 3), (3, 2), (1, 4), (4, 1), (2, 3)])
    origin = [rng.randint(-1, n) for n in shape]
    mode = rng.choice(list(BorderMode))
    border = Border(mode, 0, rng.choice(list(Grid)))
    return spacing, list(shape), origin, border, rng.choice(list(Extent))


def random_axes(
    rng: random.Random, spacing: list[int], shape: list[int], origin: list[int], cells: int
) -> list[Axis]:
    least = [max(s, rng.choice([1, 1, 2])) for s in spacing]
    tall = rng.randint(least[0], max(least[0], cells // least[1]))
    wide = rng.randint(least[1], max(least[1], cells // tall))
    made = []
    for n, o, d, low, high in zip(shape, origin, spacing, least, (tall, wide), strict=True):
        step = rng.choice([1, 1, 2])
        made.append(axis(n, (low, high), o, d, step, rng.randrange(step)))
    return made


def random_accumulator(rng: random.Random, requantisable: bool) -> Accumulator:
    overflow = rng.choice([Overflow.FORBID, Overflow.FORBID, Overflow.WRAP, Overflow.SATURATE])
    bits = None if overflow is Overflow.FORBID else rng.choice([None, 3, 4, 5])
    signed = overflow is Overflow.FORBID or rng.random() < 0.8
    preload = rng.choice([Preload.ZERO, Preload.ROUNDING]) if requantisable else Preload.ZERO
    return Accumulator(bits, signed, overflow, preload)


def random_requantiser(rng: random.Random) -> Requantiser:
    bits, signed = rng.randint(2, 4), rng.random() < 0.5
    pedestal = rng.choice([0, 0, 1])
    shift = rng.choice([-1, 0, 1, 2])
    overflow = rng.choice([Overflow.SATURATE, Overflow.SATURATE, Overflow.WRAP])
    divisor = rng.choice([1, 1, 3])
    return to_output(
        shift, pixels(bits, signed, pedestal), rng.choice(list(Rounding)), overflow, divisor
    )


def random_source(rng: random.Random) -> tuple[PixelFormat, int]:
    legal = rng.choice([(0, 1), (0, 1), (1, 2), (0, 2), (2, 4), (-1, 0), (-2, 1)])
    pedestal = rng.choice([0, 0, 1, 3])
    return pixels(4, True, pedestal, legal), (9 if legal[1] - legal[0] == 1 else 5)


def random_taps(rng: random.Random, shape: list[int]) -> list[list[int]]:
    choices = [-3, -2, -1, 0, 1, 1, 2, 4]
    taps = [[rng.choice(choices) for _ in range(shape[1])] for _ in range(shape[0])]
    taps[0][0] = taps[0][0] or 1
    return taps


def random_ideal(rng: random.Random, taps: list[list[int]]) -> list[list[Fraction]]:
    return [
        [t + Fraction(rng.choice([0, 0, 1, -1]), rng.choice([3, 4])) for t in row] for row in taps
    ]


def random_single(rng: random.Random) -> Filter:
    spacing, shape, origin, border, extent = random_geometry(rng)
    source, cells = random_source(rng)
    rows, columns = random_axes(rng, spacing, shape, origin, cells)
    border = replace(border, value=rng.randint(-3, 6))
    requantiser = random_requantiser(rng)
    preloadable = (
        requantiser.exponent < 0
        and requantiser.divisor == 1
        and requantiser.rounding is Rounding.TIES_TO_POSITIVE
    )
    taps = random_taps(rng, shape)
    k = kernel(random_ideal(rng, taps), taps, (spacing[0], spacing[1]), (origin[0], origin[1]))
    return single(
        k, source, rows, columns, border, extent, random_accumulator(rng, preloadable), requantiser
    )


def random_double(rng: random.Random) -> Filter:
    spacing, shape, origin, border, extent = random_geometry(rng)
    source, cells = random_source(rng)
    rows, columns = random_axes(rng, spacing, shape, origin, cells)
    border = replace(border, value=rng.randint(-3, 6))
    vertical = rng.random() < 0.5
    parts = ([shape[0], 1], (origin[0], 0)), ([1, shape[1]], (0, origin[1]))
    passes: list[Pass] = []
    for part, at in parts if vertical else parts[::-1]:
        r = random_requantiser(rng)
        preloadable = r.exponent < 0 and r.divisor == 1 and r.rounding is Rounding.TIES_TO_POSITIVE
        taps = random_taps(rng, part)
        k = kernel(random_ideal(rng, taps), taps, (spacing[0], spacing[1]), at)
        before = passes[-1].requantiser.to if passes else source
        passes.append(Pass(before, k, random_accumulator(rng, preloadable), r))
    return double(passes[0], passes[1], rows, columns, border, extent)


def has_output(f: Filter) -> bool:
    g = f.geometry
    return bool(kept(f, g.rows, g.rows.sizes[1])) and bool(kept(f, g.columns, g.columns.sizes[1]))


@pytest.mark.parametrize("seed", range(4))
def test_single_passes_against_every_frame(seed: int) -> None:
    rng = random.Random(f"single{seed}")
    acted = checked = errors = 0
    for _ in range(40):
        f = random_single(rng)
        if not has_output(f):
            continue
        made = analyse(f)
        f = made.filter
        found = [r for _, r in runs(f)]
        check_register(f, made.registers[0], found, 0)
        check_requantisers(f, made, found)
        errors += check_error(f, made)
        acted += made.registers[0].held != made.registers[0].final
        checked += 1
    assert checked > 15
    assert errors > 1000
    assert acted > 3


@pytest.mark.parametrize("seed", range(4))
def test_two_passes_against_every_frame(seed: int) -> None:
    rng = random.Random(f"double{seed}")
    acted = wrapped = checked = errors = 0
    for _ in range(40):
        f = random_double(rng)
        if not has_output(f):
            continue
        made = analyse(f)
        f = made.filter
        found = [r for _, r in runs(f)]
        for which in (0, 1):
            check_register(f, made.registers[which], found, which)
        check_requantisers(f, made, found)
        errors += check_error(f, made)
        acted += any(r.held != r.final for r in made.registers)
        wrapped += any(r.witnesses for r in made.requantisers)
        checked += 1
    assert checked > 15
    assert errors > 1000
    assert acted > 3
    assert wrapped > 2


def test_class_ranges_against_every_frame() -> None:
    rng = random.Random("classes")
    compared = 0
    for _ in range(40):
        f = random_single(rng)
        if not has_output(f):
            continue
        made = analyse(f)
        terms = [t for t in f.passes[0].kernel.terms if t.integer]
        seen: dict[tuple[str, str], list[tuple[int, int, int, int]]] = defaultdict(list)
        for (h, w), found in runs(made.filter):
            for s in found.registers[0]:
                labels = (
                    label(f, (t.dy for t in terms), "row", s.place[0], h),
                    label(f, (t.dx for t in terms), "column", s.place[1], w),
                )
                last = s.sums[:, -1]
                ends = (last.min(), last.max(), s.sums.min(), s.sums.max())
                seen[labels].append((int(ends[0]), int(ends[1]), int(ends[2]), int(ends[3])))
        assert {c.label for c in made.registers[0].classes} == set(seen)
        for c in made.registers[0].classes:
            rows = seen[c.label]
            assert c.final == Interval(min(r[0] for r in rows), max(r[1] for r in rows))
            assert c.partial == Interval(min(r[2] for r in rows), max(r[3] for r in rows))
            compared += 1
    assert compared > 60
