"""Why no legal frame can show that a tap is off by one, where that can be shown."""

from collections.abc import Sequence
from dataclasses import dataclass, replace
from functools import lru_cache
from math import gcd

import numpy as np
from numpy.typing import NDArray

from guardbit.model.enums import BorderMode, Overflow, Preload
from guardbit.model.filter import Filter, Requantiser
from guardbit.reference.accumulate import register_limits
from guardbit.reference.requantise import requantise
from guardbit.reference.run import respond
from guardbit.vectors.aim import Spot, boundary_near, span
from guardbit.vectors.changes import (
    SIGNS,
    Tap,
    changes,
    in_register,
    is_linear,
    single_channels,
)
from guardbit.vectors.classes import Site, axis_of

PEDESTAL = "the tap reads only the border's constant, which is the pedestal"
FLAT = "every sum there becomes the same code, with the change and without"
COARSE = "sums there lie too far from every rounding boundary for one step of the tap"
SEARCHED = "no legal codes of the few pixels read there show it (all were tried)"
_MOST_TRIED = 1 << 16
_MOST_RUN = 1 << 12


def reasons_hidden(
    filter: Filter, taps: Sequence[Tap], there: Spot, open_checks: NDArray[np.bool_]
) -> NDArray[np.object_]:
    """Return per check (tap, sign) why no legal frame can show it, "" if that is not known.

    Only checks that are open are looked at.
    """
    reasons = np.full(open_checks.shape, "", object)
    constant = filter.border.value - filter.input.pedestal
    if len(filter.passes) == 1 and constant == 0:
        reasons[there.outside] = PEDESTAL
    left = open_checks & (reasons == "")
    if is_linear(filter) and left.any():
        _explain(filter, there, left, reasons)
    elif left.any():
        chosen = np.flatnonzero(left.any(axis=1)).tolist()
        reasons[chosen] = np.where(_run_all(filter, [taps[t] for t in chosen], there), SEARCHED, "")
    return np.where(open_checks, reasons, "")


def _explain(
    filter: Filter, there: Spot, left: NDArray[np.bool_], reasons: NDArray[np.object_]
) -> None:
    if _is_flat(filter, there):
        reasons[left] = FLAT
        return
    trial = _tried(filter, there)
    for tap, sign in np.argwhere(left):
        if _is_coarse(filter, there, int(tap), SIGNS[sign]):
            reasons[tap, sign] = COARSE
        elif trial is not None and trial.never_shows(filter, there, int(tap), SIGNS[sign]):
            reasons[tap, sign] = SEARCHED


def _run_all(filter: Filter, taps: Sequence[Tap], there: Spot) -> NDArray[np.bool_]:
    """Return per tap and sign whether all frames of a spot's size, if few, show no change."""
    never = np.zeros((len(taps), len(SIGNS)), bool)
    source, (height, width) = filter.input, there.shape
    count = source.high - source.low + 1
    if not _is_alone_at(filter, there) or count ** (height * width) > _MOST_RUN:
        return never
    codes = np.arange(source.low, source.high + 1)
    every = np.stack(np.meshgrid(*[codes] * (height * width), indexing="ij"))
    stack = every.reshape(height, width, -1)
    wide = single_channels(filter, stack.shape[2])
    at = (np.array([there.row.index]), np.array([there.column.index]))
    found = changes(wide, stack, respond(wide, stack), taps, at)
    return np.array([~changed.any(axis=(1, 2)) for changed in found])


def _wraps(filter: Filter) -> bool:
    which = filter.passes[0]
    return Overflow.WRAP in (which.accumulator.overflow, which.requantiser.overflow)


def _moves(filter: Filter, there: Spot, tap: int) -> tuple[int, int]:
    """Return the least and greatest (code - pedestal) that a tap reads at the spot."""
    source = filter.input
    if there.outside[tap]:
        return (filter.border.value - source.pedestal,) * 2
    return source.low - source.pedestal, source.high - source.pedestal


