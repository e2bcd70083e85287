"""Pointers in expressions: null, comparisons, distances, conversions."""

from pycparser import c_ast

from guardbit.proof.c.places import moved
from guardbit.proof.c.scope import Frame, Run
from guardbit.proof.c.types import Array, Integer, Pointing, Void
from guardbit.proof.c.unit import Typed, Unit
from guardbit.proof.machine.context import Site
from guardbit.proof.machine.memory import NULL, Content, Pointer

COMPARED = ("<", "<=", ">", ">=", "==", "!=")


def is_null(node: c_ast.Node) -> bool:
    """Return whether an expression is a null pointer constant."""
    if isinstance(node, c_ast.Cast):
        return is_null(node.expr)
    return isinstance(node, c_ast.Constant) and node.value.rstrip("uUlL") in ("0", "0x0")


def compared_with_null(u: Unit, node: c_ast.BinaryOp) -> Run | None:
    """Return the run of a comparison of a pointer with null; None if there is no pointer."""
    other = node.left if is_null(node.right) else node.right
    kind, run = u.value(other)
    if not isinstance(kind, Pointing):
        return None
    if node.op not in ("==", "!="):
        u.refuse(node, "pointer-comparison")
    wanted = node.op == "=="
    return lambda frame: int((run(frame) is NULL) == wanted)


def with_pointers(u: Unit, node: c_ast.BinaryOp, left: Typed, right: Typed) -> Typed:
    """Return type and run of a binary operator with a pointer among its operands."""
    op = node.op
    (left_kind, left_run), (right_kind, right_run) = left, right
    if isinstance(left_kind, Pointing) and isinstance(right_kind, Pointing):
        if op == "-":
            return u.types.difference, _distance(u, node, left_kind, left_run, right_run)
        if op in COMPARED:
            return u.types.int, _order(u, node, left_run, right_run)
        u.refuse(node, "pointer-operator", op)
    if op == "+" and isinstance(left_kind, Pointing):
        return left_kind, moved(u.at(node), left_kind, left_run, right_run)
    if op == "+" and isinstance(right_kind, Pointing):
        return right_kind, moved(u.at(node), right_kind, right_run, left_run)
    if op == "-" and isinstance(left_kind, Pointing):
        return left_kind, moved(u.at(node), left_kind, left_run, right_run, down=True)
    u.refuse(node, "pointer-operator", op)


def _distance(u: Unit, node: c_ast.Node, kind: Pointing, left: Run, right: Run) -> Run:
    site, cells = u.at(node), kind.to.cells

    def distance(frame: Frame) -> int:
        a, b = left(frame), right(frame)
        assert isinstance(a, Pointer) and isinstance(b, Pointer)
        if a is NULL or b is NULL or a.block is not b.block:
            site.broken("pointers-of-different-arrays")
        return (a.index - b.index) // cells

    return distance


def _order(u: Unit, node: c_ast.BinaryOp, left: Run, right: Run) -> Run:
    site, op = u.at(node), node.op
    cx = site.cx

    def order(frame: Frame) -> int:
        a, b = left(frame), right(frame)
        assert isinstance(a, Pointer) and isinstance(b, Pointer)
        if op in ("==", "!="):
            same = a is b or (
                a is not NULL and b is not NULL and a.block is b.block and a.index == b.index
            )
            return int(same == (op == "=="))
        if a is NULL or b is NULL or a.block is not b.block:
            site.broken("pointers-of-different-arrays")
        return int(cx.space.compare(op, a.index, b.index) == 1)

    return order


def cast_pointer(u: Unit, given: tuple[Pointing, Run], target: Pointing, node: c_ast.Node) -> Run:
    """Return the run of a pointer cast to another pointer type."""
    kind, run = given
    if kind.to == target.to or isinstance(target.to, Void):
        return run
    if isinstance(target.to, Integer) and isinstance(kind.to, Integer | Void):
        return _seen_as(u.at(node), run, target.to)
    u.refuse(node, "pointer-cast")


def _seen_as(site: Site, run: Run, to: Integer) -> Run:
    """Return the run of a pointer to cells of the same width (C99 6.5, paragraph 7)."""
    view = (to.bits, to.signed)

    def seen(frame: Frame) -> Content:
        p = run(frame)
        assert isinstance(p, Pointer)
        if p is NULL or p.block.kind == view:
            return p
        if p.block.kind is None or p.block.kind[0] != to.bits:
            site.refused("pointer-to-other-cells")
        return Pointer(p.block, p.index, (p.low, p.high), p.tags, view)

    return seen


def as_pointer(u: Unit, given: tuple[Pointing, Run], target: Pointing, node: c_ast.Node) -> Run:
    """Return the run of a pointer as by assignment to another pointer type."""
    kind, run = given
    if kind.constant and not target.constant:
        u.refuse(node, "constant-dropped")
    if isinstance(kind.to, Void) and isinstance(target.to, Integer):
        return _seen_as(u.at(node), run, target.to)
    if isinstance(target.to, Void) or kind.to == target.to:
        return run
    if isinstance(kind.to, Array) and isinstance(target.to, Array) and kind.to.of == target.to.of:
        return run
    u.refuse(node, "incompatible-pointer")
