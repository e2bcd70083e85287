"""Coefficients that are loaded at run time: their cells, their set and the width they need."""

from typing import Any

import pytest

from guardbit.fit.resolve import resolve
from guardbit.model.enums import Operation
from guardbit.model.filter import Kernel, TapSet
from guardbit.model.spec import Registers

from .specs import integers, kernel, spec

Rows = tuple[tuple[int, ...], ...]


def registers(
    least: Rows,
    greatest: Rows,
    sum: int | None = None,
    magnitudes: int | None = None,
    kernels: tuple[Rows, ...] = (),
) -> dict[str, Any]:
    return {"registers": Registers(least, greatest, sum, magnitudes, kernels)}


def held(made: Kernel) -> TapSet:
    assert made.registers is not None
    return made.registers


def test_terms_are_the_cells_that_can_be_other_than_zero() -> None:
    made = kernel(
        spec(
            [[1, 0, 2], [0, 4, 0]],
            coefficient=registers(((0, 0, 0), (0, 0, -1)), ((9, 0, 8), (5, 7, 0))),
        )
    )
    # convolution reads the last cell first; the cell at (0, 1) holds nothing but 0
    assert integers(made) == [0, 4, 0, 2, 1]
    assert [(t.dy, t.dx) for t in made.terms] == [(-1, -1), (-1, 0), (-1, 1), (0, -1), (0, 1)]
    s = held(made)
    assert (s.count, s.cells) == (6, (5, 4, 3, 2, 0))
    assert (s.least, s.greatest) == ((-1, 0, 0, 0, 0), (0, 7, 5, 8, 9))


def test_correlation_reads_the_cells_as_they_stand() -> None:
    made = kernel(
        spec(
            [[1, 2, 3]],
            filter={"operation": Operation.CORRELATION},
            coefficient=registers(((0, 0, 0),), ((9, 8, 7),), sum=6, magnitudes=11),
        )
    )
    s = held(made)
    assert (s.cells, s.greatest, s.sum, s.magnitudes) == ((0, 1, 2), (9, 8, 7), 6, 11)


def test_kernels_stand_in_the_order_of_the_terms_each_once() -> None:
    rows = (((1, 2),), ((3, 4),), ((1, 2),))
    made = kernel(spec([[1, 2]], coefficient=registers(((1, 2),), ((3, 4),), kernels=rows)))
    assert held(made).kernels == ((2, 1), (4, 3))


@pytest.mark.parametrize(
    ("least", "greatest", "signed", "bits"),
    [(0, 7, True, 4), (0, 7, False, 3), (-8, 7, True, 4), (-9, 2, True, 5), (1, 1, True, 2)],
)
def test_auto_takes_the_fewest_bits_that_hold_the_set(
    least: int, greatest: int, signed: bool, bits: int
) -> None:
    table = registers(((least,),), ((greatest,),)) | {"signed": signed}
    assert kernel(spec([[1]], coefficient=table)).bits == bits


def test_taps_that_are_not_exact_are_rounded_beside_a_set_that_gives_the_width() -> None:
    table = registers(((0, 0),), ((7, 7),)) | {"frac": (3,)}
    assert integers(kernel(spec([["1/3", "2/3"]], coefficient=table))) == [5, 3]


def test_without_registers_there_is_no_set() -> None:
    (only,) = resolve(spec([[1]])).passes
    assert only.kernel.registers is None
