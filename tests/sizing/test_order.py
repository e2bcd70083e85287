"""The order of accumulation: every order of small kernels, and large ones within their floor."""

import itertools
import random
from dataclasses import replace

import numpy as np

from guardbit.model.enums import BorderMode, Overflow
from guardbit.model.filter import Accumulator, Filter
from guardbit.sizing.analyse import analyse
from guardbit.sizing.order import tap_orders

from .small import AUTO, Ints, column_then_row, pixels, plain, to_output
from .test_sizing_exhaustive import has_output, random_double, random_single, runs


def bits(low: int, high: int, signed: bool) -> int:
    """The narrowest register, from 2 bits; a signed one's where a sum is negative."""
    if not signed and low >= 0:
        return max(high.bit_length(), 2)
    return next(n for n in range(2, 99) if -(2 ** (n - 1)) <= low and high < 2 ** (n - 1))


def amounts_of(f: Filter, which: int) -> Ints:
    """Start value and what each tap that is not zero adds, at every place of every frame."""
    sums = np.concatenate([seen.sums for _, run in runs(f) for seen in run.registers[which]])
    added = np.diff(sums, axis=1)
    taps = [t.integer != 0 for t in f.passes[which].kernel.terms]
    return np.unique(np.concatenate([sums[:, :1], added[:, taps]], axis=1), axis=0)


def widths(f: Filter, which: int) -> dict[tuple[int, ...], int]:
    """The bits that every order of the taps needs, by the numbers of the taps."""
    amounts, signed = amounts_of(f, which), f.passes[which].accumulator.signed
    numbers = [n for n, t in enumerate(f.passes[which].kernel.terms, 1) if t.integer]
    made = {}
    for order in itertools.permutations(range(len(numbers))):
        sums = np.cumsum(amounts[:, [0, *(i + 1 for i in order)]], axis=1)
        key = tuple(numbers[i] for i in order)
        made[key] = bits(int(sums.min()), int(sums.max()), signed)
    return made


def test_every_order_of_small_kernels() -> None:
    rng = random.Random("orders")
    gained = proved = compared = 0
    while compared < 250:
        f = (random_single if rng.random() < 0.7 else random_double)(rng)
        if not has_output(f) or max(len(p.kernel.terms) for p in f.passes) > 5:
            continue
        f = analyse(f).filter
        for which, order in enumerate(tap_orders(f)):
            every = widths(f, which)
            own = tuple(n for n, t in enumerate(f.passes[which].kernel.terms, 1) if t.integer)
            assert order.contract == every[own]
            assert order.best == every[order.order]
            assert order.floor <= min(every.values())
            if order.is_proved_best:
                assert order.best == min(every.values())
            gained += order.best < order.contract
            proved += order.is_proved_best
            compared += 1
    assert gained > 10
    assert proved > 0.9 * compared


def test_codes_with_zero_between_them_need_no_better_order() -> None:
    """Amounts then only spread out: every order ends at the widest sums."""
    (made,) = tap_orders(plain([(3, -16, 77, 77, -16, 3)], pixels(8)))
    assert (made.contract, made.best, made.floor) == (17, 17, 17)
    assert made.order == (1, 2, 3, 4, 5, 6)


def test_taps_of_both_signs_are_interleaved() -> None:
    """Codes 16..17: three of them, less two, in turn: at most 2 * 17 - 16 is held between."""
    (made,) = tap_orders(plain([(1, 1, 1, -1, -1)], pixels(8, legal=(16, 17))))
    assert (made.contract, made.best, made.floor) == (7, 6, 6)
    assert made.is_proved_best


def test_a_first_pass_and_a_second_have_orders_of_their_own() -> None:
    middle = to_output(0, pixels(9, True, legal=(100, 140)))
    f = column_then_row(((1, 1, 1, -1, -1), pixels(8, legal=(100, 110)), middle),
                        ((1, 1, 1, -1, -1), to_output()))  # fmt: skip
    first, second = tap_orders(f)
    assert (first.register, second.register) == ("intermediate.accumulator", "accumulator")
    assert first.best < first.contract
    assert second.best < second.contract


def test_large_kernels_and_unsigned_registers() -> None:
    taps = [[i + j - 14 if i != j else 15 for j in range(15)] for i in range(15)]
    taps[14][14] = -40
    (made,) = tap_orders(plain(taps, pixels(8, legal=(200, 220))))
    assert made.floor <= made.best < made.contract
    count = sum(tap != 0 for row in taps for tap in row)
    assert sorted(made.order) == list(range(1, count + 1))
    f = plain(taps, pixels(8, legal=(200, 220)), mode=BorderMode.PERIODIC)
    terms = f.passes[0].kernel.terms
    ordered = replace(f.passes[0].kernel, terms=tuple(terms[n - 1] for n in made.order))
    moved = replace(f, passes=(replace(f.passes[0], kernel=ordered),))
    assert analyse(moved).registers[0].bits == made.best
    unsigned = Accumulator(None, False, Overflow.FORBID, AUTO.preload)
    (made,) = tap_orders(plain([(-1, 1, 1)], pixels(4, legal=(7, 7)), unsigned))
    assert (made.contract, made.best) == (4, 3)
