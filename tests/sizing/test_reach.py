"""Sets of reachable sums, and sums that clamp at every add, against plain enumeration."""

import itertools
import random
from dataclasses import replace

import pytest

from guardbit.arith.rounding import requantise
from guardbit.model.enums import Overflow, Rounding
from guardbit.model.sizing import Interval
from guardbit.sizing.clamping import (
    Add,
    Chain,
    greatest,
    loose_ends,
    pixels_of_end,
    reachable,
    whole,
)
from guardbit.sizing.reach import (
    Modulus,
    Reach,
    codes_of,
    pixels_between,
    pixels_of_sum,
    reaches_all,
    sum_sets,
)

from .small import pixels, to_output

SEVEN_BITS = Interval(-64, 63)


def numbers(reach: Reach) -> list[int]:
    return [int(member) for member in reach.members]


def clamped(chain: Chain, values: dict[tuple[int, int], int]) -> int:
    """The register at the end, add by add."""
    low, high = chain.word.low, chain.word.high
    total = min(max(chain.start, low), high)
    for add in chain.adds:
        amount = add.amount if add.pixel is None else add.coefficient * values[add.pixel]
        total = min(max(total + amount, low), high)
    return total


def one_pixel(taps: tuple[int, ...], top: int, word: Interval) -> Chain:
    adds = tuple(Add(tap, (0, 0)) for tap in taps)
    return Chain(0, adds, word, Interval(0, top), Reach.run(Interval(0, top)))


def test_ends_of_a_shared_pixel_are_not_those_of_the_sum() -> None:
    """Worked by hand: 9 gives 27, 18, 63, 27; 15 gives 45, 30, 63 (from 105), 3."""
    chain = one_pixel((3, -1, 5, -4), 15, SEVEN_BITS)
    found = greatest(chain)
    assert found is not None
    assert (found.value, dict(found.pixels)) == (27, {(0, 0): 9})
    assert clamped(chain, {(0, 0): 15}) == 3
    assert loose_ends(chain) == Interval(-64, 63)
    stages = reachable(chain)
    assert stages is not None
    assert numbers(whole(stages)) == sorted({clamped(chain, {(0, 0): v}) for v in range(16)})


def random_chain(rng: random.Random) -> Chain:
    pixels_ = [None, (0, 0), (0, 1), (1, 0)]
    taps = [-3, -2, -1, 1, 2, 5]
    adds = [
        Add(rng.choice(taps), rng.choice(pixels_), rng.randint(-4, 4))
        for _ in range(rng.randint(1, 6))
    ]
    values = Reach.of(rng.sample(range(-3, 6), rng.randint(1, 4)))
    bits = rng.randint(2, 5)
    signed = Interval(-(2 ** (bits - 1)), 2 ** (bits - 1) - 1)
    word = rng.choice([signed, Interval(0, 2**bits - 1)])
    return Chain(rng.randint(-3, 5), tuple(adds), word, values.ends, values)


def test_chains_against_every_choice_of_pixels() -> None:
    rng = random.Random("chains")
    shared = 0
    for _ in range(600):
        chain = random_chain(rng)
        assert chain.values is not None
        read = sorted({add.pixel for add in chain.adds if add.pixel is not None})
        choices = itertools.product(numbers(chain.values), repeat=len(read))
        truth = {clamped(chain, dict(zip(read, choice, strict=True))) for choice in choices}
        most, least = greatest(chain), greatest(chain.mirrored())
        assert most is not None
        assert least is not None
        assert (-least.value, most.value) == (min(truth), max(truth))
        assert clamped(chain, dict(most.pixels)) == max(truth)
        assert clamped(chain, dict(least.pixels)) == min(truth)
        stages = reachable(chain)
        assert stages is not None
        assert set(numbers(whole(stages))) == truth
        for target in truth:
            assert clamped(chain, pixels_of_end(chain, stages, target)) == target
        loose = loose_ends(chain)
        assert loose.low <= min(truth) <= max(truth) <= loose.high
        shared += chain.shares
        if not chain.shares:
            assert loose == Interval(min(truth), max(truth))
    assert shared > 200


