"""A second statement of the arithmetic: scalar roundings mapped over arrays, SciPy's sums.

Nothing here comes from the reference. The image is extended by np.pad alone: it pads vectors
of indices, from which pixels are gathered, so that distant origins cost nothing. Taps that
are `spacing` apart meet only pixels of one residue, and each residue is convolved alone.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from guardbit.arith.borders import positions
from guardbit.arith.rounding import requantise, rounding_constant
from guardbit.arith.words import clamp, format_range
from guardbit.model.enums import BorderMode, Grid, Outside, Overflow, Preload
from guardbit.model.filter import Axis, Border, Filter, Pass
from guardbit.model.sizing import Interval
from guardbit.model.vectors import Codes
from guardbit.verify.typing import Array

_PAD = {
    BorderMode.REPLICATE: "edge",
    BorderMode.HALF_SAMPLE: "symmetric",
    BorderMode.WHOLE_SAMPLE: "reflect",
    BorderMode.PERIODIC: "wrap",
}


def requantised(which: Pass, acc: Array, known: dict[int, int] | None = None) -> Array:
    """Return the codes of accumulator values, each distinct value computed as a scalar.

    `known` remembers the codes of values between calls.
    """
    seen = {} if known is None else known
    distinct, places = np.unique(acc, return_inverse=True)
    values = distinct.tolist()
    preloaded = which.accumulator.preload is Preload.ROUNDING
    for value in values:
        if value not in seen:
            seen[value] = requantise(which.requantiser, preloaded, value)
    codes = [seen[value] for value in values]
    return np.array(codes, np.int64).reshape(-1)[places].reshape(acc.shape)


def start_value(which: Pass) -> int:
    """Return what the accumulator holds before the first product."""
    if which.accumulator.preload is Preload.ZERO:
        return 0
    constant = rounding_constant(which.requantiser)
    if which.accumulator.overflow is Overflow.SATURATE:
        limits = register(which)
        return clamp(constant, limits.low, limits.high)
    return constant


def register(which: Pass) -> Interval:
    """Return the numbers that the pass's accumulator holds. Its width is resolved."""
    assert which.accumulator.bits is not None
    return format_range(which.accumulator.bits, which.accumulator.signed)


@dataclass(frozen=True)
class _Block:
    """Rows or columns at which a pass is computed, every one of them: positions first..last."""

    first: int
    last: int

    @property
    def count(self) -> int:
        """Return how many positions there are."""
        return self.last - self.first + 1


@dataclass(frozen=True, eq=False)
class Second:
    """Final accumulators of the last pass by SciPy, modulo 2**64.

    `sure` is False where an accumulator that saturates may have done so on the way: there
    the sum says nothing.
    """

    sums: NDArray[np.int64]
    sure: NDArray[np.bool_]


def second_sums(filter: Filter, frame: Codes, may_saturate: tuple[bool, ...]) -> Second | None:
    """Return the last pass's sums for a frame; None if there is no output, or no sure one.

    `may_saturate` says per pass whether its accumulator can leave its limits.
    """
    rows = positions(filter.geometry.rows, filter.geometry.extent, frame.shape[0])
    columns = positions(filter.geometry.columns, filter.geometry.extent, frame.shape[1])
    if not rows or not columns or any(may_saturate[:-1]):
        return None
    last = filter.passes[-1]
    blocks = (_Block(rows[0], rows[-1]), _Block(columns[0], columns[-1]))
    image = _last_source(filter, frame, blocks)
    sums, sure = _convolved(filter, last, image, blocks, may_saturate[-1])
    steps = (filter.geometry.rows.step, filter.geometry.columns.step)
    return Second(sums[:: steps[0], :: steps[1]], sure[:: steps[0], :: steps[1]])


def _last_source(filter: Filter, frame: Codes, blocks: tuple[_Block, _Block]) -> Codes:
    """Return what the last pass reads, less its pedestal, over blocks widened by its taps."""
    wide = _widened(filter.passes[-1], blocks)
    if len(filter.passes) == 1:
        return _extended(filter, frame, wide)
    first, last = filter.passes
    sums, _ = _convolved(
        filter, first, _extended(filter, frame, _widened(first, wide)), wide, False
    )
    return requantised(first, in_register(first, sums)) - last.source.pedestal


def in_register(which: Pass, sums: NDArray[np.int64]) -> NDArray[np.int64]:
    """Return sums modulo 2**64 as the register shows them: wrapped if it wraps."""
    if which.accumulator.overflow is not Overflow.WRAP:
        return sums
    limits = register(which)
    mask = np.uint64(limits.high - limits.low)
    bits = sums.view(np.uint64) & mask
    sign = np.uint64(-limits.low)
    return ((bits ^ sign) - sign).view(np.int64)


def _widened(which: Pass, blocks: tuple[_Block, _Block]) -> tuple[_Block, _Block]:
    terms = which.kernel.terms
    made = []
    for axis, block in enumerate(blocks):
        moves = [(t.dy, t.dx)[axis] for t in terms] or [0]
        made.append(_Block(block.first + min(moves), block.last + max(moves)))
    return made[0], made[1]


