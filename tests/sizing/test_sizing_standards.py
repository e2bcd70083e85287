"""Yes-or-no statements of open standards about widths, and every tap set's exact range.

Ranges are the depth's greatest code times the sums of positive and of negative taps. A rule
of thumb never falls short of them, and by no more than one bit exceeds the exact width.
"""

import itertools
from dataclasses import replace

import pytest

from guardbit.model.enums import Overflow, Preload, Rounding
from guardbit.model.filter import Accumulator, Filter
from guardbit.model.sizing import Interval
from guardbit.sizing.analyse import analyse, unmet

from .shown import attained
from .small import AUTO, column_then_row, pixels, plain, to_output

FLOOR = Rounding.TOWARD_NEGATIVE
Taps = tuple[int, ...]


def holds(f: Filter) -> bool:
    """Whether every width that is given does."""
    return unmet(analyse(f)) == ()


def register(bits: int, signed: bool = True) -> Accumulator:
    return Accumulator(bits, signed, Overflow.FORBID, Preload.ZERO)


# Rec. ITU-T H.265, 8.5.3.3.3: luma and chroma interpolation filters
LUMA = [(-1, 4, -10, 58, 17, -5, 1, 0), (-1, 4, -11, 40, 40, -11, 4, -1),
        (0, 1, -5, 17, 58, -10, 4, -1)]  # fmt: skip
CHROMA_HALVES = [(-2, 58, 10, -2), (-4, 54, 16, -2), (-6, 46, 28, -4), (-4, 36, 36, -4)]
CHROMA = [*CHROMA_HALVES, *(taps[::-1] for taps in CHROMA_HALVES[:3])]


def h265(column: Taps, row: Taps, depth: int, out: int, offset: int) -> Filter:
    """Rows first, >> min(4, depth - 8), columns >> 6; the result less `offset` in `out` bits."""
    middle = to_output(min(4, depth - 8), pixels(32, True), FLOOR)
    to = pixels(out, True, pedestal=-offset)
    last = to_output(6, to, FLOOR, Overflow.FORBID)
    return column_then_row((row, pixels(depth), middle), (column, last), horizontal_first=True)


@pytest.mark.parametrize("depth", [8, 9, 10, 11, 12])
def test_h265_predictions_less_8192_fit_16_bits_up_to_depth_12(depth: int) -> None:
    """The HM software stores them less 8192 (IF_INTERNAL_OFFS). Without it they need 17."""
    for column, row in itertools.product(LUMA, LUMA):
        assert holds(h265(column, row, depth, 16, 8192))
    half = LUMA[1]
    assert not holds(h265(half, half, depth, 16, 0))
    assert holds(h265(half, half, depth, 17, 0))


@pytest.mark.parametrize(
    ("depth", "low", "high", "bits"),
    [
        (8, -25022, 24958, 16),
        (10, -25072, 25055, 16),
        (12, -25085, 25079, 16),
        (16, -278525, 524279, 20),
    ],
)
def test_h265_half_sample_less_8192(depth: int, low: int, high: int, bits: int) -> None:
    made = analyse(h265(LUMA[1], LUMA[1], depth, bits, 8192))
    assert made.requantisers[1].unlimited == Interval(low, high)
    assert unmet(made) == ()
    assert not holds(h265(LUMA[1], LUMA[1], depth, bits - 1, 8192))


def test_h265_half_sample_is_the_worst_of_all_phases() -> None:
    worst = analyse(h265(LUMA[1], LUMA[1], 8, 17, 0))
    for column, row in itertools.product(LUMA, LUMA):
        made = analyse(h265(column, row, 8, 17, 0))
        for one, other in zip(made.registers, worst.registers, strict=True):
            assert other.final.low <= one.final.low <= one.final.high <= other.final.high


def test_h265_16_bit_first_results_hold_up_to_depth_12() -> None:
    """Stored intermediates fit 16 bits; the second pass's accumulator needs 23 all the same."""
    for depth, fits in ((8, True), (10, True), (12, True), (14, False), (16, False)):
        f = h265(LUMA[1], LUMA[1], depth, 32, 0)
        middle = replace(f.passes[0].requantiser, overflow=Overflow.FORBID, to=pixels(16, True))
        narrow = (replace(f.passes[0], requantiser=middle),
                  replace(f.passes[1], source=middle.to))  # fmt: skip
        assert holds(replace(f, passes=narrow)) is fits
        if fits:
            assert analyse(f).registers[1].bits == 23


def test_h265_chroma_at_8_bits() -> None:
    """The widest of its filters is 3/8: 74 and -10 times 255."""
    made = [analyse(h265(a, b, 8, 32, 0)) for a, b in itertools.product(CHROMA, CHROMA)]
    for which, low, high, bits in ((0, -2550, 18870, 16), (1, -377400, 1421880, 22)):
        assert min(m.registers[which].final.low for m in made) == low
        assert max(m.registers[which].final.high for m in made) == high
        assert max(m.registers[which].bits for m in made) == bits
    codes = [m.requantisers[1].unlimited for m in made]
    assert (min(c.low for c in codes), max(c.high for c in codes)) == (-5897, 22216)
    assert all(holds(h265(a, b, 8, 16, 0)) for a, b in itertools.product(CHROMA, CHROMA))


# AV1 specification, 7.17.4 and the greatest and least Wiener taps of its syntax tables
@pytest.mark.parametrize(("depth", "bits", "offset"), [(8, 13, 2048), (10, 15, 8192),
                                                       (12, 15, 8192)])  # fmt: skip
