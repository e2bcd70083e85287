"""Whole specs resolved: defaults, formats, terms, passes, and published kernels."""

import pickle
from dataclasses import replace
from fractions import Fraction
from typing import Any

import pytest

from guardbit.fit.resolve import resolve
from guardbit.model.enums import (
    BorderMode,
    Container,
    Extent,
    First,
    FitRule,
    Operation,
    Overflow,
    Rounding,
    Scale,
)
from guardbit.model.filter import Axis, Border, Kernel, PixelFormat
from guardbit.model.spec import Auto, Pinned, Sum

from .specs import EXACT, GAIN, PRELOADED, integers, kernel, spec

CORRELATION = {"operation": Operation.CORRELATION}
AUTO = Auto.AUTO
ZERO = Fraction(0)


def reads(made: Kernel) -> list[tuple[int, int, int]]:
    return [(term.dy, term.dx, term.integer) for term in made.terms]


# Formats.


def test_defaults_follow_the_input() -> None:
    made = resolve(spec([[1]], input={"bits": 10, "signed": True, "frac": 3, "pedestal": -7}))
    assert made.input == PixelFormat(10, True, 3, -7, -512, 511, Container.I16)
    assert made.output == PixelFormat(10, True, 3, 0, -512, 511, Container.I16)
    assert made.border == Border(BorderMode.CONSTANT, -7, made.border.grid)


@pytest.mark.parametrize(
    ("bits", "signed", "wanted"),
    [
        (1, False, Container.U8),
        (8, False, Container.U8),
        (9, False, Container.U16),
        (16, False, Container.U16),
        (17, False, Container.U32),
        (32, False, Container.U32),
        (1, True, Container.I8),
        (8, True, Container.I8),
        (9, True, Container.I16),
        (16, True, Container.I16),
        (17, True, Container.I32),
        (32, True, Container.I32),
    ],
)
def test_smallest_container(bits: int, signed: bool, wanted: Container) -> None:
    made = resolve(spec([[1]], output={"bits": bits, "signed": signed}))
    assert made.output.container is wanted
    assert made.output.high - made.output.low == 2**bits - 1


def test_named_container_range_and_border_value() -> None:
    made = resolve(
        spec(
            [[1]],
            input={"range": (16, 235), "container": Container.I16, "pedestal": 16},
            output={"range": (1, 254), "bits": 9, "pedestal": 5, "frac": -2},
            border={"value": 255},
        )
    )
    assert made.input == PixelFormat(8, False, 0, 16, 16, 235, Container.I16)
    assert made.output == PixelFormat(9, False, -2, 5, 1, 254, Container.U16)
    # Outside the range, not outside the format.
    assert made.border.value == 255


# Geometry. Displacements and offsets worked by hand.


@pytest.mark.parametrize(
    ("keys", "wanted"),
    [
        ({}, [(0, -1, 2), (0, 0, 1)]),
        ({"filter": CORRELATION}, [(0, 0, 1), (0, 1, 2)]),
        ({"kernel": {"origin": (0, 1)}}, [(0, 0, 2), (0, 1, 1)]),
        ({"kernel": {"origin": (2, -3)}}, [(2, -4, 2), (2, -3, 1)]),
        ({"image": {"spacing": (5, 3)}}, [(0, -3, 2), (0, 0, 1)]),
    ],
)
def test_terms_in_raster_order_of_what_they_read(
    keys: dict[str, Any], wanted: list[tuple[int, int, int]]
) -> None:
    assert reads(kernel(spec([[1, 2]], **keys))) == wanted


def test_terms_of_a_whole_kernel() -> None:
    taps = [[1, 2, 3], [4, 5, 0]]
    assert reads(kernel(spec(taps))) == [
        (-1, 0, 5),
        (-1, 1, 4),
        (0, -1, 3),
        (0, 0, 2),
        (0, 1, 1),
    ]
    assert reads(kernel(spec(taps, filter=CORRELATION))) == [
        (0, -1, 1),
        (0, 0, 2),
        (0, 1, 3),
        (1, -1, 4),
        (1, 0, 5),
    ]


@pytest.mark.parametrize(
    ("keys", "rows", "columns"),
    [
        # Default origin (1, 1) of 3x4.
        ({}, (-1, 1), (-1, 2)),
        ({"filter": CORRELATION}, (-1, 1), (-2, 1)),
        ({"kernel": {"origin": (0, 0)}}, (0, 2), (0, 3)),
        ({"kernel": {"origin": (4, -2)}}, (-4, -2), (2, 5)),
        ({"kernel": {"origin": (4, -2)}, "filter": CORRELATION}, (2, 4), (-5, -2)),
        ({"image": {"spacing": (2, 3)}}, (-2, 2), (-3, 6)),
    ],
)
def test_ends_of_displacements_count_zero_taps(
    keys: dict[str, Any], rows: tuple[int, int], columns: tuple[int, int]
) -> None:
    taps = [[0, 0, 0, 0], [0, 1, 0, 0], [0, 0, 0, 0]]
    found = resolve(spec(taps, **keys)).geometry
    assert (found.rows.least, found.rows.greatest) == rows
    assert (found.columns.least, found.columns.greatest) == columns


