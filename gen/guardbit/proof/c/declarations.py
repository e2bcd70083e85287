"""Declarations: types as they are written, and what objects begin with."""

from collections.abc import Iterator

from pycparser import c_ast

from guardbit.proof.c.scope import Enumerator, Frame
from guardbit.proof.c.types import Array, Function, Integer, Pointing, Struct, Type, Void
from guardbit.proof.c.unit import Unit


def named_type(u: Unit, node: c_ast.Node) -> Type:
    """Return the type that a declaration, a declarator or a type name denotes."""
    match node:
        case c_ast.Typename() | c_ast.Decl() | c_ast.Typedef():
            return named_type(u, node.type)
        case c_ast.TypeDecl():
            return named_type(u, node.type)
        case c_ast.IdentifierType():
            return _by_words(u, node)
        case c_ast.PtrDecl():
            return _pointer(u, node)
        case c_ast.ArrayDecl():
            return _array(u, node)
        case c_ast.FuncDecl():
            return _function(u, node)
        case c_ast.Struct():
            return _struct(u, node)
        case c_ast.Enum():
            return _enum(u, node)
        case c_ast.Union():
            u.refuse(node, "union")
        case _:
            u.refuse(node, "type")


def is_constant(node: c_ast.Node) -> bool:
    """Return whether the object that a declaration names may not be written."""
    match node:
        case c_ast.Decl() | c_ast.Typename():
            return is_constant(node.type)
        case c_ast.TypeDecl():
            return "const" in node.quals
        case c_ast.ArrayDecl():
            return is_constant(node.type)
        case c_ast.PtrDecl():
            return "const" in node.quals
        case _:
            return False


def _by_words(u: Unit, node: c_ast.IdentifierType) -> Type:
    if len(node.names) == 1:
        name = node.names[0]
        found = u.scope.find_type(name)
        if found is not None:
            return found
        if name == "void":
            return Void()
    if {"float", "double", "_Complex"} & set(node.names):
        u.refuse(node, "floating-point")
    kind = u.types.named(list(node.names))
    if kind is None:
        u.refuse(node, "type")
    return kind


def _pointer(u: Unit, node: c_ast.PtrDecl) -> Type:
    if isinstance(node.type, c_ast.FuncDecl):
        u.refuse(node, "function-pointer")
    constant = is_constant(node.type)
    return Pointing(named_type(u, node.type), constant, "restrict" in node.quals)


def _array(u: Unit, node: c_ast.ArrayDecl) -> Type:
    of = named_type(u, node.type)
    if node.dim is None:
        return Array(of, -1, is_constant(node.type))
    count = constant_value(u, node.dim)
    if count is None:
        u.refuse(node, "array-of-variable-length")
    if count <= 0:
        u.refuse(node, "array-size")
    return Array(of, count, is_constant(node.type))


def constant_value(u: Unit, node: c_ast.Node) -> int | None:
    """Return the value of an integer constant expression; None if it is none."""
    if any(isinstance(n, c_ast.ID) and not _is_number(u, n) for n in _walk(node)):
        return None
    if any(isinstance(n, c_ast.Assignment | c_ast.FuncCall) for n in _walk(node)):
        return None
    kind, run = u.value(node)
    frame: Frame = []
    value = run(frame)
    return value if isinstance(kind, Integer) and isinstance(value, int) else None


def _is_number(u: Unit, node: c_ast.ID) -> bool:
    return isinstance(u.scope.find(node.name), Enumerator)


def _walk(node: c_ast.Node) -> Iterator[c_ast.Node]:
    yield node
    if isinstance(node, c_ast.UnaryOp) and node.op == "sizeof":
        return
    for _, child in node.children():
        yield from _walk(child)


def _function(u: Unit, node: c_ast.FuncDecl) -> Type:
    returns = named_type(u, node.type)
    parameters = []
    for each in node.args.params if node.args else ():
        if isinstance(each, c_ast.EllipsisParam):
            u.refuse(node, "variable-arguments")
        kind = parameter_type(u, each)
        if not isinstance(kind, Void):
            parameters.append(kind)
    return Function(returns, tuple(parameters))


def parameter_type(u: Unit, node: c_ast.Node) -> Type:
    """Return the type of a parameter: arrays are pointers (C99 6.7.5.3)."""
    inner = node.type
    if isinstance(inner, c_ast.ArrayDecl):
        return Pointing(named_type(u, inner.type), is_constant(inner.type))
    return named_type(u, node)


def _struct(u: Unit, node: c_ast.Struct) -> Type:
    if node.decls is None:
        found = u.scope.find_tag(node.name)
        return found if found is not None else Struct(node.name, ())
    fields = []
    for each in node.decls:
        if each.bitsize is not None:
            u.refuse(each, "bit-field")
        fields.append((each.name, named_type(u, each)))
    made = Struct(node.name or f"at {node.coord}", tuple(fields))
    if node.name:
        u.scope.tags[node.name] = made
    return made


def _enum(u: Unit, node: c_ast.Enum) -> Type:
    value = -1
    for each in node.values.enumerators if node.values else ():
        if each.value is not None:
            found = constant_value(u, each.value)
            if found is None:
                u.refuse(each, "constant")
            value = found
        else:
            value += 1
        u.scope.names[each.name] = Enumerator(value)
    return u.types.int
