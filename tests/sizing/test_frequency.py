"""Frequency responses: closed forms, NumPy's FFT as outside judge, and the guarantee."""

from collections.abc import Mapping
from fractions import Fraction
from math import cos, pi, sin
from pathlib import Path
from random import Random
from time import perf_counter

import numpy as np
import pytest
from numpy.typing import NDArray

from guardbit.fit.resolve import resolve
from guardbit.model.frequency import Frequency, Peak
from guardbit.sizing import peak as peaks
from guardbit.sizing.frequency import frequency
from guardbit.sizing.peak import edge_sums, peak, total
from guardbit.spec.reader import parse_spec

Taps = dict[tuple[int, int], Fraction]
Floats = NDArray[np.float64]


def taps(rows: list[list[int | str]]) -> Taps:
    return {(y, x): Fraction(tap) for y, row in enumerate(rows) for x, tap in enumerate(row)}


def dense(found: Mapping[tuple[int, int], Fraction]) -> Floats:
    """Return |response| on a fine grid, by NumPy's FFT; indices are 1/512 cycles per tap."""
    matrix = np.zeros((512, 512))
    for (y, x), tap in found.items():
        matrix[y % 512, x % 512] += float(tap)
    return np.abs(np.fft.fft2(matrix))


def response(found: Mapping[tuple[int, int], Fraction], places: Floats) -> Floats:
    """Return |response| at places (rows of y, x in cycles per tap), from the definition."""
    waves = sum(
        float(tap) * np.exp(-2j * np.pi * (places[:, 0] * y + places[:, 1] * x))
        for (y, x), tap in found.items()
    )
    sizes: Floats = np.abs(waves)
    return sizes


def measured(text: str) -> Frequency:
    spec = f'[filter]\nname = "f"\n[input]\nbits = 8\n{text}'
    return frequency(resolve(parse_spec(spec, "f.toml", Path())))


def close(found: Peak, wanted: float) -> bool:
    """Return whether a peak brackets a number, to a few ten-millionths of it."""
    slack = 1e-12 * wanted
    return (
        float(found.attained) <= wanted + slack
        and float(found.guaranteed) >= wanted - slack
        and found.guaranteed - found.attained <= Fraction(3, 10**7) * found.attained
    )


@pytest.mark.parametrize(
    ("rows", "wanted", "at"),
    [
        # One tap: the same everywhere. Two: |1 - exp(-iw)| is 2 at Nyquist.
        ([["-3/7"]], Fraction(3, 7), (0, 0)),
        ([[1, -1]], Fraction(2), (0, Fraction(1, 2))),
        ([[1], [-1]], Fraction(2), (Fraction(1, 2), 0)),
        # No tap is below zero: the sum of all, at DC (triangle inequality).
        ([[1, 2, 1], [2, 4, 2], [1, 2, 1]], Fraction(16), (0, 0)),
        # Signs like a chessboard's: the same at (1/2, 1/2).
        ([[1, -2], [-3, 4]], Fraction(10), (Fraction(1, 2), Fraction(1, 2))),
        # Laplacian, four neighbours: 8 at (1/2, 1/2).
        ([[0, 1, 0], [1, -4, 1], [0, 1, 0]], Fraction(8), (Fraction(1, 2), Fraction(1, 2))),
        ([[0, 0], [0, 0]], Fraction(0), (0, 0)),
    ],
)
def test_peaks_that_are_exact(
    rows: list[list[int | str]], wanted: Fraction, at: tuple[Fraction, Fraction]
) -> None:
    assert peak(taps(rows)) == Peak(wanted, wanted, at)


def test_sobel_between_the_edges() -> None:
    # Sobel-Feldman: (2 + 2 cos v) * 2 sin w, greatest 8 at v = 0, w = pi / 2.
    found = peak(taps([[-1, 0, 1], [-2, 0, 2], [-1, 0, 1]]))
    assert close(found, 8)
    assert found.at[0] == 0 and abs(found.at[1] - Fraction(1, 4)) < Fraction(1, 1000)


def test_notch_of_a_box() -> None:
    # 1 - D(w) with Dirichlet's kernel D(w) = sin(5w/2) / (5 sin(w/2)) = (4 c^2 + 2 c - 1) / 5,
    # c = cos w: greatest where D is least, at c = -1/4, where D = -1/4.
    found = peak({(0, x): Fraction(int(x == 2)) - Fraction(1, 5) for x in range(5)})
    w = 2 * pi * float(found.at[1])
    assert close(found, 1 - sin(5 * w / 2) / (5 * sin(w / 2)))
    assert close(found, 1.25)
    assert abs(cos(w) + 1 / 4) < 1e-3


