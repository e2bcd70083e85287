"""Kernels by formula: what each one is, its parameters, and its exact taps.

The taps are the impulse response, in the order of the kernel's rows and columns. Signs are
those of `operation = "convolution"`; with "correlation" a first derivative changes its sign,
the other formulas are symmetric and do not change.

Every formula but the Laplacian is an outer product and gives a column and a row. Where
divisor and frac are scalars, their outer product is fitted as one matrix, as if it had been
written out; with pairs, each vector is fitted alone.
"""

from collections.abc import Mapping
from dataclasses import dataclass
from decimal import ROUND_HALF_EVEN, Context, Decimal
from enum import StrEnum
from fractions import Fraction
from math import comb

from guardbit.model.spec import Matrix, Vector
from guardbit.spec.ideal import Ideal

DIGITS = 50

# Twenty digits to spare: neither the quotient nor exp() disturbs the 50th decimal.
_WORK = Context(prec=DIGITS + 20, rounding=ROUND_HALF_EVEN)
_LAST = Decimal(1).scaleb(-DIGITS)


class Formula(StrEnum):
    """The values of `kernel.formula`."""

    BINOMIAL = "binomial"
    BOX = "box"
    GAUSSIAN = "gaussian"
    FIRST_DERIVATIVE = "first-derivative"
    SECOND_DERIVATIVE = "second-derivative"
    LAPLACIAN = "laplacian"


class Direction(StrEnum):
    """The values of `kernel.axis`: along the rows' index, or along the columns'."""

    VERTICAL = "vertical"
    HORIZONTAL = "horizontal"


@dataclass(frozen=True)
class Parameters:
    """What a formula needs, pairs as (vertical, horizontal); unused ones are None."""

    size: tuple[int, int] | None = None
    sigma: tuple[Fraction, Fraction] | None = None
    axis: Direction | None = None
    neighbours: int | None = None


@dataclass(frozen=True)
class Recipe:
    """What a person is told about one formula, and the parameters it takes."""

    needs: tuple[str, ...]
    explanation: str


RECIPES: Mapping[Formula, Recipe] = {
    Formula.BINOMIAL: Recipe(
        ("size",),
        "Rows of Pascal's triangle: size 5 is 1 4 6 4 1. Taps sum to 2^(rows + columns - 2); "
        'divisor = "sum" gives a gain of 1.',
    ),
    Formula.BOX: Recipe(
        ("size",), 'All taps 1. They sum to rows * columns; divisor = "sum" gives the mean.'
    ),
    Formula.GAUSSIAN: Recipe(
        ("size", "sigma"),
        "exp(-d^2 / (2 sigma^2)) per axis, sampled at the taps' distances d from the centre of "
        "the box (halves where the size is even), to 50 decimals; 1 at the centre, not scaled: "
        'divisor = "sum" gives a gain of 1.',
    ),
    Formula.FIRST_DERIVATIVE: Recipe(
        ("axis", "size"),
        "Central difference along axis, binomial smoothing across it and, from size 5 on, along "
        "it. Convolution gives the slope per pixel, positive where the image grows with "
        "the index along axis, times 2^(along - 2) * 2^(across - 1), for a size of along and "
        "across (3 and 3: times 8). Correlation gives its negative.",
    ),
    Formula.SECOND_DERIVATIVE: Recipe(
        ("axis", "size"),
        "Second difference 1 -2 1 along axis, binomial smoothing across it and, from size 5 "
        "on, along it. Gives the second derivative per pixel squared, positive in a valley, "
        "times 2^(along - 3) * 2^(across - 1), for a size of along and across "
        "(3 and 3: times 4).",
    ),
    Formula.LAPLACIAN: Recipe(
        ("neighbours",),
        "The sum of the 4 or 8 neighbours less 4 or 8 times the centre. Gives the Laplacian per "
        "pixel squared, positive in a valley, times 1 (4 neighbours) or times 3 (8).",
    ),
}


def evaluate(formula: Formula, given: Parameters) -> Ideal:
    """Return the ideal taps: a column and a row, or a matrix where there are no such vectors.

    `given` holds what the formula's recipe needs, checked: sizes 1..255 (derivatives: odd,
    at least 3 along the axis), sigma > 0, neighbours 4 or 8.
    """
    if formula is Formula.LAPLACIAN:
        return Ideal(taps=laplacian(given.neighbours or 4))
    height, width = given.size or (1, 1)
    if formula is Formula.BINOMIAL:
        return Ideal(column=binomial(height), row=binomial(width))
    if formula is Formula.BOX:
        return Ideal(column=(Fraction(1),) * height, row=(Fraction(1),) * width)
    if formula is Formula.GAUSSIAN:
        down, across = given.sigma or (Fraction(1), Fraction(1))
        return Ideal(column=gaussian(height, down), row=gaussian(width, across))
    order = 1 if formula is Formula.FIRST_DERIVATIVE else 2
    if given.axis is Direction.VERTICAL:
        return Ideal(column=derivative(order, height), row=binomial(width))
    return Ideal(column=binomial(height), row=derivative(order, width))


def binomial(size: int) -> Vector:
    """Return row `size` - 1 of Pascal's triangle."""
    return tuple(Fraction(comb(size - 1, k)) for k in range(size))


def gaussian(size: int, sigma: Fraction) -> Vector:
    """Return exp(-d^2 / (2 sigma^2)) at each tap's distance d from the centre.

    To 50 decimals, ties to even, then exact: a tap under half of 10^-50 is zero.
    """
    doubled = range(1 - size, size, 2)
    return tuple(_exponential(Fraction(d * d, 8) / (sigma * sigma)) for d in doubled)


def _exponential(power: Fraction) -> Fraction:
    """Return exp(-power) to 50 decimals."""
    if power > 200:
        return Fraction(0)  # exp(-200) < 10^-86
    quotient = _WORK.divide(Decimal(power.numerator), Decimal(power.denominator))
    value = _WORK.exp(_WORK.minus(quotient))
    return Fraction(value.quantize(_LAST, ROUND_HALF_EVEN, _WORK))


def derivative(order: int, size: int) -> Vector:
    """Return the difference of that order (1 or 2) along an axis, smoothed to `size` taps.

    1: (1, 0, -1), which convolved with a ramp of slope 1 gives 2. 2: (1, -2, 1). Both are
    convolved with the binomial of `size` - 2.
    """
    core = (1, 0, -1) if order == 1 else (1, -2, 1)
    result = [Fraction(0)] * size
    for start, weight in enumerate(binomial(size - 2)):
        for k, tap in enumerate(core):
            result[start + k] += weight * tap
    return tuple(result)


def laplacian(neighbours: int) -> Matrix:
    """Return the 3x3 sum of 4 or 8 neighbours less as many times the centre."""
    corner = Fraction(1 if neighbours == 8 else 0)
    side, centre = Fraction(1), Fraction(-neighbours)
    edge = (corner, side, corner)
    return (edge, (side, centre, side), edge)
