"""What the sizing shows that the contract forbids."""

from collections.abc import Iterator
from dataclasses import dataclass, replace

from guardbit.arith.intervals import contains
from guardbit.arith.words import bits_needed, format_range
from guardbit.model.enums import Overflow
from guardbit.model.filter import Filter, Kernel, Pass
from guardbit.model.finding import Finding, Place, Value, finding
from guardbit.model.sizing import End, Interval, RegisterSizing, RequantiserSizing, Sizing, Witness
from guardbit.sizing.outcome import outcome
from guardbit.sizing.passes import pixel_values
from guardbit.sizing.requantisers import output_limits

WIDEST = 64


def unmet(sizing: Sizing, place: Place | None = None) -> tuple[Finding, ...]:
    """Return a finding for each `forbid` that is not met and for each width over 64 bits.

    Each place is `place` (the spec file) with the key that the finding is about.
    """
    found: list[Finding] = []
    for stage in _stages(sizing):
        here = replace(place or Place(), key=f"{stage.register.name}.bits")
        there = replace(place or Place(), key=f"{stage.requantiser.name}.overflow")
        found += _register(stage, here)
        found += _requantiser(stage.its_pass, stage.register, stage.requantiser, there)
    return tuple(found)


@dataclass(frozen=True)
class Stage:
    """One pass of a filter of resolved widths, by its index, and how it is sized."""

    filter: Filter
    index: int
    register: RegisterSizing
    requantiser: RequantiserSizing

    @property
    def its_pass(self) -> Pass:
        """Return the pass."""
        return self.filter.passes[self.index]


def _stages(sizing: Sizing) -> Iterator[Stage]:
    for index, pair in enumerate(zip(sizing.registers, sizing.requantisers, strict=True)):
        yield Stage(sizing.filter, index, *pair)


def _register(stage: Stage, place: Place) -> Iterator[Finding]:
    r, overflow = stage.register, stage.its_pass.accumulator.overflow
    if r.bits > WIDEST:
        yield finding("accumulator-over-64", place, register=r.name, needed=r.bits)
    elif overflow is Overflow.FORBID:
        yield from _forbidden(stage, place)
    if overflow is Overflow.SATURATE:
        yield from _products(stage.its_pass, r, place)


def _forbidden(stage: Stage, place: Place) -> Iterator[Finding]:
    r = stage.register
    word = format_range(r.bits, r.signed)
    # the end that needs more bits is the one that leaves the word if any does
    low_is_worse = ~r.partial.low >= r.partial.high
    if not r.signed and r.partial.low < 0:
        key = place.key and place.key.replace(".bits", ".signed")
        yield _exceeded(stage, "accumulator-negative", replace(place, key=key), End.LEAST, 0)
    elif low_is_worse and r.partial.low < word.low:
        yield _exceeded(stage, "accumulator-too-narrow", place, End.LEAST, word.low)
    elif r.partial.high > word.high:
        yield _exceeded(stage, "accumulator-too-narrow", place, End.GREATEST, word.high)


def _exceeded(stage: Stage, kind: str, place: Place, end: End, limit: int) -> Finding:
    """Return the finding with the frame that shows it, or of kind "...-bound" without one.

    Its kind ends in "-wrap" where a register that wraps would do at that width.
    """
    r, word = stage.register, format_range(stage.register.bits, stage.register.signed)
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
    values = common | _frame(witness) | _outcomes(stage, witness)
    if contains(word, r.final):
        return finding(f"{kind}-wrap", place, **values)
    return finding(kind, place, **values)


def _outcomes(stage: Stage, witness: Witness) -> dict[str, Value]:
    """Return what the register and its requantiser make of the witness in the given width."""
    exact, wrapped, saturated = (
        outcome(stage.filter, stage.index, witness, policy)
        for policy in (Overflow.FORBID, Overflow.WRAP, Overflow.SATURATE)
    )
    return {
        "stage": stage.requantiser.name,
        "final": exact.held,
        "code": exact.code,
        "wrapped": wrapped.held,
        "wrapped_code": wrapped.code,
        "saturated": saturated.held,
        "saturated_code": saturated.code,
    }


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
    for tap in _taps(p.kernel):
        needed = bits_needed(-most * abs(tap), most * abs(tap), True)
        if needed is not None and needed > WIDEST:
            yield finding("product-over-64", place, register=r.name, tap=tap, needed=needed)
            return


def _taps(kernel: Kernel) -> tuple[int, ...]:
    """Return the taps, or the limits of those that are loaded."""
    s = kernel.registers
    return tuple(t.integer for t in kernel.terms) if s is None else (*s.least, *s.greatest)


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
    witness = _holding(register, end)
    if witness is None or not r.exact:
        return finding("code-out-of-range-bound", place, **common)
    return finding("code-out-of-range", place, **common, **_frame(witness))


def _holding(r: RegisterSizing, end: End) -> Witness | None:
    """Return the frame in which the register ends at that end of what it holds."""
    held = next((w for w in r.held_witnesses if w.end is end), None)
    return held or _witness(r, end, partial=False)
