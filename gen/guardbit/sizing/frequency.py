"""The frequency responses of a filter's ideal and fitted taps, and how far they are apart."""

from collections.abc import Mapping
from fractions import Fraction
from typing import TypeAlias

from guardbit.model.filter import Filter, Pass
from guardbit.model.frequency import Frequency, Gain, Peak
from guardbit.sizing.peak import CLOSE, EDGES, Taps, edge_sums, peak

_Places: TypeAlias = dict[tuple[int, int], Fraction]

# The ideal response serves as a reference only, and it may be flat.
_ABOUT = 1e-3


def frequency(f: Filter) -> Frequency:
    """Return both responses at DC and the Nyquist edges, and their largest deviation.

    Taps stand for their real values: integers divided by their scale. Two passes act as the
    outer product of their kernels, in real arithmetic: what the intermediate rounds and clamps
    is no matter of frequency. The response is that of the filter at every pixel, before `step`
    drops some of them.
    """
    ideal, fitted = _taps(f, fitted=False), _taps(f, fitted=True)
    deviation = {
        place: fitted.get(place, Fraction(0)) - ideal.get(place, Fraction(0))
        for place in ideal.keys() | fitted.keys()
    }
    at_edges = zip(EDGES, edge_sums(ideal), edge_sums(fitted), strict=True)
    dc, down, across, both = (Gain(at, one, other) for at, one, other in at_edges)
    return Frequency(
        largest=_peak(f, deviation),
        ideal=_peak(f, ideal, _ABOUT),
        gains=(dc, down, across, both),
    )


def _taps(f: Filter, *, fitted: bool) -> _Places:
    """Return the filter's impulse response: displacement in pixels to value."""
    taps: _Places = {(0, 0): Fraction(1)}
    for each in f.passes:
        taps = _convolved(taps, _values(each, fitted=fitted))
    return taps


def _values(each: Pass, *, fitted: bool) -> _Places:
    """Return one pass's taps; a tap's contribution lands opposite to the offset it reads."""
    kernel = each.kernel
    unit = 1 / (Fraction(2) ** kernel.frac * kernel.divisor)
    return {(-t.dy, -t.dx): t.integer * unit if fitted else t.ideal for t in kernel.terms}


def _convolved(first: Mapping[tuple[int, int], Fraction], second: _Places) -> _Places:
    """Return all products; no two land on one place: passes lie along different axes."""
    return {
        (y + v, x + u): one * other
        for (y, x), one in first.items()
        for (v, u), other in second.items()
    }


def _peak(f: Filter, taps: Taps, close: float = CLOSE) -> Peak:
    """Return the largest magnitude, its place in cycles per pixel.

    Taps that lie `spacing` pixels apart repeat the response that often; the place that is
    given is the one nearest to DC.
    """
    down, across = f.geometry.rows.spacing, f.geometry.columns.spacing
    y0, x0 = min((y for y, _ in taps), default=0), min((x for _, x in taps), default=0)
    places = {((y - y0) // down, (x - x0) // across): tap for (y, x), tap in taps.items()}
    found = peak(places, close)
    return Peak(found.attained, found.guaranteed, (found.at[0] / down, found.at[1] / across))