def test_h264_half_sample_filter_overshoots() -> None:
    # ISO/IEC 14496-10, 8.4.2.2.1: (1, -5, 20, 20, -5, 1) / 32. With c = cos(w/2) its response
    # is (cos(5w/2) - 5 cos(3w/2) + 20 c) / 16; an even kernel, whose degree is 5/2.
    row = {(0, x): Fraction(t, 32) for x, t in enumerate((1, -5, 20, 20, -5, 1))}
    angles = np.linspace(0, np.pi, 200_001)
    sizes = np.cos(5 * angles / 2) - 5 * np.cos(3 * angles / 2) + 20 * np.cos(angles / 2)
    assert close(peak(row), float(np.abs(sizes).max() / 16))
    assert list(edge_sums(row)) == [1, 1, 0, 0]


def test_binomial_filter() -> None:
    # (1 + z)^4 / 16 in each direction: cos^4(pi f) vertically times the same horizontally.
    rows = "[[1,4,6,4,1],[4,16,24,16,4],[6,24,36,24,6],[4,16,24,16,4],[1,4,6,4,1]]"
    found = measured(f"[kernel]\ntaps = {rows}\ndivisor = 256\n")
    assert found.deviation == 0
    assert [g.ideal for g in found.gains] == [1, 0, 0, 0]
    assert [g.fitted for g in found.gains] == [1, 0, 0, 0]
    assert found.ideal == Peak(Fraction(1), Fraction(1), (Fraction(0), Fraction(0)))
    # All but the middle tap set to zero at frac 3: the deviation is 3/8 - 1/4 off the binomial.
    coarse = measured(
        "[kernel]\ncolumn = [1]\nrow = [1, 4, 6, 4, 1]\ndivisor = 16\n"
        "[coefficient]\nbits = 8\nfrac = 3\npinned = [[0, 0, 3, 0, 0]]\n"
    )
    # |3/8 - cos^4(pi f)| is 5/8 at DC.
    assert coarse.largest == Peak(Fraction(5, 8), Fraction(5, 8), (Fraction(0), Fraction(0)))
    assert [g.deviation for g in coarse.gains] == [Fraction(-5, 8), Fraction(-5, 8)] + [
        Fraction(3, 8)
    ] * 2


def random_taps(random: Random) -> Taps:
    rows, columns = random.choice([(1, 6), (7, 1), (2, 2), (3, 3), (4, 5), (5, 5), (6, 3)])
    unit = random.choice([1, 7, 2**20, 10**12])
    found = {
        (y + 3, x - 2): Fraction(random.randint(-unit, unit), unit * random.choice([1, 3]))
        for y in range(rows)
        for x in range(columns)
        if random.random() < 0.8
    }
    return found or {(0, 0): Fraction(1)}


def test_numpy_and_random_frequencies_never_exceed_the_guarantee() -> None:
    random, places = Random(31), np.random.default_rng(31).random((20_000, 2))
    for _ in range(25):
        found = random_taps(random)
        result = peak(found)
        grid = float(dense(found).max())
        slack = 1e-12 * float(total(map(abs, found.values())))
        assert max(grid, float(response(found, places).max())) <= float(result.guaranteed) + slack
        # The grid of 512 is at most cos(pi (3 + 3) / 512) below the true peak.
        assert float(result.attained) <= (grid + slack) / cos(6 * pi / 512)
        at = np.array([[float(part) for part in result.at]])
        assert float(response(found, at)[0]) >= float(result.attained) - slack
        assert result.guaranteed - result.attained <= Fraction(3, 10**7) * result.attained


