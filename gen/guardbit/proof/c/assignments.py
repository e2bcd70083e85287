"""Assignments: conversion to a type, what is stored, and what that is worth."""

from pycparser import c_ast

from guardbit.proof.c.conversions import arithmetic, converted, shift
from guardbit.proof.c.operators import SHIFTS, operated
from guardbit.proof.c.places import Spot, moved, spot
from guardbit.proof.c.pointers import as_pointer, is_null
from guardbit.proof.c.scope import Frame, Run, number
from guardbit.proof.c.types import Integer, Pointing, Struct, Type
from guardbit.proof.c.unit import Typed, Unit
from guardbit.proof.machine.memory import NULL, Content, Pointer


def assignment(u: Unit, node: c_ast.Assignment) -> Typed:
    """Return type and run of an assignment."""
    s = spot(u, node.lvalue)
    if s.constant:
        u.refuse(node, "assignment-to-constant")
    if node.op == "=":
        run = assigned(u, s.kind, node.rvalue)
        if isinstance(s.kind, Struct):
            return s.kind, _struct_assignment(u, s, run, node)
    else:
        run = _compound(u, s, node)
    store = s.store

    def assign(frame: Frame) -> Content:
        value = run(frame)
        store(frame, value)
        return value

    return s.kind, assign


def _struct_assignment(u: Unit, s: Spot, run: Run, node: c_ast.Node) -> Run:
    site, address = u.at(node), s.address
    assert address is not None

    def assign(frame: Frame) -> Content:
        values = run(frame)
        start = address(frame)
        assert isinstance(start, Pointer) and isinstance(values, tuple)
        for k, value in enumerate(values):
            at = Pointer(start.block, start.index + k, (start.low, start.high), start.tags)
            if value is not None:
                site.store(at, value)
        return values

    return assign


def _compound(u: Unit, s: Spot, node: c_ast.Assignment) -> Run:
    """Return the run of the new value of e.g. a += b, which is that of a = a + (b)."""
    op, site = node.op[:-1], u.at(node)
    right_kind, right = u.value(node.rvalue)
    if isinstance(s.kind, Pointing) and op in ("+", "-"):
        return moved(u.at(node), s.kind, s.load, right, down=op == "-")
    if not isinstance(s.kind, Integer) or not isinstance(right_kind, Integer):
        u.refuse(node, "incompatible-types")
    if op in SHIFTS:
        common = u.types.promoted(s.kind)
        left = converted(site, number(s.load), s.kind, common)
        made = shift(site, op, common, left, number(right))
    else:
        common = u.types.common(s.kind, right_kind)
        left = converted(site, number(s.load), s.kind, common)
        second = converted(u.at(node.rvalue), number(right), right_kind, common)
        made = operated(u, node, common, (op, left, second))
    return converted(site, made, common, s.kind)


def stepped(u: Unit, node: c_ast.UnaryOp) -> Typed:
    """Return type and run of ++ or --, before or after."""
    s = spot(u, node.expr)
    up, after = node.op.endswith("++"), node.op.startswith("p")
    kind, load, store = s.kind, s.load, s.store

    def one(_: Frame) -> int:
        return 1

    old: list[Content] = [None]

    def remembered(frame: Frame) -> Content:
        old[0] = load(frame)
        return old[0]

    changed: Run
    if isinstance(kind, Pointing):
        changed = moved(u.at(node), kind, remembered, one, down=not up)
    elif isinstance(kind, Integer):
        common = u.types.common(kind, u.types.int)
        widened = converted(u.at(node), number(remembered), kind, common)
        sum_ = arithmetic(u.at(node), "+" if up else "-", common, widened, one)
        changed = converted(u.at(node), sum_, common, kind)
    else:
        u.refuse(node, "incompatible-types")

    def step(frame: Frame) -> Content:
        value = changed(frame)
        before = old[0]
        store(frame, value)
        return before if after else value

    return kind, step


def assigned(u: Unit, target: Type, node: c_ast.Node) -> Run:
    """Return the run of an expression converted as by assignment to a type (C99 6.5.16.1)."""
    if isinstance(target, Pointing) and is_null(node):
        return lambda _: NULL
    kind, run = u.value(node)
    if isinstance(target, Integer) and isinstance(kind, Integer):
        return converted(u.at(node), number(run), kind, target)
    if isinstance(target, Pointing) and isinstance(kind, Pointing):
        return as_pointer(u, (kind, run), target, node)
    if isinstance(target, Struct) and target == kind:
        return run
    u.refuse(node, "incompatible-types")