def test_geometry_is_carried_over() -> None:
    image = {
        "extent": Extent.FULL,
        "width": (3, 640),
        "height": (2, 480),
        "step": (2, 3),
        "phase": (1, 2),
        "spacing": (4, 5),
        "channels": 3,
    }
    found = resolve(spec([[1]], image=image)).geometry
    assert (found.extent, found.channels) == (Extent.FULL, 3)
    assert found.rows == Axis(0, 0, (2, 480), 2, 1, 4)
    assert found.columns == Axis(0, 0, (3, 640), 3, 2, 5)


def test_zero_kernel_has_no_terms() -> None:
    for coefficient in ({}, GAIN | {"bits": 4}, EXACT):
        made = kernel(spec([[0, 0], [0, 0]], coefficient=coefficient))
        assert not made.terms
        assert made.frac == made.residual == 0


def test_tap_fitted_to_zero_is_kept() -> None:
    made = kernel(spec([["0.01", 1, 0]], coefficient={"bits": 3, "frac": (1,)}))
    assert [(term.ideal, term.integer) for term in made.terms] == [(1, 2), (Fraction(1, 100), 0)]
    assert made.residual == Fraction(-2, 100)


# Coefficients.


@pytest.mark.parametrize(
    ("bits", "frac", "wanted", "found_bits", "found_frac"),
    [
        (AUTO, (AUTO,), [1, 2, 1], 3, 2),
        (AUTO, (4,), [4, 8, 4], 5, 4),
        (8, (AUTO,), [1, 2, 1], 8, 2),
        (8, (0,), [0, 0, 0], 8, 0),
        # The exact frac is 2; in 2 bits the largest at which the taps fit is 1: 1/2, 1, 1/2.
        (2, (AUTO,), [0, 1, 0], 2, 1),
    ],
)
def test_auto(
    bits: int | Auto,
    frac: tuple[int | Auto],
    wanted: list[int],
    found_bits: int,
    found_frac: int,
) -> None:
    made = kernel(
        spec([[1, 2, 1]], kernel={"divisor": (4,)}, coefficient={"bits": bits, "frac": frac})
    )
    assert (integers(made), made.bits, made.frac) == (wanted, found_bits, found_frac)
    assert made.divisor == 1


def test_gain_is_used_and_reported() -> None:
    taps = [[1, 5, 8, 5, 1]]
    made = kernel(
        spec(taps, kernel={"divisor": (Sum.SUM,)}, coefficient=GAIN | {"bits": 8, "frac": (5,)})
    )
    # Ideal 1.6, 8, 12.8, 8, 1.6.
    assert integers(made) == [2, 8, 12, 8, 2]
    assert (made.rule, made.residual) == (FitRule.GAIN, ZERO)


def test_auto_frac_for_gain_is_where_the_free_fit_fits() -> None:
    made = kernel(spec([[1, 1, 1]], kernel={"divisor": (3,)}, coefficient=GAIN | {"bits": 4}))
    # 2^4 / 3: 5, 6, 5; at frac 5 the middle would be 10, over 7.
    assert (integers(made), made.frac, made.residual) == ([5, 6, 5], 4, ZERO)


@pytest.mark.parametrize("keys", [{"signed": False}, {"bits": 1}])
def test_unsigned_or_tiny_registers_take_what_they_can(keys: dict[str, Any]) -> None:
    sign = 1 if "signed" in keys else -1
    made = kernel(spec([[sign]], coefficient={"bits": 1} | keys))
    assert integers(made) == [sign]


def test_pinned_integers_are_used_as_they_are() -> None:
    pinned = Pinned(((1, 9, 1),), None, None)
    coefficient = {"fit": FitRule.RESPONSE, "frac": (4,), "bits": 5, "pinned": pinned}
    made = kernel(spec([[1, 8, 1]], kernel={"divisor": (16,)}, coefficient=coefficient))
    assert (integers(made), made.rule, made.residual) == ([1, 9, 1], None, Fraction(1))
    automatic = kernel(
        spec([[1, 8, 1]], kernel={"divisor": (16,)}, coefficient=coefficient | {"bits": AUTO})
    )
    assert automatic.bits == 5


def test_exact_scale_reduces_nothing() -> None:
    made = kernel(spec([[2, 4, 2]], kernel={"divisor": (8,)}, coefficient=EXACT))
    assert (integers(made), made.divisor, made.frac, made.scale) == ([2, 4, 2], 8, 0, Scale.EXACT)
    assert (made.bits, made.residual) == (4, ZERO)
    summed = kernel(
        spec([[1] * 5] * 5, kernel={"divisor": (Sum.SUM,)}, coefficient=EXACT | {"frac": (9,)})
    )
    assert (summed.divisor, summed.frac) == (25, 0)
    assert all(term.ideal == Fraction(1, 25) for term in summed.terms)


