"""Border classes of an axis against enumeration of every length and position."""

import random
from collections.abc import Sequence

import pytest

from guardbit.arith.borders import positions, read_index
from guardbit.arith.classes import axis_patterns, interior, pattern_reads
from guardbit.model.enums import BorderMode, Extent, Grid
from guardbit.model.filter import Axis, Border

Reads = tuple[int | None, ...]


def canonical(indices: Sequence[int | None]) -> Reads:
    seen: list[int] = []
    for index in indices:
        if index is not None and index not in seen:
            seen.append(index)
    return tuple(None if i is None else seen.index(i) for i in indices)


def enumerated(
    axis: Axis, extent: Extent, border: Border, offsets: Sequence[int]
) -> dict[tuple[Reads, bool, bool], tuple[int, int]]:
    found: dict[tuple[Reads, bool, bool], tuple[int, int]] = {}
    for length in range(axis.sizes[0], axis.sizes[1] + 1):
        for position in positions(axis, extent, length):
            reads = canonical(
                [read_index(border, axis.spacing, position + o, length) for o in offsets]
            )
            before = position + offsets[0] < 0
            after = position + offsets[-1] >= length
            found.setdefault((reads, before, after), (length, position))
    return found


def random_axis(rng: random.Random) -> tuple[Axis, Extent, list[int]]:
    spacing = rng.choice([1, 1, 2, 3, 4, 6])
    size = rng.randint(1, 5)
    origin = rng.randint(-3, 6)
    sign = rng.choice([1, -1])
    box = [sign * (k - origin) * spacing for k in range(size)]
    step = rng.choice([1, 1, 2, 3, 4])
    least = rng.randint(1, 20)
    sizes = (least, least + rng.randint(0, 60))
    axis = Axis(min(box), max(box), sizes, step, rng.randrange(step), spacing)
    offsets = sorted({-d for d in box if rng.random() < 0.8} or {-box[0]})
    return axis, rng.choice(list(Extent)), offsets


@pytest.mark.parametrize("mode", list(BorderMode))
@pytest.mark.parametrize("grid", list(Grid))
def test_patterns_are_those_of_enumeration(mode: BorderMode, grid: Grid) -> None:
    rng = random.Random(f"{mode}{grid}")
    compared = 0
    for _ in range(120):
        axis, extent, offsets = random_axis(rng)
        if grid is Grid.SITE and axis.sizes[0] < axis.spacing:
            axis = Axis(
                axis.least, axis.greatest, (axis.spacing, 70), axis.step, axis.phase, axis.spacing
            )
        border = Border(mode, 0, grid)
        expected = enumerated(axis, extent, border, offsets)
        got = axis_patterns(axis, extent, border, offsets)
        keys = [(pattern_reads(axis, border, offsets, p), p.before > 0, p.after > 0) for p in got]
        assert set(keys) == set(expected), (axis, extent, offsets)
        for pattern in got:
            assert axis.sizes[0] <= pattern.length <= axis.sizes[1]
            assert pattern.position in positions(axis, extent, pattern.length)
            assert pattern.before == sum(pattern.position + o < 0 for o in offsets)
            assert pattern.after == sum(pattern.position + o >= pattern.length for o in offsets)
        for key, pattern in zip(keys, got, strict=True):
            assert pattern.length >= expected[key][0]
        inside = interior(axis, extent, offsets)
        assert (inside is not None) == any(not b and not a for _, b, a in expected)
        compared += len(got)
    assert compared > 200
