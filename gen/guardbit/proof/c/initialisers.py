"""What objects begin with: initialisers laid out over cells (C99 6.7.8)."""

from pycparser import c_ast

from guardbit.proof.c.declarations import constant_value
from guardbit.proof.c.scope import Frame, Run
from guardbit.proof.c.types import Array, Pointing, Struct, Type
from guardbit.proof.c.unit import Unit
from guardbit.proof.machine.memory import NULL, Content

Cells = dict[int, Run]


def completed(u: Unit, kind: Type, init: c_ast.Node | None, node: c_ast.Node) -> Type:
    """Return the type of an object, the size of an open array taken from its initialiser."""
    if not isinstance(kind, Array) or kind.count >= 0:
        return kind
    if not isinstance(init, c_ast.InitList):
        u.refuse(node, "array-size")
    at, most = 0, 0
    for each in init.exprs:
        if isinstance(each, c_ast.NamedInitializer):
            found = _designated(u, each)
            if found is None:
                u.refuse(node, "constant")
            at = found
        at += 1
        most = max(most, at)
    return Array(kind.of, most, kind.constant)


def zero(kind: Type) -> list[Content]:
    """Return the cells of an object of which nothing is said: zeros and null pointers."""
    match kind:
        case Array():
            return zero(kind.of) * kind.count
        case Struct():
            return [cell for _, inner in kind.fields for cell in zero(inner)]
        case Pointing():
            return [NULL]
        case _:
            return [0]


def cells_of(u: Unit, kind: Type, init: c_ast.Node) -> Cells:
    """Return a run for each cell that an initialiser sets, by the cell's number."""
    found: Cells = {}
    _fill(u, kind, init, 0, found)
    return found


def _fill(u: Unit, kind: Type, init: c_ast.Node, at: int, found: Cells) -> None:
    if not isinstance(init, c_ast.InitList):
        if isinstance(kind, Array):
            u.refuse(init, "array-initialiser")
        run = u.assigned(kind, init)
        if isinstance(kind, Struct):
            for k in range(kind.cells):
                found[at + k] = _part(run, k)
        else:
            found[at] = run
        return
    if isinstance(kind, Array):
        _fill_array(u, kind, init, at, found)
    elif isinstance(kind, Struct):
        _fill_struct(u, kind, init, at, found)
    elif len(init.exprs) == 1:
        _fill(u, kind, init.exprs[0], at, found)
    else:
        u.refuse(init, "initialiser")


def _part(run: Run, k: int) -> Run:
    def part(frame: Frame) -> Content:
        values = run(frame)
        assert isinstance(values, tuple)
        return values[k]

    return part


def _fill_array(u: Unit, kind: Array, init: c_ast.InitList, at: int, found: Cells) -> None:
    size = kind.of.cells
    if isinstance(kind.of, Array | Struct) and not any(
        isinstance(e, c_ast.InitList | c_ast.NamedInitializer) for e in init.exprs
    ):
        u.refuse(init, "initialiser")
    index = 0
    for each in init.exprs:
        value = each
        if isinstance(each, c_ast.NamedInitializer):
            number = _designated(u, each)
            if number is None or len(each.name) > 1:
                u.refuse(init, "initialiser")
            index, value = number, each.expr
        if index >= kind.count:
            u.refuse(init, "initialiser")
        _fill(u, kind.of, value, at + index * size, found)
        index += 1


def _fill_struct(u: Unit, kind: Struct, init: c_ast.InitList, at: int, found: Cells) -> None:
    names = [name for name, _ in kind.fields]
    index = 0
    for each in init.exprs:
        value = each
        if isinstance(each, c_ast.NamedInitializer):
            name = getattr(each.name[0], "name", None)
            if name not in names or len(each.name) > 1:
                u.refuse(init, "initialiser")
            index, value = names.index(name), each.expr
        if index >= len(names):
            u.refuse(init, "initialiser")
        place = kind.field(names[index])
        assert place is not None
        _fill(u, place[0], value, at + place[1], found)
        index += 1


def _designated(u: Unit, node: c_ast.NamedInitializer) -> int | None:
    """Return the index that a designator names; None if it is none."""
    inside = node.name[0]
    # newer parsers wrap the index
    return constant_value(u, getattr(inside, "expr", inside))
