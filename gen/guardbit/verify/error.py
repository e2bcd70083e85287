"""The error that frames show: output codes against the ideal filter, in exact arithmetic.

The ideal filter is run as one whose integer taps are the ideal ones times their common
denominator; its sums are then exact whole numbers, however large.
"""

from collections.abc import Sequence
from dataclasses import dataclass, replace
from fractions import Fraction
from math import lcm

import numpy as np
from numpy.typing import NDArray

from guardbit.model.certificate import Figure, RungResult
from guardbit.model.decimals import lower, signed, upper
from guardbit.model.enums import Overflow, Preload, Scale
from guardbit.model.filter import Accumulator, Filter, Kernel, Term
from guardbit.model.finding import Finding, finding
from guardbit.model.sizing import Sizing
from guardbit.model.vectors import Codes, Vector
from guardbit.reference.run import respond

NAME = "error"
# Products of one frame: sums of fifty digits are slow.
_MOST_WORK = 1 << 22


@dataclass(frozen=True)
class Span:
    """The least and the greatest error of a frame, in LSB, over `outputs` output codes."""

    frame: str
    low: Fraction
    high: Fraction
    outputs: int


def result(sizing: Sizing, vectors: Sequence[Vector]) -> RungResult:
    """Return the largest error of the vectors, held against the bound.

    The bound is a claim about all legal frames: one that goes beyond it is a finding.
    """
    filter_ = sizing.filter
    chosen = [v for v in vectors if _legal(filter_, v.frame)]
    taps = len(_ideal_terms(filter_))
    small = [v for v in chosen if v.frame.size * taps <= _MOST_WORK]
    spans = _spans(filter_, small)
    findings = tuple(_beyond(sizing, spans))
    skipped = len(chosen) - len(small)
    return RungResult(
        NAME,
        ran=True,
        cases=len(spans),
        covered=(f"{sum(s.outputs for s in spans)} output codes against the ideal filter",),
        not_covered=(
            "the bound holds for all legal frames by analysis; these need not attain it",
            *([f"{skipped} frames are too large for exact arithmetic here"] if skipped else []),
        ),
        figures=_figures(spans),
        findings=findings,
    )


def _figures(spans: Sequence[Span]) -> tuple[Figure, ...]:
    if not spans:
        return ()
    low, high = min(s.low for s in spans), max(s.high for s in spans)
    return (Figure("largest error measured", f"{_low(low)} .. {_high(high)}", "LSB"),)


def _low(value: Fraction) -> str:
    return signed(lower(value))


def _high(value: Fraction) -> str:
    return signed(upper(value))


def _beyond(sizing: Sizing, spans: Sequence[Span]) -> list[Finding]:
    bound = sizing.error
    # a frame may well make a register wrap: what holds then is the bound for any input
    least, greatest = bound.overall or (bound.low, bound.high)
    if bound.assumes_no_wrap and bound.overall is None:
        return []
    return [
        finding(
            "error-beyond-bound",
            frame=span.frame,
            least=_low(span.low),
            greatest=_high(span.high),
            low=_low(least),
            high=_high(greatest),
        )
        for span in spans
        if span.low < least or span.high > greatest
    ]


def _legal(filter_: Filter, frame: Codes) -> bool:
    return bool(frame.min() >= filter_.input.low and frame.max() <= filter_.input.high)


def _spans(filter_: Filter, vectors: Sequence[Vector]) -> list[Span]:
    scale, ideal = ideal_filter(filter_)
    return [_span(filter_, scale, ideal, v) for v in vectors if v.response.output.size]


def _span(filter_: Filter, scale: int, ideal: Filter, vector: Vector) -> Span:
    found = deviation(filter_, scale, ideal, vector.frame, vector.response.output)
    low, high = Fraction(found.error.min(), found.unit), Fraction(found.error.max(), found.unit)
    return Span(vector.name, low, high, found.error.size)


@dataclass(frozen=True, eq=False)
class Deviation:
    """A frame's errors and clamped ideal codes: whole numbers of 1/`unit` LSB."""

    error: NDArray[np.object_]
    ideal: NDArray[np.object_]
    unit: int


def deviation(filter_: Filter, scale: int, ideal: Filter, frame: Codes, output: Codes) -> Deviation:
    """Return how far the codes of `output` are from the ideal ones of a frame, exactly.

    `scale` and `ideal` are those of `ideal_filter`.
    """
    to = filter_.output
    shift = to.frac - filter_.input.frac
    up, down = 2 ** max(shift, 0), 2 ** max(-shift, 0) * scale
    sums = respond(ideal, frame).accumulators[-1].astype(object)
    # Everything times `down`, so that all numbers are whole.
    code = np.clip(sums * up + to.pedestal * down, to.low * down, to.high * down)
    return Deviation(output.astype(object) * down - code, code, down)


def ideal_filter(filter_: Filter) -> tuple[int, Filter]:
    """Return (denominator, filter): its sums are the ideal filter's times the denominator."""
    terms = _ideal_terms(filter_)
    scale = lcm(*(ideal.denominator for ideal in terms.values()))
    whole = tuple(
        Term(dy, dx, ideal, int(ideal * scale)) for (dy, dx), ideal in sorted(terms.items())
    )
    first, last = filter_.passes[0], filter_.passes[-1]
    kernel = replace(first.kernel, terms=whole, scale=Scale.BINARY, frac=0, divisor=1)
    # The width is not looked at where sums neither wrap nor saturate.
    sums = Accumulator(64, True, Overflow.FORBID, Preload.ZERO)
    codes = replace(last.requantiser, exponent=0, divisor=1, overflow=Overflow.SATURATE)
    one = replace(first, kernel=kernel, accumulator=sums, requantiser=codes)
    return scale, replace(filter_, passes=(one,))


def _ideal_terms(filter_: Filter) -> dict[tuple[int, int], Fraction]:
    """Return the ideal taps by offset; of two passes, their outer product."""
    terms = {(0, 0): Fraction(1)}
    for each in filter_.passes:
        terms = _product(terms, each.kernel)
    return terms


def _product(
    terms: dict[tuple[int, int], Fraction], kernel: Kernel
) -> dict[tuple[int, int], Fraction]:
    return {
        (dy + term.dy, dx + term.dx): ideal * term.ideal
        for (dy, dx), ideal in terms.items()
        for term in kernel.terms
    }
