"""What the sizing shows that the contract forbids."""

from collections.abc import Iterator
from dataclasses import replace

from guardbit.arith.words import bits_needed, format_range
from guardbit.model.enums import Overflow
from guardbit.model.filter import Accumulator, Pass
from guardbit.model.finding import Finding, Place, Value, finding
from guardbit.model.sizing import End, Interval, RegisterSizing, RequantiserSizing, Sizing, Witness
from guardbit.sizing.passes import pixel_values
from guardbit.sizing.requantisers import output_limits

WIDEST = 64


def unmet(sizing: Sizing, place: Place | None = None) -> tuple[Finding, ...]:
    """Return a finding for each `forbid` that is not met and for each width over 64 bits.

    Each place is `place` (the spec file) with the key that the finding is about.
    """
    found: list[Finding] = []
    stages = zip(sizing.filter.passes, sizing.registers, sizing.requantisers, strict=True)
    for p, register, requantiser in stages:
        here = replace(place or Place(), key=f"{register.name}.bits")
        there = replace(place or Place(), key=f"{requantiser.name}.overflow")
        found += _register(p, register, here)
        found += _requantiser(p, register, requantiser, there)
    return tuple(found)


def _register(p: Pass, r: RegisterSizing, place: Place) -> Iterator[Finding]:
    accumulator = p.accumulator
    if r.bits > WIDEST:
        yield finding("accumulator-over-64", place, register=r.name, needed=r.bits)
    elif accumulator.overflow is Overflow.FORBID:
        yield from _forbidden(accumulator, r, place)
    if accumulator.overflow is Overflow.SATURATE:
        yield from _products(p, r, place)


def _forbidden(accumulator: Accumulator, r: RegisterSizing, place: Place) -> Iterator[Finding]:
    word = format_range(r.bits, accumulator.signed)
    # the end that needs more bits is the one that leaves the word if any does
    low_is_worse = ~r.partial.low >= r.partial.high
    if not accumulator.signed and r.partial.low < 0:
        key = place.key and place.key.replace(".bits", ".signed")
        yield _exceeded("accumulator-negative", replace(place, key=key), r, End.LEAST, 0)
    elif low_is_worse and r.partial.low < word.low:
        yield _exceeded("accumulator-too-narrow", place, r, End.LEAST, word.low)
    elif r.partial.high > word.high:
        yield _exceeded("accumulator-too-narrow", place, r, End.GREATEST, word.high)


def _exceeded(kind: str, place: Place, r: RegisterSizing, end: End, limit: int) -> Finding:
    """Return the finding with the frame that shows it, or of kind "...-bound" without one."""
    value = r.partial.low if end is End.LEAST else r.partial.high
    common: dict[str, Value] = {
        "register": r.name,
        "bits": r.bits,
        "needed": r.bits_forbid,
        "end": end.value,
    }
    witness = _witness(r, end, partial=True)
    common |= {"value": value, "limit": limit}
    if witness is None:
        return finding(f"{kind}-bound", place, **common)
    return finding(kind, place, **common, **_frame(witness))


def _witness(r: RegisterSizing, end: End, *, partial: bool) -> Witness | None:
    found = (w for w in r.witnesses if w.end is end and w.partial == partial)
    return next(found, None)


def _frame(witness: Witness) -> dict[str, int]:
    """Return the size of a witness's frame, and where in it the end is reached."""
    row, column = witness.position
    return {
        "height": witness.height,
        "width": witness.width,
        "row": row,
        "column": column,
        "after": witness.after,
    }


def _products(p: Pass, r: RegisterSizing, place: Place) -> Iterator[Finding]:
    """Yield a finding if a saturating accumulator would add a product of over 64 bits."""
    values = pixel_values(p.source)
    most = max(abs(values.low), abs(values.high))
    for term in p.kernel.terms:
        needed = bits_needed(-most * abs(term.integer), most * abs(term.integer), True)
        if needed is not None and needed > WIDEST:
            yield finding(
                "product-over-64", place, register=r.name, tap=term.integer, needed=needed
            )
            return


def _requantiser(
    p: Pass, register: RegisterSizing, r: RequantiserSizing, place: Place
) -> Iterator[Finding]:
    if r.bits > WIDEST:
        yield finding("requantiser-over-64", place, stage=r.name, needed=r.bits)
    if p.requantiser.overflow is Overflow.FORBID and r.can_overflow:
        limits = output_limits(p.requantiser)
        end = End.LEAST if r.unlimited.low < limits.low else End.GREATEST
        yield _left(register, r, limits, end, place)


def _left(
    register: RegisterSizing, r: RequantiserSizing, limits: Interval, end: End, place: Place
) -> Finding:
    value = r.unlimited.low if end is End.LEAST else r.unlimited.high
    common: dict[str, Value] = {
        "stage": r.name,
        "value": value,
        "low": limits.low,
        "high": limits.high,
    }
    witness = _witness(register, end, partial=False)
    # a register that wraps or saturates need not hold its sum's end in that frame
    if witness is None or register.held != register.final:
        return finding("code-out-of-range-bound", place, **common)
    return finding("code-out-of-range", place, **common, **_frame(witness))
