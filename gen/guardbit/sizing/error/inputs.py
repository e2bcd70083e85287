"""What the sum and the ideal code depend on: the free pixels of a border class, with weights.

A border that repeats pixels only equates some of them, and a constant that is a legal value is
one choice of a pixel. So what holds for pixels that are all free holds in every class, and it
is enough to look at the interior, if the legal images have one. Else the classes are walked
one by one where that is affordable, and elsewhere every tap gets a pixel of its own.
"""

from collections import Counter
from collections.abc import Callable, Hashable, Iterable, Mapping, Sequence
from dataclasses import dataclass, field, replace
from fractions import Fraction
from functools import cached_property
from itertools import product
from math import gcd, lcm

from guardbit.arith.classes import Pattern, interior
from guardbit.arith.intervals import hull
from guardbit.arith.rounding import ratio, requantise
from guardbit.model.enums import Extent
from guardbit.model.filter import Filter, Pass
from guardbit.model.sizing import Interval
from guardbit.sizing.lines import COLUMN, ROW, Line, axis_lines, axis_of, constant_value
from guardbit.sizing.outcome import ended
from guardbit.sizing.passes import (
    is_nested,
    is_preloaded,
    is_vertical_first,
    pixel_values,
    start_value,
)

# Taps of all the classes that are walked, and classes.
WALK_WORK = 20_000
WALK_CASES = 256

Read = Callable[[int], int | None]
# what an input is multiplied by in the sum and in the ideal
Pair = tuple[int, int]


@dataclass(frozen=True)
class Weight:
    """`count` inputs alike: a value x adds amount * x to the sum and ideal * x to the ideal."""

    amount: int
    ideal: int
    count: int


@dataclass(frozen=True)
class Inputs:
    """A sum of weighted inputs, and the ideal value of the same inputs over `denominator`.

    `amount` and `ideal` are what start value, pedestal and a constant border add to both.
    `places` says which image index, or pair of them, each input is read at.
    """

    weights: tuple[Weight, ...]
    amount: int
    ideal: int
    denominator: int
    places: Mapping[Hashable, Pair] = field(compare=False, repr=False)

    @cached_property
    def common(self) -> int:
        """Return the greatest common divisor of what inputs add to the sum; 0 without any."""
        return gcd(*(weight.amount for weight in self.weights))


@dataclass(frozen=True)
class Case:
    """A border class, or a relaxation that covers many.

    One pass: `last` has the pixels as inputs, of `values`, and the ideal code as its ideal.
    Two: the inputs of `last` are results of the first pass, and `first` says what each of
    them is made of, its ideal being the ideal first pass; the ideals of `last` are in
    1/`last.denominator` per 1/`first.denominator`. `row` and `column` give an image of the
    class; without them no image need attain what the case allows.
    """

    last: Inputs
    first: Inputs | None
    values: Interval
    row: Line | None
    column: Line | None

    @property
    def denominator(self) -> int:
        """Return what the ideal code is a multiple of 1 over."""
        return self.last.denominator * (self.first.denominator if self.first else 1)


@dataclass(frozen=True)
class Cases:
    """Cases that cover every output position; `exact` if all of them are classes."""

    items: tuple[Case, ...]
    exact: bool


def cases(f: Filter) -> Cases:
    """Return the cases of a filter whose widths are resolved."""
    inner = _interior(f)
    if _is_free(f):
        if inner is not None:
            return Cases((class_case(f, *inner),), True)
        walked = _walk(f)
        return walked or Cases((_relaxed(f, pixel_values(f.input)),), False)
    walked = _walk(f)
    constant = constant_value(f) or 0
    legal = pixel_values(f.input)
    return walked or Cases((_relaxed(f, hull([legal, Interval(constant, constant)])),), False)


def _is_free(f: Filter) -> bool:
    """Return whether free pixels can do whatever a border makes a tap read."""
    return is_nested(f) or f.geometry.extent is Extent.VALID


def _offsets(f: Filter) -> tuple[list[int], list[int]]:
    """Return the offsets that ideal or integer taps read, on both axes."""
    found: list[list[int]] = []
    for axis in (0, 1):
        offsets = {0}
        for p in f.passes:
            own = {(t.dy, t.dx)[axis] for t in p.kernel.terms} or {0}
            offsets = {a + b for a in offsets for b in own}
        found.append(sorted(offsets))
    return found[0], found[1]


def _interior(f: Filter) -> tuple[Line, Line] | None:
    made = []
    for word, offsets in zip((ROW, COLUMN), _offsets(f), strict=True):
        pattern = interior(axis_of(f, word), f.geometry.extent, offsets)
        if pattern is None:
            return None
        made.append(_inner_line(pattern))
    return made[0], made[1]


def _inner_line(pattern: Pattern) -> Line:
    return Line(
        "interior", pattern.length, pattern.position, 0, 0, lambda offset: pattern.position + offset
    )


def _walk(f: Filter) -> Cases | None:
    """Return every class, those that amount to the same once; None if they are too many."""
    lines = axis_classes(f)
    pairs = len(lines[0]) * len(lines[1])
    taps = sum(len(p.kernel.terms) for p in f.passes)
    if not pairs or pairs > WALK_CASES or pairs * max(taps, 1) > WALK_WORK:
        return None
    found: dict[tuple[Inputs, Inputs | None], Case] = {}
    for row, column in product(*lines):
        made = class_case(f, row, column)
        found.setdefault((made.last, made.first), made)
    return Cases(tuple(found.values()), True)


def axis_classes(f: Filter) -> tuple[list[Line], list[Line]]:
    """Return the classes of rows and of columns for ideal and integer taps, interior first."""
    rows, columns = _offsets(f)
    return axis_lines(f, ROW, rows), axis_lines(f, COLUMN, columns)


