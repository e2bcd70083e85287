"""Names while a translation unit is compiled: types, objects, constants, functions."""

from collections.abc import Callable
from dataclasses import dataclass, field
from typing import TypeAlias, cast

from guardbit.proof.algebra.values import Value
from guardbit.proof.c.types import Function, Type
from guardbit.proof.machine.memory import Content, Pointer

Frame: TypeAlias = list[Content]
"""The local variables of one call, by slot. A variable in memory has its pointer there."""

Run: TypeAlias = Callable[[Frame], Content]

Number: TypeAlias = Callable[[Frame], Value]
"""The run of an expression of integer type."""


@dataclass(frozen=True, slots=True)
class Variable:
    """A local variable: in a slot, or in memory with its address in the slot."""

    kind: Type
    slot: int
    in_memory: bool
    constant: bool


@dataclass(frozen=True, slots=True)
class Static:
    """A constant object that outlives calls."""

    kind: Type
    address: Pointer
    constant: bool


@dataclass(frozen=True, slots=True)
class Enumerator:
    value: int


@dataclass(frozen=True, slots=True)
class Callee:
    """A function by name; what it does is looked up when it is called."""

    name: str
    kind: Function


Named: TypeAlias = Variable | Static | Enumerator | Callee


@dataclass
class Scope:
    """Names of a block, within those of the blocks around it."""

    outer: "Scope | None" = None
    names: dict[str, Named] = field(default_factory=dict)
    types: dict[str, Type] = field(default_factory=dict)
    tags: dict[str, Type] = field(default_factory=dict)

    def find(self, name: str) -> Named | None:
        """Return what an identifier names."""
        found = self.names.get(name)
        return found if found is not None or self.outer is None else self.outer.find(name)

    def find_type(self, name: str) -> Type | None:
        """Return what a typedef name stands for."""
        found = self.types.get(name)
        return found if found is not None or self.outer is None else self.outer.find_type(name)

    def find_tag(self, name: str) -> Type | None:
        """Return what a struct's or enum's tag stands for."""
        found = self.tags.get(name)
        return found if found is not None or self.outer is None else self.outer.find_tag(name)


@dataclass
class Layout:
    """The slots of a function's frame, while it is compiled."""

    slots: int = 0

    def new(self) -> int:
        """Return the number of a new slot."""
        self.slots += 1
        return self.slots - 1


def number(run: Run) -> Number:
    """Return the run of an expression whose type is an integer type."""
    return cast("Number", run)
