"""Memory: blocks of cells, and pointers into them."""

from collections.abc import Callable, Iterable
from dataclasses import dataclass, field
from typing import TypeAlias

from guardbit.model.proof import Place
from guardbit.proof.algebra.values import Value

CellType: TypeAlias = tuple[int, bool]
"""Bits and whether signed."""


@dataclass(frozen=True, slots=True)
class Guard:
    """A cell written only where a mask holds; elsewhere it is what it was, or nothing.

    The first part whose mask holds tells the value.
    """

    parts: tuple[tuple[Value, "Content"], ...]


class Block:
    """An array of cells of one type, filled when they are first read.

    `initial` gives a cell's content by index, None for a cell without value. A block costs
    nothing until it is touched, however large it is.
    """

    __slots__ = ("cells", "count", "initial", "kind", "name", "places", "writable")

    def __init__(
        self,
        name: str,
        kind: CellType | None,
        count: int,
        *,
        initial: Callable[[int], "Content"] | None = None,
        writable: bool = True,
    ) -> None:
        self.name = name
        self.kind = kind
        self.count = count
        self.initial = initial
        self.writable = writable
        self.cells: dict[int, Content] = {}
        self.places: dict[int, Callable[[], Place]] = {}

    def get(self, index: int) -> "Content":
        """Return what a cell holds; None if it has no value yet."""
        try:
            return self.cells[index]
        except KeyError:
            if self.initial is None:
                return None
            found = self.cells[index] = self.initial(index)
            return found

    def fill(self, values: Iterable["Content"]) -> None:
        """Set the cells from the first on."""
        self.cells.update(enumerate(values))

    @property
    def written(self) -> set[int]:
        """Return the cells that were stored to."""
        return set(self.places)


@dataclass(slots=True)
class Tag:
    """Where a pointer argument comes from, and what was read and written through it."""

    reads: set[tuple[int, int]] = field(default_factory=set)
    writes: set[tuple[int, int]] = field(default_factory=set)


class Pointer:
    """A place in a block: `index`, within the array `bounds` (its first cell, one past its last).

    `view` is the type through which cells of the other signedness are seen.
    """

    __slots__ = ("block", "high", "index", "low", "tags", "view")

    def __init__(
        self,
        block: Block,
        index: int,
        bounds: tuple[int, int],
        tags: tuple[Tag, ...] = (),
        view: CellType | None = None,
    ) -> None:
        self.block = block
        self.index = index
        self.low, self.high = bounds
        self.tags = tags
        self.view = view


Content: TypeAlias = Value | Guard | Pointer | None

NULL = Pointer(Block("null", None, 0), 0, (0, 0))
"""The null pointer: compared with, never followed."""
