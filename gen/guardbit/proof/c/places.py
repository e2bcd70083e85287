"""Objects: where an lvalue is, how it is read and written; pointers and how they move."""

from collections.abc import Callable
from dataclasses import dataclass

from pycparser import c_ast

from guardbit.proof.algebra.values import InexpressibleError, Value
from guardbit.proof.c.scope import Frame, Run, Static, Variable
from guardbit.proof.c.types import Array, Integer, Pointing, Struct, Type, Void
from guardbit.proof.c.unit import Typed, Unit
from guardbit.proof.machine.context import Site
from guardbit.proof.machine.memory import Content, Guard, Pointer

Store = Callable[[Frame, Content], None]


@dataclass(frozen=True, slots=True)
class Spot:
    """An object: its type, how its value is had and set, and its address if it has one."""

    kind: Type
    load: Run
    store: Store
    address: Run | None
    constant: bool = False


def spot(u: Unit, node: c_ast.Node) -> Spot:
    """Return the object that an lvalue names."""
    match node:
        case c_ast.ID():
            return _named(u, node)
        case c_ast.ArrayRef():
            kind, base = u.value(node.name)
            index_kind, index = u.value(node.subscript)
            if isinstance(index_kind, Pointing):
                kind, base, index_kind, index = index_kind, index, kind, base
            if not isinstance(kind, Pointing) or not isinstance(index_kind, Integer):
                u.refuse(node, "index")
            return _element(u, kind, base, index, node)
        case c_ast.UnaryOp(op="*"):
            kind, base = u.value(node.expr)
            if not isinstance(kind, Pointing) or isinstance(kind.to, Void):
                u.refuse(node, "dereference")
            return _element(u, kind, base, lambda frame: 0, node)
        case c_ast.StructRef():
            return _member(u, node)
        case _:
            u.refuse(node, "not-an-object")


def decayed(s: Spot) -> Typed:
    """Return the pointer to the first element of an array."""
    assert isinstance(s.kind, Array) and s.address is not None
    return Pointing(s.kind.of, s.constant or s.kind.constant), s.address


def moved(site: Site, kind: Pointing, base: Run, count: Run, *, down: bool = False) -> Run:
    """Return the run of a pointer moved by some elements; it stays in its array or one past it."""
    step = -kind.to.cells if down else kind.to.cells

    def move(frame: Frame) -> Pointer:
        p, n = base(frame), count(frame)
        assert isinstance(p, Pointer)
        if not isinstance(n, int):
            site.refused("address-by-pixel")
        index = p.index + n * step
        if not p.low <= index <= p.high:
            site.broken("pointer-arithmetic")
        return Pointer(p.block, index, (p.low, p.high), p.tags, p.view)

    return move


def _named(u: Unit, node: c_ast.ID) -> Spot:
    found = u.scope.find(node.name)
    site = u.at(node)
    if isinstance(found, Static):
        address = found.address
        return _at(site, found.kind, lambda frame: address, constant=found.constant)
    if not isinstance(found, Variable):
        u.refuse(node, "unknown-name", node.name)
    slot = found.slot
    if found.in_memory:
        return _at(site, found.kind, lambda frame: frame[slot], constant=found.constant)
    return _in_slot(site, found)


def _in_slot(site: Site, variable: Variable) -> Spot:
    slot = variable.slot

    def load(frame: Frame) -> Content:
        value = frame[slot]
        if value is None or type(value) is Guard:
            return site.read(value)
        return value

    def store(frame: Frame, value: Content) -> None:
        if type(site.cx.mask) is int:
            frame[slot] = value
        else:
            frame[slot] = site.stored(frame[slot], value)  # type: ignore[arg-type]

    return Spot(variable.kind, load, store, None, variable.constant)


