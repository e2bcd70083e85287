"""Which outputs there are, and which pixel a read outside the image gets."""

from functools import lru_cache

from guardbit.model.enums import BorderMode, Extent, Grid
from guardbit.model.filter import Axis, Border


def outputs(axis: Axis, extent: Extent, length: int) -> range:
    """Return the positions of the outputs along an axis, counted in pixels of the image."""
    if extent is Extent.SAME:
        first, stop = 0, length
    elif extent is Extent.FULL:
        # supports add: from the least displacement to the last pixel's greatest
        first, stop = axis.least, length + axis.greatest
    else:
        first, stop = axis.greatest, length + axis.least
    return range(first + axis.phase, max(stop, first + axis.phase), axis.step)


def pixel_read(border: Border, axis: Axis, at: int, length: int) -> int | None:
    """Return the index of the pixel that stands at a position; None: the border's constant."""
    if border.mode is BorderMode.CONSTANT:
        return at if 0 <= at < length else None
    if border.grid is Grid.PIXEL:
        return _mapped(border.mode, at, length)
    pitch = axis.spacing
    residue: int = at % pitch
    # pixels residue, residue + pitch, ... are a line of their own
    count = len(range(residue, length, pitch))
    if count == 0:
        return None
    return residue + pitch * _mapped(border.mode, at // pitch, count)


def _mapped(mode: BorderMode, at: int, n: int) -> int:
    """Return the index in 0..n-1 that position `at` of a line of n pixels stands for."""
    if mode is BorderMode.REPLICATE:
        return 0 if at < 0 else n - 1 if at >= n else at
    if mode is BorderMode.PERIODIC:
        return at % n
    walk = _mirrored(mode, n)
    return walk[at % len(walk)]


@lru_cache(maxsize=8)
def _mirrored(mode: BorderMode, n: int) -> tuple[int, ...]:
    """Return the pixels that a walk forth and back over a line of n meets before it repeats."""
    if mode is BorderMode.HALF_SAMPLE:
        return (*range(n), *reversed(range(n)))
    return (*range(n), *reversed(range(1, n - 1)))
