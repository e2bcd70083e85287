"""Pixels that take a sum to a value, or near it, with the ideal code as far away as can be."""

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import replace
from typing import cast

from guardbit.model.sizing import Interval
from guardbit.sizing.error.choices import Made, Work, choices, made_results
from guardbit.sizing.error.inputs import Inputs
from guardbit.sizing.error.peaks import Found, peak
from guardbit.sizing.error.pixels import items_of
from guardbit.sizing.error.subject import Subject
from guardbit.sizing.error.table import Choices
from guardbit.sizing.passes import is_vertical_first
from guardbit.study.adversary.calm import calm_pixels
from guardbit.study.adversary.nearby import near_counts

Pixels = Mapping[tuple[int, int], int]

WORK = Work(list=1 << 18, table=1 << 24)


def pixels_at(s: Subject, found: Found) -> Iterator[Pixels]:
    """Yield choices of pixels, less the pedestal, for the sum at which the bound was found.

    Where all choices can be gone through, the best of them is one.
    """
    yield from calm_pixels(s)
    every, span = choices(s, WORK), s.stairs.quiet()
    best = None if every is None or span is None else peak(s, s.stairs, span, WORK)
    if every is not None and best is not None and not best.exact and best.n not in every.numbers:
        best = None
    if every is not None and best is not None:
        options = every.options(best.n)
        yield single_pixels(s, options) if s.results is None else _double_pixels(s, options)
    elif s.results is None:
        for counts in near_counts(s, found.n):
            yield single_pixels(s, counts)
    else:
        yield from _from_columns(s, found)


def _from_columns(s: Subject, found: Found) -> Iterator[Pixels]:
    sides = sides_of(s)
    if sides is not None:
        from guardbit.study.adversary.columns import results_near

        for wanted in results_near(replace(s, clamped=found.clamped), sides, found.n):
            yield placed(s, sides, wanted)


def single_pixels(s: Subject, counts: Sequence[int]) -> Pixels:
    """Return the pixels of a single pass, from how many steps each weight's inputs go up."""
    return cast(Pixels, values_of(s.case.last, s.case.values, s.sign, counts))


def values_of(
    inputs: Inputs, values: Interval, sign: int, counts: Sequence[int]
) -> dict[object, int]:
    """Return the value of each input by its place.

    `counts` says of each weight that adds how many steps its inputs together are from where
    they add least; others are where they cost least.
    """
    weights, _, _ = items_of(inputs, values, sign)
    left = {(w.amount, w.ideal): count for w, count in zip(weights, counts, strict=True)}
    chosen = dict[object, int]()
    for place, (amount, ideal) in inputs.places.items():
        if not amount:
            chosen[place] = values.low if sign * ideal > 0 else values.high
            continue
        taken = min(left[amount, ideal], values.high - values.low)
        left[amount, ideal] -= taken
        chosen[place] = values.low + taken if amount > 0 else values.high - taken
    return chosen


Sides = tuple[Made, Made]


def sides_of(s: Subject) -> Sides | None:
    """Return the results with the least and with the greatest ideal; None: too much work."""
    least, most = (made_results(s, sign, WORK) for sign in (1, -1))
    return None if least is None or most is None else (least, most)


def _double_pixels(s: Subject, options: Sequence[int]) -> Pixels:
    sides, left, wanted = sides_of(s), list(options), list[int]()
    assert sides is not None
    for amount, ideal in s.case.last.places.values():
        side = sides[0] if s.sign * ideal >= 0 else sides[1]
        option = left.pop(0) if amount else int(side.costs.argmin())
        wanted.append(int(side.values[option]))
    return placed(s, sides, wanted)


def placed(s: Subject, sides: Sides, wanted: Sequence[int]) -> Pixels:
    """Return pixels that make a result wanted for each place that the last pass reads."""
    vertical, chosen = is_vertical_first(s.filter), dict[tuple[int, int], int]()
    for (place, (_, ideal)), value in zip(s.case.last.places.items(), wanted, strict=True):
        sign = 1 if s.sign * ideal >= 0 else -1
        for at, pixel in _column(s, sides[0] if sign > 0 else sides[1], sign, value).items():
            assert isinstance(at, int) and isinstance(place, int)
            chosen[(at, place) if vertical else (place, at)] = pixel
    return chosen


def _column(s: Subject, side: Made, sign: int, value: int) -> dict[object, int]:
    """Return the pixels along the first pass that make a result."""
    assert s.case.first is not None
    number = int(side.numbers[side.values.searchsorted(value)])
    found: Choices = side.choices
    return values_of(s.case.first, s.case.values, sign, found.options(number))
