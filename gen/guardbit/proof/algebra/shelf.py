"""Every function of one proof, each kept once.

Two functions with the same pieces are one object, and the result of an operation is remembered by
the operands' numbers. So the tail of a filter is worked out once, not per pixel.
"""

from collections.abc import Callable, Hashable, Sequence
from dataclasses import dataclass

import numpy as np

from guardbit.proof.algebra import operations
from guardbit.proof.algebra.pieces import (
    MOST_PIECES,
    Floor,
    Pieces,
    Row,
    TooManyPiecesError,
    check_product,
    common_divisor,
    extremes,
    values_at_ends,
)

_MOST_FLOORS = 4


@dataclass(frozen=True, slots=True)
class Normal:
    """f = offset + factor * steps: steps begins at 0, differs by no common factor, rises first."""

    offset: int
    factor: int
    steps: Pieces


class Shelf:
    """The functions, and what operations made of them. Operations raise TooManyPiecesError."""

    def __init__(self) -> None:
        self._kept: dict[tuple[bytes, bytes, bytes, int], Pieces] = {}
        self._made: dict[Hashable, Pieces] = {}
        self._ranges: dict[tuple[int, int, int], tuple[int, int]] = {}
        self._lines: dict[tuple[int, int, int], tuple[int, int] | None] = {}
        self._normals: dict[int, Normal] = {}
        self._arrays: dict[tuple[int, ...], tuple[int, ...]] = {}
        self._by_id: dict[int, tuple[tuple[int, ...], tuple[int, ...]]] = {}

    def __len__(self) -> int:
        """Return how many functions are kept."""
        return len(self._kept)

    def affine(self, first: int, last: int, slope: int, offset: int) -> Pieces:
        """Return slope * x + offset on first..last."""
        key = ("affine", first, last, slope, offset)
        return self._once(key, lambda: operations.affine(first, last, slope, offset))

    def scaled(self, f: Pieces, factor: int, add: int) -> Pieces:
        """Return factor * f + add."""
        if factor == 1 and add == 0:
            return f
        key = ("scaled", f.number, factor, add)
        made = self._once(key, lambda: operations.scaled(f, factor, add))
        if f.floors and factor in (1, -1):
            _know(made, [turned(floor, factor, add) for floor in f.floors])
        return made

    def sum(self, f: Pieces, g: Pieces) -> Pieces:
        """Return f + g."""
        key = ("sum", *sorted((f.number, g.number)))
        return self._once(key, lambda: operations.total(f, g))

    def floor_divided(self, f: Pieces, n: int) -> Pieces:
        """Return floor(f / n), n > 0."""
        made = self._once(("floor", f.number, n), lambda: operations.floor_divided(f, n))
        if f.is_affine():
            _know(made, [(int(f.slopes[0]), int(f.offsets[0]), n)])
        else:
            # floor(floor((g x + q) / m) / n) = floor((g x + q) / (m n))
            _know(made, [(g, q, m * n) for g, q, m in f.floors])
        return made

    def chosen(self, mask: Pieces, f: Pieces, g: Pieces) -> Pieces:
        """Return f where the mask, of values 0 and 1, is 1, else g."""
        key = ("chosen", mask.number, f.number, g.number)
        return self._once(key, lambda: operations.chosen(mask, f, g))

    def negative(self, f: Pieces) -> Pieces:
        """Return 1 where f < 0, else 0."""
        return self._once(("negative", f.number), lambda: operations.negative(f))

    def product(self, f: Pieces, g: Pieces) -> Pieces:
        """Return f * g."""
        key = ("product", *sorted((f.number, g.number)))
        return self._once(key, lambda: operations.product(f, g))

    def pointwise(self, name: str, f: Pieces, g: Pieces, of: Callable[[int, int], int]) -> Pieces:
        """Return of(f, g), which `name` stands for."""
        return self._once((name, f.number, g.number), lambda: operations.pointwise(f, g, of))

    def looked_up(self, entries: Sequence[int], f: Pieces) -> Pieces:
        """Return entries[f]."""
        entries = self._same_entries(entries)
        key = ("look-up", id(entries), f.number)
        return self._once(key, lambda: operations.looked_up(entries, f))

    def restricted(self, f: Pieces, first: int, last: int) -> Pieces:
        """Return f on a part of its domain."""
        if f.domain == (first, last):
            return f
        key = ("restricted", f.number, first, last)
        made = self._once(key, lambda: operations.restricted(f, first, last))
        _know(made, f.floors)
        return made

    def range(self, f: Pieces, first: int, last: int) -> tuple[int, int]:
        """Return the least and the greatest value on first..last."""
        key = (f.number, first, last)
        found = self._ranges.get(key)
        if found is None:
            found = self._ranges[key] = extremes(self.restricted(f, first, last))
        return found

    def line(self, f: Pieces, first: int, last: int) -> tuple[int, int] | None:
        """Return slope and offset of f on first..last if it is affine there."""
        key = (f.number, first, last)
        if key not in self._lines:
            part = self.restricted(f, first, last)
            flat = part.is_affine()
            self._lines[key] = (int(part.slopes[0]), int(part.offsets[0])) if flat else None
        return self._lines[key]

    def normal(self, f: Pieces) -> Normal:
        """Return a function that is not constant apart from its scale and where it begins."""
        found = self._normals.get(f.number)
        if found is None:
            offset, factor = f.at(f.first), common_divisor(f)
            if not _rises(f, offset):
                factor = -factor
            steps = self._once(
                ("steps", f.number),
                lambda: (f.starts, f.slopes // factor, (f.offsets - offset) // factor, f.last),
            )
            if factor in (1, -1):
                _know(steps, [turned(floor, factor, -factor * offset) for floor in f.floors])
            found = self._normals[f.number] = Normal(offset, factor, steps)
        return found

    def _same_entries(self, entries: Sequence[int]) -> Sequence[int]:
        """Return the first array met that holds these numbers."""
        known = self._by_id.get(id(entries))
        if known is not None and known[0] is entries:
            return known[1]
        fixed = tuple(entries)
        first = self._arrays.setdefault(fixed, fixed)
        if fixed is entries:
            # a tuple that is kept keeps its id, and cannot change
            self._by_id[id(fixed)] = fixed, first
        return first

    def _once(self, key: Hashable, make: Callable[[], Row]) -> Pieces:
        found = self._made.get(key)
        if found is None:
            starts, slopes, offsets, last = operations.canonical(*make())
            if len(starts) > MOST_PIECES:
                raise TooManyPiecesError
            kept = (starts.tobytes(), slopes.tobytes(), offsets.tobytes(), last)
            found = self._kept.get(kept)
            if found is None:
                found = Pieces(len(self._kept), starts, slopes, offsets, last)
                check_product(found, 1, 0)
                self._kept[kept] = found
            self._made[key] = found
        return found


def _rises(f: Pieces, first: int) -> bool:
    """Return whether the first value other than `first` is greater."""
    at_starts, at_ends = values_at_ends(f)
    values = np.stack((at_starts, at_ends), axis=1).ravel()
    return bool(values[np.argmax(values != first)] > first)


def turned(floor: Floor, factor: int, add: int) -> Floor:
    """Return factor * floor + add, the factor 1 or -1, as a floor."""
    g, q, m = floor
    # -floor(y / m) = floor((m - 1 - y) / m)
    return (g, q + m * add, m) if factor == 1 else (-g, m - 1 - q + m * add, m)


def _know(f: Pieces, floors: Sequence[Floor]) -> None:
    """Remember floors that a function equals."""
    for floor in floors:
        if floor not in f.floors and len(f.floors) < _MOST_FLOORS:
            f.floors = (*f.floors, floor)
