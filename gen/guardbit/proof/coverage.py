"""Which cases are proved.

What happens at an output depends on how its reads fold at the borders, row by row and column by
column, and on which way the code takes there. Both are settled once the image is longer than
twice the reach of the taps: a longer one has more outputs of kinds that were seen.
"""

from collections.abc import Iterator, Sequence
from itertools import pairwise, product

from guardbit.model.enums import Outside
from guardbit.model.filter import Filter, raster, registers_of
from guardbit.model.proof import Case, Codes, DataModel
from guardbit.model.routine import Routine
from guardbit.proof.argument import coverage
from guardbit.proof.judge.subject import container_ends
from guardbit.proof.sizes import (
    MOST_WORK,
    Size,
    beyond,
    lengths,
    limits_of,
    middle,
    outputs_of,
    reach_of,
    sizes,
    with_outputs,
    work_of,
)

__all__ = ["cases", "coverage", "lengths"]

_MOST_ILLEGAL = 64
_LONG = 300
_BAND_ROWS = 5
_ALL_BANDS = 10
_MOST_ONCE = 200_000
_MOST_OFTEN = 40_000


def cases(
    f: Filter, routine: Routine, models: Sequence[DataModel], *, thorough: bool
) -> tuple[Case, ...]:
    """Return the cases of a proof, smallest sizes first, for every data model."""
    found = [case for model in models for case in _cases(f, routine, model, thorough)]
    return tuple(dict.fromkeys(found))


def _cases(f: Filter, routine: Routine, model: DataModel, thorough: bool) -> Iterator[Case]:
    loadings = _loadings(f)
    for height, width in sizes(f, routine, thorough=thorough):
        for taps in loadings if max(height, width) <= 4 else loadings[:1]:
            yield Case(model, width, height, taps=taps)
    height, width = middle(f, routine, _MOST_ONCE)
    for taps in loadings[1:]:
        yield Case(model, width, height, taps=taps)
    yield Case(model, width, height, src_gap=1, dst_gap=2)
    yield from _of_bands(f, routine, model, thorough)
    yield from _of_codes(f, routine, model, thorough)
    if routine.frame.status:
        yield Case(model, width, height, codes=Codes.WRONG)
    height, width = middle(f, routine, _MOST_OFTEN)
    yield Case(model, width, height, codes=Codes.BREAKPOINTS)
    yield from _largest(f, routine, model, thorough)


def _loadings(f: Filter) -> list[tuple[int, ...] | None]:
    """Return the coefficients that are loaded: the nominal ones, and those of a list."""
    s = registers_of(f)
    if s is None:
        return [None]
    found: list[tuple[int, ...] | None] = [None]
    for taps in (*s.kernels, *_ends(f)):
        found.append(raster(s, taps))
    return list(dict.fromkeys(found))


def _ends(f: Filter) -> Iterator[tuple[int, ...]]:
    """Yield legal loadings that move the nominal one to the ends of its limits, pair by pair."""
    s = registers_of(f)
    assert s is not None
    if s.kernels:
        return
    own = [t.integer for t in f.passes[0].kernel.terms]
    for turn in (1, -1):
        taps = list(own)
        for a, b in pairwise(range(len(taps))):
            up, down = (a, b) if turn > 0 else (b, a)
            by = min(s.greatest[up] - taps[up], taps[down] - s.least[down])
            size = sum(map(abs, taps))
            moved = list(taps)
            moved[up], moved[down] = moved[up] + by, moved[down] - by
            if s.magnitudes is None or max(size, sum(map(abs, moved))) <= s.magnitudes:
                taps = moved
        if taps != own:
            yield tuple(taps)


