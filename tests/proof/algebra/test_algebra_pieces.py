"""Functions affine in pieces, against lists of their values."""

from collections.abc import Callable

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from guardbit.proof.algebra.pieces import (
    LIMIT,
    Pieces,
    TooManyPiecesError,
    argument,
    common_divisor,
    dense,
    stretches,
)
from guardbit.proof.algebra.shelf import Shelf
from tools import examples

Drawn = tuple[Pieces, list[int]]

TABLE = tuple(7 * i % 13 - 6 for i in range(64))


def _unary(shelf: Shelf, name: str, f: Pieces, n: int) -> tuple[Pieces, Callable[[int], int]]:
    match name:
        case "scaled":
            return shelf.scaled(f, n - 8, 3 * n), lambda v: (n - 8) * v + 3 * n
        case "floor":
            n *= 1 if n < 15 else 37
            return shelf.floor_divided(f, n), lambda v: v // n
        case "negative":
            return shelf.negative(shelf.scaled(f, 1, n)), lambda v: int(v + n < 0)
        case "rest":
            down = shelf.scaled(shelf.floor_divided(f, n), -n, 0)
            return shelf.sum(f, down), lambda v: v % n
        case _:
            low = shelf.scaled(shelf.floor_divided(f, 64), -64, 0)
            return shelf.looked_up(TABLE, shelf.sum(f, low)), lambda v: TABLE[v % 64]


def _binary(shelf: Shelf, name: str, f: Drawn, g: Drawn) -> Drawn:
    a, b = f[1], g[1]
    match name:
        case "sum":
            return shelf.sum(f[0], g[0]), [x + y for x, y in zip(a, b, strict=True)]
        case "product":
            return shelf.product(f[0], g[0]), [x * y for x, y in zip(a, b, strict=True)]
        case "and":
            made = shelf.pointwise("and", f[0], g[0], lambda x, y: x & y)
            return made, [x & y for x, y in zip(a, b, strict=True)]
        case _:
            mask = shelf.negative(f[0])
            return shelf.chosen(mask, f[0], g[0]), [
                x if x < 0 else y for x, y in zip(a, b, strict=True)
            ]


@st.composite
def functions(draw: st.DrawFn) -> tuple[Shelf, list[Drawn]]:
    """Draw a domain and functions on it, each made of earlier ones, with lists of their values."""
    shelf = Shelf()
    first = draw(st.integers(-300, 300))
    last = first + draw(st.sampled_from((0, 1, 2, 5, 40, 400)))
    made: list[Drawn] = []
    for slope, offset in ((1, 0), (draw(st.integers(-9, 9)), draw(st.integers(-99, 99)))):
        values = [slope * x + offset for x in range(first, last + 1)]
        made.append((shelf.affine(first, last, slope, offset), values))
    names = ("scaled", "floor", "negative", "rest", "look", "sum", "product", "and", "chosen")
    for name in draw(st.lists(st.sampled_from(names), max_size=7)):
        f, g = draw(st.sampled_from(made)), draw(st.sampled_from(made))
        n = draw(st.integers(1, 20))
        try:
            if name in ("sum", "product", "and", "chosen"):
                made.append(_binary(shelf, name, f, g))
            else:
                h, of = _unary(shelf, name, f[0], n)
                made.append((h, [of(v) for v in f[1]]))
        except TooManyPiecesError:
            # products of products leave 64 bits
            assert max(abs(v) for v in (*f[1], *g[1])) > 1 << 20
    return shelf, made


@settings(max_examples=examples(150), deadline=None)
@given(functions())
def test_operations_agree_with_lists(drawn: tuple[Shelf, list[Drawn]]) -> None:
    _, made = drawn
    for f, values in made:
        assert dense(f) == values
        assert [f.at(x) for x in (f.first, f.last)] == [values[0], values[-1]]


@settings(max_examples=examples(150), deadline=None)
@given(functions())
def test_equal_functions_are_one_object(drawn: tuple[Shelf, list[Drawn]]) -> None:
    _, made = drawn
    for f, values in made:
        for g, others in made:
            assert (f is g) == (values == others)


@settings(max_examples=examples(100), deadline=None)
@given(functions(), st.data())
def test_what_is_asked_of_a_function(drawn: tuple[Shelf, list[Drawn]], data: st.DataObject) -> None:
    shelf, made = drawn
    f, values = made[-1]
    a = data.draw(st.integers(f.first, f.last))
    b = data.draw(st.integers(a, f.last))
    part = values[a - f.first : b - f.first + 1]
    assert shelf.range(f, a, b) == (min(part), max(part))
    assert common_divisor(f) == np.gcd.reduce([v - values[0] for v in values])
    wanted = data.draw(st.sampled_from(values))
    found = argument(f, wanted, a, b)
    assert (found is None) == (wanted not in part)
    assert found is None or values[found - f.first] == wanted
    mask = shelf.negative(f)
    holding = [x for low, high in stretches(mask, a, b) for x in range(low, high + 1)]
    assert holding == [x for x in range(a, b + 1) if values[x - f.first] < 0]


@settings(max_examples=examples(100), deadline=None)
@given(functions(), st.integers(-9, 9).filter(bool), st.integers(-99, 99))
def test_the_normal_form_is_that_of_every_multiple(
    drawn: tuple[Shelf, list[Drawn]], factor: int, add: int
) -> None:
    shelf, made = drawn
    f, values = made[-1]
    if len(set(values)) == 1 or max(map(abs, values)) > 1 << 40:
        return
    normal, other = shelf.normal(f), shelf.normal(shelf.scaled(f, factor, add))
    assert normal.steps is other.steps
    assert [normal.offset + normal.factor * s for s in dense(normal.steps)] == values


@settings(max_examples=examples(100), deadline=None)
@given(functions())
def test_floors_that_are_known_hold(drawn: tuple[Shelf, list[Drawn]]) -> None:
    shelf, made = drawn
    for f, values in made:
        for g, q, m in f.floors:
            assert [(g * x + q) // m for x in range(f.first, f.last + 1)] == values
        if len(set(values)) > 1:
            steps = shelf.normal(f).steps
            for g, q, m in steps.floors:
                assert [(g * x + q) // m for x in range(f.first, f.last + 1)] == dense(steps)


def test_a_wide_domain_takes_no_more_pieces_than_results() -> None:
    shelf = Shelf()
    wide = shelf.affine(-(1 << 31), (1 << 31) - 1, 1, 0)
    for slope in (1, -1, (1 << 20) - 1):
        steep = shelf.scaled(wide, slope, 5)
        assert len(shelf.floor_divided(steep, 1 << 20).starts) <= (1 << 13) + 1
    assert len(shelf.negative(wide).starts) == 2


def test_too_many_pieces_and_too_large_numbers_are_refused() -> None:
    shelf = Shelf()
    wide = shelf.affine(0, 1 << 40, 1, 0)
    with pytest.raises(TooManyPiecesError):
        shelf.floor_divided(wide, 4)
    with pytest.raises(TooManyPiecesError):
        shelf.scaled(wide, 1 << 22, 0)
    with pytest.raises(TooManyPiecesError):
        shelf.affine(0, LIMIT, 1, 0)
    with pytest.raises(TooManyPiecesError):
        shelf.product(wide, wide)
    # what fits is exact: NumPy would have wrapped silently
    assert shelf.scaled(wide, 1 << 20, 0).at(1 << 40) == 1 << 60
