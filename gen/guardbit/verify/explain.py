"""What a wrong output pixel read, and which single change of the filter would give it."""

from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass, replace

import numpy as np

from guardbit.arith.borders import positions, read_index
from guardbit.model.enums import BorderMode, Overflow, Rounding
from guardbit.model.filter import Filter, Requantiser
from guardbit.model.vectors import Codes
from guardbit.reference.run import respond
from guardbit.vectors.changes import taps, with_tap
from guardbit.vectors.classes import axis_of, offsets

_MOST_WORK = 1 << 27
_MOST_TAPS = 100
_WIDEST = 9
_LISTED = 4


def window(filter: Filter, frame: Codes, at: tuple[int, int, int]) -> str:
    """Return the codes that an output pixel reads, row by row; (v): the border's constant."""
    rows = _reads(filter, 0, frame.shape[0], at[0])
    columns = _reads(filter, 1, frame.shape[1], at[1])
    note = ""
    if len(rows) > _WIDEST or len(columns) > _WIDEST:
        note = f" (the middle of {len(rows)} rows of {len(columns)})"
        rows, columns = _middle(rows), _middle(columns)
    lines = (
        " ".join(
            f"({filter.border.value})" if r is None or c is None else str(frame[r, c, at[2]])
            for c in columns
        )
        for r in rows
    )
    return " / ".join(lines) + note


def _reads(filter: Filter, axis: int, length: int, index: int) -> list[int | None]:
    along = axis_of(filter, axis)
    position = positions(along, filter.geometry.extent, length)[index]
    return [
        read_index(filter.border, along.spacing, position + offset, length)
        for offset in offsets(filter, axis)
    ]


def _middle(reads: list[int | None]) -> list[int | None]:
    start = max(0, (len(reads) - _WIDEST) // 2)
    return reads[start : start + _WIDEST]


@dataclass(frozen=True, eq=False)
class Mismatch:
    """A frame, and its outputs as expected and as got, which differ somewhere."""

    frame: Codes
    expected: Codes
    got: Codes

    @property
    def first(self) -> tuple[int, ...]:
        """Return the place of the first output that differs."""
        return tuple(int(i) for i in np.argwhere(self.expected != self.got)[0])


def explanation(filter: Filter, first: Mismatch, others: Sequence[Mismatch] = ()) -> str:
    """Return which changes give all that was got, else the first mismatch's first wrong pixel.

    Tried are every tap by one, or left out, other borders, roundings and shifts, the kernel
    turned, and wrapping for saturation.
    """
    taps_count = sum(len(p.kernel.terms) for p in filter.passes)
    if first.frame.size * taps_count**2 > _MOST_WORK:
        return "not looked for: the frame and the kernel are large"
    cheap = [m for m in others if m.frame.size * taps_count**2 <= _MOST_WORK]
    whole: list[str] = []
    one: list[str] = []
    for name, other in _variants(filter):
        output = respond(other, first.frame).output
        if output[first.first] != first.got[first.first]:
            continue
        (whole if all(_gives(other, m) for m in (first, *cheap)) else one).append(name)
    if whole:
        frames = f" of {len(cheap) + 1} frames" if cheap else ""
        return f"every pixel{frames}: {_listed(whole)}"
    return f"this pixel: {_listed(one)}" if one else "no single change that was tried"


def _gives(filter: Filter, mismatch: Mismatch) -> bool:
    return bool(np.array_equal(respond(filter, mismatch.frame).output, mismatch.got))


def _listed(names: list[str]) -> str:
    more = f", or {len(names) - _LISTED} more" if len(names) > _LISTED else ""
    return ", or ".join(names[:_LISTED]) + more


def _variants(filter: Filter) -> Iterator[tuple[str, Filter]]:
    yield from _tap_variants(filter)
    for mode in BorderMode:
        if mode is not filter.border.mode:
            yield f"border {mode}", replace(filter, border=replace(filter.border, mode=mode))
    for index, which in enumerate(filter.passes):
        for name, other in _requantisers(which.requantiser):
            changed = replace(which, requantiser=other)
            passes = (*filter.passes[:index], changed, *filter.passes[index + 1 :])
            yield _in_pass(filter, index, name), replace(filter, passes=passes)
    yield "the kernel turned by 180 degrees", _turned(filter)


def _tap_variants(filter: Filter) -> Iterable[tuple[str, Filter]]:
    for tap in taps(filter)[:_MOST_TAPS]:
        name = f"tap {tap.term.integer} reading ({tap.term.dy}, {tap.term.dx})"
        for by in (1, -1):
            changed = with_tap(filter, tap, tap.term.integer + by)
            yield _in_pass(filter, tap.pass_index, f"{name} {by:+d}"), changed
        if abs(tap.term.integer) > 1:
            left_out = with_tap(filter, tap, 0)
            yield _in_pass(filter, tap.pass_index, f"{name} left out"), left_out


def _requantisers(r: Requantiser) -> Iterator[tuple[str, Requantiser]]:
    for rounding in Rounding:
        if rounding is not r.rounding:
            yield f"rounding {rounding}", replace(r, rounding=rounding)
    for by in (1, -1):
        yield f"a shift by {-by:+d} bit", replace(r, exponent=r.exponent + by)
    if r.overflow is not Overflow.WRAP:
        yield "output that wraps", replace(r, overflow=Overflow.WRAP)
    if r.to.pedestal:
        yield "no output pedestal", replace(r, to=replace(r.to, pedestal=0))


def _turned(filter: Filter) -> Filter:
    return replace(
        filter,
        passes=tuple(
            replace(
                which,
                kernel=replace(
                    which.kernel,
                    terms=tuple(replace(t, dy=-t.dy, dx=-t.dx) for t in which.kernel.terms),
                ),
            )
            for which in filter.passes
        ),
    )


def _in_pass(filter: Filter, index: int, name: str) -> str:
    return name if len(filter.passes) == 1 else f"{name} in pass {index + 1}"
