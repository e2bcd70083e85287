"""One-dimensional geometry: how an axis continues outside the image, and which positions exist.

Every map works at any distance from the image and for every length from 1.
"""

from guardbit.arith.words import clamp
from guardbit.model.enums import BorderMode, Extent, Grid
from guardbit.model.filter import Axis, Border


def map_index(mode: BorderMode, position: int, length: int) -> int | None:
    """Return the index in 0..length-1 that `position` reads; None: outside, a constant."""
    match mode:
        case BorderMode.CONSTANT:
            return position if 0 <= position < length else None
        case BorderMode.REPLICATE:
            return clamp(position, 0, length - 1)
        case BorderMode.HALF_SAMPLE:
            folded = position % (2 * length)
            return min(folded, 2 * length - 1 - folded)
        case BorderMode.WHOLE_SAMPLE:
            if length == 1:
                return 0
            folded = position % (2 * length - 2)
            return min(folded, 2 * length - 2 - folded)
        case BorderMode.PERIODIC:
            return position % length


def sites(length: int, spacing: int, residue: int) -> int:
    """Return how many pixels of 0..length-1 are congruent to `residue` modulo `spacing`."""
    return max(0, (length - residue + spacing - 1) // spacing)


def read_index(border: Border, spacing: int, position: int, length: int) -> int | None:
    """Return the pixel that a read at `position` of an axis gets; None: the constant.

    With the site grid the map acts on the pixels `spacing` apart from `position`. Raises
    ValueError if there are none, which no legal spec allows.
    """
    if border.grid is Grid.PIXEL or border.mode is BorderMode.CONSTANT or spacing == 1:
        return map_index(border.mode, position, length)
    site, residue = divmod(position, spacing)
    count = sites(length, spacing, residue)
    if count == 0:
        raise ValueError(f"no pixel of 0..{length - 1} is {residue} modulo {spacing}")
    mapped = map_index(border.mode, site, count)
    return None if mapped is None else residue + spacing * mapped


def positions(axis: Axis, extent: Extent, length: int) -> range:
    """Return the output positions kept along an axis, in image coordinates, ascending."""
    match extent:
        case Extent.SAME:
            first, last = 0, length - 1
        case Extent.FULL:
            first, last = axis.least, length - 1 + axis.greatest
        case Extent.VALID:
            first, last = axis.greatest, length - 1 + axis.least
    return range(first, max(first, last + 1))[axis.phase :: axis.step]