def _is_flat(filter: Filter, there: Spot) -> bool:
    """Return whether all sums give one code. Rounding and clamping are monotone: ends do.

    So is an output that wraps, as far as the value before wrapping is the same.
    """
    which, source = filter.passes[0], filter.input
    codes = (source.low, source.high, filter.border.value)
    reach = max(abs(code - source.pedestal) for code in codes)
    low, high = span(filter, there)
    ends = np.array([low - reach, high + reach], object)
    limits = register_limits(which.accumulator)
    if (
        which.accumulator.overflow is Overflow.WRAP
        and not limits[0] <= ends[0] <= ends[1] <= limits[1]
    ):
        return False
    r = which.requantiser
    if r.overflow is Overflow.WRAP:
        r = replace(r, overflow=Overflow.FORBID)
    made = requantise(r, which.accumulator.preload, ends)
    return bool(made[0] == made[1])


def _is_coarse(filter: Filter, there: Spot, tap: int, sign: int) -> bool:
    """Return whether the sums' common divisor keeps them away from all boundaries.

    Sums are congruent to `start` modulo the gcd of the weights, boundaries to one of two
    residues modulo an output step; what is between them is known modulo the gcd of both.
    """
    r = filter.passes[0].requantiser
    step = r.divisor << max(-r.exponent, 0)
    common = gcd(int(np.gcd.reduce(there.weights, axis=None)), step)
    if _wraps(filter) or r.exponent > 0 or common <= 1:
        return False
    ends = sorted(sign * move for move in _moves(filter, there, tap))
    for boundary in _boundaries(r, filter.passes[0].accumulator.preload):
        up = (boundary - there.start - 1) % common + 1
        down = (there.start - boundary) % common + 1
        if ends[1] >= up or -ends[0] >= down:
            return False
    return True


@lru_cache(maxsize=64)
def _boundaries(r: Requantiser, preload: Preload) -> frozenset[int]:
    """Return boundaries of every kind that there is.

    Toward zero and ties-to-away differ by the sum's sign, ties-to-even by the step's parity:
    several neighbours at both ends of the range and about zero.
    """
    step = r.divisor << max(-r.exponent, 0)
    levels = (r.to.low - r.to.pedestal, 0, r.to.high - r.to.pedestal)
    sums = [(level + k) * step for level in levels for k in range(-3, 4)]
    near = (boundary_near(r, preload, acc) for acc in sums)
    return frozenset(boundary for boundary in near if boundary is not None)


@dataclass(frozen=True, eq=False)
class _Trial:
    """All legal codes of the few pixels that a spot reads, less the pedestal, and the sums."""

    values: dict[tuple[int, int], NDArray[np.int64]]
    sums: NDArray[np.int64]

    def never_shows(self, filter: Filter, there: Spot, tap: int, sign: int) -> bool:
        """Return whether the tap's step changes no code."""
        at = (int(there.rows[tap]), int(there.columns[tap]))
        if there.outside[tap]:
            moves: NDArray[np.int64] | int = filter.border.value - filter.input.pedestal
        else:
            moves = self.values[at]
        which = filter.passes[0]
        before, after = (
            requantise(which.requantiser, which.accumulator.preload, in_register(which, sums))
            for sums in (self.sums, self.sums + sign * moves)
        )
        return bool((before == after).all())


def _tried(filter: Filter, there: Spot) -> _Trial | None:
    """Return all cases of a spot if they are few, and if the spot stands for its class."""
    inside = ~there.outside
    pairs = zip(there.rows[inside].tolist(), there.columns[inside].tolist(), strict=True)
    used = sorted(set(pairs))
    source = filter.input
    count = source.high - source.low + 1
    if not _is_alone_at(filter, there) or count ** len(used) > _MOST_TRIED:
        return None
    codes = np.arange(source.low, source.high + 1) - source.pedestal
    grids = np.meshgrid(*[codes] * len(used), indexing="ij")
    values = dict(zip(used, grids, strict=True))
    sums = np.full([count] * len(used), there.start)
    for at, cells in values.items():
        sums = sums + int(there.weights[at]) * cells
    return _Trial(values, sums)


def _is_alone_at(filter: Filter, there: Spot) -> bool:
    return _is_alone(filter, 0, there.row) and _is_alone(filter, 1, there.column)


def _is_alone(filter: Filter, axis: int, site: Site) -> bool:
    """Return whether all positions of the class fold their reads in the same way.

    With spacing a class holds several positions, and a periodic read from the far side meets
    other pixels in a longer image.
    """
    mode = filter.border.mode
    if mode is BorderMode.CONSTANT or site.label == (0, 0):
        return True
    both = site.label[0] > 0 and site.label[1] > 0
    return axis_of(filter, axis).spacing == 1 and (mode is not BorderMode.PERIODIC or both)