def test_the_guarantee_holds_on_the_first_grid_alone(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(peaks, "_MOST_CELLS", 0)
    random = Random(5)
    for _ in range(20):
        found = random_taps(random)
        result = peak(found)
        assert float(dense(found).max()) <= float(result.guaranteed) * (1 + 1e-12)
        assert result.guaranteed <= result.attained * Fraction(101, 100)


@pytest.mark.parametrize("count", [31, 127])
def test_flat_responses_are_bounded_within_one_percent(count: int) -> None:
    # A low-pass by Hamming's window: level over a quarter of all frequencies, with ripples.
    n = np.arange(count) - (count - 1) / 2
    window = np.sinc(n / 2) * np.hamming(count)
    line = {x: Fraction(float(tap)) for x, tap in enumerate(window / window.sum())}
    found = {(y, x): one * other for y, one in line.items() for x, other in line.items()}
    result = peak(found, 1e-3)
    one_row = float(np.abs(np.fft.fft(window / window.sum(), 2**16)).max())
    assert float(result.attained) <= one_row**2 * (1 + 1e-6)
    assert one_row**2 <= float(result.guaranteed) <= one_row**2 * 1.01


def test_edges_are_sums_with_signs() -> None:
    random = Random(8)
    for _ in range(10):
        found = random_taps(random)
        for (fy, fx), value in zip(peaks.EDGES, edge_sums(found), strict=True):
            signed = (
                (-1 if 2 * (fy * y + fx * x) % 2 else 1) * tap for (y, x), tap in found.items()
            )
            assert value == sum(signed, Fraction(0))


def test_spacing_repeats_the_response() -> None:
    kernel = '[kernel]\ntaps = [["1/3", "-2/3"], ["1/5", "1/7"]]\n[coefficient]\nbits = 4\n'
    plain = measured(kernel)
    apart = measured(f"{kernel}[image]\nspacing = [2, 3]\n")
    assert (apart.largest.attained, apart.deviation) == (plain.largest.attained, plain.deviation)
    assert apart.largest.at == (plain.largest.at[0] / 2, plain.largest.at[1] / 3)
    # Two pixels apart, half a cycle per pixel is a whole one; three apart it is one and a half.
    dc, _, across, _ = plain.gains
    assert [g.ideal for g in apart.gains] == [g.ideal for g in (dc, dc, across, across)]
    assert [g.deviation for g in apart.gains] == [g.deviation for g in (dc, dc, across, across)]


TWO = (
    '[kernel]\ncolumn = ["1/3", "1/3", "1/3"]\nrow = ["1/7", "5/7", "1/7"]\n{}'
    "[coefficient]\nbits = 6\nfrac = [4, 5]\n"
)


def test_two_passes_are_their_outer_product() -> None:
    # 1/3 -> 5/16; 1/7 -> 5/32 (4.57), 5/7 -> 23/32 (22.86).
    found = measured(TWO.format("") + "[intermediate]\nbits = 12\nfrac = 4\n")
    ideal = np.outer([1 / 3] * 3, np.array([1, 5, 1]) / 7)
    fitted = np.outer([5 / 16] * 3, np.array([5, 23, 5]) / 32)
    grid = np.abs(np.fft.fft2(fitted - ideal, (512, 512)))
    assert grid.max() <= float(found.deviation) + 1e-12
    assert float(found.largest.attained) <= grid.max() * (1 + 1e-3)
    assert found.gains[0].fitted == Fraction(15, 16) * Fraction(33, 32)
    assert found.gains[2].fitted == Fraction(15, 16) * Fraction(13, 32)
    one_pass = measured(TWO.format(""))
    assert (one_pass.largest, one_pass.gains) == (found.largest, found.gains)


def test_exact_scale_has_no_deviation() -> None:
    text = '[kernel]\ntaps = [[1, 1, 1, 1, 1]]\ndivisor = 5\n[coefficient]\nscale = "exact"\n'
    found = measured(text)
    assert found.deviation == 0
    assert [g.fitted for g in found.gains] == [1, 1, Fraction(1, 5), Fraction(1, 5)]


def test_reference_is_the_gain_at_dc_or_the_largest() -> None:
    assert measured("[kernel]\ntaps = [[1, 2, 1]]\ndivisor = 8\n").reference == Fraction(1, 2)
    sharp = measured("[kernel]\ntaps = [[-1, 2, -1]]\n")
    assert sharp.reference == 4


@pytest.mark.parametrize(("rows", "columns"), [(255, 255), (64, 64)])
def test_the_largest_boxes_take_seconds(rows: int, columns: int) -> None:
    random = Random(2)
    found = {
        (y, x): Fraction(random.randint(-1000, 1000), 2**20)
        for y in range(rows)
        for x in range(columns)
    }
    began = perf_counter()
    result = peak(found)
    assert perf_counter() - began < 10
    assert result.guaranteed - result.attained <= Fraction(3, 10**7) * result.attained
    assert float(dense(found).max()) <= float(result.guaranteed)
