"""The coefficients of a pass laid out as the pixels that they multiply."""

from collections.abc import Sequence

from guardbit.emit.layout import WIDTH
from guardbit.model.filter import Axis, Geometry, Kernel

_MOST_COLUMNS = 15
_MOST_ROWS = 31


def kernel_lines(kernel: Kernel, geometry: Geometry) -> tuple[str, ...]:
    """Return a sentence and the matrix of coefficients; empty if it is too large to read.

    Coefficients that are given at run time show as their places in the array.
    """
    taps = {(t.dy, t.dx): str(t.integer) for t in kernel.terms if t.integer}
    what, empty = "Coefficients of the pixels", "0"
    if kernel.registers is not None:
        offsets = [(t.dy, t.dx) for t in kernel.terms]
        taps = dict(zip(offsets, map(str, kernel.registers.cells), strict=True))
        what, empty = "Which of the taps multiplies each pixel", "."
    if not taps:
        return ()
    rows = _lattice([dy for dy, _ in taps], geometry.rows)
    columns = _lattice([dx for _, dx in taps], geometry.columns)
    if len(rows) > _MOST_ROWS or len(columns) > _MOST_COLUMNS:
        return ()
    matrix = [[taps.get((dy, dx), empty) for dx in columns] for dy in rows]
    width = max(len(text) for row in matrix for text in row)
    lines = ["   ".join(text.rjust(width) for text in row) for row in matrix]
    if max(map(len, lines)) > WIDTH - 8:
        return ()
    where = f"{_along('row', rows)}, {_along('column', columns)}"
    return (f"{what} about the output, {where}:", *lines)


def _lattice(offsets: Sequence[int], axis: Axis) -> range:
    """Return the offsets from the least to the greatest in steps of the spacing."""
    return range(min(offsets), max(offsets) + 1, axis.spacing)


def _along(line: str, offsets: range) -> str:
    if len(offsets) == 1:
        return f"{line} {offsets[0]}"
    step = f" by {offsets.step}" if offsets.step > 1 else ""
    return f"{line}s {offsets[0]} to {offsets[-1]}{step}"
