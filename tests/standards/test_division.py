"""Exact division against published ways to divide by an invariant, over every 16-bit numerator.

Granlund and Montgomery, "Division by invariant integers using multiplication", PLDI 1994, theorem
4.2: with l = ceil(log2 d) and 2^(N+l) <= m d <= 2^(N+l) + 2^l, n // d = (m n) >> (N + l) for all
0 <= n < 2^N.
"""

import pytest

from implementations import Implementation, each_implementation, filtered

EVERY = [list(range(256 * row, 256 * row + 256)) for row in range(256)]


def quotients(implementation: Implementation, divisor: int, rounding: str) -> list[int]:
    """0..65535 divided by `divisor`, in order."""
    text = f"""
[filter]
name = "divide"
[kernel]
taps = [[1]]
divisor = {divisor}
[input]
bits = 16
[coefficient]
scale = "exact"
[output]
bits = 16
rounding = "{rounding}"
"""
    return [code for row in filtered(implementation, text, EVERY) for code in row]


@pytest.mark.parametrize("divisor", [3, 25, 273])
@each_implementation
def test_floor_is_the_theorems_quotient(implementation: Implementation, divisor: int) -> None:
    shift = 16 + (divisor - 1).bit_length()
    multiplier = -(-(2**shift) // divisor)
    assert 2**shift <= multiplier * divisor <= 2**shift + 2 ** (shift - 16)
    got = quotients(implementation, divisor, "toward-negative")
    assert got == [(multiplier * n) >> shift for n in range(65536)]


# First numerator at which ceil(2^16 / d) fails; the sums of a 5x5 and a 7x7 box lie beyond.
FAILING = {25: 4699, 49: 2547}


@pytest.mark.parametrize("divisor", FAILING)
@each_implementation
def test_a_short_reciprocal_would_fail(implementation: Implementation, divisor: int) -> None:
    multiplier = -(-(2**16) // divisor)
    got = quotients(implementation, divisor, "toward-negative")
    differing = [n for n in range(65536) if (multiplier * n) >> 16 != got[n]]
    assert differing[0] == FAILING[divisor]


@each_implementation
def test_rounded_by_255(implementation: Implementation) -> None:
    """Blinn's (t + (t >> 8)) >> 8 with t = x + 128 (IEEE CG&A 1995, from memory)."""
    got = quotients(implementation, 255, "ties-to-positive")
    shifted = [n + 128 for n in range(65536)]
    assert got == [(t + (t >> 8)) >> 8 for t in shifted]


@pytest.mark.parametrize("bits", [8, 10])
def test_the_theorem_itself(bits: int) -> None:
    """Every divisor, both extreme multipliers, at the numerators next to multiples."""
    for divisor in range(1, 2**bits):
        spread = (divisor - 1).bit_length()
        low = -(-(2 ** (bits + spread)) // divisor)
        high = (2 ** (bits + spread) + 2**spread) // divisor
        for multiple in range(divisor, 2**bits + 1, divisor):
            for n in (multiple - 1, multiple % 2**bits):
                assert (low * n) >> (bits + spread) == n // divisor == (high * n) >> (bits + spread)
