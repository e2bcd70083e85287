"""The frames that a self-check program carries: few and small, the same on any machine.

They come from whole-number arithmetic alone. A library's random generator may give other
numbers in its next version, and then the emitted bytes would change.
"""

from collections.abc import Iterator

import numpy as np

from guardbit.model.filter import Axis, Filter
from guardbit.model.finding import Place, SpecError, finding
from guardbit.model.sizing import Sizing
from guardbit.model.vectors import Codes, Purpose, Vector
from guardbit.vectors.stimuli import Stimulus, answered, level, main_shape
from guardbit.vectors.witnesses import witnesses

_MOST_CODES = 4096
_TOO_MANY_CODES = 1 << 22
_MOST_WITNESSES = 8
# x -> (a x + c) mod 2^32, a full-period generator: Knuth, TAOCP vol. 2, 3.2.1.
_MULTIPLIER, _INCREMENT = 1664525, 1013904223


def selfcheck(sizing: Sizing) -> tuple[Vector, ...]:
    """Return the vectors of the self-check, of at most a few thousand codes each.

    Noise over the whole range and around the level at which outputs do not saturate, the
    smallest image, and frames that attain the worst cases. If all legal images are larger,
    one frame of the least size; SpecError if no compiler could be expected to take even that.
    """
    return answered(sizing.filter, _frames(sizing))


def _frames(sizing: Sizing) -> Iterator[Stimulus]:
    filter_ = sizing.filter
    shape = _shape(filter_)
    if _codes(filter_, shape) > _TOO_MANY_CODES:
        size = f"{shape[0]} rows of {shape[1]}"
        raise SpecError(finding("selfcheck-too-large", Place(key="image"), size=size))
    low, high = filter_.input.low, filter_.input.high
    yield Stimulus("noise", Purpose.RANDOM, noise(filter_, shape, low, high, 1))
    if _codes(filter_, shape) > _MOST_CODES:
        return
    centre = level(filter_)
    near = max(low, centre.code - centre.spread), min(high, centre.code + centre.spread)
    yield Stimulus("noise in range", Purpose.RANDOM, noise(filter_, shape, *near, 2))
    least = _least(filter_)
    yield Stimulus("smallest", Purpose.RANDOM, noise(filter_, least, low, high, 3))
    attained = [each.stimulus for each in witnesses(sizing, _MOST_CODES) if each.stimulus]
    small = [each for each in attained if each.frame.size <= _MOST_CODES]
    yield from small[:_MOST_WITNESSES]


def _shape(filter_: Filter) -> tuple[int, int]:
    shape = main_shape(filter_)
    return shape if _codes(filter_, shape) <= _MOST_CODES else _least(filter_)


def _least(filter_: Filter) -> tuple[int, int]:
    axes: tuple[Axis, Axis] = (filter_.geometry.rows, filter_.geometry.columns)
    return axes[0].sizes[0], axes[1].sizes[0]


def _codes(filter_: Filter, shape: tuple[int, int]) -> int:
    return shape[0] * shape[1] * filter_.geometry.channels


def noise(filter_: Filter, shape: tuple[int, int], low: int, high: int, seed: int) -> Codes:
    """Return (height, width, channels) of codes in low..high."""
    state, codes = seed, []
    for _ in range(_codes(filter_, shape)):
        state = (state * _MULTIPLIER + _INCREMENT) % 2**32
        # The upper bits: the lower ones of such a generator have short periods.
        codes.append(low + (state * (high - low + 1) >> 32))
    return np.array(codes, np.int64).reshape(*shape, filter_.geometry.channels)
