"""A program: C sources compiled for one data model, its functions ready to be called."""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from pycparser import c_ast

from guardbit.model.proof import DataModel, Place
from guardbit.model.routine import SourceFile
from guardbit.proof.algebra.space import Space
from guardbit.proof.algebra.values import InexpressibleError
from guardbit.proof.c.assignments import assigned
from guardbit.proof.c.calls import invoke
from guardbit.proof.c.declarations import is_constant, named_type, parameter_type
from guardbit.proof.c.expressions import expression
from guardbit.proof.c.initialisers import completed
from guardbit.proof.c.scope import Callee, Layout, Scope, Variable
from guardbit.proof.c.sequencing import UnsequencedError, check, full_expressions
from guardbit.proof.c.source import place, tree
from guardbit.proof.c.statements import statement, static
from guardbit.proof.c.types import Array, Function, Pointing, Struct, Type, Types, Void
from guardbit.proof.c.unit import Compiled, Rules, Unit, where
from guardbit.proof.machine.context import Context, Site
from guardbit.proof.machine.errors import BrokenError, RefusedError
from guardbit.proof.machine.memory import Content

_RULES = Rules(expression, assigned)
BUDGET = 50_000_000


@dataclass(frozen=True)
class Signature:
    """A function's parameters and what it returns, as types of the data model."""

    returns: Type
    parameters: tuple[Type, ...]


class Program:
    """Functions of C sources, executed on symbols.

    A run begins with `begin`; `call` then calls functions. What was worked out of a function of
    one value is kept from run to run. Raises RefusedError for what is not taken.
    """

    def __init__(
        self, sources: Sequence[SourceFile], model: DataModel, *, strict: bool = True
    ) -> None:
        self.model = model
        self.types = Types(model)
        self.cx = Context(Space(), strict=strict, budget=BUDGET)
        self.functions: dict[str, Compiled] = {}
        self.unsequenced: tuple[Place, str] | None = None
        for source in sources:
            if source.name.endswith(".c"):
                self._compile(tree(source, sources, model))
        self._refuse_recursion()

    def begin(self, *, budget: int = BUDGET) -> Context:
        """Return the state of a new run: no reliances, all steps left.

        The space is the same in all runs: pixels that are used again find their sums again.
        Raises BrokenError if a rule is broken whatever the input.
        """
        cx = self.cx
        cx.mask = 1
        cx.steps = budget
        cx.assumptions = {}
        if self.unsequenced is not None:
            raise BrokenError("unsequenced", self.unsequenced[0], 1)
        return cx

    def signature(self, function: str) -> Signature | None:
        """Return the signature of a function that is defined; None if there is none."""
        found = self.functions.get(function)
        return None if found is None else Signature(found.kind.returns, found.kind.parameters)

    def call(self, function: str, arguments: Sequence[Content]) -> Content:
        """Return what a function returns. Raises BrokenError, RefusedError, BudgetError."""
        found = self.functions[function]
        assert found.where is not None
        try:
            return invoke(Site(self.cx, found.where), found, arguments)
        except InexpressibleError as error:
            raise RefusedError(error.reason, found.where()) from None
        finally:
            self.cx.mask = 1

    def _compile(self, ast: c_ast.FileAST) -> None:
        scope = Scope()
        u = Unit(_RULES, self.cx, self.types, self.functions, scope, Layout(), Void(), frozenset())
        for item in ast.ext:
            match item:
                case c_ast.Typedef():
                    scope.types[item.name] = named_type(u, item)
                case c_ast.FuncDef():
                    self._function(u, item)
                case c_ast.Decl():
                    _declaration(u, item)
                case c_ast.StaticAssert():
                    statement(u, item)
                case c_ast.Pragma():
                    continue
                case _:
                    u.refuse(item, "construct")

    def _function(self, u: Unit, node: c_ast.FuncDef) -> None:
        name, kind = node.decl.name, named_type(u, node.decl.type)
        assert isinstance(kind, Function)
        if node.param_decls:
            u.refuse(node.decl, "old-style-function")
        u.scope.names[name] = Callee(name, kind)
        self._check_sequencing(node)
        layout = Layout(slots=1)
        inner = Scope(u.scope)
        addressed = frozenset(_addressed(node.body))
        compiled = Compiled(name, kind, where=where(node.decl))
        self.functions[name] = compiled
        unit = Unit(
            _RULES, self.cx, self.types, self.functions, inner, layout, kind.returns, addressed
        )
        names, in_memory = [], []
        parameters = node.decl.type.args.params if node.decl.type.args else ()
        for each in parameters:
            if isinstance(each, c_ast.Typename):
                continue
            parameter = parameter_type(unit, each)
            slot = layout.new()
            taken = each.name in addressed
            if isinstance(parameter, Struct | Array):
                u.refuse(each, "struct-argument")
            if taken:
                in_memory.append(slot)
            names.append(each.name)
            inner.names[each.name] = Variable(parameter, slot, taken, is_constant(each))
        compiled.names, compiled.in_memory = tuple(names), tuple(in_memory)
        compiled.restricts = any(isinstance(p, Pointing) and p.restrict for p in kind.parameters)
        compiled.body = statement(unit, node.body)
        compiled.slots = layout.slots
        compiled.pure = _is_pure(kind)
        compiled.calls = frozenset(_called(node.body))

    def _check_sequencing(self, node: c_ast.FuncDef) -> None:
        for each in full_expressions(node.body):
            try:
                check(each)
            except UnsequencedError as error:
                self.unsequenced = self.unsequenced or (place(error.node), error.name)

    def _refuse_recursion(self) -> None:
        for name in self.functions:
            seen: set[str] = set()
            left = list(self.functions[name].calls)
            while left:
                other = left.pop()
                if other == name:
                    found = self.functions[name].where
                    assert found is not None
                    raise RefusedError("recursion", found(), name)
                if other not in seen and other in self.functions:
                    seen.add(other)
                    left.extend(self.functions[other].calls)


def _declaration(u: Unit, node: c_ast.Decl) -> None:
    kind = named_type(u, node.type)
    if node.name is None:
        return
    if isinstance(kind, Function):
        u.scope.names[node.name] = Callee(node.name, kind)
        return
    kind = completed(u, kind, node.init, node)
    if not is_constant(node):
        u.refuse(node, "static-variable")
    if "extern" in node.storage and node.init is None:
        u.refuse(node, "external-object")
    u.scope.names[node.name] = static(u, node.name, kind, node.init)


def _is_pure(kind: Function) -> bool:
    """Return whether a result depends on arguments alone: all memory that outlives is constant."""
    return not isinstance(kind.returns, Void | Pointing | Struct) and not any(
        isinstance(each, Pointing | Struct) for each in kind.parameters
    )


def _addressed(node: c_ast.Node) -> Iterator[str]:
    """Yield the names of variables whose address is taken."""
    if isinstance(node, c_ast.UnaryOp) and node.op == "&":
        inner = node.expr
        if isinstance(inner, c_ast.ID):
            yield inner.name
    for _, child in node.children():
        yield from _addressed(child)


def _called(node: c_ast.Node) -> Iterator[str]:
    if isinstance(node, c_ast.FuncCall) and isinstance(node.name, c_ast.ID):
        yield node.name.name
    for _, child in node.children():
        yield from _called(child)
