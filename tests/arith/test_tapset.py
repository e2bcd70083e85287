"""Ranges over sets of coefficients, against every loading and every extreme pixel."""

from itertools import product

import pytest
from hypothesis import given
from hypothesis import strategies as st

from guardbit.arith.tapset import (
    EmptySetError,
    corner_loadings,
    extreme_loading,
    is_exact,
    is_member,
    range_of,
)
from guardbit.model.filter import TapSet
from guardbit.model.sizing import Interval

LIMITS = st.tuples(st.integers(-3, 3), st.integers(-3, 3)).map(sorted)


@st.composite
def sets(draw: st.DrawFn) -> TapSet:
    count = draw(st.integers(1, 4))
    limits = draw(st.lists(LIMITS, min_size=count, max_size=count))
    if draw(st.booleans()):
        limits = [limits[0]] * count
    return TapSet(
        count,
        tuple(range(count)),
        tuple(low for low, _ in limits),
        tuple(high for _, high in limits),
        draw(st.none() | st.integers(-5, 5)),
        draw(st.none() | st.integers(0, 9)),
        (),
    )


def loadings(s: TapSet) -> list[tuple[int, ...]]:
    """Every legal loading, from the definition."""
    limits = zip(s.least, s.greatest, strict=True)
    return [
        taps
        for taps in product(*(range(low, high + 1) for low, high in limits))
        if s.sum in (None, sum(taps))
        and (s.magnitudes is None or sum(map(abs, taps)) <= s.magnitudes)
    ]


@given(sets(), st.data())
def test_ranges_are_those_of_all_loadings(s: TapSet, data: st.DataObject) -> None:
    low, high = sorted((data.draw(st.integers(-4, 4)), data.draw(st.integers(-4, 4))))
    inside = [i for i in range(s.count) if data.draw(st.booleans())]
    legal = loadings(s)
    if not legal:
        with pytest.raises(EmptySetError):
            range_of(s, inside, Interval(low, high))
        return
    ends = [[sorted((taps[i] * low, taps[i] * high)) for i in inside] for taps in legal]
    least = min(sum(e[0] for e in each) for each in ends)
    greatest = max(sum(e[1] for e in each) for each in ends)
    assert is_exact(s)
    assert range_of(s, inside, Interval(low, high)) == Interval(least, greatest)
    for is_greatest, end in ((False, least), (True, greatest)):
        taps = extreme_loading(s, inside, Interval(low, high), greatest=is_greatest)
        assert taps in legal
        pick = max if is_greatest else min
        assert sum(pick(taps[i] * low, taps[i] * high) for i in inside) == end


@given(sets())
def test_corners_are_legal_and_attain_the_ends(s: TapSet) -> None:
    legal = loadings(s)
    if not legal:
        return
    corners = corner_loadings(s)
    assert set(corners) <= set(legal) and all(is_member(s, taps) for taps in corners)
    assert max(sum(map(abs, taps)) for taps in corners) == max(sum(map(abs, t)) for t in legal)
    if s.sum is None:
        assert {sum(t) for t in corners} >= {f(map(sum, legal)) for f in (min, max)}


def test_a_list_of_kernels() -> None:
    s = TapSet(2, (0, 1), (-9, -9), (9, 9), None, None, ((1, 2), (-3, 4)))
    assert range_of(s, [0, 1], Interval(0, 10)) == Interval(-30, 40)
    assert range_of(s, [0], Interval(0, 10)) == Interval(-30, 10)
    assert corner_loadings(s) == ((1, 2), (-3, 4))
    assert is_member(s, (-3, 4)) and not is_member(s, (1, 4))


def test_many_wide_registers_give_a_bound() -> None:
    count = 64
    s = TapSet(count, tuple(range(count)), (-(2**20),) * count, (2**20,) * count, 1, None, ())
    assert not is_exact(s)
    assert range_of(s, range(count), Interval(0, 255)).high == 255 * count * 2**20
