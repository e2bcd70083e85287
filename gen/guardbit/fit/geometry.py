"""Where taps read and where their contributions land: terms and axes."""

from collections.abc import Iterable, Iterator
from fractions import Fraction

from guardbit.fit.nearest import Integers
from guardbit.model.enums import Operation
from guardbit.model.filter import Axis, Geometry, Term
from guardbit.model.spec import Matrix, Spec


def box(spec: Spec) -> tuple[int, int]:
    """Return the rows and columns of the kernel as given, zero taps included."""
    taps, column, row = spec.kernel.taps, spec.kernel.column, spec.kernel.row
    if column is not None and row is not None:
        return len(column), len(row)
    return (len(taps), len(taps[0])) if taps else (0, 0)


def origin(spec: Spec) -> tuple[int, int]:
    """Return the index of the tap at displacement (0, 0); it may lie outside the box."""
    rows, columns = box(spec)
    return spec.kernel.origin or ((rows - 1) // 2, (columns - 1) // 2)


def geometry(spec: Spec) -> Geometry:
    """Return the extent, sizes and sampling, with the ends of the box's displacements."""
    image = spec.image
    return Geometry(
        extent=image.extent,
        rows=_axis(spec, 0, image.height),
        columns=_axis(spec, 1, image.width),
        channels=image.channels,
    )


def _axis(spec: Spec, axis: int, sizes: tuple[int, int]) -> Axis:
    length, start, spacing = box(spec)[axis], origin(spec)[axis], spec.image.spacing[axis]
    # A contribution lands where the reading tap is not: opposite to the offset that it reads.
    ends = [-_offset(spec, axis, index - start) for index in (0, length - 1)]
    return Axis(
        least=min(ends),
        greatest=max(ends),
        sizes=sizes,
        step=spec.image.step[axis],
        phase=spec.image.phase[axis],
        spacing=spacing,
    )


def _offset(spec: Spec, axis: int, k: int) -> int:
    """Return where tap k, counted from the origin, reads, relative to the output."""
    sign = 1 if spec.filter.operation is Operation.CORRELATION else -1
    return sign * k * spec.image.spacing[axis]


def terms(
    spec: Spec, ideal: Matrix, integers: Integers, axes: tuple[int, ...] = (0, 1)
) -> tuple[Term, ...]:
    """Return the taps that are not zero twice, in raster order of the offset they read."""
    found = (term for term in placed(spec, ideal, integers, axes) if term.ideal or term.integer)
    return tuple(sorted(found, key=lambda term: (term.dy, term.dx)))


def placed(
    spec: Spec, ideal: Matrix, integers: Integers, axes: tuple[int, ...] = (0, 1)
) -> Iterator[Term]:
    """Yield all taps of a matrix, in raster order of the matrix, with the offset each reads.

    `axes`: the directions in which the matrix extends; (0,) for a column and (1,) for a row,
    whose offsets in the other direction are zero.
    """
    start = origin(spec)
    for y, x, tap, integer in _cells(ideal, integers):
        yield Term(
            dy=_offset(spec, 0, y - start[0]) if 0 in axes else 0,
            dx=_offset(spec, 1, x - start[1]) if 1 in axes else 0,
            ideal=tap,
            integer=integer,
        )


def _cells(ideal: Matrix, integers: Integers) -> Iterable[tuple[int, int, Fraction, int]]:
    for y, (taps, numbers) in enumerate(zip(ideal, integers, strict=True)):
        for x, (tap, integer) in enumerate(zip(taps, numbers, strict=True)):
            yield y, x, tap, integer
