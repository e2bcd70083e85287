"""What compiling needs at every point: the run's state, the types, the functions, the names."""

from collections.abc import Callable, Hashable
from dataclasses import dataclass, field, replace
from typing import NoReturn, TypeAlias

from pycparser import c_ast

from guardbit.model.proof import Place
from guardbit.proof.algebra.values import Form, Table, Value
from guardbit.proof.c.scope import Frame, Layout, Number, Run, Scope, number
from guardbit.proof.c.source import place
from guardbit.proof.c.types import Function, Integer, Type, Types
from guardbit.proof.machine.context import Context, Site, Where
from guardbit.proof.machine.errors import RefusedError

Status: TypeAlias = int
NORMAL, BREAK, CONTINUE, RETURN = range(4)

Statement: TypeAlias = Callable[[Frame], Status]
Typed: TypeAlias = tuple[Type, Run]


@dataclass
class Compiled:
    """A function that can be called.

    `pure`: it reads no memory but constants, so that numbers in give numbers out. `body` is set
    once compiled. `in_memory`: slots of parameters that live in memory. `memory`: results, and
    what symbol they are of. `calls`: the functions that it names.
    """

    name: str
    kind: Function
    slots: int = 0
    body: Statement | None = None
    pure: bool = False
    names: tuple[str, ...] = ()
    in_memory: tuple[int, ...] = ()
    where: Where | None = None
    restricts: bool = False
    memory: dict[Hashable, tuple[Value, Form | Table | None]] = field(default_factory=dict)
    calls: frozenset[str] = frozenset()


@dataclass(frozen=True)
class Rules:
    """How expressions are compiled: for their value, and as assigned to a type."""

    value: Callable[["Unit", c_ast.Node], Typed]
    assigned: Callable[["Unit", Type, c_ast.Node], Run]


@dataclass(frozen=True)
class Unit:
    """The state of compiling one function of one source."""

    rules: Rules

    cx: Context
    types: Types
    functions: dict[str, Compiled]
    scope: Scope
    layout: Layout
    returns: Type
    addressed: frozenset[str]

    def inner(self) -> "Unit":
        """Return the unit for a block within this one."""
        return replace(self, scope=Scope(self.scope))

    def at(self, node: c_ast.Node) -> Site:
        """Return the point of the code that a node is."""
        return Site(self.cx, where(node))

    def value(self, node: c_ast.Node) -> Typed:
        """Return type and run of an expression's value."""
        return self.rules.value(self, node)

    def assigned(self, target: Type, node: c_ast.Node) -> Run:
        """Return the run of an expression as assigned to a type."""
        return self.rules.assigned(self, target, node)

    def integer(self, node: c_ast.Node) -> tuple[Integer, Number]:
        """Return type and run of an expression that has to be an integer."""
        kind, run = self.value(node)
        if not isinstance(kind, Integer):
            self.refuse(node, "not-an-integer")
        return kind, number(run)

    def refuse(self, node: c_ast.Node, reason: str, detail: str = "") -> NoReturn:
        """Raise the error that a construct is not taken."""
        raise RefusedError(reason, place(node), detail)


def where(node: c_ast.Node) -> Where:
    """Return what tells the place of a node, which is worked out once, when asked for."""
    found: list[Place] = []

    def tell() -> Place:
        if not found:
            found.append(place(node))
        return found[0]

    return tell
