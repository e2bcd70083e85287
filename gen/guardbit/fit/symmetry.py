"""The symmetry of a matrix: which taps a fit must keep equal, or opposite."""

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from typing import TypeAlias

Position: TypeAlias = tuple[int, int]
Move: TypeAlias = Callable[[Position], Position]


@dataclass(frozen=True)
class Orbit:
    """Positions that symmetry ties together, first in raster order first.

    The value at `positions[i]` is signs[i] times the value at `positions[0]`. `forced` says
    that symmetry makes all of them zero.
    """

    positions: tuple[Position, ...]
    signs: tuple[int, ...]
    forced: bool

    @property
    def balance(self) -> int:
        """Return how often the first value counts in the sum of the matrix."""
        return sum(self.signs)


def single(rows: int, columns: int) -> tuple[Orbit, ...]:
    """Return one orbit for each position, in raster order: no symmetry asked for."""
    return tuple(Orbit((p,), (1,), False) for p in _raster(rows, columns))


def orbits(matrix: tuple[tuple[int, ...], ...]) -> tuple[Orbit, ...]:
    """Return the orbits under every flip, half turn, quarter turn and transpose that the
    matrix has about the centre of its box, as itself or negated.

    In raster order of their first positions. A matrix that is its own negative (all zero)
    has forced orbits only.
    """
    rows, columns = len(matrix), len(matrix[0])
    kept = [(move, sign) for move in _moves(rows, columns) for sign in _kept(matrix, move)]
    seen: set[Position] = set()
    found = []
    for position in _raster(rows, columns):
        if position not in seen:
            found.append(_orbit(position, kept))
            seen.update(found[-1].positions)
    return tuple(found)


def _orbit(position: Position, kept: list[tuple[Move, int]]) -> Orbit:
    signs: dict[Position, int] = {}
    forced = False
    for move, sign in kept:
        forced |= signs.setdefault(move(position), sign) != sign
    ordered = sorted(signs)
    return Orbit(tuple(ordered), tuple(signs[p] for p in ordered), forced)


def _kept(matrix: tuple[tuple[int, ...], ...], move: Move) -> Iterator[int]:
    """Yield the signs with which the move maps the matrix to itself."""
    pairs = [
        (value, matrix[i][j])
        for y, row in enumerate(matrix)
        for x, value in enumerate(row)
        for i, j in [move((y, x))]
    ]
    for sign in (1, -1):
        if all(a == sign * b for a, b in pairs):
            yield sign


def _moves(rows: int, columns: int) -> Iterator[Move]:
    """Yield the symmetries of the box: four of an oblong, eight of a square."""
    last, end = rows - 1, columns - 1
    yield lambda p: p
    yield lambda p: (last - p[0], p[1])
    yield lambda p: (p[0], end - p[1])
    yield lambda p: (last - p[0], end - p[1])
    if rows == columns:
        yield lambda p: (p[1], p[0])
        yield lambda p: (end - p[1], p[0])
        yield lambda p: (p[1], last - p[0])
        yield lambda p: (end - p[1], last - p[0])


def _raster(rows: int, columns: int) -> Iterator[Position]:
    return ((y, x) for y in range(rows) for x in range(columns))
