"""What cases show, why that stands for other sizes, and what it leaves open."""

from collections.abc import Iterator, Sequence

from guardbit.model.enums import BorderMode, Grid
from guardbit.model.filter import Filter, registers_of
from guardbit.model.proof import Case, Codes, Coverage
from guardbit.model.routine import Routine
from guardbit.proof.sizes import Size, after_last, axis_of, limits_of, reach_of

_AXES = ("rows", "columns")
_LISTED = 6


def coverage(f: Filter, routine: Routine, proved: Sequence[Case]) -> Coverage:
    """Return what these cases show, why that stands for other sizes, and what remains."""
    sizes = {(c.height, c.width) for c in proved if c.codes is Codes.LEGAL and not c.bands}
    if not sizes:
        return Coverage((), (), ("every size",))
    return Coverage(
        tuple(_covered(sizes, proved)),
        tuple(_argument(f, routine, sizes)),
        tuple(_remaining(f, routine, sizes, proved)),
    )


def _covered(sizes: set[Size], proved: Sequence[Case]) -> Iterator[str]:
    heights, widths = ({size[axis] for size in sizes} for axis in (0, 1))
    full = len(sizes) == len(heights) * len(widths)
    pairs = "every pair of" if full else f"{len(sizes)} pairs of"
    yield f"{pairs} heights {_said(heights)} and widths {_said(widths)}"
    if bands := sum(len(c.bands) for c in proved if c.codes is Codes.LEGAL):
        yield f"{bands} bands of output rows"
    if any(c.codes is Codes.ANY for c in proved):
        yield "pixels of any code that the container holds"
    if illegal := sum(c.codes is Codes.ILLEGAL for c in proved):
        yield f"one illegal pixel at each of {illegal} places"


def _argument(f: Filter, routine: Routine, sizes: set[Size]) -> Iterator[str]:
    reach = reach_of(f, 0), reach_of(f, 1)
    yield (
        f"the taps reach {reach[0].most} rows and {reach[1].most} columns: from "
        f"{reach[0].interior} rows and {reach[1].interior} columns on, an image has an interior "
        "and all its borders, and a larger one has more outputs of these kinds only"
    )
    if len(sizes) < len({h for h, _ in sizes}) * len({w for _, w in sizes}):
        yield "rows and columns fold apart from each other: heights were paired with some widths"
    for axis, word in enumerate(_AXES):
        own = axis_of(f, axis)
        seen = {size[axis] for size in sizes}
        if own.step > 1 and set(_legal(routine, axis, after_last(own, reach[axis]))) <= seen:
            yield (
                f"outputs are {own.step} {word} apart: the last was seen at each distance from "
                "the border up to the reach"
            )
        if _has_sites(f, axis) and not _missing_residues(f, routine, axis, seen):
            yield f"{word} of each remainder by {own.spacing} were seen"


def _has_sites(f: Filter, axis: int) -> bool:
    """Return whether the way reads fold depends on a length's remainder by the spacing."""
    folds = f.border.mode is not BorderMode.CONSTANT and f.border.grid is Grid.SITE
    return folds and axis_of(f, axis).spacing > 1


def _missing_residues(f: Filter, routine: Routine, axis: int, seen: set[int]) -> int:
    pitch = axis_of(f, axis).spacing
    least, greatest = limits_of(routine, axis)
    legal = {n % pitch for n in range(least, min(greatest, least + pitch) + 1)}
    return len(legal - {n % pitch for n in seen})


def _legal(routine: Routine, axis: int, lengths: range) -> list[int]:
    least, greatest = limits_of(routine, axis)
    return [n for n in lengths if least <= n <= greatest]


def _remaining(
    f: Filter, routine: Routine, sizes: set[Size], proved: Sequence[Case]
) -> Iterator[str]:
    yield "larger sizes: by this argument, and by the frames of verify"
    interior = [reach_of(f, axis).interior for axis in (0, 1)]
    for axis, word in enumerate(_AXES):
        longest = max(size[axis] for size in sizes)
        if longest < min(interior[axis], limits_of(routine, axis)[1]):
            yield f"images of {interior[axis]} {word} and more, the first with an interior"
        if _has_sites(f, axis):
            missing = _missing_residues(f, routine, axis, {size[axis] for size in sizes})
            if missing:
                yield f"{missing} remainders of {word} by {axis_of(f, axis).spacing}"
    both = [min(interior[axis], limits_of(routine, axis)[1]) for axis in (0, 1)]
    if not any(h >= both[0] and w >= both[1] for h, w in sizes):
        yield "an image with an interior in both directions at once"
    ends = sorted({(c.height, c.width) for c in proved if c.codes is Codes.CONCRETE})
    if ends:
        listed = ", ".join(f"{h} x {w}" for h, w in ends[:_LISTED])
        yield f"index arithmetic of large images: seen on fixed codes at {listed}"
    else:
        yield "index arithmetic of the largest legal sizes"
    s = registers_of(f)
    if s is not None and not s.kernels:
        yield "taps other than those that were loaded"


def _said(numbers: set[int]) -> str:
    """Return numbers with runs of them as first to last."""
    runs: list[list[int]] = []
    for n in sorted(numbers):
        if runs and n == runs[-1][-1] + 1:
            runs[-1].append(n)
        else:
            runs.append([n])
    return ", ".join(str(r[0]) if len(r) == 1 else f"{r[0]} to {r[-1]}" for r in runs)
