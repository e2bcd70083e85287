"""The contract's answer to a frame."""

from collections.abc import Iterable

import numpy as np

from guardbit.model.enums import Grid, Outside
from guardbit.model.filter import Axis, Filter, Pass
from guardbit.model.vectors import Response
from guardbit.reference.accumulate import Plane, accumulate, moved, non_zero, sum_bound
from guardbit.reference.borders import border_index, kept
from guardbit.reference.requantise import requantise
from guardbit.reference.words import Array, magnitude, stored, word_for

# Cells of one block: its sum, its products and what they read stay in a core's cache.
_BLOCK = 2**14


def respond(filter: Filter, frame: Array) -> Response:
    """Return the output and accumulators of a frame (height, width, channels) of integers.

    The filter's accumulator widths are resolved. Codes outside the range are clamped where
    `outside` says so, else computed as they are. Raises ValueError for another shape.
    """
    rows, columns = output_positions(filter, *_size(filter, frame))
    if len(filter.passes) == 1:
        plane = _image(filter, frame, columns)
        sums, codes = _run(plane, filter.passes[0], rows, columns)
        return Response(codes, (sums,))
    first, second = filter.passes
    wide_rows = _span(rows, _row_offsets(second))
    wide_columns = _span(columns, _column_offsets(second))
    first_sums, codes = _run(_image(filter, frame, wide_columns), first, wide_rows, wide_columns)
    plane = _intermediate(second, codes, wide_rows, wide_columns)
    sums, codes = _run(plane, second, rows, columns)
    read = np.ix_(
        _read(rows, _row_offsets(second), wide_rows),
        _read(columns, _column_offsets(second), wide_columns),
    )
    return Response(codes, (first_sums[read], sums))


def rejects(filter: Filter, frame: Array) -> bool:
    """Return whether a `reject` filter refuses the frame: an illegal code in a row it reads.

    A row counts, whole, if a tap that is not zero reads it for some output of the frame; a tap
    in a register counts whatever it holds.
    """
    rows, columns = output_positions(filter, *_size(filter, frame))
    if filter.outside is not Outside.REJECT or not rows or not columns:
        return False
    height = frame.shape[0]
    offsets = {0}
    for which in filter.passes:
        offsets = {a + b for a in offsets for b in {term.dy for term in which.kernel.live}}
    read = {int(row) for dy in offsets for row in _index(filter, 0, moved(rows, dy), height)}
    codes = frame[sorted(read - {height})]
    return bool(np.any((codes < filter.input.low) | (codes > filter.input.high)))


def output_positions(filter: Filter, height: int, width: int) -> tuple[range, range]:
    """Return the output rows and columns of a frame, in image coordinates; may be empty."""
    geometry = filter.geometry
    return (
        kept(geometry.rows, geometry.extent, height),
        kept(geometry.columns, geometry.extent, width),
    )


def _size(filter: Filter, frame: Array) -> tuple[int, int]:
    """Return the height and width of a frame. Raises ValueError if it is none."""
    if frame.ndim != 3 or frame.dtype.kind not in "iu" or 0 in frame.shape:
        raise ValueError(f"no frame: {frame.dtype} of shape {frame.shape}")
    if frame.shape[2] != filter.geometry.channels:
        raise ValueError(f"{frame.shape[2]} channels instead of {filter.geometry.channels}")
    return frame.shape[0], frame.shape[1]


def _image(filter: Filter, frame: Array, columns: range) -> Plane:
    """Return the frame as the first pass reads it for outputs in the columns given.

    Codes are clamped, the constant is set as one more row and column, the pedestal is
    subtracted, and columns outside are filled in.
    """
    height, width, channels = frame.shape
    source = filter.input
    legal = (source.low, source.high) if filter.outside is Outside.CLAMP else ()
    values = (int(frame.min()), int(frame.max()), filter.border.value, *legal)
    reach = max(abs(value - source.pedestal) for value in values)
    bound = max(sum_bound(filter.passes[0], reach), reach + abs(source.pedestal))
    cells = np.full((height + 1, width + 1, channels), filter.border.value, word_for(bound))
    image = cells[:height, :width]
    image[...] = frame
    if legal:
        np.minimum(np.maximum(image, source.low, out=image), source.high, out=image)
    cells -= source.pedestal
    held = _span(columns, _column_offsets(filter.passes[0]))
    cells = cells.take(_index(filter, 1, held, width), axis=1)
    mode, pitch = filter.border.mode, _pitch(filter, filter.geometry.rows)
    return Plane(cells, range(height), held, mode, pitch)


def _intermediate(second: Pass, codes: Array, rows: range, columns: range) -> Plane:
    """Return the first pass's codes as the second reads them: never outside."""
    reach = magnitude(codes) + abs(second.source.pedestal)
    word = word_for(max(sum_bound(second, reach), reach))
    cells = codes.astype(word) - second.source.pedestal
    return Plane(cells, rows, columns)


def _run(plane: Plane, which: Pass, rows: range, columns: range) -> tuple[Array, Array]:
    """Return final accumulators and codes at rows x columns, computed block by block."""
    channels = plane.cells.shape[2]
    sums = [np.empty((0, len(columns), channels), np.int64)]
    codes = list(sums)
    step = max(1, _BLOCK // max(1, len(columns) * channels))
    for top in range(0, len(rows) if columns else 0, step):
        block = accumulate(plane, which, rows[top : top + step], columns)
        sums.append(stored(block))
        codes.append(requantise(which.requantiser, which.accumulator.preload, block))
    return _stacked(sums, len(rows)), _stacked(codes, len(rows))


def _stacked(blocks: list[Array], rows: int) -> Array:
    _, width, channels = blocks[0].shape
    return np.concatenate(blocks).reshape(rows, width, channels)


def _row_offsets(which: Pass) -> set[int]:
    return {term.dy for term in non_zero(which)}


def _column_offsets(which: Pass) -> set[int]:
    return {term.dx for term in non_zero(which)}


def _span(positions: range, offsets: set[int]) -> range:
    """Return positions that include all read by taps of the offsets given."""
    if not positions or not offsets:
        return range(0)
    if offsets == {0}:
        return positions
    return range(positions[0] + min(offsets), positions[-1] + max(offsets) + 1)


def _read(positions: range, offsets: Iterable[int], span: range) -> Array:
    """Return where in their span the positions read lie, ascending."""
    outputs = np.arange(positions.start, positions.stop, positions.step)
    read = np.unique([outputs + offset for offset in offsets]).astype(np.intp)
    return (read - span.start) // span.step


def _index(filter: Filter, axis: int, positions: range, length: int) -> Array:
    along = (filter.geometry.rows, filter.geometry.columns)[axis]
    return border_index(positions, length, filter.border.mode, _pitch(filter, along))


def _pitch(filter: Filter, axis: Axis) -> int:
    return axis.spacing if filter.border.grid is Grid.SITE else 1
