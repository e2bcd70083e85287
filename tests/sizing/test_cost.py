"""What filters cost, by hand and by published counts."""

from fractions import Fraction
from pathlib import Path

import pytest

from guardbit.fit.resolve import resolve
from guardbit.model.cost import Cost
from guardbit.sizing.analyse import analyse
from guardbit.sizing.cost import cost, signed_digits
from guardbit.spec.reader import parse_spec

# OEIS A007302, as computed for n = 0..32.
WEIGHTS = "0 1 1 2 1 2 2 2 1 2 2 3 2 3 2 2 1 2 2 3 2 3 3 3 2 3 3 3 2 3 2 2 1"


def costs(tables: str) -> Cost:
    f = resolve(parse_spec('[filter]\nname = "one"\n' + tables, "a.toml", Path()))
    return cost(analyse(f).filter)


def test_signed_digits_are_those_of_the_published_sequence() -> None:
    assert [signed_digits(n) for n in range(33)] == [int(w) for w in WEIGHTS.split()]
    assert [signed_digits(-n) for n in (77, 93, 123, 40)] == [4, 4, 3, 2]


@pytest.mark.parametrize(
    ("k", "mean"),
    [(8, Fraction(199, 64)), (10, Fraction(967, 256)), (12, Fraction(4551, 1024))],
)
def test_mean_number_of_signed_digits(k: int, mean: Fraction) -> None:
    """k/3 + 4/9 - 4(-1)^k/(9 * 2^k), Arno and Wheeler, IEEE Trans. Comput. 42(8), 1993."""
    assert Fraction(sum(map(signed_digits, range(2**k))), 2**k) == mean


def test_half_sample_filter_of_h264() -> None:
    """Taps 1 -5 20 20 -5 1 (ITU-T H.264, 8.4.2.2.1) as a row: 5 and 20 share the factor 5."""
    found = costs("[kernel]\ntaps = [[1, -5, 20, 20, -5, 1]]\ndivisor = 32\n[input]\nbits = 8\n")
    (p,) = found.passes
    assert (p.reads, p.multipliers, p.shifts, p.adders) == (6, 4, 2, 5)
    assert (p.folded_multipliers, p.magnitudes, p.constants) == (2, 3, 1)
    # 1, 5 = 4 + 1, 20 = 16 + 4, twice each
    assert p.signed_digit_adders == 2 * (1 + 2 + 2) - 1
    assert p.constant_bits == 6 * 6
    assert (p.line_rows, p.line_bits, found.line_bits) == (0, 0, 0)


def test_gradient_folds_by_subtraction() -> None:
    found = costs(
        "[kernel]\ntaps = [[-3, 0, 3], [-10, 0, 10], [-3, 0, 3]]\n[input]\nbits = 10\n"
        "[output]\nbits = 16\nsigned = true\n[image]\nwidth = [1, 640]\nchannels = 3\n"
    )
    (p,) = found.passes
    assert (p.reads, p.multipliers, p.folded_multipliers, p.constants) == (6, 6, 3, 2)
    assert (p.line_rows, p.line_bits) == (2, 2 * 3 * 10)
    assert (found.widest, found.line_bits) == (640, 640 * 60)


def test_two_passes_keep_rows_of_what_the_vertical_one_reads() -> None:
    tables = (
        "[kernel]\ncolumn = [1, 2, 1]\nrow = [1, 4, 6, 4, 1]\ndivisor = [4, 16]\n[coefficient]\n"
        "frac = ['auto', 'auto']\n[input]\nbits = 8\n[intermediate]\nbits = 12\nfirst = '{}'\n"
    )
    vertical, horizontal = (costs(tables.format(w)) for w in ("vertical", "horizontal"))
    assert [p.line_bits for p in vertical.passes] == [2 * 8, 0]
    assert [p.line_bits for p in horizontal.passes] == [0, 2 * 12]
    assert [p.reads for p in vertical.passes] == [3, 5]


def test_a_kernel_of_zeros_costs_nothing() -> None:
    (p,) = costs("[kernel]\ntaps = [[0, 0]]\n[input]\nbits = 8\n").passes
    assert (p.reads, p.multipliers, p.adders, p.signed_digit_adders, p.line_bits) == (0,) * 5


def test_loaded_taps_need_a_multiplier_each_but_for_those_held_fast() -> None:
    """The corners may be nothing but 0 and the middle nothing but 4, which is a shift."""
    (p,) = costs(
        "[kernel]\ntaps = [[0, 1, 0], [1, 4, 1], [0, 1, 0]]\n[input]\nbits = 8\n"
        "[coefficient]\nbits = 5\n[coefficient.registers]\n"
        "least = [[0, -9, 0], [-9, 4, -9], [0, -9, 0]]\n"
        "greatest = [[0, 9, 0], [9, 4, 9], [0, 9, 0]]\n"
    ).passes
    assert (p.reads, p.multipliers, p.shifts, p.adders) == (5, 4, 1, 4)
    assert (p.folded_multipliers, p.magnitudes, p.constant_bits) == (4, 5, 25)
    assert (p.constants, p.signed_digit_adders) == (None, None)
