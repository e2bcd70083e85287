"""Side effects without an order: a variable changed twice, or changed and read, in one expression.

C99 6.5, paragraph 2: between two sequence points an object is changed at most once, and its old
value read only to find the new one. Checked for named variables, which is where it happens.
"""

from collections.abc import Iterator
from dataclasses import dataclass

from pycparser import c_ast

_STEPS = ("++", "--", "p++", "p--")


@dataclass(frozen=True)
class _Effects:
    """Variables read, and variables changed by side effects, with no sequence point after."""

    reads: frozenset[str]
    writes: frozenset[str]


_NONE = _Effects(frozenset(), frozenset())


class UnsequencedError(Exception):
    """Two operands that C does not order touch one variable, one of them changing it."""

    def __init__(self, node: c_ast.Node, name: str) -> None:
        super().__init__(name)
        self.node = node
        self.name = name


def check(node: c_ast.Node) -> None:
    """Raise UnsequencedError if anything in a full expression is unsequenced."""
    _effects(node)


def _effects(node: c_ast.Node | None) -> _Effects:
    match node:
        case None | c_ast.Constant() | c_ast.Typename():
            return _NONE
        case c_ast.ID():
            return _Effects(frozenset([node.name]), frozenset())
        case c_ast.Assignment():
            return _assigned(node)
        case c_ast.UnaryOp(op=op) if op in _STEPS:
            inside = _effects(node.expr)
            return _written(node, inside, node.expr)
        case c_ast.UnaryOp(op="sizeof"):
            return _NONE
        case c_ast.BinaryOp(op=op) if op in ("&&", "||"):
            return _in_order(node.left, node.right)
        case c_ast.TernaryOp():
            branches = _in_order(node.iftrue, node.iffalse)
            first = _effects(node.cond)
            return _Effects(first.reads | branches.reads, first.writes | branches.writes)
        case c_ast.ExprList():
            return _in_order(*node.exprs)
        case c_ast.FuncCall():
            arguments = node.args.exprs if node.args else []
            return _unordered(node, [_effects(each) for each in arguments])
        case _:
            return _unordered(node, [_effects(child) for _, child in node.children()])


def _in_order(*nodes: c_ast.Node) -> _Effects:
    found = [_effects(each) for each in nodes]
    return _Effects(
        frozenset().union(*(e.reads for e in found)), frozenset().union(*(e.writes for e in found))
    )


def _unordered(node: c_ast.Node, parts: list[_Effects]) -> _Effects:
    for i, one in enumerate(parts):
        for other in parts[i + 1 :]:
            clash = (one.writes & (other.reads | other.writes)) | (other.writes & one.reads)
            if clash:
                raise UnsequencedError(node, min(clash))
    return _Effects(
        frozenset().union(*(e.reads for e in parts)), frozenset().union(*(e.writes for e in parts))
    )


def _assigned(node: c_ast.Assignment) -> _Effects:
    value = _effects(node.rvalue)
    if isinstance(node.lvalue, c_ast.ID):
        name = node.lvalue.name
        if name in value.writes:
            raise UnsequencedError(node, name)
        return _Effects(value.reads, value.writes | {name})
    return _unordered(node, [_effects(node.lvalue), value])


def _written(node: c_ast.Node, inside: _Effects, target: c_ast.Node) -> _Effects:
    if not isinstance(target, c_ast.ID):
        return inside
    if target.name in inside.writes:
        raise UnsequencedError(node, target.name)
    return _Effects(frozenset(), inside.writes | {target.name})


def full_expressions(node: c_ast.Node) -> Iterator[c_ast.Node]:
    """Yield every full expression in a statement."""
    if isinstance(node, _NO_EXPRESSION):
        return
    if isinstance(node, c_ast.Decl):
        if node.init is not None:
            yield node.init
    elif isinstance(node, _STATEMENTS):
        for _, child in node.children():
            yield from full_expressions(child)
    else:
        yield node


_NO_EXPRESSION = (
    c_ast.Break,
    c_ast.Continue,
    c_ast.EmptyStatement,
    c_ast.Goto,
    c_ast.Pragma,
    c_ast.Typedef,
    c_ast.StaticAssert,
)
_STATEMENTS = (
    c_ast.Compound,
    c_ast.DeclList,
    c_ast.If,
    c_ast.For,
    c_ast.While,
    c_ast.DoWhile,
    c_ast.Switch,
    c_ast.Case,
    c_ast.Default,
    c_ast.Label,
    c_ast.Return,
)
