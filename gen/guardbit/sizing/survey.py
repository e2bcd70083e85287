"""The ends of a register over all border classes, exact wherever the work allows it.

When a class exists that reads only inside, its pixels are free and distinct. A border that
repeats pixels then only narrows the choice, and so does a constant that is a legal value: all
other classes lie within that one, and are walked for the report only.
"""

from collections.abc import Iterable
from dataclasses import dataclass, replace
from itertools import product

from guardbit.arith.intervals import contains
from guardbit.model.sizing import ClassRange, Interval
from guardbit.sizing.lines import COLUMN, ROW, Line
from guardbit.sizing.problem import (
    MARKS,
    Ends,
    Problem,
    bound_ends,
    class_ends,
    ends_interval,
    ends_of_reads,
    further,
    reads_of,
)
from guardbit.sizing.windows import Labels, window_ends

# Work that is spent on the report, and on exact ends, in tap visits of the slowest way.
REPORT_WORK = 100_000
EXACT_WORK = 4_000_000


@dataclass(frozen=True)
class Survey:
    """The ends of a register, whether a class attains each of them, and the ends by label."""

    ends: Ends
    exact: bool
    classes: dict[Labels, Ends]

    def interval(self, partial: bool) -> Interval:
        """Return the range of the final or of all partial sums."""
        return ends_interval(self.ends, partial)


def survey(problem: Problem) -> Survey:
    """Return the ends of a register over all classes of its rows and columns.

    They are exact unless the classes are too many to walk (about EXACT_WORK tap visits, for
    which kernels of more than about 60 taps an axis are needed), or there is no class at all.
    """
    inner = interior_class(problem)
    if inner is not None:
        classes = _classes(problem, REPORT_WORK) or {
            (inner[0].label, inner[1].label): class_ends(problem, *inner)
        }
        return Survey(class_ends(problem, *inner), True, classes)
    classes = _walk(problem) if _work(problem) <= EXACT_WORK else {}
    if classes:
        return Survey(_merged(classes.values()), True, classes)
    return Survey(bound_ends(problem), False, {})


def interior_class(problem: Problem) -> tuple[Line, Line] | None:
    """Return a class within which all others lie, if there is one."""
    lines = (*problem.rows, *problem.columns)
    row = next((a for a in problem.rows if a.is_interior), None)
    column = next((a for a in problem.columns if a.is_interior), None)
    if row is None or column is None:
        return None
    values = problem.values_at(row, column)
    others = {a.values for a in lines if a.values is not None}
    if problem.constant is not None and not all(a.is_interior for a in lines):
        others.add(Interval(problem.constant, problem.constant))
    return (row, column) if all(contains(values, other) for other in others) else None


def _classes(problem: Problem, work: int) -> dict[Labels, Ends]:
    """Return the ends by label, leaving out the classes that cost more than `work`."""
    simple = replace(
        problem,
        rows=[a for a in problem.rows if not a.at_both_ends],
        columns=[a for a in problem.columns if not a.at_both_ends],
    )
    for tried in (problem, simple):
        if _work(tried) <= work:
            return _walk(tried)
    return {}


def _walk(problem: Problem) -> dict[Labels, Ends]:
    if problem.constant is not None and problem.taps:
        return window_ends(problem)
    rows = [(row, reads_of(problem, row, ROW)) for row in problem.rows]
    columns = [(column, reads_of(problem, column, COLUMN)) for column in problem.columns]
    found: dict[Labels, Ends] = {}
    for (row, ys), (column, xs) in product(rows, columns):
        labels = (row.label, column.label)
        new = ends_of_reads(problem, row, column, ys, xs)
        found[labels] = _merged([found[labels], new]) if labels in found else new
    return found


def _work(problem: Problem) -> int:
    """Return about how many tap visits a walk over all classes costs as much as."""
    pairs = len(problem.rows) * len(problem.columns)
    if problem.constant is None:
        return pairs * len(problem.taps)
    height = len({tap.dy for tap in problem.taps})
    return len(problem.columns) * (200 + (len(problem.rows) + height**2) // 25)


def _merged(all_ends: Iterable[Ends]) -> Ends:
    first, *rest = all_ends
    merged = dict(first)
    for ends in rest:
        for mark in MARKS:
            merged[mark] = further(mark, merged[mark], ends[mark])
    return merged


def class_ranges(found: Survey) -> tuple[ClassRange, ...]:
    """Return the ranges by label, the interior first."""
    made = [
        ClassRange(labels, ends_interval(ends, False), ends_interval(ends, True))
        for labels, ends in found.classes.items()
    ]
    return tuple(sorted(made, key=lambda c: [(a != "interior", a) for a in c.label]))
