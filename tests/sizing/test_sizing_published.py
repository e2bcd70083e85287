"""Widths and ranges that standards and the literature state, or that follow from their taps.

Ranges of tap sets are 255 (or the depth's maximum) times the sums of positive and of negative
taps; every one is attained, since pixels are independent.
"""

from dataclasses import replace

import pytest

from guardbit.model.enums import BorderMode, Overflow, Preload, Rounding
from guardbit.model.filter import Accumulator, Filter, PixelFormat
from guardbit.model.sizing import Interval, RegisterSizing
from guardbit.sizing.analyse import analyse, unmet

from .shown import attained
from .small import AUTO, column_then_row, pixels, plain, to_output

FLOOR = Rounding.TOWARD_NEGATIVE
UNSIGNED = replace(AUTO, signed=False)
INT16 = Accumulator(16, True, Overflow.FORBID, Preload.ZERO)


def sized(f: Filter, which: int = 0) -> RegisterSizing:
    return analyse(f).registers[which]


# RFC 6386 s.18.3: six-tap filters of VP8, phases 1/8 to 1/2 (the others are mirrored)
VP8 = {
    (0, -6, 123, 12, -1, 0): (-1785, 34425),
    (2, -11, 108, 36, -8, 1): (-4845, 37485),
    (0, -9, 93, 50, -6, 0): (-3825, 36465),
    (3, -16, 77, 77, -16, 3): (-8160, 40800),
}


@pytest.mark.parametrize(("taps", "ends"), VP8.items())
def test_vp8_six_taps_need_17_bits(taps: tuple[int, ...], ends: tuple[int, int]) -> None:
    made = sized(plain([taps], pixels(8), requantiser=to_output(7)))
    assert (made.final.low, made.final.high) == ends
    assert (made.bits, made.bits_forbid, made.exact) == (17, 17, True)
    refused = unmet(analyse(plain([taps], pixels(8), INT16, to_output(7))))
    assert [f.kind for f in refused] == ["accumulator-too-narrow"]
    assert (refused[0].value("needed"), refused[0].value("bits")) == (17, 16)


def test_vp8_half_sample_with_its_rounding_constant() -> None:
    preloaded = replace(AUTO, preload=Preload.ROUNDING)
    taps = [(3, -16, 77, 77, -16, 3)]
    made = analyse(plain(taps, pixels(8), preloaded, to_output(7)))
    assert made.registers[0].final == Interval(-8160 + 64, 40864)
    assert made.requantisers[0].unlimited == Interval(-64, 319)
    assert made.requantisers[0].output == Interval(0, 255)
    assert made.requantisers[0].can_overflow


@pytest.mark.parametrize("k", range(8))
def test_vp8_bilinear_fits_int16(k: int) -> None:
    made = analyse(plain([(128 - 16 * k, 16 * k)], pixels(8), INT16, to_output(7)))
    assert made.registers[0].final == Interval(0, 32640)
    assert unmet(made) == ()


def test_vp8_second_pass_reads_clamped_pixels() -> None:
    taps, r = (3, -16, 77, 77, -16, 3), to_output(7)
    f = column_then_row((taps, pixels(8), r), (taps, r), horizontal_first=True)
    made = analyse(f)
    assert [m.final for m in made.registers] == [Interval(-8160, 40800)] * 2
    assert [m.bits for m in made.registers] == [17, 17]


SIX = (1, -5, 20, 20, -5, 1)


@pytest.mark.parametrize(
    ("depth", "first", "second"),
    [(8, 15, 20), (9, 16, 21), (10, 17, 22), (12, 19, 24), (14, 21, 26)],
)
def test_h264_centre_sample(depth: int, first: int, second: int) -> None:
    """ISO/IEC 14496-10, 8.4.2.2.1: the six-tap twice, nothing rounded in between."""
    middle = to_output(0, pixels(32, True), FLOOR)
    f = column_then_row((SIX, pixels(depth), middle), (SIX, to_output(10, pixels(depth))))
    made = analyse(f)
    assert [m.bits for m in made.registers] == [first, second]
    whole = sized(plain([[a * b for b in SIX] for a in SIX], pixels(depth)))
    assert (whole.bits, whole.final) == (second, made.registers[1].final)


def test_h264_ranges_at_8_bits() -> None:
    f = column_then_row(
        (SIX, pixels(8), to_output(0, pixels(32, True), FLOOR)), (SIX, to_output(10))
    )
    made = analyse(f)
    assert made.registers[0].final == Interval(-2550, 10710)
    assert made.registers[1].final == Interval(-214200, 475320)
    assert made.requantisers[1].unlimited == Interval(-209, 464)
    for witness in made.registers[1].witnesses:
        assert attained(made.filter, witness, 1) == witness.value


HALF = (-1, 4, -11, 40, 40, -11, 4, -1)


