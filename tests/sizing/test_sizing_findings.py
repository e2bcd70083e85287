"""What `unmet` reports, the words for it, and corners of the analysis."""

import time
from dataclasses import replace
from fractions import Fraction

import pytest

from guardbit.model.enums import BorderMode, Extent, Grid, Overflow, Preload, Rounding
from guardbit.model.filter import Accumulator, Border
from guardbit.model.finding import Place
from guardbit.model.sizing import End, Interval
from guardbit.report.words_sizing import WORDS
from guardbit.sizing.analyse import analyse, unmet
from guardbit.sizing.noise import rounding_error

from .shown import attained
from .small import (
    AUTO,
    axis,
    column_then_row,
    kernel,
    pixels,
    plain,
    rounded,
    single,
    to_output,
)


def register(bits: int | None, overflow: Overflow = Overflow.FORBID, signed: bool = True,
             preload: Preload = Preload.ZERO) -> Accumulator:  # fmt: skip
    return Accumulator(bits, signed, overflow, preload)


def test_a_narrow_accumulator_is_shown_by_its_frame() -> None:
    made = analyse(plain([(1, 2, 1), (2, 4, 2), (1, 2, 1)], pixels(8), register(12)))
    (found,) = unmet(made, Place("soften.toml"))
    assert found.kind == "accumulator-too-narrow"
    assert (found.place.file, found.place.key) == ("soften.toml", "accumulator.bits")
    assert dict(found.values) == {
        "register": "accumulator", "bits": 12, "needed": 13, "end": "greatest", "value": 4080,
        "limit": 2047, "height": 3, "width": 3, "row": 1, "column": 1, "after": 9,
        "stage": "output", "final": 4080, "code": 255, "wrapped": -16, "wrapped_code": 0,
        "saturated": 2047, "saturated_code": 255,
    }  # fmt: skip
    assert made.registers[0].spare == -1
    assert made.registers[0].headroom == Fraction(2047, 4080)
    assert unmet(analyse(plain([(1, 2, 1)], pixels(8), register(11)))) == ()


def test_partial_sums_count_even_where_the_final_fits() -> None:
    """Pixels of 16..17 keep away from zero: 16 * 3 - 17 * 2 and so on, partials up to 51."""
    f = plain([(1, 1, 1, -1, -1)], pixels(8, legal=(16, 17)), register(6))
    made = analyse(f)
    assert made.registers[0].final == Interval(14, 19)
    assert made.registers[0].partial == Interval(0, 51)
    assert (made.registers[0].bits_forbid, made.registers[0].bits_wrap) == (7, 6)
    (found,) = unmet(made)
    assert (found.kind, found.value("needed")) == ("accumulator-too-narrow-wrap", 7)
    assert found.value("after") == 3
    # the fill is 16: 3 * 17 - 2 * 16, and 31 - 2 * 16
    assert [found.value(n) for n in ("final", "wrapped", "saturated")] == [19, 19, -1]
    wraps = analyse(
        plain([(1, 1, 1, -1, -1)], pixels(8, legal=(16, 17)), register(6, Overflow.WRAP))
    )
    assert (unmet(wraps), wraps.registers[0].held) == ((), Interval(14, 19))
    assert not wraps.error.assumes_no_wrap


def test_an_unsigned_accumulator_holds_no_negative_sum() -> None:
    made = analyse(plain([(1, -1)], pixels(4), register(None, signed=False)))
    (found,) = unmet(made)
    assert (found.kind, found.place.key) == ("accumulator-negative", "accumulator.signed")
    assert (found.value("value"), found.value("needed")) == (-15, 5)


def test_forbidden_output_codes() -> None:
    forbid = replace(to_output(2), overflow=Overflow.FORBID)
    made = analyse(plain([(1, 2, 2)], pixels(8), requantiser=forbid))
    (found,) = unmet(made)
    assert (found.kind, found.value("value"), found.value("high")) == (
        "code-out-of-range",
        319,
        255,
    )
    assert unmet(analyse(plain([(1, 2, 1)], pixels(8), requantiser=forbid))) == ()


