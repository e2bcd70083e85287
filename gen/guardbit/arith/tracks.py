"""The lattices on which a border's index map acts: the pixels of an axis, or its sites."""

from collections.abc import Iterator
from dataclasses import dataclass
from math import gcd

from guardbit.arith.borders import positions, sites
from guardbit.model.enums import BorderMode, Extent, Grid
from guardbit.model.filter import Axis, Border

Example = tuple[int, int]
FAR = 1 << 40


@dataclass(frozen=True)
class Track:
    """A lattice of `shortest`..`longest` points and the kept positions on it.

    For length n positions are first, first + step, ... up to n - 1 + reach. Point q is pixel
    residue + spacing * q of an image not shorter than `least_image`.
    """

    first: int
    step: int
    reach: int
    shortest: int
    longest: int
    spacing: int
    residue: int
    least_image: int

    def example(self, length: int, position: int) -> Example:
        """Return (image length, position): the shortest image with that many points."""
        image = self.residue + (length - 1) * self.spacing + 1
        return max(self.least_image, image), self.residue + self.spacing * position

    def smallest(self, span: tuple[int, int], gap: tuple[int, int]) -> Example | None:
        """Return the least (length, position) with position in `span`, length - it in `gap`."""
        least_gap = max(gap[0], 1 - self.reach)
        position = self.kept_from(max(span[0], self.first, self.shortest - gap[1]))
        length = max(self.shortest, position + least_gap)
        if least_gap > gap[1] or position > span[1] or length > self.longest:
            return None
        return length, position

    def kept_from(self, least: int) -> int:
        """Return the first kept position that is not below `least`."""
        return least + (self.first - least) % self.step if least > self.first else self.first

    def last(self, length: int) -> int:
        """Return the last position of the extent for that length."""
        return length - 1 + self.reach


def tracks(axis: Axis, extent: Extent, border: Border) -> list[Track]:
    """Return the lattices of an axis: one for the pixel grid, else those of all residues.

    Of residues with equal lengths and positions only the first is kept.
    """
    if border.grid is Grid.PIXEL or border.mode is BorderMode.CONSTANT:
        return [_pixel_track(axis, extent)]
    found: dict[tuple[int, int, int], Track] = {}
    for track in _site_tracks(axis, extent):
        found.setdefault((track.first, track.shortest, track.longest), track)
    return list(found.values())


def _reach(axis: Axis, extent: Extent) -> int:
    return {Extent.SAME: 0, Extent.FULL: axis.greatest, Extent.VALID: axis.least}[extent]


def _pixel_track(axis: Axis, extent: Extent) -> Track:
    low, high = axis.sizes
    start = positions(axis, extent, high).start
    return Track(start, axis.step, _reach(axis, extent), low, high, 1, 0, low)


def _site_tracks(axis: Axis, extent: Extent) -> Iterator[Track]:
    spacing, common = axis.spacing, gcd(axis.spacing, axis.step)
    start = positions(axis, extent, axis.sizes[1]).start
    step, reach = axis.step // common, _reach(axis, extent) // spacing
    for residue in range(min(spacing, axis.sizes[1])):
        if (start - residue) % common == 0:
            solution = (start - residue) // common * pow(spacing // common, -1, step)
            wanted = -((residue - start) // spacing)
            low, high = (sites(n, spacing, residue) for n in axis.sizes)
            first = wanted + (solution - wanted) % step
            yield Track(first, step, reach, max(1, low), high, spacing, residue, axis.sizes[0])