@pytest.mark.parametrize(
    ("depth", "acc1", "mid", "acc2_bits", "out", "out_bits"),
    [
        (8, (-6120, 22440), (-6120, 22440), 23, (-16830, 33150), 17),
        (10, (-24552, 90024), (-6138, 22506), 23, (-16880, 33247), 17),
        (12, (-98280, 360360), (-6143, 22522), 23, (-16893, 33271), 17),
        (14, (-393192, 1441704), (-24575, 90106), 25, (-67581, 133111), 19),
        (16, (-1572840, 5767080), (-98303, 360442), 27, (-270333, 532471), 21),
    ],
)
def test_h265_luma_half_sample(
    depth: int,
    acc1: tuple[int, int],
    mid: tuple[int, int],
    acc2_bits: int,
    out: tuple[int, int],
    out_bits: int,
) -> None:
    """Rec. H.265, 8.5.3.3.3: shifts min(4, depth - 8) and 6, both floored, nothing clipped."""
    first = to_output(min(4, depth - 8), pixels(32, True), FLOOR)
    f = column_then_row((HALF, pixels(depth), first), (HALF, to_output(6, pixels(32, True), FLOOR)))
    made = analyse(f)
    assert made.registers[0].final == Interval(*acc1)
    assert made.requantisers[0].unlimited == Interval(*mid)
    assert made.registers[1].bits == acc2_bits
    assert made.requantisers[1].unlimited == Interval(*out)
    assert made.registers[1].exact
    narrow = replace(
        f.passes[1].requantiser, to=pixels(out_bits - 1, True), overflow=Overflow.FORBID
    )
    refused = replace(f, passes=(f.passes[0], replace(f.passes[1], requantiser=narrow)))
    assert [found.kind for found in unmet(analyse(refused))] == ["code-out-of-range"]
    wide = replace(narrow, to=pixels(out_bits, True))
    allowed = replace(f, passes=(f.passes[0], replace(f.passes[1], requantiser=wide)))
    assert unmet(analyse(allowed)) == ()


SHARP = (-4, 12, -24, 80, 80, -24, 12, -4)


@pytest.mark.parametrize(
    ("depth", "shifts", "acc1", "mid", "mid_bits", "out", "out_bits"),
    [
        (8, (3, 11), (-14280, 46920), (-1785, 5865), 14, (-321, 576), 11),
        (8, (3, 7), (-14280, 46920), (-1785, 5865), 14, (-5132, 9212), 15),
        (10, (3, 7), (-57288, 188232), (-7161, 23529), 16, (-20588, 36956), 17),
        (12, (5, 7), (-229320, 753480), (-7166, 23546), 16, (-20602, 36983), 17),
    ],
)
def test_av1_block_prediction(
    depth: int,
    shifts: tuple[int, int],
    acc1: tuple[int, int],
    mid: tuple[int, int],
    mid_bits: int,
    out: tuple[int, int],
    out_bits: int,
) -> None:
    """AV1 specification, 7.11.3.4, with its note: the first result always fits 16 bits."""
    middle = replace(to_output(shifts[0], pixels(mid_bits, True)), overflow=Overflow.FORBID)
    last = replace(to_output(shifts[1], pixels(out_bits, True)), overflow=Overflow.FORBID)
    f = column_then_row((SHARP, pixels(depth), middle), (SHARP, last), horizontal_first=True)
    made = analyse(f)
    assert unmet(made) == ()
    assert made.registers[0].final == Interval(*acc1)
    assert made.requantisers[0].unlimited == Interval(*mid)
    assert made.requantisers[1].unlimited == Interval(*out)
    assert made.error.parts[2].low == made.error.parts[2].high == 0


def test_av1_12_bits_would_not_fit_with_the_smaller_shift() -> None:
    middle = replace(to_output(3, pixels(16, True)), overflow=Overflow.FORBID)
    f = column_then_row((SHARP, pixels(12), middle), (SHARP, to_output(7, pixels(24, True))))
    made = analyse(f)
    assert made.requantisers[0].unlimited == Interval(-28665, 94185)
    assert [(x.kind, x.value("stage")) for x in unmet(made)] == [
        ("code-out-of-range", "intermediate")
    ]


def test_av1_wiener_needs_its_intermediate_clip() -> None:
    """AV1 specification, 7.17.4: the clip to -offset..limit - offset acts at the worst taps."""
    taps = (-5, -23, -17, 218, -17, -23, -5)
    clipped = pixels(14, True, legal=(-2048, 6143))
    f = column_then_row((taps, pixels(8), to_output(3, clipped)), (taps, to_output(11)))
    made = analyse(f)
    assert made.registers[0].final == Interval(-22950, 55590)
    assert made.requantisers[0].unlimited == Interval(-2869, 6949)
    assert made.requantisers[0].output == Interval(-2048, 6143)
    assert made.error.parts[2].low < 0 < made.error.parts[2].high