def test_av1_wiener_intermediate_plus_offset_fits(depth: int, bits: int, offset: int) -> None:
    """The note: clipped intermediate + offset fits Min(15, BitDepth + 5) unsigned bits."""
    assert bits == min(15, depth + 5)
    first, second = (5, 9) if depth == 12 else (3, 11)
    assert offset == 1 << (depth + 7 - first - 1)
    for half in itertools.product((-5, 10), (-23, 8), (-17, 46)):
        taps = (*half, 128 - 2 * sum(half), *half[::-1])
        clipped = pixels(bits, pedestal=offset)
        middle = to_output(first, clipped)
        f = column_then_row((taps, pixels(depth), middle), (taps, to_output(second, pixels(depth))))
        made = analyse(f)
        assert 0 <= made.requantisers[0].output.low <= made.requantisers[0].output.high < 2**bits
    worst = (-5, -23, -17, 218, -17, -23, -5)
    f = column_then_row((worst, pixels(depth), middle), (worst, to_output(second, pixels(depth))))
    made = analyse(f)
    assert made.requantisers[0].can_overflow
    assert made.requantisers[0].output == Interval(0, 2**bits - 1)
    assert made.registers[1].exact


def test_vp8_span_fits_16_bits_with_a_bias() -> None:
    """RFC 6386 s.18.3: -8160..40800 spans 48960 < 65536; a pixel more than int16 all the same."""
    made = analyse(plain([(3, -16, 77, 77, -16, 3)], pixels(8))).registers[0]
    assert made.final.high - made.final.low == 48960 < 65536
    assert made.bits == 17


def test_vp8_wrapping_at_16_bits_is_really_wrong() -> None:
    """40864 > 32767: the register wraps to -24672 there, and a frame shows it."""
    wraps = Accumulator(16, True, Overflow.WRAP, Preload.ROUNDING)
    made = analyse(plain([(3, -16, 77, 77, -16, 3)], pixels(8), wraps, to_output(7)))
    (register_,) = made.registers
    assert register_.final == Interval(-8096, 40864)
    assert register_.held == Interval(-32768, 32767)
    assert register_.held_exact
    assert len(register_.held_witnesses) == 2
    assert register_.spare == -1


# VP9 sub-pixel filters at the half sample (the published decoder's tables), sums 128
@pytest.mark.parametrize(
    ("taps", "low", "high"),
    [
        ((-1, 6, -19, 78, 78, -19, 6, -1), -10200, 42840),
        ((-4, 11, -23, 80, 80, -23, 11, -4), -13770, 46410),
        ((-1, -4, 14, 55, 55, 14, -4, -1), -2550, 35190),
    ],
)
def test_vp9_filters_need_17_bits(taps: Taps, low: int, high: int) -> None:
    assert sum(taps) == 128
    r = to_output(7)
    f = column_then_row((taps, pixels(8), r), (taps, r), horizontal_first=True)
    made = analyse(f)
    assert [m.final for m in made.registers] == [Interval(low, high)] * 2
    assert [m.bits for m in made.registers] == [17, 17]
    for which in (0, 1):
        for witness in made.registers[which].witnesses:
            assert attained(made.filter, witness, which) == witness.value


@pytest.mark.parametrize("x", range(8))
@pytest.mark.parametrize("y", range(8))
def test_h264_chroma_fits_15_bits(x: int, y: int) -> None:
    """ISO/IEC 14496-10, 8.4.2.2.2: weights that sum to 64; 16320, and 16352 with the half."""
    taps = [((8 - x) * (8 - y), x * (8 - y)), ((8 - x) * y, x * y)]
    made = analyse(plain(taps, pixels(8), replace(register(15), preload=Preload.ROUNDING),
                         to_output(6)))  # fmt: skip
    assert made.registers[0].final == Interval(32, 16352)
    assert unmet(made) == ()
    assert not holds(plain(taps, pixels(8), register(14), to_output(6)))


def test_jpeg_2000_reversible_filters() -> None:
    """ITU-T T.800, annex F, as linear taps (from memory): 8 times low, twice high."""
    low = analyse(plain([(-1, 2, 6, 2, -1)], pixels(8))).registers[0]
    high = analyse(plain([(-1, 2, -1)], pixels(8))).registers[0]
    assert (low.final, high.final) == (Interval(-510, 2550), Interval(-510, 510))


TABLE: list[tuple[Taps, int]] = [
    ((3, -16, 77, 77, -16, 3), 8),
    ((2, -11, 108, 36, -8, 1), 8),
    ((1, -5, 20, 20, -5, 1), 8),
    ((1, -5, 20, 20, -5, 1), 10),
    *((taps, depth) for taps in (*LUMA, *CHROMA) for depth in (8, 10, 16)),
    ((-4, 12, -24, 80, 80, -24, 12, -4), 8),
    ((0, 2, -16, 94, 58, -12, 2, 0), 12),
    ((-1, 6, -19, 78, 78, -19, 6, -1), 8),
    ((1, 4, 6, 4, 1), 8),
    ((-1, 0, 1), 8),
]


@pytest.mark.parametrize(("taps", "depth"), TABLE)
def test_exact_never_above_the_growth_rule_nor_two_bits_below(taps: Taps, depth: int) -> None:
    for square in ([taps], [[a * b for b in taps] for a in taps]):
        made = analyse(plain(square, pixels(depth))).registers[0]
        assert made.bits == made.bits_forbid
        assert made.bits <= made.rule_l1 <= made.bits + 1
        assert made.rule_l1 <= made.rule_count
    unsigned = analyse(plain([[abs(t) for t in taps]], pixels(depth), replace(AUTO, signed=False)))
    assert unsigned.registers[0].bits <= unsigned.registers[0].rule_l1
