"""Border classes of one axis, as the analysis walks over them."""

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from typing import Protocol

from guardbit.arith.borders import read_index
from guardbit.arith.classes import Pattern, axis_patterns
from guardbit.model.enums import BorderMode
from guardbit.model.filter import Axis, Filter
from guardbit.model.sizing import Interval
from guardbit.sizing.reach import Reach

ROW, COLUMN = "row", "column"


class Origin(Protocol):
    """Where pixels come from that are results of a first pass."""

    @property
    def reach(self) -> Reach | None:
        """Return all values that a pixel takes, less its pedestal; None: too many to list."""
        ...

    @property
    def is_interior(self) -> bool:
        """Return whether no read of the first pass leaves the image."""
        ...

    def pixels(self, value: int) -> Mapping[tuple[int, int], int] | None:
        """Return pixels of the first pass that make `value`; None: not searched."""
        ...


@dataclass(frozen=True)
class Line:
    """One class of output positions along an axis, by its smallest example.

    `read` gives the image index that an offset reads there, None for the constant. `before`
    and `after` count the offsets that read before and behind the image. `values`, where set,
    is the range of the pixels (less their pedestal) at positions of this class, which are
    `results` of a first pass.
    """

    label: str
    length: int
    position: int
    before: int
    after: int
    read: Callable[[int], int | None]
    values: Interval | None = None
    results: "Origin | None" = None

    @property
    def is_interior(self) -> bool:
        """Return whether no read leaves the image."""
        return not self.before and not self.after

    @property
    def at_both_ends(self) -> bool:
        """Return whether reads leave the image at both ends."""
        return bool(self.before and self.after)


def axis_of(f: Filter, word: str) -> Axis:
    """Return the axis along which rows or columns are counted."""
    return f.geometry.rows if word == ROW else f.geometry.columns


def axis_lines(f: Filter, word: str, offsets: Sequence[int]) -> list[Line]:
    """Return the classes of an axis for the offsets used on it, interior first."""
    patterns = axis_patterns(axis_of(f, word), f.geometry.extent, f.border, offsets)
    return [_line(f, word, pattern) for pattern in patterns]


def _line(f: Filter, word: str, pattern: Pattern) -> Line:
    def read(offset: int) -> int | None:
        spacing = axis_of(f, word).spacing
        return read_index(f.border, spacing, pattern.position + offset, pattern.length)

    return Line(
        pattern.label(word), pattern.length, pattern.position, pattern.before, pattern.after, read
    )


def crossing_lines(f: Filter, lines: Sequence[Line], offsets: Sequence[int]) -> list[Line]:
    """Return where a first pass is computed across its own direction.

    `lines` are the second pass's classes, which read the first pass at `offsets`: inside
    the image, on a pixel of it, or beyond, where a constant border gives a fixed result.
    """
    reads = [(line, offset, line.read(offset)) for line in lines for offset in offsets]
    inside = next(((a, o, i) for a, o, i in reads if i is not None), None)
    beyond = next(((a, o, i) for a, o, i in reads if i is None), None)
    made = []
    if inside is not None:
        made.append(_crossing("interior", 0, *inside))
    if beyond is not None:
        made.append(_crossing("outside", 1, *beyond))
    return made


def _crossing(label: str, before: int, line: Line, offset: int, index: int | None) -> Line:
    return Line(label, line.length, line.position + offset, before, 0, lambda _: index)


def constant_value(f: Filter) -> int | None:
    """Return the code of a constant border less the input's pedestal, None for other modes."""
    is_constant = f.border.mode is BorderMode.CONSTANT
    return f.border.value - f.input.pedestal if is_constant else None
