"""The binary job file that every child process reads.

Numbers are native 64-bit words. A job: the count of cases; per case a head (HEAD), per call of
the C function its entry and MOST_ARGUMENTS arguments, then the frame's rows without gaps, then
the taps. A pointer argument is an offset in bytes from its buffer, or -1 for a null pointer.
"""

import struct
from collections.abc import Iterable
from dataclasses import dataclass
from typing import Any, TypeAlias

import numpy as np

from guardbit.model.enums import Container
from guardbit.model.routine import Call, Entry, Role, Routine

MOST_ARGUMENTS = 16
HEAD = struct.Struct("=10Q")

DTYPES: dict[Container, np.dtype[Any]] = {
    Container.U8: np.dtype(np.uint8),
    Container.I8: np.dtype(np.int8),
    Container.U16: np.dtype(np.uint16),
    Container.I16: np.dtype(np.int16),
    Container.U32: np.dtype(np.uint32),
    Container.I32: np.dtype(np.int32),
}
_WORD = 1 << 64

_One: TypeAlias = tuple[int, Entry, tuple[int, int]]


@dataclass(frozen=True)
class Layout:
    """The sizes in bytes of one call's buffers, and what follows from them."""

    src_stride: int
    dst_stride: int
    dst_bytes: int
    scratch_len: int
    scratch_bytes: int


def layout(routine: Routine, call: Call) -> Layout:
    """Return the buffers that a call needs. Strides are in elements."""
    _, width, channels = call.frame.shape
    rows, columns = call.shape
    # without an argument for the stride rows follow one another
    roles = routine.frame.roles
    src_gap = call.src_gap if Role.SRC_STRIDE in roles else 0
    dst_gap = call.dst_gap if Role.DST_STRIDE in roles else 0
    dst_stride = columns * channels + dst_gap
    cells = (rows - 1) * dst_stride + columns * channels if rows and columns else 0
    length, word = 0, 0
    if routine.word is not None:
        length = max(1, routine.scratch_per_column * width + routine.scratch_fixed)
        word = routine.word[0] // 8
    size = DTYPES[routine.destination].itemsize
    src_stride = width * channels + src_gap
    return Layout(src_stride, dst_stride, cells * size, length, length * word)


def encode(tasks: Iterable[tuple[int, Routine, Call]]) -> bytes:
    """Return the job file for calls, each with the number of its routine."""
    cases = [_case(index, routine, call) for index, routine, call in tasks]
    return struct.pack("=Q", len(cases)) + b"".join(cases)


def _case(index: int, routine: Routine, call: Call) -> bytes:
    height, width, channels = call.frame.shape
    made = layout(routine, call)
    kind = DTYPES[routine.source]
    faults = dict(call.faults)
    calls = _calls(routine, call)
    taps = _taps(routine, call)
    head = HEAD.pack(
        index,
        len(calls),
        height,
        width * channels * kind.itemsize,
        made.src_stride * kind.itemsize,
        made.dst_bytes,
        made.scratch_bytes,
        faults.get(Role.WIDTH, width) or 0,
        faults.get(Role.HEIGHT, height) or 0,
        len(taps),
    )
    parts = [_arguments(routine, call, made, one) for one in calls]
    return head + b"".join(parts) + call.frame.astype(kind).tobytes() + taps


def taps_given(routine: Routine, call: Call) -> tuple[int, ...]:
    """Return the coefficients that a call passes; none if the routine takes none."""
    if routine.taps is None:
        return ()
    return routine.taps.nominal if call.taps is None else call.taps


def _taps(routine: Routine, call: Call) -> bytes:
    """Return the coefficients in their C type."""
    if routine.taps is None:
        return b""
    bits, signed = routine.taps.word
    kind = np.dtype(f"{'i' if signed else 'u'}{bits // 8}")
    return np.array(taps_given(routine, call), np.int64).astype(kind).tobytes()


def _calls(routine: Routine, call: Call) -> list[_One]:
    """Return per C call the number of its entry, the entry and its rows."""
    if not call.bands:
        return [(0, routine.frame, (0, call.shape[0]))]
    if routine.band is None:
        raise ValueError(f"{routine.name} has no entry for bands")
    return [(1, routine.band, band) for band in call.bands]


def _arguments(routine: Routine, call: Call, made: Layout, one: _One) -> bytes:
    number, entry, band = one
    height, width, _ = call.frame.shape
    dst_row = made.dst_stride * DTYPES[routine.destination].itemsize
    values: dict[Role, int | None] = {
        Role.SRC: 0,
        Role.SRC_STRIDE: made.src_stride,
        # an empty band may lie at the end of the buffer, never beyond it
        Role.DST: min(band[0] * dst_row, made.dst_bytes),
        Role.DST_STRIDE: made.dst_stride,
        Role.WIDTH: width,
        Role.HEIGHT: height,
        Role.FROM: band[0],
        Role.TO: band[1],
        Role.TAPS: 0,
        Role.SCRATCH: 0,
        Role.SCRATCH_LEN: made.scratch_len,
        **dict(call.faults),
    }
    words = [number, *(_plain(values[role]) for role in entry.roles)]
    words += [0] * (1 + MOST_ARGUMENTS - len(words))
    return struct.pack(f"={len(words)}q", *words)


def _plain(value: int | None) -> int:
    """Return a size_t as the signed word of the job file; null is -1."""
    if value is None:
        return -1
    return value - _WORD if value >= _WORD // 2 else value
