"""What each cause alone makes of the error, as exact intervals in LSB of the output code.

- coefficient fitting: fitted minus ideal value of the inputs whose ideal code is a legal one;
- intermediate rounding, and final rounding: what rounding adds, over the residues that the
  sums can leave; what the second pass then makes of it, if every result is off by its worst;
- intermediate saturation: likewise, of what clamping to the intermediate format adds;
- saturation: what clamping the output code adds for inputs whose ideal code is a legal one.

Inputs are real numbers of the pixels' range here. Where wrapping or a clamping register can act,
that is left out.
"""

from collections.abc import Iterable, Iterator
from fractions import Fraction
from functools import reduce
from math import ceil, floor

from guardbit.arith.rounding import ratio, unlimited
from guardbit.arith.words import clamp
from guardbit.model.enums import Overflow
from guardbit.model.filter import Filter, Pass
from guardbit.model.sizing import ErrorPart, Interval
from guardbit.sizing.error.columns import residues
from guardbit.sizing.error.inputs import Case, Cases, Form, form
from guardbit.sizing.error.pixels import pixel_envelope, sum_range
from guardbit.sizing.error.subject import Subject, subject
from guardbit.sizing.noise import NOTHING, Span
from guardbit.sizing.passes import is_preloaded, start_value

FITTING = "coefficient fitting"
MIDDLE_ROUNDING = "intermediate rounding"
MIDDLE_SATURATION = "intermediate saturation"
FINAL_ROUNDING = "final rounding"
SATURATION = "saturation"


def parts(f: Filter, found: Cases) -> tuple[ErrorPart, ...]:
    """Return the contributions, in the order in which they arise."""
    made = {FITTING: _joined(_fitting(f, form(f, case)) for case in found.items)}
    if len(f.passes) == 2:
        made[MIDDLE_ROUNDING] = _joined(_middle_rounding(f, case) for case in found.items)
        made[MIDDLE_SATURATION] = _joined(_middle_saturation(f, case) for case in found.items)
    made[FINAL_ROUNDING] = _joined(_final_rounding(f, case) for case in found.items)
    made[SATURATION] = _joined(_saturation(f, case) for case in found.items)
    return tuple(ErrorPart(cause, span.low, span.high) for cause, span in made.items())


def ideal_range(f: Filter, found: Cases) -> Span:
    """Return the range of the ideal code before it is clamped."""
    spans = []
    for case in found.items:
        made = form(f, case)
        ends = sum_range(made.inputs, made.values)
        unit = made.inputs.denominator
        spans.append(Span(Fraction(ends.low, unit), Fraction(ends.high, unit)))
    return reduce(Span.joined, spans)


def _joined(spans: Iterable[Span | None]) -> Span:
    """Return the least span of all; nothing where there are none."""
    made = [span for span in spans if span is not None]
    return reduce(Span.joined, made) if made else NOTHING


def _fitting(f: Filter, made: Form) -> Span | None:
    """Return the range of fitted minus ideal value over legal ideal codes; None without any."""
    unit = made.inputs.denominator
    low, high = Fraction(f.output.low * unit), Fraction(f.output.high * unit)
    ends = []
    for sign in (1, -1):
        ideal = pixel_envelope(made.inputs, made.values, sign).clipped(low, high)
        if ideal is None:
            return None
        ends.append(sign * Fraction(min(ideal.costs), ideal.unit))
    return Span(*ends)


def _middle_rounding(f: Filter, case: Case) -> Span:
    assert case.first is not None
    p, sums = f.passes[0], sum_range(case.first, case.values)
    return _passed_on(f, case, residues(p, case.first.common, case.first.amount, sums))


def _middle_saturation(f: Filter, case: Case) -> Span:
    assert case.first is not None
    p, sums = f.passes[0], sum_range(case.first, case.values)
    if p.requantiser.overflow is not Overflow.SATURATE:
        return NOTHING
    return _passed_on(f, case, _clamped(p, sums.low + start_value(p), sums.high + start_value(p)))


def _clamped(p: Pass, low: int, high: int) -> Span:
    """Return the range of what clamping the codes of sums low..high adds."""
    r = p.requantiser
    values = [unlimited(r, is_preloaded(p), end) for end in (high, low)]
    changes = [Fraction(clamp(value, r.to.low, r.to.high) - value) for value in values]
    return Span(min(changes[0], Fraction(0)), max(changes[1], Fraction(0)))


def _passed_on(f: Filter, case: Case, error: Span) -> Span:
    """Return what an error of every result of the first pass amounts to at the output."""
    unit = Fraction(*ratio(f.passes[1].requantiser))
    shares = [weight.amount * weight.count * unit for weight in case.last.weights]
    rise, fall = sum(s for s in shares if s > 0), sum(s for s in shares if s < 0)
    return error.scaled(Fraction(rise)) + error.scaled(Fraction(fall))


def _final_rounding(f: Filter, case: Case) -> Span | None:
    s = subject(f, case, 1)
    if s is None:
        return None
    p, start = f.passes[-1], start_value(f.passes[-1])
    sums = Interval(s.stairs.sum_of(0) - start, s.stairs.sum_of(s.stairs.last) - start)
    return residues(p, case.last.common, case.last.amount - start, sums)


def _saturation(f: Filter, case: Case) -> Span | None:
    """Return the range over the sums that go with a legal ideal code; None without any."""
    p = f.passes[-1]
    if p.requantiser.overflow is not Overflow.SATURATE:
        return None
    least, most = subject(f, case, 1), subject(f, case, -1)
    if least is None or most is None:
        return None
    spans = list(_legal_sums(least, most))
    low, high = max(low for low, _ in spans), min(high for _, high in spans)
    return _clamped(p, least.stairs.sum_of(low), least.stairs.sum_of(high)) if low <= high else None


def _legal_sums(least: Subject, most: Subject) -> Iterator[tuple[int, int]]:
    """Yield the first and last number of sums whose ideal codes reach down, and up, far enough."""
    stairs, nothing = least.stairs, (1, 0)
    yield stairs.quiet() or nothing
    for s, level in ((least, least.legal.high), (most, -least.legal.low)):
        ends = s.ideal.within(Fraction(level))
        if ends is None:
            yield nothing
        elif stairs.step:
            low, high = ((end - stairs.base) / stairs.step for end in ends)
            yield ceil(low), floor(high)