def _extended(filter: Filter, frame: Codes, blocks: tuple[_Block, _Block]) -> Codes:
    """Return (code - pedestal) at every position of the blocks."""
    source = filter.input
    codes = np.clip(frame, source.low, source.high) if filter.outside is Outside.CLAMP else frame
    rows = gathered(filter.border, filter.geometry.rows, frame.shape[0], blocks[0])
    columns = gathered(filter.border, filter.geometry.columns, frame.shape[1], blocks[1])
    taken = codes[np.ix_(rows, columns)]
    taken[rows < 0] = filter.border.value
    taken[:, columns < 0] = filter.border.value
    return taken.astype(np.int64) - source.pedestal


def gathered(border: Border, axis: Axis, length: int, block: _Block) -> NDArray[np.int64]:
    """Return the pixel that each position of a block reads, -1 for the constant, by np.pad."""
    if border.grid is Grid.PIXEL:
        return _padded(border, np.arange(length), block)
    # a site that the image lacks is read by no tap: the constant stands for it
    found = np.full(block.count, -1, np.int64)
    pitch = axis.spacing
    for residue in range(pitch):
        first = -((residue - block.first) // pitch)
        last = (block.last - residue) // pitch
        if first <= last and residue < length:
            at = residue + pitch * np.arange(first, last + 1) - block.first
            found[at] = _padded(border, np.arange(residue, length, pitch), _Block(first, last))
    return found


def _padded(border: Border, pixels: NDArray[np.int64], block: _Block) -> NDArray[np.int64]:
    before, after = max(0, -block.first), max(0, block.last - (len(pixels) - 1))
    if border.mode is BorderMode.CONSTANT:
        wide = np.pad(pixels, (before, after), mode="constant", constant_values=-1)
    else:
        wide = np.pad(pixels, (before, after), mode=_PAD[border.mode])  # type: ignore[call-overload]
    start = block.first + before
    return np.asarray(wide[start : start + block.count], np.int64)


def _convolved(
    filter: Filter,
    which: Pass,
    source: Codes,
    blocks: tuple[_Block, _Block],
    may_saturate: bool,
) -> tuple[NDArray[np.int64], NDArray[np.bool_]]:
    """Return sums at all positions of the blocks, and where they are sure.

    Any partial sum lies between the sum of the negative and that of the positive products.
    """
    pitch = (filter.geometry.rows.spacing, filter.geometry.columns.spacing)
    taps = _matrix(which, pitch)
    start = start_value(which)
    sums = _by_residue(source, taps, pitch, blocks) + np.int64(start)
    if not may_saturate:
        return sums, np.ones(sums.shape, bool)
    # where the bounds themselves would leave int64, nothing can be said
    weight = sum(abs(int(tap)) for tap in taps.ravel())
    if abs(start) + weight * int(np.abs(source).max(initial=0)) >= 2**63:
        return sums, np.zeros(sums.shape, bool)
    up, down = np.maximum(taps, 0), np.minimum(taps, 0)
    high, low = np.maximum(source, 0), np.minimum(source, 0)
    most = _by_residue(high, up, pitch, blocks) + _by_residue(low, down, pitch, blocks)
    least = _by_residue(high, down, pitch, blocks) + _by_residue(low, up, pitch, blocks)
    limits = register(which)
    return sums, (start + most <= limits.high) & (start + least >= limits.low)


def _matrix(which: Pass, pitch: tuple[int, int]) -> NDArray[np.int64]:
    """Return the integers as a dense correlation kernel, one cell a spacing."""
    terms = which.kernel.terms
    if not terms:
        return np.zeros((1, 1), np.int64)
    rows = [t.dy // pitch[0] for t in terms]
    columns = [t.dx // pitch[1] for t in terms]
    taps = np.zeros((max(rows) - min(rows) + 1, max(columns) - min(columns) + 1), np.int64)
    for term, row, column in zip(terms, rows, columns, strict=True):
        taps[row - min(rows), column - min(columns)] = term.integer
    return taps


def load_scipy() -> None:
    """Import what is used of SciPy, which takes a second: while others wait for compilers."""
    from scipy.signal import convolve2d  # noqa: F401


def _by_residue(
    source: Codes, taps: NDArray[np.int64], pitch: tuple[int, int], blocks: tuple[_Block, _Block]
) -> NDArray[np.int64]:
    from scipy.signal import convolve2d

    count = (blocks[0].count, blocks[1].count)
    sums = np.zeros((*count, source.shape[2]), np.int64)
    turned = taps[::-1, ::-1]
    for y in range(min(pitch[0], count[0])):
        for x in range(min(pitch[1], count[1])):
            for channel in range(source.shape[2]):
                plane = source[y :: pitch[0], x :: pitch[1], channel]
                # more rows than outputs of this residue need may be there: cut to fit
                rows = -(-(count[0] - y) // pitch[0]) + taps.shape[0] - 1
                columns = -(-(count[1] - x) // pitch[1]) + taps.shape[1] - 1
                made = convolve2d(plane[:rows, :columns], turned, mode="valid")
                sums[y :: pitch[0], x :: pitch[1], channel] = made
    return sums