def _of_bands(f: Filter, routine: Routine, model: DataModel, thorough: bool) -> Iterator[Case]:
    """Yield every band of output rows at two widths; once more with gaps between rows.

    With many rows those at both ends and in the middle.
    """
    if routine.band is None:
        return
    least = lengths(f, routine, 0)[0]
    tall = with_outputs(f, routine, 0, _BAND_ROWS, reach_of(f, 0).interior)
    narrow = with_outputs(f, routine, 1, 1, 1)
    wide = max(narrow, beyond(f, lengths(f, routine, 1), 1))
    most = _MOST_ONCE * (10 if thorough else 1)
    short = with_outputs(f, routine, 0, 3, least)
    for width in dict.fromkeys((narrow, wide)):
        for height in (tall, short):
            bands = _bands(len(outputs_of(f, 0, height)))
            if _band_work(f, (height, width), bands) <= most or height == short:
                yield Case(model, width, height, bands=bands)
                break
    bands = _bands(len(outputs_of(f, 0, short)))
    some = bands[len(bands) // 2 :][:3]
    yield Case(model, wide, short, bands=some, src_gap=2, dst_gap=1)


def _bands(rows: int) -> tuple[tuple[int, int], ...]:
    ends = range(rows + 1)
    if rows > _ALL_BANDS:
        half = rows // 2
        marks = {0, 1, 2, half, half + 1, rows - 2, rows - 1, rows}
        near = [(a, b) for a in sorted(marks) for b in sorted(marks) if a <= b <= a + 2]
        return (*near, (0, rows))
    return tuple((a, b) for a in ends for b in ends if a <= b)


def _band_work(f: Filter, size: Size, bands: Sequence[tuple[int, int]]) -> int:
    rows = max(len(outputs_of(f, 0, size[0])), 1)
    return work_of(f, size) * sum(b - a for a, b in bands) // rows


def _of_codes(f: Filter, routine: Routine, model: DataModel, thorough: bool) -> Iterator[Case]:
    """Yield cases in which pixels hold codes that are not legal."""
    if (f.input.low, f.input.high) == container_ends(f.input.container):
        return
    small = lengths(f, routine, 0)[0], lengths(f, routine, 1)[0]
    if f.outside is not Outside.REJECT:
        for h, w in dict.fromkeys((small, middle(f, routine, _MOST_ONCE))):
            yield Case(model, w, h, codes=Codes.ANY)
        return
    most = _MOST_ONCE if thorough else _MOST_OFTEN
    size = middle(f, routine, most)
    for h, w in dict.fromkeys((small, size)):
        cells = list(product(range(h), range(w), range(f.geometry.channels)))
        step = 1
        if not thorough or work_of(f, (h, w)) * len(cells) > MOST_WORK:
            step = -(-len(cells) // _MOST_ILLEGAL)
        for cell in cells[::step]:
            yield Case(model, w, h, codes=Codes.ILLEGAL, illegal=cell)
    if routine.band is None:
        return
    height, width = size
    rows = min(len(outputs_of(f, 0, height)), 12)
    single = tuple((row, row + 1) for row in range(rows))
    for y in range(height):
        cell = (y, width // 2, 0)
        yield Case(model, width, height, codes=Codes.ILLEGAL, bands=single, illegal=cell)


def _largest(f: Filter, routine: Routine, model: DataModel, thorough: bool) -> Iterator[Case]:
    """Yield the last rows of the tallest, and with `thorough` of the widest, legal images.

    They are no larger than what an array of the data model can be. Before them a length beyond
    what eight bits count, or the greatest legal one, of either axis.
    """
    cell = max(routine.source.bits, routine.destination.bits, 8) // 8
    most = ((1 << model.pointer) - 1) // (2 * cell * f.geometry.channels)
    least = lengths(f, routine, 0)[0]
    width = with_outputs(f, routine, 1, 1, 1)
    height = min(limits_of(routine, 0)[1], most // width)
    if height < least:
        return
    yield Case(model, min(limits_of(routine, 1)[1], _LONG), least, codes=Codes.CONCRETE)
    yield Case(model, width, min(height, _LONG), codes=Codes.CONCRETE)
    if routine.band is None:
        return
    yield _last_row(f, model, (height, width))
    if thorough:
        scratch = max(routine.scratch_per_column, 1) * ((routine.word or (8, False))[0] // 8)
        wide = min(limits_of(routine, 1)[1], most // least, 2 * cell * most // scratch)
        wide = min(wide, MOST_WORK // 8 // max(work_of(f, (least, 1)), 1))
        height = min(limits_of(routine, 0)[1], most // max(wide, 1))
        if wide >= limits_of(routine, 1)[0] and height >= least:
            yield _last_row(f, model, (height, wide))


def _last_row(f: Filter, model: DataModel, size: Size) -> Case:
    rows = len(outputs_of(f, 0, size[0]))
    bands = ((rows - 1, rows),) if rows else ((0, 0),)
    return Case(model, size[1], size[0], codes=Codes.CONCRETE, bands=bands)