def test_widths_over_64_bits() -> None:
    wide = to_output(-60, pixels(8))
    assert [f.kind for f in unmet(analyse(plain([(1,)], pixels(8), requantiser=wide)))] == [
        "requantiser-over-64"
    ]
    huge = [[2**31 - 1] * 5]
    middle = to_output(0, pixels(32, True))
    f = column_then_row((huge[0], pixels(16), middle), (huge[0][:1], to_output(0)))
    assert unmet(analyse(f)) == ()
    f = column_then_row((huge[0], pixels(16), middle), ([2**31 - 1] * 30, to_output(0)))
    assert [x.kind for x in unmet(analyse(f))] == ["accumulator-over-64", "requantiser-over-64"]
    saturating = (AUTO, register(64, Overflow.SATURATE))
    middle = replace(middle, to=pixels(32, True, pedestal=2**31 - 1))
    f = column_then_row(((1,), pixels(16), middle), ((2**32 - 1,), to_output(0)),
                        accumulators=saturating)  # fmt: skip
    assert "product-over-64" in [x.kind for x in unmet(analyse(f))]


@pytest.mark.parametrize("shift", [8, 20, 64, 65, 128, 190])
@pytest.mark.parametrize("rounding", list(Rounding))
def test_long_shifts_stay_narrow(shift: int, rounding: Rounding) -> None:
    """A shift by the word length or more is legal and needs no longer word."""
    made = analyse(plain([(1, -1)], pixels(8), requantiser=to_output(shift, rounding=rounding)))
    assert made.requantisers[0].bits <= 12
    assert unmet(made) == ()


def test_width_of_a_division_with_its_rounding_constant() -> None:
    """0..6375 / 25: adding 12 gives 6387, 13 bits; -255..510 and 12 need 11 signed ones."""
    box = [[1] * 5] * 5
    made = analyse(plain(box, pixels(8), requantiser=to_output(0, divisor=25)))
    assert made.requantisers[0].bits == 13
    made = analyse(plain([(1, 1, -1)], pixels(8), requantiser=to_output(0, divisor=25)))
    assert made.requantisers[0].bits == 11


def test_every_finding_has_words() -> None:
    cases = [
        plain([(1, 2, 1)], pixels(8), register(8)),
        plain([(1, -1)], pixels(4), register(None, signed=False)),
        plain([(9,)], pixels(8), requantiser=replace(to_output(0), overflow=Overflow.FORBID)),
        plain([(1,)], pixels(8), requantiser=to_output(-60)),
    ]
    found = [finding for f in cases for finding in unmet(analyse(f))]
    assert len({f.kind for f in found}) == 4
    for finding in found:
        for text in WORDS[finding.kind]:
            assert "{" not in text.format(**dict(finding.values))


def test_a_filter_without_output_or_taps() -> None:
    rows, columns = axis(3, (1, 2)), axis(3, (1, 9))
    never = single(kernel([[1] * 3] * 3), pixels(8), rows, columns, extent=Extent.VALID)
    made = analyse(never).registers[0]
    assert (made.final, made.exact, made.witnesses) == (Interval(0, 2295), False, ())
    nothing = analyse(plain([(0,)], pixels(8)))
    assert (nothing.registers[0].final, nothing.registers[0].bits) == (Interval(0, 0), 2)
    assert nothing.registers[0].headroom is None
    two = column_then_row(((1, 2), pixels(8), to_output()), ((0,), to_output()))
    assert not analyse(two).registers[0].witnesses