def _at(site: Site, kind: Type, address: Run, *, constant: bool) -> Spot:
    """Return the object at an address."""

    def load(frame: Frame) -> Content:
        return site.load(address(frame))  # type: ignore[arg-type]

    def store(frame: Frame, value: Content) -> None:
        site.store(address(frame), value)  # type: ignore[arg-type]

    return Spot(kind, load, store, address, constant)


def _element(u: Unit, kind: Pointing, base: Run, index: Run, node: c_ast.Node) -> Spot:
    """Return the object that a pointer points to, some elements on."""
    site, to = u.at(node), kind.to
    cells = to.cells

    def load(frame: Frame) -> Content:
        p, i = base(frame), index(frame)
        if type(i) is int:
            k = p.index + i * cells  # type: ignore[union-attr]
            if p.low <= k < p.high and not p.tags and p.view is None:  # type: ignore[union-attr]
                found = p.block.cells.get(k)  # type: ignore[union-attr]
                if found is not None and type(found) is not Guard:
                    return found
            return site.load(Pointer(p.block, k, (p.low, p.high), p.tags, p.view))  # type: ignore[union-attr]
        return _looked_up(site, p, i)  # type: ignore[arg-type]

    def address(frame: Frame) -> Pointer:
        p, i = base(frame), index(frame)
        assert isinstance(p, Pointer)
        if type(i) is not int:
            site.refused("address-by-pixel")
        k = p.index + i * cells
        if not p.low <= k <= p.high:
            site.broken("pointer-arithmetic")
        if isinstance(to, Array | Struct):
            if k == p.high:
                return Pointer(p.block, k, (k, k), p.tags, p.view)
            return Pointer(p.block, k, (k, k + cells), p.tags, p.view)
        return Pointer(p.block, k, (p.low, p.high), p.tags, p.view)

    def store(frame: Frame, value: Content) -> None:
        p, i = base(frame), index(frame)
        assert isinstance(p, Pointer)
        if type(i) is not int:
            site.refused("address-by-pixel")
        target = Pointer(p.block, p.index + i * cells, (p.low, p.high), p.tags, p.view)
        site.store(target, value)  # type: ignore[arg-type]

    return Spot(to, load, store, address, kind.constant)


def _looked_up(site: Site, p: Pointer, i: Value) -> Value:
    """Return what a table holds at an index that depends on pixels."""
    inside = (p.low - p.index, p.high - 1 - p.index)
    space, mask = site.cx.space, site.cx.mask
    try:
        low, high = space.bounds(i)
        if low < inside[0] or high > inside[1]:
            found = space.bounds_where(i, mask)
            if found is None or found[0] < inside[0] or found[1] > inside[1]:
                site.broken("out-of-bounds-read", i, inside)
            low, high = found
            # off this path any index will do
            i = space.where(mask, i, low)
        entries = [p.block.get(p.index + k) for k in range(low, high + 1)]
        numbers = [each for each in entries if isinstance(each, int)]
        if len(numbers) < len(entries):
            site.refused("address-by-pixel")
        return space.look_up(numbers, space.subtract(i, low))
    except InexpressibleError as error:
        site.refused(error.reason)


def _member(u: Unit, node: c_ast.StructRef) -> Spot:
    site = u.at(node)
    if node.type == "->":
        kind, base = u.value(node.name)
        if not isinstance(kind, Pointing) or not isinstance(kind.to, Struct):
            u.refuse(node, "member")
        struct, constant = kind.to, kind.constant
    else:
        s = spot(u, node.name)
        if not isinstance(s.kind, Struct) or s.address is None:
            u.refuse(node, "member")
        struct, base, constant = s.kind, s.address, s.constant
    found = struct.field(node.field.name)
    if found is None:
        u.refuse(node, "member", node.field.name)
    inner, offset = found

    def address(frame: Frame) -> Pointer:
        p = base(frame)
        assert isinstance(p, Pointer)
        k = p.index + offset
        return Pointer(p.block, k, (k, k + inner.cells), p.tags, p.view)

    return _at(site, inner, address, constant=constant)
