"""Specs built by hand, with the defaults that are constants, and an exhaustive search."""

from collections.abc import Callable, Iterable, Sequence
from dataclasses import replace
from fractions import Fraction
from functools import cache
from itertools import product
from typing import Any

import numpy as np
from numpy.typing import NDArray

from guardbit.fit.resolve import resolve
from guardbit.model.enums import (
    BorderMode,
    Extent,
    First,
    FitRule,
    Grid,
    Operation,
    Outside,
    Overflow,
    Preload,
    Rounding,
    Scale,
)
from guardbit.model.filter import Kernel
from guardbit.model.spec import (
    AccumulatorTable,
    Auto,
    BorderTable,
    CoefficientTable,
    FilterTable,
    ImageTable,
    InputTable,
    IntermediateTable,
    KernelTable,
    Matrix,
    OutputTable,
    Spec,
    Vector,
)

ACCUMULATOR = AccumulatorTable(Auto.AUTO, True, Overflow.FORBID, Preload.ZERO)
PRELOADED = replace(ACCUMULATOR, preload=Preload.ROUNDING)
INTERMEDIATE = IntermediateTable(
    First.VERTICAL,
    8,
    True,
    None,
    0,
    Rounding.TIES_TO_POSITIVE,
    Overflow.SATURATE,
    ACCUMULATOR,
)
PLAIN = Spec(
    path="station.toml",
    digest="d",
    lines={},
    filter=FilterTable("station", Operation.CONVOLUTION, ""),
    kernel=KernelTable(None, None, None, (Fraction(1),), None, "taps"),
    input=InputTable(8, False, 0, 0, None, None, Outside.UNDEFINED),
    coefficient=CoefficientTable(
        Auto.AUTO, True, (Auto.AUTO,), FitRule.NEAREST, Scale.BINARY, None
    ),
    intermediate=None,
    accumulator=ACCUMULATOR,
    output=OutputTable(
        None, None, None, 0, None, None, Rounding.TIES_TO_POSITIVE, Overflow.SATURATE
    ),
    border=BorderTable(BorderMode.CONSTANT, None, Grid.PIXEL),
    image=ImageTable(Extent.SAME, (1, 65535), (1, 65535), (1, 1), (0, 0), (1, 1), 1),
)
EXACT: dict[str, Any] = {"scale": Scale.EXACT}
GAIN: dict[str, Any] = {"fit": FitRule.GAIN}


def vector(values: Iterable[int | str]) -> Vector:
    return tuple(Fraction(value) for value in values)


def matrix(rows: Iterable[Iterable[int | str]]) -> Matrix:
    return tuple(vector(row) for row in rows)


def spec(
    taps: Sequence[Sequence[int | str]] | None = None,
    column: Sequence[int | str] | None = None,
    row: Sequence[int | str] | None = None,
    lines: dict[str, int] | None = None,
    **tables: dict[str, Any] | None,
) -> Spec:
    """Return a spec; each table is a dict of the keys that differ from the defaults."""
    between = tables.pop("intermediate", None)
    kernel: dict[str, Any] = {
        "taps": None if taps is None else matrix(taps),
        "column": None if column is None else vector(column),
        "row": None if row is None else vector(row),
        **(tables.pop("kernel", None) or {}),
    }
    if "divisor" in kernel:
        kernel["divisor"] = tuple(
            Fraction(each) if isinstance(each, int) else each for each in kernel["divisor"]
        )
    made = replace(PLAIN, kernel=replace(PLAIN.kernel, **kernel), lines=lines or {})
    if between is not None:
        made = replace(made, intermediate=replace(INTERMEDIATE, **between))
    changed = {name: replace(getattr(made, name), **keys) for name, keys in tables.items() if keys}
    return replace(made, **changed)


Array = NDArray[Any]
_FLIPS: list[Callable[[Array], Array]] = [
    lambda m: m[..., ::-1, :],
    lambda m: m[..., ::-1],
    lambda m: m[..., ::-1, ::-1],
]
_TURNS: list[Callable[[Array], Array]] = [
    lambda m: np.swapaxes(m, -1, -2),
    lambda m: np.rot90(m, 1, axes=(-2, -1)),
    lambda m: np.rot90(m, 3, axes=(-2, -1)),
    lambda m: np.rot90(np.swapaxes(m, -1, -2), 2, axes=(-2, -1)),
]


def exhaustive_gain(units: Array, unit: int, low: int, high: int) -> Array | None:
    """Return the contract's `gain` fit of units / unit by trying every vector there is."""
    shape = units.shape
    total = round(Fraction(int(units.sum()), unit))
    every = _every(units.size, low, high).reshape(-1, *shape)
    legal = every[every.sum(axis=(1, 2)) == total]
    if not len(legal):
        return None
    tied = legal[_alike(legal, units)]
    legal = tied if len(tied) else legal
    off = legal * unit - units
    cost = abs(off).sum(axis=(1, 2)), (off**2).sum(axis=(1, 2))
    # A stable sort: of equal costs the first in lexicographic order stays first.
    best: Array = legal[np.lexsort(cost[::-1])[0]]
    return best


@cache
def _every(count: int, low: int, high: int) -> Array:
    """Return all vectors of that length in low..high, in lexicographic order."""
    return np.array(list(product(range(low, high + 1), repeat=count)), dtype=np.int64)


def _alike(candidates: Array, units: Array) -> NDArray[np.bool_]:
    keep = np.ones(len(candidates), dtype=np.bool_)
    square = units.shape[0] == units.shape[1]
    for move in [*_FLIPS, *(_TURNS if square else [])]:
        for sign in (1, -1):
            if np.array_equal(move(units), sign * units):
                keep &= (move(candidates) == sign * candidates).all(axis=(1, 2))
    return keep


def kernel(made: Spec) -> Kernel:
    (only,) = resolve(made).passes
    return only.kernel


def integers(made: Kernel) -> list[int]:
    return [term.integer for term in made.terms]
