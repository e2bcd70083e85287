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
_INT_MAX = 32767


def cell_type(cell: Cell) -> str:
    """Return the C type of a cell."""
    return f"{'int' if cell.signed else 'uint'}{cell.bits}_t"


def container_type(container: Container) -> str:
    """Return the C type of a container."""
    return cell_type(Cell(container.bits, container.signed))


def number(value: int) -> str:
    """Return a C99 constant; its type is the first of int, long, long long that holds it.

    Only what none of them holds, uint64's upper half, is unsigned (6.4.4.1p5).
    """
    if value > (1 << 63) - 1:
        return f"{value}u"
    return _MINIMA.get(value, str(value))


def plus(expression: str, value: int) -> str:
    """Return the expression with a constant added, in C's usual spelling."""
    if value == 0:
        return expression
    if value in _MINIMA:
        return f"{expression} + {number(value)}"
    return f"{expression} {'-' if value < 0 else '+'} {number(abs(value))}"


def times(factor: int, expression: str) -> str:
    """Return the expression multiplied by a constant."""
    return expression if factor == 1 else f"{factor} * {grouped(expression)}"


def grouped(expression: str) -> str:
    """Return the expression in brackets, unless it is one name, cast or call."""
    return f"({expression})" if _is_open(expression) else expression


def _is_open(expression: str) -> bool:
    """Return whether there is a space outside of all brackets."""
    depth = 0
    for character in expression:
        depth += {"(": 1, "[": 1, ")": -1, "]": -1}.get(character, 0)
        if character == " " and depth == 0:
            return True
    return False


def cast(kind: str, expression: str, held: str) -> str:
    """Return the expression converted from type `held` to `kind`."""
    return expression if kind == held else f"({kind}){grouped(expression)}"


def product(term: Product, read: str, cell: Cell, word: Cell) -> str:
    """Return coefficient * value in the type of `cell`, a minus sign in front.

    A 16-bit cell is int's own work; a word that has the type already needs no cast.
    """
    value = read if cell.bits == 16 or cell == word else f"({cell_type(cell)}){read}"
    if term.coefficient in (1, -1):
        return ("-" if term.coefficient < 0 else "") + value
    return f"{number(term.coefficient)} * {value}"


def loaded_product(tap: str, read: str, cells: tuple[Cell, Cell, Cell]) -> str:
    """Return tap * value; `cells` are the product's, the tap's and that of the rows.

    An operand is cast unless C's own conversions give it the product's type on any machine.
    A tap that is narrower than the product, or as wide with its sign, follows the value.
    """
    cell, held, word = cells
    if cell.bits == 16:
        return f"{tap} * {read}"
    value = read if cell == word else f"({cell_type(cell)}){read}"
    follows = held == cell or (held.bits < cell.bits and (cell.signed or not held.signed))
    return f"{tap if follows else f'({cell_type(cell)}){tap}'} * {value}"


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
    below = f"({n} <= {number(down)})" if down is not None else ""
    return f"{above or '0'} - {below}" if below else above


def with_offset(form: Quotient, expression: str, offset: int, work: Cell) -> str:
    """Return the quotient with the offset added.

    A shift binds less than a sum. Comparisons are of type int, which may be too small for
    the sum (and is signed).
    """
    if not expression:
        return number(offset)
    if isinstance(form, Thresholds) and (abs(offset) >= _INT_MAX or not work.signed):
        expression = f"({cell_type(work)}){grouped(expression)}"
    if ">>" in expression and offset:
        expression = f"({expression})"
    return plus(expression, offset)


def low_bits(value: str, bits: int, unsigned: str) -> str:
    """Return the lowest `bits` bits of a value; conversion to an unsigned type is modular."""
    full = f"({unsigned}){value}"
    return full if unsigned == f"uint{bits}_t" else f"{full} & {2**bits - 1:#x}"


def from_low_bits(bits: int, signed: bool, result: str, unsigned: str) -> str:
    """Return the number that the lowest bits in `low`, of type `unsigned`, stand for.

    Nothing out of range is ever converted to a signed type (6.3.1.3p3): the upper half is
    moved down first. `result` holds every number of the format.
    """
    if not signed:
        return cast(result, "low", unsigned)
    half = 1 << (bits - 1)
    wide = holder(-half, half - 1)
    choice = f"low < {half:#x} ? ({wide})low : {plus(f'({wide})(low - {half:#x})', -half)}"
    return choice if wide == result else f"({result})({choice})"


def holder(low: int, high: int) -> str:
    """Return the type, int32_t or int64_t, that holds low..high."""
    return "int32_t" if low >= -(1 << 31) and high < 1 << 31 else "int64_t"