SOBEL = [(-1, 0, 1), (-2, 0, 2), (-1, 0, 1)]
BINOMIAL = [[a * b for b in (1, 4, 6, 4, 1)] for a in (1, 4, 6, 4, 1)]
LAPLACIAN = [(0, 1, 0), (1, -4, 1), (0, 1, 0)]
LOG = [(0, 0, -1, 0, 0), (0, -1, -2, -1, 0), (-1, -2, 16, -2, -1), (0, -1, -2, -1, 0),
       (0, 0, -1, 0, 0)]  # fmt: skip
MALVAR = [(0, 0, -1, 0, 0), (0, 0, 2, 0, 0), (-1, 2, 4, 2, -1), (0, 0, 2, 0, 0), (0, 0, -1, 0, 0)]
MALVAR_TWICE = [(0, 0, 1, 0, 0), (0, -2, 0, -2, 0), (-2, 8, 10, 8, -2), (0, -2, 0, -2, 0),
                (0, 0, 1, 0, 0)]  # fmt: skip
CLASSIC = [
    ([(1, 2, 1), (2, 4, 2), (1, 2, 1)], 8, 0, 4080, 13),
    (BINOMIAL, 8, 0, 65280, 17),
    ([[a * b for b in (1, 5, 8, 5, 1)] for a in (1, 5, 8, 5, 1)], 8, 0, 102000, 18),
    (SOBEL, 8, -1020, 1020, 11),
    ([(-1, 0, 1)] * 3, 8, -765, 765, 11),
    ([(-3, 0, 3), (-10, 0, 10), (-3, 0, 3)], 8, -4080, 4080, 13),
    ([(-47, 0, 47), (-162, 0, 162), (-47, 0, 47)], 8, -65280, 65280, 17),
    ([(1, 0), (0, -1)], 8, -255, 255, 9),
    (LAPLACIAN, 8, -1020, 1020, 11),
    ([(1, 1, 1), (1, -8, 1), (1, 1, 1)], 8, -2040, 2040, 12),
    (LOG, 8, -4080, 4080, 13),
    (MALVAR, 8, -1020, 3060, 13),
    (MALVAR_TWICE, 8, -3060, 7140, 14),
    (MALVAR, 12, -16380, 49140, 17),
    (MALVAR_TWICE, 12, -49140, 114660, 18),
    (MALVAR_TWICE, 10, -12276, 28644, 16),
]


@pytest.mark.parametrize(("taps", "depth", "low", "high", "bits"), CLASSIC)
@pytest.mark.parametrize("mode", [BorderMode.CONSTANT, BorderMode.HALF_SAMPLE])
def test_classic_kernels(
    taps: list[tuple[int, ...]], depth: int, low: int, high: int, bits: int, mode: BorderMode
) -> None:
    """Sobel, Prewitt, Scharr, Laplacians (tables of the field, from memory); demosaicing
    kernels of Malvar, He and Cutler, ICASSP 2004, fig. 2, times 1 and 2."""
    made = sized(plain(taps, pixels(depth), mode=mode))
    assert (made.final, made.bits, made.exact) == (Interval(low, high), bits, True)
    assert bits <= made.rule_l1 <= bits + 1
    assert made.rule_l1 <= made.rule_count
    for witness in made.witnesses:
        f = plain(taps, pixels(depth), mode=mode)
        assert attained(f, witness, 0) == witness.value


def test_rules_of_thumb_as_stated() -> None:
    """8 bits + ceil(log2 192) + sign = 17 (VP8); 8 + 6 + 1 (H.264); 8 + 8 unsigned."""
    assert sized(plain([(3, -16, 77, 77, -16, 3)], pixels(8))).rule_l1 == 17
    assert sized(plain([SIX], pixels(8))).rule_l1 == 15
    assert sized(plain(BINOMIAL, pixels(8), UNSIGNED)).rule_l1 == 16
    assert sized(plain(BINOMIAL, pixels(8), UNSIGNED)).bits == 16
    assert sized(plain(SOBEL, pixels(8))).rule_l1 == 12


def test_binomial_with_its_rounding_constant_fits_16_unsigned_bits() -> None:
    made = sized(plain(BINOMIAL, pixels(8), replace(UNSIGNED, preload=Preload.ROUNDING),
                       to_output(8)))  # fmt: skip
    assert (made.final, made.bits) == (Interval(128, 65408), 16)


def test_modular_arithmetic_recovers_a_final_in_range() -> None:
    """J. O. Smith, Introduction to Digital Filters: 3 + 3 - 4 in three bits."""
    source: PixelFormat = pixels(2)
    made = sized(plain([(1, 1, -1)], source, Accumulator(4, True, Overflow.WRAP, Preload.ZERO)))
    assert (made.final, made.partial) == (Interval(-3, 6), Interval(-3, 6))
    three = analyse(plain([(1, 1, -2)], pixels(1), Accumulator(2, True, Overflow.WRAP,
                                                                Preload.ZERO)))  # fmt: skip
    register = three.registers[0]
    assert (register.final, register.partial) == (Interval(-2, 2), Interval(-2, 2))
    assert register.held == Interval(-2, 1)
