"""What a run carries along: the space, the path's condition, reliances, steps left."""

from collections.abc import Callable
from dataclasses import dataclass
from typing import NoReturn, Protocol

from guardbit.model.proof import Assumption, Place, Reliance
from guardbit.model.sizing import Interval
from guardbit.proof.algebra.space import Space
from guardbit.proof.algebra.values import InexpressibleError, Value
from guardbit.proof.machine.errors import BrokenError, BudgetError, RefusedError
from guardbit.proof.machine.memory import NULL, Block, Content, Guard, Pointer

Where = Callable[[], Place]
"""Tells the place; only asked for if it is needed."""


class Word(Protocol):
    """An integer type: its width and what it holds."""

    @property
    def bits(self) -> int:
        """Return the width."""
        ...

    @property
    def low(self) -> int:
        """Return the least number."""
        ...

    @property
    def high(self) -> int:
        """Return the greatest number."""
        ...


class Context:
    """The state of a run.

    `mask` holds for the inputs that take the path which is run: 1 for all. `strict` makes a
    reliance on the implementation a broken rule.
    """

    def __init__(self, space: Space, *, strict: bool, budget: int) -> None:
        self.space = space
        self.strict = strict
        self.mask: Value = 1
        self.steps = budget
        self.assumptions: dict[tuple[Reliance, Place], Interval] = {}

    def step(self) -> None:
        """Take one step of a loop. Raises BudgetError."""
        self.steps -= 1
        if self.steps < 0:
            raise BudgetError

    def reliances(self) -> tuple[Assumption, ...]:
        """Return what the code was seen to rely on."""
        found = self.assumptions.items()
        made = (Assumption(reliance, place, range_) for (reliance, place), range_ in found)
        return tuple(sorted(made, key=lambda a: (a.place.file, a.place.line, a.reliance)))


@dataclass(frozen=True, slots=True)
class Site:
    """A point of the code, where rules of C may be broken."""

    cx: Context
    where: Where

    def broken(
        self,
        reason: str,
        value: Value | None = None,
        inside: tuple[int, int] | None = None,
    ) -> NoReturn:
        """Raise the error that a rule is broken."""
        raise BrokenError(reason, self.where(), self.cx.mask, value, inside)

    def refused(self, reason: str, detail: str = "") -> NoReturn:
        """Raise the error that the machine does not take this."""
        raise RefusedError(reason, self.where(), detail)

    def within(self, value: Value, word: Word, reason: str) -> Value:
        """Return a value that has to lie in a signed type, or break a rule.

        Where the path is not taken it may lie outside, and is brought inside.
        """
        space, low, high = self.cx.space, word.low, word.high
        least, most = space.bounds(value)
        if low <= least and most <= high:
            return value
        if self._is_inside(value, low, high):
            return space.wrap(value, word.bits, signed=low < 0)
        self.broken(reason, value, (low, high))

    def _is_inside(self, value: Value, low: int, high: int) -> bool:
        if isinstance(self.cx.mask, int):
            return False
        found = self.cx.space.bounds_where(value, self.cx.mask)
        return found is None or (low <= found[0] and found[1] <= high)

    def relies(self, reliance: Reliance, value: Value, inside: tuple[int, int]) -> None:
        """Note that the code relies on the implementation here, or break a rule if strict."""
        if self._is_inside(value, *inside):
            return
        if self.cx.strict:
            self.broken(reliance.value, value, inside)
        key = (reliance, self.where())
        low, high = self.cx.space.bounds(value)
        old = self.cx.assumptions.get(key)
        if old is not None:
            low, high = min(low, old.low), max(high, old.high)
        self.cx.assumptions[key] = Interval(low, high)

    def read(self, content: Content) -> Value | Pointer:
        """Return what a cell holds. Breaks a rule if it has no value."""
        if content is None:
            self.broken("uninitialised-read")
        if isinstance(content, Guard):
            return self._guarded(content)
        return content

    def _guarded(self, guard: Guard) -> Value | Pointer:
        space = self.cx.space
        left: Value = self.cx.mask
        taken: list[tuple[Value, Value]] = []
        try:
            for mask, content in guard.parts:
                here = space.both(left, mask)
                if here == 0:
                    continue
                if isinstance(content, Pointer):
                    self.refused("pointer-by-pixel")
                if isinstance(content, Guard):
                    self.refused("choice-by-another-pixel")
                if content is None:
                    raise BrokenError("uninitialised-read", self.where(), here)
                taken.append((mask, content))
                left = space.both(left, space.compare("==", mask, 0))
                if left == 0:
                    break
            if left != 0:
                raise BrokenError("uninitialised-read", self.where(), left)
            value = taken[-1][1]
            for mask, other in reversed(taken[:-1]):
                value = space.where(mask, other, value)
        except InexpressibleError as error:
            self.refused(error.reason)
        return value

    def stored(self, old: Content, new: Value | Pointer) -> Content:
        """Return what a cell holds after a store on this path."""
        mask = self.cx.mask
        if mask == 1 and isinstance(mask, int):
            return new
        if isinstance(new, Pointer) or isinstance(old, Pointer):
            self.refused("pointer-by-pixel")
        if old is not None and not isinstance(old, Guard):
            try:
                return self.cx.space.where(mask, new, old)
            except InexpressibleError:
                return Guard(((mask, new), (1, old)))
        parts = () if old is None else old.parts
        return self._joined(mask, new, parts)

    def _joined(self, mask: Value, new: Value, parts: tuple[tuple[Value, Content], ...]) -> Content:
        """Return a guard with one more part before the others, or the value if that is all."""
        space = self.cx.space
        try:
            if len(parts) == 1 and space.same(space.add(mask, parts[0][0]), 1):
                other = parts[0][1]
                if other is not None and not isinstance(other, Guard | Pointer):
                    return space.where(mask, new, other)
        except InexpressibleError:
            pass
        return Guard(((mask, new), *parts))

    def load(self, pointer: Pointer) -> Value | Pointer:
        """Return the value of the cell that a pointer points to."""
        block, index = pointer.block, pointer.index
        if not pointer.low <= index < pointer.high:
            self.broken(_bounds_reason(block, "read"))
        if pointer.tags:
            for tag in pointer.tags:
                tag.reads.add((id(block), index))
        content = block.get(index)
        if content is None or isinstance(content, Guard):
            content = self.read(content)
        if pointer.view is not None and not isinstance(content, Pointer):
            bits, signed = pointer.view
            return self.cx.space.wrap(content, bits, signed)
        return content

    def store(self, pointer: Pointer, value: Value | Pointer) -> None:
        """Store into the cell that a pointer points to."""
        block, index = pointer.block, pointer.index
        if not pointer.low <= index < pointer.high:
            self.broken(_bounds_reason(block, "write"))
        if not block.writable:
            self.broken("write-to-constant")
        if pointer.tags:
            for tag in pointer.tags:
                tag.writes.add((id(block), index))
        if pointer.view is not None and block.kind is not None and not isinstance(value, Pointer):
            value = self.cx.space.wrap(value, *block.kind)
        if self.cx.mask != 1 or not isinstance(self.cx.mask, int):
            block.cells[index] = self.stored(block.get(index), value)
        else:
            block.cells[index] = value
        block.places[index] = self.where


def _bounds_reason(block: Block, deed: str) -> str:
    return "null-dereference" if block is NULL.block else f"out-of-bounds-{deed}"