# Column and row.


def test_scalars_fit_the_outer_product_as_one() -> None:
    made = kernel(
        spec(
            column=[1, 3],
            row=[1, 3],
            kernel={"divisor": (16,)},
            coefficient={"bits": 5, "frac": (2,)},
        )
    )
    # 1/4, 3/4, 3/4, 9/4; each vector alone could not keep the parts below 1/2.
    assert sorted(integers(made)) == [0, 1, 1, 2]


def test_pairs_fit_each_vector_alone() -> None:
    keys: dict[str, Any] = {"divisor": (Fraction(4), Fraction(2))}
    made = kernel(
        spec(
            column=[1, 3],
            row=[1, 3],
            kernel=keys,
            coefficient={"bits": 8, "frac": (1, 2)},
        )
    )
    # Column 1/2, 3/2 -> 0, 2; row 2, 6.
    assert reads(made) == [(-1, -1, 12), (-1, 0, 4), (0, -1, 0), (0, 0, 0)]
    assert (made.frac, made.divisor) == (3, 1)
    assert sum(term.ideal for term in made.terms) == 2
    assert made.residual == 0


def test_pair_of_exact_divisors_multiplies() -> None:
    made = kernel(
        spec(
            column=[2, 2],
            row=[1, 1, 1],
            kernel={"divisor": (Fraction(4), Sum.SUM)},
            coefficient=EXACT,
        )
    )
    assert (made.divisor, set(integers(made)), made.residual) == (12, {2}, ZERO)


def test_products_get_a_register_that_holds_them() -> None:
    made = kernel(spec(column=[-8, 7], row=[-8, 1], coefficient={"bits": 4, "frac": (0, 0)}))
    assert (made.bits, sorted(integers(made))) == (8, [-56, -8, 7, 64])


def test_left_out_keys_follow_the_pair() -> None:
    by_frac = kernel(
        spec(column=[1, 2], row=["1/2", 1], coefficient={"bits": 8, "frac": (AUTO, 3)})
    )
    assert by_frac.frac == 3
    by_divisor = kernel(spec(column=[1, 2], row=[1, 1], kernel={"divisor": (2, 4)}))
    assert (by_divisor.frac, by_divisor.bits) == (3, 3)


# Two passes.


def test_two_passes() -> None:
    made = resolve(
        spec(
            column=[1, 2, 1],
            row=[1, 2, 3, 4],
            kernel={"divisor": (4, 8)},
            input={"bits": 8, "frac": 1, "pedestal": 16},
            intermediate={"bits": 12, "frac": 3, "pedestal": 9, "rounding": Rounding.TIES_TO_EVEN},
            output={"frac": 2, "overflow": Overflow.FORBID},
        )
    )
    first, second = made.passes
    middle = PixelFormat(12, True, 3, 9, -2048, 2047, Container.I16)
    assert reads(first.kernel) == [(-1, 0, 1), (0, 0, 2), (1, 0, 1)]
    assert reads(second.kernel) == [(0, -2, 4), (0, -1, 3), (0, 0, 2), (0, 1, 1)]
    assert (first.kernel.frac, second.kernel.frac) == (2, 3)
    assert first.source == made.input
    assert first.requantiser.to == middle == second.source
    # s = 1 + 2 - 3 and s = 3 + 3 - 2.
    assert (first.requantiser.exponent, second.requantiser.exponent) == (0, -4)
    assert first.requantiser.rounding is Rounding.TIES_TO_EVEN
    assert second.requantiser.overflow is Overflow.FORBID
    assert second.requantiser.to == made.output
    assert (made.geometry.rows.least, made.geometry.columns.greatest) == (-1, 2)


def test_horizontal_first_and_default_middle_frac() -> None:
    made = resolve(
        spec(
            column=[1, 1],
            row=[3],
            input={"frac": 5},
            intermediate={"first": First.HORIZONTAL, "bits": 10},
        )
    )
    assert [integers(each.kernel) for each in made.passes] == [[3], [1, 1]]
    assert made.passes[1].source.frac == 5


def test_exact_passes_divide_each_by_their_own() -> None:
    made = resolve(
        spec(
            column=[1, 1, 1],
            row=[1, 1, 1, 1, 1],
            kernel={"divisor": (Sum.SUM, Sum.SUM)},
            coefficient=EXACT,
            intermediate={"bits": 12, "frac": 4, "signed": False},
            output={"frac": 1},
        )
    )
    tails = [(each.requantiser.exponent, each.requantiser.divisor) for each in made.passes]
    assert tails == [(4, 3), (-3, 5)]


def test_preload_is_legal_before_a_shift() -> None:
    made = replace(spec([["1/2"]]), accumulator=PRELOADED)
    assert resolve(made).passes[0].accumulator.bits is None


def test_filter_can_be_pickled() -> None:
    made = resolve(spec([[1, "1/3"]], coefficient={"bits": 8}))
    assert pickle.loads(pickle.dumps(made)) == made
