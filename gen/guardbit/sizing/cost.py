"""Multipliers, adders and memory, counted from the taps of a filter."""

from collections.abc import Sequence

from guardbit.model.cost import Cost, PassCost
from guardbit.model.filter import Filter, Pass, TapSet, Term
from guardbit.sizing.passes import ACCUMULATOR, FIRST_ACCUMULATOR


def cost(f: Filter) -> Cost:
    """Return what each pass costs per result, and the line buffers at the greatest width."""
    names = (ACCUMULATOR,) if len(f.passes) == 1 else (FIRST_ACCUMULATOR, ACCUMULATOR)
    made = tuple(
        _pass_cost(name, p, f.geometry.channels) for name, p in zip(names, f.passes, strict=True)
    )
    widest = f.geometry.columns.sizes[1]
    return Cost(made, widest, widest * sum(p.line_bits for p in made))


def signed_digits(value: int) -> int:
    """Return the number of digits other than 0 in the canonical signed-digit form.

    No sum of signed powers of two has fewer terms (Reitwieser, Binary Arithmetic, Advances in
    Computers 1, 1960). A digit is other than 0 where 3n/2 and n/2 differ (Prodinger, Integers 0,
    2000, A08).
    """
    return (abs(value) ^ 3 * abs(value)).bit_count()


def _pass_cost(name: str, p: Pass, channels: int) -> PassCost:
    if p.kernel.registers is not None:
        return _loadable_cost(name, p, p.kernel.registers, channels)
    terms = [term for term in p.kernel.terms if term.integer]
    factors = {odd for term in terms if (odd := _odd(term.integer)) > 1}
    rows = _rows_between(terms)
    digits = sum(signed_digits(term.integer) for term in terms)
    real = [term for term in terms if _odd(term.integer) > 1]
    return PassCost(
        name=name,
        reads=len(terms),
        multipliers=len(real),
        shifts=len(terms) - len(real),
        adders=max(len(terms) - 1, 0),
        folded_multipliers=_folded(real, terms),
        magnitudes=len({abs(term.integer) for term in terms}),
        constants=len(factors),
        signed_digit_adders=max(digits - 1, 0),
        constant_bits=len(terms) * p.kernel.bits,
        line_rows=rows,
        line_bits=rows * channels * p.source.bits,
    )


def _loadable_cost(name: str, p: Pass, s: TapSet, channels: int) -> PassCost:
    """Return the cost where each tap that is not held to one number needs a multiplier."""
    terms = p.kernel.terms
    fixed = [low for low, high in zip(s.least, s.greatest, strict=True) if low == high]
    real = len(terms) - len(fixed) + sum(bool(tap) and _odd(tap) > 1 for tap in fixed)
    reads = len(terms) - fixed.count(0)
    rows = _rows_between(terms)
    return PassCost(
        name=name,
        reads=reads,
        multipliers=real,
        shifts=reads - real,
        adders=max(reads - 1, 0),
        folded_multipliers=real,
        magnitudes=len(terms) - len(fixed) + len({abs(tap) for tap in fixed if tap}),
        constants=None,
        signed_digit_adders=None,
        constant_bits=reads * p.kernel.bits,
        line_rows=rows,
        line_bits=rows * channels * p.source.bits,
    )


def _rows_between(terms: Sequence[Term]) -> int:
    return max((t.dy for t in terms), default=0) - min((t.dy for t in terms), default=0)


def _odd(integer: int) -> int:
    """Return the odd factor of the magnitude, which is not 0."""
    magnitude = abs(integer)
    return magnitude // (magnitude & -magnitude)


def _folded(real: Sequence[Term], terms: Sequence[Term]) -> int:
    """Return how many multipliers `real` taps need if mirrored ones of `terms` share them."""
    if not real:
        return 0
    # twice the centre, so that it is whole for boxes of even size too
    dys, dxs = [t.dy for t in terms], [t.dx for t in terms]
    y, x = min(dys) + max(dys), min(dxs) + max(dxs)
    magnitude = {(t.dy, t.dx): abs(t.integer) for t in real}
    shared = sum(
        magnitude.get((y - t.dy, x - t.dx)) == abs(t.integer)
        for t in real
        if (t.dy, t.dx) < (y - t.dy, x - t.dx)
    )
    return len(real) - shared
