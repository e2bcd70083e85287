"""Expressions: each becomes its type and a run, with every conversion in its place."""

from pycparser import c_ast

from guardbit.proof.algebra.values import InexpressibleError, Value
from guardbit.proof.c.assignments import assignment, stepped
from guardbit.proof.c.calls import call
from guardbit.proof.c.constants import constant
from guardbit.proof.c.conversions import arithmetic, comparison, complement, converted, shift
from guardbit.proof.c.declarations import named_type
from guardbit.proof.c.operators import SHIFTS, operated
from guardbit.proof.c.places import Spot, decayed, spot
from guardbit.proof.c.pointers import (
    COMPARED,
    cast_pointer,
    compared_with_null,
    is_null,
    with_pointers,
)
from guardbit.proof.c.scope import Callee, Enumerator, Frame, Number, Run, number
from guardbit.proof.c.sizes import size_of
from guardbit.proof.c.types import Array, Integer, Pointing, Struct, Type, Void
from guardbit.proof.c.unit import Typed, Unit
from guardbit.proof.machine.memory import NULL, Content, Pointer

_OBJECTS = (c_ast.ID, c_ast.ArrayRef, c_ast.StructRef)


def expression(u: Unit, node: c_ast.Node) -> Typed:
    """Return type and run of an expression's value. Arrays decay to pointers."""
    match node:
        case c_ast.Constant():
            found = constant(u.types, node)
            if found is None:
                u.refuse(node, "constant")
            kind, value = found
            return kind, lambda _: value
        case c_ast.ID():
            return _identifier(u, node)
        case c_ast.ArrayRef() | c_ast.StructRef():
            return loaded(spot(u, node))
        case c_ast.UnaryOp():
            return _unary(u, node)
        case c_ast.BinaryOp():
            return _binary(u, node)
        case c_ast.Assignment():
            return assignment(u, node)
        case c_ast.TernaryOp():
            return _ternary(u, node)
        case c_ast.Cast():
            return _cast(u, node)
        case c_ast.FuncCall():
            return call(u, node)
        case c_ast.ExprList():
            return _comma(u, node)
        case _:
            u.refuse(node, "construct")


def condition(u: Unit, node: c_ast.Node) -> Number:
    """Return a run that gives 1 or 0 (or a mask): whether an expression is not 0."""
    kind, run = expression(u, node)
    site = u.at(node)
    if isinstance(kind, Pointing):
        return lambda frame: int(run(frame) is not NULL)
    if not isinstance(kind, Integer):
        u.refuse(node, "not-an-integer")
    if isinstance(node, c_ast.BinaryOp) and node.op in (*COMPARED, "&&", "||"):
        return number(run)
    return comparison(site, "!=", number(run), lambda _: 0)


def loaded(s: Spot) -> Typed:
    """Return type and run of the value that an object holds; of its address if it is an array."""
    if isinstance(s.kind, Array):
        return decayed(s)
    if isinstance(s.kind, Struct):
        cells, address = s.kind.cells, s.address
        assert address is not None

        def whole(frame: Frame) -> Content:
            start = address(frame)
            assert isinstance(start, Pointer)
            return tuple(  # type: ignore[return-value]
                start.block.get(start.index + k) for k in range(cells)
            )

        return s.kind, whole
    return s.kind, s.load


def _identifier(u: Unit, node: c_ast.ID) -> Typed:
    found = u.scope.find(node.name)
    if isinstance(found, Enumerator):
        value = found.value
        return u.types.int, lambda _: value
    if isinstance(found, Callee):
        u.refuse(node, "function-pointer")
    return loaded(spot(u, node))


def _unary(u: Unit, node: c_ast.UnaryOp) -> Typed:
    op = node.op
    if op == "sizeof":
        return u.types.size, _constant_run(_sizeof(u, node))
    if op == "&":
        if isinstance(node.expr, c_ast.UnaryOp) and node.expr.op == "*":
            return expression(u, node.expr.expr)
        s = spot(u, node.expr)
        if s.address is None:
            u.refuse(node, "address-of-value")
        return Pointing(s.kind, s.constant), s.address
    if op == "*":
        return loaded(spot(u, node))
    if op in ("++", "--", "p++", "p--"):
        return stepped(u, node)
    if op == "!":
        held = condition(u, node.expr)
        return u.types.int, comparison(u.at(node), "==", held, lambda _: 0)
    kind, run = u.integer(node.expr)
    promoted = u.types.promoted(kind)
    run = converted(u.at(node), run, kind, promoted)
    if op == "+":
        return promoted, run
    if op == "-":
        return promoted, arithmetic(u.at(node), "-", promoted, lambda _: 0, run)
    if op == "~":
        return promoted, complement(u.at(node), promoted, run)
    u.refuse(node, "operator", op)


def _constant_run(value: int) -> Run:
    return lambda _: value


def _sizeof(u: Unit, node: c_ast.UnaryOp) -> int:
    if isinstance(node.expr, c_ast.Typename):
        kind = named_type(u, node.expr)
    elif isinstance(node.expr, _OBJECTS) or _follows(node.expr):
        kind = spot(u, node.expr).kind
    else:
        kind = expression(u, node.expr)[0]
    found = size_of(u.types, kind)
    if found is None:
        u.refuse(node, "size-of-padded")
    return found