def class_case(f: Filter, row: Line, column: Line) -> Case:
    """Return the case of a class of rows and one of columns."""
    last, first = _inputs(f, row.read, column.read)
    return Case(last, first, pixel_values(f.input), row, column)


def _relaxed(f: Filter, values: Interval) -> Case:
    """Return the case in which every tap reads a pixel of its own, of any of `values`."""
    last, first = _inputs(f, _itself, _itself)
    return Case(last, first, values, None, None)


def _inputs(f: Filter, row: Read, column: Read) -> tuple[Inputs, Inputs | None]:
    if len(f.passes) == 1:
        return _single(f, row, column), None
    along = (row, column) if is_vertical_first(f) else (column, row)
    return _double(f, *along)


def _scale(f: Filter) -> Fraction:
    return Fraction(2) ** (f.output.frac - f.input.frac)


def whole(ratios: Sequence[Fraction]) -> tuple[list[int], int]:
    """Return the numbers' numerators over their least common denominator, and that."""
    common = lcm(*(r.denominator for r in ratios))
    return [r.numerator * (common // r.denominator) for r in ratios], common


def _inputs_of(
    reads: Iterable[tuple[Hashable | None, int, int]], constant: int, denominator: int
) -> Inputs:
    """Return the inputs of (place or None for the constant, amount, ideal), added up by place."""
    sums: dict[Hashable | None, Pair] = {None: (0, 0)}
    for at, amount, ideal in reads:
        old = sums.get(at, (0, 0))
        sums[at] = old[0] + amount, old[1] + ideal
    outside = sums.pop(None)
    places = {at: pair for at, pair in sums.items() if at is not None and pair != (0, 0)}
    alike = Counter(places.values())
    weights = tuple(Weight(*pair, n) for pair, n in sorted(alike.items()))
    return Inputs(weights, outside[0] * constant, outside[1] * constant, denominator, places)


def _single(f: Filter, row: Read, column: Read) -> Inputs:
    p, constant = f.passes[0], constant_value(f) or 0
    ideals, denominator = whole([_scale(f) * t.ideal for t in p.kernel.terms])
    reads = []
    for term, ideal in zip(p.kernel.terms, ideals, strict=True):
        y, x = row(term.dy), column(term.dx)
        reads.append((None if y is None or x is None else (y, x), term.integer, ideal))
    made = _inputs_of(reads, constant, denominator)
    pedestal = f.output.pedestal * denominator
    return replace(made, amount=made.amount + start_value(p), ideal=made.ideal + pedestal)


def _along(p: Pass, read: Read, scale: Fraction, constant: int) -> Inputs:
    ideals, denominator = whole([scale * t.ideal for t in p.kernel.terms])
    reads = [
        (read(term.dy + term.dx), term.integer, ideal)
        for term, ideal in zip(p.kernel.terms, ideals, strict=True)
    ]
    return _inputs_of(reads, constant, denominator)


def _double(f: Filter, along_first: Read, along_second: Read) -> tuple[Inputs, Inputs]:
    """Return the inputs of the second and of the first pass.

    The amounts of the first leave out its start value: rounding then is that of the sum.
    """
    one, two = f.passes
    constant = constant_value(f) or 0
    first = _along(one, along_first, Fraction(1), constant)
    last = _along(two, along_second, _scale(f), 1)
    # a position of the second pass beyond a constant border reads constants alone
    result, ideal = _beyond(one, constant)
    amount = start_value(two) + last.amount * result
    pedestal = f.output.pedestal * last.denominator * first.denominator
    outside = last.ideal * int(ideal * first.denominator)
    return replace(last, amount=amount, ideal=pedestal + outside), first


def _beyond(p: Pass, constant: int) -> tuple[int, Fraction]:
    """Return the first pass's result, less its pedestal, and its ideal, on constants alone."""
    amounts = (t.integer * constant for t in p.kernel.terms if t.integer)
    held = ended(p.accumulator, start_value(p), amounts)
    result = requantise(p.requantiser, is_preloaded(p), held) - p.requantiser.to.pedestal
    return result, sum((t.ideal for t in p.kernel.terms), Fraction(0)) * constant


@dataclass(frozen=True)
class Form:
    """The ideal code of a case and fitted minus ideal value, as linear forms of its pixels.

    The amount of a weight is its share of the ideal code, its ideal that of the difference:
    both, and what constants add to them, in 1/`denominator`.
    """

    inputs: Inputs
    values: Interval


def form(f: Filter, case: Case) -> Form:
    """Return the form of a case; of two passes, that of the outer product of their taps."""
    row = case.row.read if case.row else _itself
    column = case.column.read if case.column else _itself
    taps = [(0, 0, Fraction(1), _scale(f))]
    for p in f.passes:
        unit = Fraction(*ratio(p.requantiser))
        taps = [
            (y + t.dy, x + t.dx, fitted * t.integer * unit, ideal * t.ideal)
            for y, x, fitted, ideal in taps
            for t in p.kernel.terms
        ]
    numbers, denominator = whole([n for _, _, fitted, ideal in taps for n in (ideal, fitted)])
    reads = []
    for (dy, dx, _, _), ideal, fitted in zip(taps, numbers[::2], numbers[1::2], strict=True):
        y, x = row(dy), column(dx)
        reads.append((None if y is None or x is None else (y, x), ideal, fitted - ideal))
    inputs = _inputs_of(reads, constant_value(f) or 0, denominator)
    pedestal = f.output.pedestal * denominator
    return Form(replace(inputs, amount=inputs.amount + pedestal), case.values)


def _itself(offset: int) -> int:
    return offset
