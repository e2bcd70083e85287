"""Statements: each becomes a run that tells whether to go on, break, continue or return.

Conditions on sizes and indices are numbers. One on pixels splits no run: both branches are run,
each under a mask, and what they store is chosen by it.
"""

from collections.abc import Callable, Mapping, Sequence

from pycparser import c_ast

from guardbit.proof.algebra.values import InexpressibleError, Value
from guardbit.proof.c.assignments import assigned
from guardbit.proof.c.calls import RETURNED
from guardbit.proof.c.declarations import constant_value, is_constant, named_type
from guardbit.proof.c.expressions import condition, expression
from guardbit.proof.c.initialisers import cells_of, completed, zero
from guardbit.proof.c.scope import Frame, Run, Static, Variable
from guardbit.proof.c.types import Array, Integer, Struct, Type, Void
from guardbit.proof.c.unit import BREAK, CONTINUE, NORMAL, RETURN, Statement, Status, Unit
from guardbit.proof.machine.context import Site
from guardbit.proof.machine.memory import Block, Pointer


def statement(u: Unit, node: c_ast.Node | None) -> Statement:
    """Return the run of a statement."""
    if node is None or isinstance(node, c_ast.EmptyStatement | c_ast.Pragma):
        return lambda _: NORMAL
    if isinstance(node, c_ast.Goto | c_ast.Label | c_ast.Case | c_ast.Default):
        u.refuse(node, "jump")
    found = _KINDS.get(type(node))
    return _for_effect(u.value(node)[1]) if found is None else found(u, node)


def _for_effect(run: Run) -> Statement:
    def effect(frame: Frame) -> Status:
        run(frame)
        return NORMAL

    return effect


def block(u: Unit, nodes: Sequence[c_ast.Node]) -> Statement:
    """Return the run of statements one after the other."""
    runs = [statement(u, each) for each in nodes]
    if len(runs) == 1:
        return runs[0]

    def run(frame: Frame) -> Status:
        for each in runs:
            status = each(frame)
            if status:
                return status
        return NORMAL

    return run


def declared(u: Unit, node: c_ast.Decl) -> Statement:
    """Return the run of a local declaration."""
    if node.name is None:
        named_type(u, node.type)
        return lambda frame: NORMAL
    if isinstance(node.type, c_ast.FuncDecl):
        u.refuse(node, "declaration-of-function")
    kind = completed(u, named_type(u, node.type), node.init, node)
    constant_object = is_constant(node)
    if "static" in node.storage:
        if not constant_object:
            u.refuse(node, "static-variable")
        u.scope.names[node.name] = static(u, node.name, kind, node.init)
        return lambda frame: NORMAL
    slot = u.layout.new()
    in_memory = isinstance(kind, Array | Struct) or node.name in u.addressed
    if isinstance(kind, Void):
        u.refuse(node, "type")
    # an initialiser sees the name that it belongs to
    u.scope.names[node.name] = Variable(kind, slot, in_memory, constant_object)
    if in_memory:
        return _in_memory(u, node, kind, slot)
    if node.init is None:

        def fresh(frame: Frame) -> Status:
            frame[slot] = None
            return NORMAL

        return fresh
    run = assigned(u, kind, _single(node.init))

    def begin(frame: Frame) -> Status:
        # what another path of this run left in the slot is no longer there
        frame[slot] = run(frame)
        return NORMAL

    return begin


def _single(init: c_ast.Node) -> c_ast.Node:
    if isinstance(init, c_ast.InitList) and len(init.exprs) == 1:
        return init.exprs[0]
    return init


def _in_memory(u: Unit, node: c_ast.Decl, kind: Type, slot: int) -> Statement:
    cells = {} if node.init is None else cells_of(u, kind, node.init)
    begin = zero(kind) if node.init is not None else []
    name, cell_kind, count = node.name, cell_type(kind), kind.cells

    def run(frame: Frame) -> Status:
        made = Block(name, cell_kind, count)
        made.fill(begin)
        frame[slot] = Pointer(made, 0, (0, count))
        for k, value in cells.items():
            made.cells[k] = value(frame)
        return NORMAL

    return run


def cell_type(kind: Type) -> tuple[int, bool] | None:
    """Return the type of all cells of an object; None if they differ or are no integers."""
    match kind:
        case Integer():
            return kind.bits, kind.signed
        case Array():
            return cell_type(kind.of)
        case Struct():
            found = {cell_type(inner) for _, inner in kind.fields}
            return found.pop() if len(found) == 1 else None
        case _:
            return None


def static(u: Unit, name: str, kind: Type, init: c_ast.Node | None) -> Static:
    """Return a constant object, with what it begins with."""
    made = Block(name, cell_type(kind), kind.cells, writable=False)
    made.fill(zero(kind))
    if init is not None:
        for k, run in cells_of(u, kind, init).items():
            made.cells[k] = run([])
    return Static(kind, Pointer(made, 0, (0, kind.cells)), constant=True)


def _static_assert(u: Unit, node: c_ast.StaticAssert) -> Statement:
    value = constant_value(u, node.cond)
    if value is None:
        u.refuse(node, "constant")
    if value == 0:
        u.refuse(node, "static-assertion")
    return lambda frame: NORMAL


def _return(u: Unit, node: c_ast.Return) -> Statement:
    cx = u.cx
    if node.expr is None or isinstance(u.returns, Void):
        run: Run = lambda frame: None  # noqa: E731
        if node.expr is not None:
            _, run = expression(u, node.expr)
    else:
        run = assigned(u, u.returns, node.expr)

    def give(frame: Frame) -> Status:
        value = run(frame)
        frame[RETURNED].append((cx.mask, value))  # type: ignore[union-attr]
        return RETURN

    return give


