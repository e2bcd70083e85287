"""Binary operators on two integers of one type."""

from pycparser import c_ast

from guardbit.proof.c.conversions import arithmetic, bitwise, division
from guardbit.proof.c.scope import Number
from guardbit.proof.c.types import Integer
from guardbit.proof.c.unit import Unit

ARITHMETIC = ("+", "-", "*")
BITWISE = ("&", "|", "^")
SHIFTS = ("<<", ">>")


def operated(
    u: Unit, node: c_ast.Node, kind: Integer, operation: tuple[str, Number, Number]
) -> Number:
    """Return the run of an operator on two operands that both have the type."""
    op, left, right = operation
    site = u.at(node)
    if op in ARITHMETIC:
        return arithmetic(site, op, kind, left, right)
    if op in ("/", "%"):
        return division(site, op, kind, left, right)
    if op in BITWISE:
        return bitwise(site, op, left, right)
    u.refuse(node, "operator", op)
