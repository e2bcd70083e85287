"""C expressions with their casts, printed from a plan. All other C stands in the templates.

Every expression is defined and means the same under 16-, 32- and 64-bit int: arithmetic is
done in a type that the plan has shown to be wide enough, operands are cast to it before use
unless C's own int will do, and no negative number is shifted.
"""

from guardbit.model.enums import Container
from guardbit.model.plan import (
    Cell,
    Exact,
    Floor,
    Product,
    Quotient,
    Thresholds,
    TiesToAway,
    TiesToEven,
    Truncate,
)

_MINIMA = {-(1 << 31): "INT32_MIN", -(1 << 63): "INT64_MIN"}


def cell_type(cell: Cell) -> str:
    """Return the C type of a cell."""
    return f"{'int' if cell.signed else 'uint'}{cell.bits}_t"


def container_type(container: Container) -> str:
    """Return the C type of a container."""
    return ("int" if container.value[0] == "i" else "uint") + container.value[1:] + "_t"


def number(value: int) -> str:
    """Return a C99 constant; its type is the first of int, long, long long that holds it."""
    return _MINIMA.get(value, str(value))


def plus(expression: str, value: int) -> str:
    """Return the expression with a constant added, in C's usual spelling."""
    if value == 0:
        return expression
    if value in _MINIMA:
        return f"{expression} + {number(value)}"
    return f"{expression} {'-' if value < 0 else '+'} {abs(value)}"


def grouped(expression: str) -> str:
    """Return the expression in brackets, unless it is one name or call."""
    return expression if " " not in expression else f"({expression})"


def product(term: Product, read: str, cell: Cell, word: Cell) -> str:
    """Return coefficient * value in the type of `cell`, a minus sign in front.

    A 16-bit cell is int's own work; a word that has the type already needs no cast.
    """
    value = read if cell.bits == 16 or cell == word else f"({cell_type(cell)}){read}"
    if term.coefficient in (1, -1):
        return ("-" if term.coefficient < 0 else "") + value
    return f"{number(term.coefficient)} * {value}"


def total(products: list[str], width: int) -> list[str]:
    """Return the sum of the products in lines of at most `width` columns, operators in front."""
    lines = [products[0]]
    for text in products[1:]:
        piece = f" - {text[1:]}" if text.startswith("-") else f" + {text}"
        if len(lines[-1]) + len(piece) > width:
            lines.append(piece[1:])
        else:
            lines[-1] += piece
    return lines


def divide(dividend: str, divisor: int) -> str:
    """Return the quotient of a dividend that is never negative."""
    if divisor & (divisor - 1) == 0:
        return f"{grouped(dividend)} >> {divisor.bit_length() - 1}"
    return f"{grouped(dividend)} / {number(divisor)}"


def floor_divide(name: str, divisor: int) -> str:
    """Return the quotient of a variable of either sign, rounded down."""
    return f"{name} / {number(divisor)} - ({name} % {number(divisor)} < 0)"


def quotient(form: Quotient, n: str) -> tuple[tuple[tuple[str, str], ...], str]:
    """Return (variables with their values, expression) for the rounded quotient of `n`."""
    match form:
        case Exact():
            return (), n
        case Thresholds(up, down):
            return (), _thresholds(n, up, down)
        case Floor(add, divisor, _, natural):
            if natural:
                return (), divide(plus(n, add), divisor)
            return (("t", plus(n, add)),), floor_divide("t", divisor)
        case TiesToEven(add, divisor, _, natural):
            floor = divide("t", divisor) if natural else floor_divide("t", divisor)
            tie = f"q - (t % {number(divisor)} == 0 && q % 2 != 0)"
            return (("t", plus(n, add)), ("q", floor)), tie
        case Truncate(divisor):
            return (), f"{n} / {number(divisor)}"
        case TiesToAway(half, divisor):
            moved = f"{n} < 0 ? {plus(n, -half)} : {plus(n, half)}"
            return (), f"({moved}) / {number(divisor)}"


def _thresholds(n: str, up: int | None, down: int | None) -> str:
    above = f"({n} >= {number(up)})" if up is not None else ""
    if down is None:
        return above or "0"
    return f"{above or '0'} - ({n} <= {number(down)})"


def with_offset(form: Quotient, expression: str, offset: int) -> str:
    """Return the quotient with the offset added; a shift binds less than a sum."""
    if offset == 0:
        return expression
    return plus(f"({expression})" if ">>" in expression else expression, offset)


def low_bits(value: str, bits: int, unsigned: str) -> str:
    """Return the lowest `bits` bits of a value; conversion to an unsigned type is modular."""
    full = f"({unsigned}){value}"
    return full if unsigned == f"uint{bits}_t" else f"{full} & {2**bits - 1:#x}"


def from_low_bits(bits: int, signed: bool, result: str, wide: str) -> str:
    """Return the number that the lowest bits in `low` stand for, as a `result`.

    Nothing out of range is ever converted to a signed type: the upper half is moved down first.
    """
    if not signed:
        return f"({result})low"
    half = 1 << (bits - 1)
    upper = plus(f"({wide})(low - {half:#x})", -half)
    if wide == result:
        return f"low < {half:#x} ? ({wide})low : {upper}"
    return f"({result})(low < {half:#x} ? ({wide})low : {upper})"