def _follows(node: c_ast.Node) -> bool:
    return isinstance(node, c_ast.UnaryOp) and node.op == "*"


def _binary(u: Unit, node: c_ast.BinaryOp) -> Typed:
    op = node.op
    if op in ("&&", "||"):
        return u.types.int, _logical(u, node)
    site = u.at(node)
    if op in COMPARED and (is_null(node.right) or is_null(node.left)):
        found = compared_with_null(u, node)
        if found is not None:
            return u.types.int, found
    left, right = expression(u, node.left), expression(u, node.right)
    left_kind, right_kind = left[0], right[0]
    if isinstance(left_kind, Pointing) or isinstance(right_kind, Pointing):
        return with_pointers(u, node, left, right)
    if not isinstance(left_kind, Integer) or not isinstance(right_kind, Integer):
        u.refuse(node, "not-an-integer")
    a, b = number(left[1]), number(right[1])
    if op in SHIFTS:
        kind = u.types.promoted(left_kind)
        return kind, shift(site, op, kind, converted(site, a, left_kind, kind), b)
    kind = u.types.common(left_kind, right_kind)
    a = converted(u.at(node.left), a, left_kind, kind)
    b = converted(u.at(node.right), b, right_kind, kind)
    if op in COMPARED:
        return u.types.int, comparison(site, op, a, b)
    return kind, operated(u, node, kind, (op, a, b))


def _logical(u: Unit, node: c_ast.BinaryOp) -> Number:
    site, stop = u.at(node), int(node.op == "||")
    cx = site.cx
    left, right = condition(u, node.left), condition(u, node.right)

    def logical(frame: Frame) -> Value:
        first = left(frame)
        if isinstance(first, int):
            return stop if first == stop else right(frame)
        space = cx.space
        saved = cx.mask
        try:
            goes_on = first if stop == 0 else space.compare("==", first, 0)
            cx.mask = space.both(saved, goes_on)
            second = stop if cx.mask == 0 else right(frame)
            cx.mask = saved
            return space.where(goes_on, second, stop)
        except InexpressibleError as error:
            site.refused(error.reason)
        finally:
            cx.mask = saved

    return logical


def _ternary(u: Unit, node: c_ast.TernaryOp) -> Typed:
    site = u.at(node)
    cx = site.cx
    test = condition(u, node.cond)
    kind, then, other = _branches(u, node)

    def ternary(frame: Frame) -> Content:
        held = test(frame)
        if isinstance(held, int):
            return then(frame) if held else other(frame)
        space, saved = cx.space, cx.mask
        try:
            not_held = space.compare("==", held, 0)
            cx.mask = space.both(saved, held)
            a = then(frame) if cx.mask != 0 else None
            cx.mask = space.both(saved, not_held)
            b = other(frame) if cx.mask != 0 else None
            cx.mask = saved
            if a is None or b is None:
                return b if a is None else a
            if isinstance(a, Pointer) or isinstance(b, Pointer):
                site.refused("pointer-by-pixel")
            return space.where(held, a, b)  # type: ignore[arg-type]
        except InexpressibleError as error:
            site.refused(error.reason)
        finally:
            cx.mask = saved

    return kind, ternary


def _branches(u: Unit, node: c_ast.TernaryOp) -> tuple[Type, Run, Run]:
    if is_null(node.iffalse) or is_null(node.iftrue):
        one = node.iffalse if is_null(node.iftrue) else node.iftrue
        kind, run = expression(u, one)
        if isinstance(kind, Pointing):
            branches = (run, _null) if is_null(node.iffalse) else (_null, run)
            return kind, *branches
    then_kind, then = expression(u, node.iftrue)
    other_kind, other = expression(u, node.iffalse)
    if isinstance(then_kind, Integer) and isinstance(other_kind, Integer):
        kind = u.types.common(then_kind, other_kind)
        return (
            kind,
            converted(u.at(node.iftrue), number(then), then_kind, kind),
            converted(u.at(node.iffalse), number(other), other_kind, kind),
        )
    if then_kind != other_kind:
        u.refuse(node, "incompatible-types")
    return then_kind, then, other


def _null(_: Frame) -> Content:
    return NULL


def _cast(u: Unit, node: c_ast.Cast) -> Typed:
    target = named_type(u, node.to_type)
    if isinstance(target, Pointing) and is_null(node.expr):
        return target, _null
    kind, run = expression(u, node.expr)
    if isinstance(target, Void):
        return target, run
    if isinstance(target, Integer) and isinstance(kind, Integer):
        return target, converted(u.at(node), number(run), kind, target)
    if isinstance(target, Pointing) and isinstance(kind, Pointing):
        return target, cast_pointer(u, (kind, run), target, node)
    u.refuse(node, "cast")


def _comma(u: Unit, node: c_ast.ExprList) -> Typed:
    *first, last = [expression(u, each) for each in node.exprs]
    kind, value = last

    def comma(frame: Frame) -> Content:
        for _, run in first:
            run(frame)
        return value(frame)

    return kind, comma
