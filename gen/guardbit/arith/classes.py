"""Border classes of one axis: the distinct ways in which the taps there can read the image.

A pattern says which of an axis' offsets read the same pixel and which read a constant. Legal
lengths and kept positions number up to 65535 squared, but patterns differ only near the ends
and on short images: they are found by solving for their smallest example, not by searching.
"""

from bisect import bisect_left
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, replace

from guardbit.arith.borders import read_index
from guardbit.arith.folding import folded_examples
from guardbit.arith.tracks import FAR, Example, Track, tracks
from guardbit.model.enums import BorderMode, Extent, Grid
from guardbit.model.filter import Axis, Border

_PIXELS = Border(BorderMode.CONSTANT, 0, Grid.PIXEL)
_Merged = tuple[int, int, bool, bool]


@dataclass(frozen=True)
class Pattern:
    """One way of reading, by its smallest example: an image length and an output position.

    There, `before` of the offsets read before the first pixel and `after` behind the last.
    """

    before: int
    after: int
    length: int
    position: int

    @property
    def is_interior(self) -> bool:
        """Return whether no read leaves the image."""
        return not self.before and not self.after

    def label(self, line: str) -> str:
        """Return the place in words; `line` is "row" or "column"."""
        if self.is_interior:
            return "interior"
        if self.before and self.after:
            return "both ends"
        return f"near the {'first' if self.before else 'last'} {line}"


def axis_patterns(
    axis: Axis, extent: Extent, border: Border, offsets: Sequence[int]
) -> tuple[Pattern, ...]:
    """Return every pattern that legal lengths and kept positions give, interior first.

    `offsets` are the distinct offsets that taps use on this axis, ascending. Two patterns
    differ in the reads that are equal or constant, or in reading before or behind the image.
    Empty if no legal length has an output position.
    """
    if not offsets:
        return ()
    match border.mode:
        case BorderMode.CONSTANT:
            examples = list(_constant_examples(tracks(axis, extent, border)[0], offsets))
        case BorderMode.REPLICATE:
            examples = _replicate_examples(tracks(axis, extent, border), offsets)
        case _:
            examples = folded_examples(axis, extent, border, offsets)
    found = (_pattern(offsets, length, position) for length, position in examples)
    return tuple(sorted(found, key=_place))


def pattern_reads(
    axis: Axis, border: Border, offsets: Sequence[int], pattern: Pattern
) -> tuple[int | None, ...]:
    """Return what each offset reads: pixels numbered in order of first use, None: constant."""
    numbers: dict[int, int] = {}
    return tuple(
        None if index is None else numbers.setdefault(index, len(numbers))
        for index in pattern_indices(axis, border, offsets, pattern)
    )


def pattern_indices(
    axis: Axis, border: Border, offsets: Sequence[int], pattern: Pattern
) -> tuple[int | None, ...]:
    """Return the image index that each offset reads in the pattern's example, or None."""
    return tuple(
        read_index(border, axis.spacing, pattern.position + offset, pattern.length)
        for offset in offsets
    )


def interior(axis: Axis, extent: Extent, offsets: Sequence[int]) -> Pattern | None:
    """Return the smallest example of a position all of whose reads are inside, if any."""
    pixels = tracks(axis, extent, _PIXELS)[0]
    example = pixels.smallest(_inside(offsets, 0), _inside_end(offsets, 0))
    return None if example is None else _pattern(offsets, *example)


def _pattern(offsets: Sequence[int], length: int, position: int) -> Pattern:
    before = bisect_left(offsets, -position)
    after = len(offsets) - bisect_left(offsets, length - position)
    return Pattern(before, after, length, position)


def _place(pattern: Pattern) -> tuple[bool, bool, bool, int, int]:
    ends = bool(pattern.before), bool(pattern.after)
    return (ends[0] and ends[1], *ends, pattern.length, pattern.position)


# A span is (least, greatest) of a position p, or of a gap n - p with image length n.
_Span = tuple[int, int]


def _inside(offsets: Sequence[int], before: int) -> _Span:
    """Return the positions at which exactly the first `before` offsets read before pixel 0."""
    least = -offsets[before] if before < len(offsets) else -FAR
    return (least, -offsets[before - 1] - 1 if before else FAR)


def _inside_end(offsets: Sequence[int], after: int) -> _Span:
    """Return the gaps at which exactly the last `after` offsets read behind the last pixel."""
    count = len(offsets) - after
    least = offsets[count - 1] + 1 if count else -FAR
    return (least, offsets[count] if after else FAR)


def _constant_examples(track: Track, offsets: Sequence[int]) -> Iterator[Example]:
    count = len(offsets)
    for before in range(count + 1):
        span = _inside(offsets, before)
        for after in range(count + 1 - before):
            example = track.smallest(span, _inside_end(offsets, after))
            if example is not None:
                yield example


def _replicate_examples(all_tracks: Sequence[Track], offsets: Sequence[int]) -> list[Example]:
    """Return examples by how many offsets read the first and the last pixel."""
    found: dict[_Merged, Example] = {}
    for track in all_tracks:
        points = [offset // track.spacing for offset in offsets]
        for key, example in _single_point_examples(track, points):
            found.setdefault(key, track.example(*example))
        longer = replace(track, shortest=max(2, track.shortest))
        for key, span, gap in _replicate_states(points):
            nearest = None if key in found else longer.smallest(span, gap)
            if nearest is not None:
                found[key] = track.example(*nearest)
    return list(found.values())


def _replicate_states(points: Sequence[int]) -> Iterator[tuple[_Merged, _Span, _Span]]:
    """Yield (key, span, gap) for each share of the offsets between first and last pixel."""
    for before, merged_low, span in _end_states(points, _inside):
        for after, merged_high, gap in _end_states(points, _inside_end):
            if merged_low + merged_high <= len(points):
                low, high = (n if n > 1 else 0 for n in (merged_low, merged_high))
                yield (low, high, before > 0, after > 0), span, gap


def _end_states(
    points: Sequence[int], inside: Callable[[Sequence[int], int], _Span]
) -> Iterator[tuple[int, int, _Span]]:
    """Yield (number outside, number that read the end pixel, positions or gaps).

    The least position or gap with a given number outside is where one more offset reads
    the end pixel itself.
    """
    for outside in range(len(points) + 1):
        least, greatest = inside(points, outside)
        if outside < len(points):
            yield outside, outside + 1, (least, least)
            yield outside, outside, (least + 1, greatest)
        else:
            yield outside, outside, (least, greatest)


def _single_point_examples(
    track: Track, points: Sequence[int]
) -> Iterator[tuple[_Merged, Example]]:
    """Yield examples with one pixel or site, which every read gets."""
    if track.shortest == 1:
        for position in range(track.first, track.last(1) + 1, track.step):
            before, after = position + points[0] < 0, position + points[-1] > 0
            yield (len(points), len(points), before, after), (1, position)