def test_what_is_too_much_work_is_left() -> None:
    """Three pending pixels of 256 values each are 2**24 sums for every add between."""
    reads = [(0, 0), (0, 1), (0, 2), (0, 2), (0, 1), (0, 0)]
    values = Interval(0, 255)
    chain = Chain(0, tuple(Add(3, at) for at in reads), SEVEN_BITS, values, Reach.run(values))
    assert greatest(chain) is None
    assert greatest(chain, 1 << 26) is not None
    assert reachable(chain) is None
    assert greatest(replace(chain, values=None)) is None


@pytest.mark.parametrize("wraps", [None, True, False])
def test_sums_against_every_choice_of_pixels(wraps: bool | None) -> None:
    rng = random.Random(f"sums{wraps}")
    for _ in range(300):
        weights = [rng.choice([-3, -2, -1, 1, 2, 5]) for _ in range(rng.randint(0, 4))]
        values, start = Reach.of(rng.sample(range(-3, 6), rng.randint(1, 4))), rng.randint(-20, 20)
        bits = rng.randint(2, 4)
        low = -(2 ** (bits - 1)) if wraps else 0
        modulus = None if wraps is None else Modulus(bits, Interval(low, low + 2**bits - 1))

        def total(choice: list[int], weights: list[int] = weights, start: int = start,
                  low: int = low, bits: int = bits) -> int:  # fmt: skip
            exact = start + sum(w * v for w, v in zip(weights, choice, strict=True))
            return exact if wraps is None else (exact - low) % 2**bits + low

        choices = itertools.product(numbers(values), repeat=len(weights))
        truth = {total(list(choice)) for choice in choices}
        sets = sum_sets(start, weights, values, modulus)
        assert sets is not None
        assert set(numbers(sets[-1])) == truth
        for target in truth:
            chosen = pixels_of_sum(sets, weights, values, modulus, target)
            assert total(chosen) == target
            assert all(value in values for value in chosen)


def test_sums_that_reach_all_integers() -> None:
    rng = random.Random("all")
    count = 0
    for _ in range(500):
        weights = [rng.choice([-9, -4, -2, -1, 1, 2, 3, 5, 8]) for _ in range(rng.randint(1, 4))]
        low = rng.randint(-3, 3)
        values = Interval(low, low + rng.randint(1, 4))
        sums = sorted(
            {
                sum(w * v for w, v in zip(weights, choice, strict=True))
                for choice in itertools.product(range(low, values.high + 1), repeat=len(weights))
            }
        )
        assert reaches_all(weights, values) is (len(sums) == sums[-1] - sums[0] + 1)
        count += reaches_all(weights, values)
        for total in sums if reaches_all(weights, values) else ():
            chosen = pixels_between(weights, values, total - sums[0])
            assert sum(w * v for w, v in zip(weights, chosen, strict=True)) == total
            assert all(low <= value <= values.high for value in chosen)
    assert count > 100


def test_sums_too_many_to_list() -> None:
    codes = Reach.run(Interval(0, 65535))
    assert sum_sets(0, [2**16] * 4, codes, None) is None
    assert sum_sets(0, [1], codes, Modulus(32, Interval(0, 2**32 - 1))) is None
    assert sum_sets(1 << 70, [1], codes, None) is None


@pytest.mark.parametrize("rounding", list(Rounding))
@pytest.mark.parametrize("overflow", [Overflow.SATURATE, Overflow.WRAP])
@pytest.mark.parametrize("low", [-70, -(2**40)])
def test_codes_of_many_sums_are_those_of_each(
    rounding: Rounding, overflow: Overflow, low: int
) -> None:
    sums = Reach.run(Interval(low, low + 140))
    for shift, divisor in ((2, 1), (-1, 1), (0, 3), (1, 5), (40, 1)):
        r = to_output(shift, pixels(4, True, 1), rounding, overflow, divisor)
        made = [int(code) for code in codes_of(r, False, sums)]
        assert made == [requantise(r, False, total) for total in numbers(sums)]
