"""The results that a child process writes, read back into outcomes.

Per case: its index, harm bits, output width and height; then twice, once for each filler of
the buffers, the statuses and the bytes of the destination.
"""

import struct
from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from guardbit.build.job import DTYPES, Layout, layout
from guardbit.model.routine import UNWRITTEN, Call, Codes, Harm, Outcome, Routine

RESULT = struct.Struct("=4Q")
FILLERS = (0xA5, 0x5A)
WROTE_OUTSIDE = 1
CHANGED_SOURCE = 2

_Rows = NDArray[np.int64]


def decode(data: bytes, tasks: Sequence[tuple[Routine, Call]]) -> list[Outcome]:
    """Return the outcomes of the cases that a child finished, in order: maybe not all."""
    outcomes: list[Outcome] = []
    at = 0
    for routine, call in tasks:
        made = layout(routine, call)
        end = at + RESULT.size + 2 * (8 * _count(call) + made.dst_bytes)
        if end > len(data):
            break
        outcomes.append(_judge(routine, call, made, data[at:end]))
        at = end
    return outcomes


def _count(call: Call) -> int:
    return max(1, len(call.bands))


def _judge(routine: Routine, call: Call, made: Layout, data: bytes) -> Outcome:
    _, bits, out_width, out_height = RESULT.unpack_from(data)
    words = 8 * _count(call)
    runs = np.frombuffer(data[RESULT.size :], np.uint8).reshape(2, -1)
    first, second = (tuple(np.frombuffer(r[:words].tobytes(), np.int64).tolist()) for r in runs)
    a, b = (_cells(routine, call, made, run[words:].tobytes()) for run in runs)
    output: Codes | None
    output, differs, stained = _merge(a, b, routine, call)
    size = (out_height, out_width) if routine.output_size else None
    if any(first) and not differs.any() and (output == UNWRITTEN).all():
        output = None
    harm, detail = _harm(bits, stained, differs, first != second)
    return Outcome(first, output, size, harm, detail)


def _harm(
    bits: int, stained: NDArray[np.bool_], differs: NDArray[np.bool_], statuses_differ: bool
) -> tuple[Harm | None, str]:
    if bits & WROTE_OUTSIDE:
        return Harm.WROTE_OUTSIDE, "outside a buffer"
    if stained.any():
        row = int(np.argwhere(stained)[0][0])
        return Harm.WROTE_OUTSIDE, f"in the gap after row {row} of the destination"
    if bits & CHANGED_SOURCE:
        return Harm.CHANGED_SOURCE, ""
    if differs.any():
        return Harm.UNSETTLED, "row {} column {} channel {}".format(*np.argwhere(differs)[0])
    return (Harm.UNSETTLED, "the status") if statuses_differ else (None, "")


def _cells(routine: Routine, call: Call, made: Layout, data: bytes) -> _Rows:
    """Return the destination as (rows, stride) cells; a gap after the last row reads 0."""
    flat = np.frombuffer(data, DTYPES[routine.destination]).astype(np.int64)
    rows = call.shape[0] if made.dst_bytes else 0
    padded = np.zeros(rows * made.dst_stride, np.int64)
    padded[: flat.size] = flat
    return padded.reshape(rows, made.dst_stride)


def _merge(
    a: _Rows, b: _Rows, routine: Routine, call: Call
) -> tuple[Codes, NDArray[np.bool_], NDArray[np.bool_]]:
    """Return the output, where the two runs differ, and which gap cells were written.

    A cell that was not written holds the filler of its run in both runs. What was written
    is alike in both, and so differs from one filler at least.
    """
    kind = DTYPES[routine.destination]
    was = [int(np.frombuffer(bytes([f]) * kind.itemsize, kind)[0]) for f in FILLERS]
    untouched = (a == was[0]) & (b == was[1])
    rows, columns = call.shape if a.size else (0, call.shape[1])
    width = columns * call.frame.shape[2]
    shape = (rows, columns, call.frame.shape[2])
    output = np.where(untouched, UNWRITTEN, a)[:, :width].reshape(shape)
    differs = ((a != b) & ~untouched)[:, :width].reshape(shape)
    return output, differs, ~untouched[: max(0, rows - 1), width:]