def _if(u: Unit, node: c_ast.If) -> Statement:
    site = u.at(node.cond)
    cx = site.cx
    test = condition(u, node.cond)
    then, other = statement(u.inner(), node.iftrue), statement(u.inner(), node.iffalse)

    def run(frame: Frame) -> Status:
        held = test(frame)
        if type(held) is int:
            return then(frame) if held else other(frame)
        space, saved = cx.space, cx.mask
        try:
            masks = (
                space.both(saved, held),
                space.both(saved, space.compare("==", held, 0)),
            )
        except InexpressibleError as error:
            site.refused(error.reason)
        left: Value = 0
        statuses = set()
        for mask, branch in zip(masks, (then, other), strict=True):
            if mask == 0:
                continue
            cx.mask = mask
            status = branch(frame)
            if status == RETURN:
                continue
            statuses.add(status)
            left = space.add(left, cx.mask)
        cx.mask = left
        if not statuses:
            return RETURN
        if len(statuses) > 1:
            site.refused("loop-by-pixel")
        return statuses.pop()

    return run


def _loop(
    site: Site, test: Run | None, body: Statement, after: Run | None = None, *, first: bool = True
) -> Statement:
    """Return the run of a loop; with `first` the test is before the body."""
    cx = site.cx

    def run(frame: Frame) -> Status:
        tests = first
        while True:
            if tests and test is not None:
                held = test(frame)
                if type(held) is not int:
                    site.refused("loop-by-pixel")
                if not held:
                    return NORMAL
            tests = True
            cx.step()
            entered = cx.mask
            status = body(frame)
            if status == RETURN:
                return RETURN
            if status in (BREAK, CONTINUE) and cx.mask is not entered:
                site.refused("loop-by-pixel")
            if status == BREAK:
                return NORMAL
            if after is not None:
                after(frame)

    return run


def _for(outer: Unit, node: c_ast.For) -> Statement:
    u = outer.inner()
    begin = statement(u, node.init)
    test = None if node.cond is None else condition(u, node.cond)
    after = None if node.next is None else expression(u, node.next)[1]
    loop = _loop(u.at(node), test, statement(u.inner(), node.stmt), after)

    def run(frame: Frame) -> Status:
        begin(frame)
        return loop(frame)

    return run


def _while(u: Unit, node: c_ast.While) -> Statement:
    body = statement(u.inner(), node.stmt)
    return _loop(u.at(node), condition(u, node.cond), body)


def _do(u: Unit, node: c_ast.DoWhile) -> Statement:
    body = statement(u.inner(), node.stmt)
    return _loop(u.at(node), condition(u, node.cond), body, first=False)


def _switch(u: Unit, node: c_ast.Switch) -> Statement:
    kind, run = u.integer(node.cond)
    del kind
    inner = u.inner()
    if not isinstance(node.stmt, c_ast.Compound):
        u.refuse(node, "switch")
    labels: dict[int | None, int] = {}
    runs: list[Statement] = []
    for item in node.stmt.block_items or ():
        _case(inner, item, labels, runs)
    site = u.at(node.cond)

    def switch(frame: Frame) -> Status:
        value = run(frame)
        if not isinstance(value, int):
            site.refused("switch-by-pixel")
        start = labels.get(value, labels.get(None))
        for each in runs[start:] if start is not None else ():
            status = each(frame)
            if status == BREAK:
                return NORMAL
            if status:
                return status
        return NORMAL

    return switch


def _case(u: Unit, item: c_ast.Node, labels: dict[int | None, int], runs: list[Statement]) -> None:
    """Append a switch's statement, with the labels that lead to it."""
    while isinstance(item, c_ast.Case | c_ast.Default):
        value = None
        if isinstance(item, c_ast.Case):
            value = constant_value(u, item.expr)
            if value is None:
                u.refuse(item, "constant")
        labels[value] = len(runs)
        inside = item.stmts or []
        if len(inside) == 1 and isinstance(inside[0], c_ast.Case | c_ast.Default):
            item = inside[0]
            continue
        runs.extend(statement(u, each) for each in inside)
        return
    runs.append(statement(u, item))


def _compound(u: Unit, node: c_ast.Compound) -> Statement:
    return block(u.inner(), node.block_items or ())


def _declarations(u: Unit, node: c_ast.DeclList) -> Statement:
    return block(u, node.decls)


def _typedef(u: Unit, node: c_ast.Typedef) -> Statement:
    u.scope.types[node.name] = named_type(u, node)
    return lambda _: NORMAL


def _break(_: Unit, __: c_ast.Break) -> Statement:
    return lambda _: BREAK


def _continue(_: Unit, __: c_ast.Continue) -> Statement:
    return lambda _: CONTINUE


_KINDS: Mapping[type[c_ast.Node], Callable[[Unit, c_ast.Node], Statement]] = {
    c_ast.Compound: _compound,
    c_ast.Decl: declared,
    c_ast.DeclList: _declarations,
    c_ast.If: _if,
    c_ast.For: _for,
    c_ast.While: _while,
    c_ast.DoWhile: _do,
    c_ast.Switch: _switch,
    c_ast.Return: _return,
    c_ast.Break: _break,
    c_ast.Continue: _continue,
    c_ast.Typedef: _typedef,
    c_ast.StaticAssert: _static_assert,
}