def test_a_border_value_outside_the_range_is_a_fixed_amount() -> None:
    """Codes 16..235, constant 0: only border classes reach down to 0, none below."""
    f = plain([(1, 1, 1)], pixels(8, legal=(16, 235)), mode=BorderMode.CONSTANT)
    f = replace(f, border=Border(BorderMode.CONSTANT, 0, Grid.PIXEL))
    made = analyse(f).registers[0]
    assert made.final == Interval(16, 705)
    least = next(w for w in made.witnesses if w.end is End.LEAST and not w.partial)
    assert (least.height, least.width, attained(f, least, 0)) == (1, 1, 16)
    interior = next(c for c in made.classes if c.label == ("interior", "interior"))
    assert interior.final == Interval(48, 705)


def test_images_too_small_for_an_interior() -> None:
    """1 x 1 images, replicated: the taps fold onto one pixel, 3 * 255 - 2 * 255."""
    rows = columns = axis(3, (1, 1))
    taps = kernel([(0, 1, 0), (1, -2, 1), (0, 0, 0)])
    border = Border(BorderMode.REPLICATE, 0, Grid.PIXEL)
    made = analyse(single(taps, pixels(8), rows, columns, border)).registers[0]
    assert (made.final, made.partial, made.exact) == (Interval(0, 255), Interval(0, 510), True)


def test_large_kernels_take_a_second_or_two() -> None:
    taps = [[(7 * i + 3 * j * j) % 61 - 30 for j in range(63)] for i in range(63)]
    f = plain(taps, pixels(8, legal=(16, 235)), mode=BorderMode.CONSTANT)
    f = replace(f, border=Border(BorderMode.CONSTANT, 0, Grid.PIXEL))
    begin = time.process_time()
    made = analyse(f).registers[0]
    assert made.exact
    assert time.process_time() - begin < 6
    for witness in made.witnesses:
        assert attained(f, witness, 0) == witness.value


@pytest.mark.parametrize("rounding", list(Rounding))
@pytest.mark.parametrize("unit", [Fraction(1, n) for n in (2, 3, 4, 8, 273, 512)]
                         + [Fraction(2, 3), Fraction(8, 5), Fraction(3, 256)])  # fmt: skip
def test_rounding_error_against_every_value(rounding: Rounding, unit: Fraction) -> None:
    for low, high in [(0, 0), (-3, 2), (5, 9), (-700, 40), (-2, 1200), (300, 700)]:
        made = rounding_error(rounding, unit, low, high)
        errors = [rounded(n * unit, rounding) - n * unit for n in range(low, high + 1)]
        assert made.low <= min(errors)
        assert max(errors) <= made.high
        if unit.numerator == 1 or high - low >= 2 * unit.denominator + 600:
            assert (made.low, made.high) == (min(errors), max(errors))


@pytest.mark.parametrize("n", range(1, 9))
def test_rounding_error_of_a_shift(n: int) -> None:
    """Exact for uniform residues of an n-bit shift: floor reaches 1 - 2^-n, half-up 1/2
    (Constantinides, Cheung and Luk, Electronics Letters 35(23), 1999, give the moments)."""
    unit, last = Fraction(1, 2**n), 2 ** (n + 4)
    floor = rounding_error(Rounding.TOWARD_NEGATIVE, unit, 0, last)
    assert floor.low == unit - 1
    assert floor.high == 0
    assert rounding_error(Rounding.TIES_TO_POSITIVE, unit, 0, last).high == Fraction(1, 2)


def test_error_of_an_exact_filter_is_its_rounding() -> None:
    made = analyse(plain([(1, 2, 1)], pixels(8), requantiser=to_output(2))).error
    causes = [part.cause for part in made.parts]
    assert causes == ["coefficient fitting", "final rounding", "saturation"]
    assert made.parts[1].low == Fraction(-1, 4)
    assert made.parts[1].high == Fraction(1, 2)


def test_a_saturating_register_that_acts_is_said() -> None:
    made = analyse(plain([(1, 1, 1, -1)], pixels(8), register(9, Overflow.SATURATE)))
    assert made.registers[0].held == Interval(-255, 255)
    assert made.registers[0].held_exact
    assert made.error.assumes_no_wrap
    assert made.error.overall is not None
