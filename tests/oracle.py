"""The arithmetic contract in plain integers and fractions: slow, and independent of the package.

It computes each pixel from the definition: `load` reads the text of a spec, `run` filters an image.
The sizing of registers is left out: an accumulator whose bits are "auto" has no limit here, and
where `forbid` holds, leaving the declared width raises UnsafeError.

An image is a list of rows, a row a list of pixels, a pixel a list of channels.
"""

from __future__ import annotations

import itertools
from collections.abc import Callable
from fractions import Fraction

from gainfit import ContradictionError
from oracle_reading import Contract, Register, Stage, load
from oracle_registers import Integers, Loadable
from oracle_words import limits

__all__ = [
    "Contract",
    "ContradictionError",
    "Image",
    "Integers",
    "Loadable",
    "Stage",
    "UnsafeError",
    "load",
    "rejects",
    "run",
]

Image = list[list[list[int]]]


class UnsafeError(ArithmeticError):
    """A value that `forbid` promised could never happen."""


def fold(mode: str, index: int, length: int) -> int | None:
    """The sample that stands at `index` of an axis of `length`; None: the border constant."""
    if mode == "constant":
        return index if 0 <= index < length else None
    if length < 1:
        raise ContradictionError("a sublattice of the image is empty")
    if mode == "replicate":
        return min(max(index, 0), length - 1)
    if mode == "periodic":
        return index % length
    if mode == "half-sample":
        index %= 2 * length
        return index if index < length else 2 * length - 1 - index
    if length == 1:
        return 0
    index %= 2 * length - 2
    return index if index < length else 2 * length - 2 - index


def source_index(contract: Contract, axis: int, index: int, length: int) -> int | None:
    """The source row (axis 0) or column (axis 1) read at `index`, as the grid says."""
    pitch = contract.spacing[axis] if contract.grid == "site" else 1
    site, residue = divmod(index, pitch)
    folded = fold(contract.mode, site, (length - residue + pitch - 1) // pitch)
    return None if folded is None else residue + pitch * folded


def contain(number: int, low: int, high: int, overflow: str) -> int:
    """`number` brought into low..high: clamped, or modulo the number of codes, or refused."""
    if low <= number <= high:
        return number
    if overflow == "forbid":
        raise UnsafeError(f"{number} is outside {low}..{high}")
    if overflow == "saturate":
        return low if number < low else high
    return (number - low) % (high - low + 1) + low


def held(number: int, register: Register) -> int:
    """What the register holds after it was given `number`."""
    if register.bits is None:
        return number
    return contain(number, *limits(register.bits, register.signed), register.overflow)


def rounded(value: Fraction, rounding: str) -> int:
    """`value` as an integer, by the exact rational's place between its neighbours."""
    below = value.numerator // value.denominator
    rest = value - below
    if rest == 0:
        return below
    half = Fraction(1, 2)
    up = {
        "toward-negative": False,
        "toward-positive": True,
        "toward-zero": value < 0,
        "ties-to-even": rest > half or (rest == half and below % 2 == 1),
        "ties-to-away": rest > half or (rest == half and value > 0),
        "ties-to-positive": rest >= half,
    }[rounding]
    return below + up


def requantised(total: int, stage: Stage) -> int:
    """The output code of a stage for the final value of its accumulator."""
    code = rounded(total * stage.scale, stage.rounding) + stage.target.pedestal
    return contain(code, stage.target.low, stage.target.high, stage.overflow)


def accumulated(stage: Stage, read: Callable[[int, int], int], y: int, x: int) -> int:
    """The final value of the stage's accumulator at (y, x) over the signal `read`."""
    total = held(stage.register.preload, stage.register)
    for dy, dx, coefficient in stage.terms:
        total = held(total + coefficient * read(y + dy, x + dx), stage.register)
    return total


def positions(contract: Contract, axis: int, length: int) -> range:
    """The output positions along an axis, in image coordinates."""
    least, greatest = contract.reach[axis]
    first, last = {
        "same": (0, length - 1),
        "full": (least, length - 1 + greatest),
        "valid": (greatest, length - 1 + least),
    }[contract.extent]
    return range(first, last + 1)[contract.phase[axis] :: contract.step[axis]]


def size_of(contract: Contract, image: Image) -> tuple[int, int]:
    """Height and width of the image; ValueError where the spec does not allow them."""
    height, width = len(image), len(image[0])
    if not contract.heights[0] <= height <= contract.heights[1]:
        raise ValueError(f"height {height}")
    if not contract.widths[0] <= width <= contract.widths[1]:
        raise ValueError(f"width {width}")
    return height, width


def source_signal(contract: Contract, image: Image, channel: int) -> Callable[[int, int], int]:
    """The extended input at any (y, x): code - pedestal."""
    height, width = size_of(contract, image)
    source = contract.source

    def read(y: int, x: int) -> int:
        row = source_index(contract, 0, y, height)
        column = source_index(contract, 1, x, width)
        if row is None or column is None:
            return contract.value - source.pedestal
        code = image[row][column][channel]
        if contract.outside == "clamp":
            code = min(max(code, source.low), source.high)
        return code - source.pedestal

    return read


def stage_signal(stage: Stage, read: Callable[[int, int], int]) -> Callable[[int, int], int]:
    """The requantised result of a stage at any (y, x), its pedestal removed."""
    known: dict[tuple[int, int], int] = {}

    def at(y: int, x: int) -> int:
        if (y, x) not in known:
            total = accumulated(stage, read, y, x)
            known[y, x] = requantised(total, stage) - stage.target.pedestal
        return known[y, x]

    return at


def run(contract: Contract, image: Image) -> tuple[Image, Image]:
    """The output codes and the last accumulator's finals; both [] where the output is empty."""
    height, width = size_of(contract, image)
    rows, columns = positions(contract, 0, height), positions(contract, 1, width)
    if not rows or not columns:
        return [], []
    *earlier, last = contract.stages
    signals = [source_signal(contract, image, channel) for channel in range(contract.channels)]
    for stage in earlier:
        signals = [stage_signal(stage, signal) for signal in signals]
    totals = [
        [[accumulated(last, signal, y, x) for signal in signals] for x in columns] for y in rows
    ]
    codes = [[[requantised(total, last) for total in pixel] for pixel in row] for row in totals]
    return codes, totals


def rejects(contract: Contract, image: Image) -> bool:
    """Whether a code outside the range stands in a source row that a non-zero tap reads."""
    height, width = size_of(contract, image)
    if contract.outside != "reject" or not positions(contract, 1, width):
        return False
    offsets = {
        sum(term[0] for term in chain)
        for chain in itertools.product(*(stage.terms for stage in contract.stages))
    }
    reads = itertools.product(positions(contract, 0, height), offsets)
    rows = {source_index(contract, 0, y + dy, height) for y, dy in reads} - {None}
    low, high = contract.source.low, contract.source.high
    codes = (code for row in rows if row is not None for pixel in image[row] for code in pixel)
    return not all(low <= code <= high for code in codes)
