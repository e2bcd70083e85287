"""Where an output lies, and which pixel a read outside the image returns."""

import numpy as np

from guardbit.model.enums import BorderMode, Extent
from guardbit.model.filter import Axis
from guardbit.reference.words import Array


def kept(axis: Axis, extent: Extent, length: int) -> range:
    """Return the output positions along an axis of `length` pixels, in image coordinates."""
    first, last = {
        Extent.SAME: (0, length - 1),
        Extent.FULL: (axis.least, length - 1 + axis.greatest),
        Extent.VALID: (axis.greatest, length - 1 + axis.least),
    }[extent]
    return range(first + axis.phase, last + 1, axis.step)


def border_index(positions: range, length: int, mode: BorderMode, pitch: int) -> Array:
    """Return the pixel index that each position reads; `length` stands for the constant.

    `pitch` is 1 for the pixel grid. For the site grid it is the spacing, and the map acts on
    the sublattice that a position belongs to. A sublattice without pixels gives `length`.
    """
    at = np.arange(positions.start, positions.stop, positions.step)
    if mode is BorderMode.CONSTANT:
        return np.where((at >= 0) & (at < length), at, length)
    site, residue = np.divmod(at, pitch)
    sites = -((residue - length) // pitch)
    index = residue + pitch * _folded(site, np.maximum(sites, 1), mode)
    return np.where(residue < length, index, length)


def _folded(site: Array, n: Array, mode: BorderMode) -> Array:
    """Return the one-dimensional maps onto 0..n-1."""
    index: Array
    match mode:
        case BorderMode.REPLICATE:
            index = np.clip(site, 0, n - 1)
        case BorderMode.HALF_SAMPLE:
            turn = site % (2 * n)
            index = np.minimum(turn, 2 * n - 1 - turn)
        case BorderMode.WHOLE_SAMPLE:
            period = np.maximum(2 * n - 2, 1)
            turn = site % period
            index = np.minimum(turn, period - turn)
        case BorderMode.PERIODIC:
            index = site % n
        case _:
            raise ValueError(f"{mode} is not an index map")
    return index
