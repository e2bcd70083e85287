"""Ends of sums over all border classes of a constant border, by running maxima.

In such a class the taps that read inside form a window of rows times a window of columns, on
pixels of their own; every other tap adds a fixed amount. Windows number up to 32896 an axis,
so pairs of them are never walked tap by tap: prefix sums and running maxima along each row,
then over the rows, give the final and the greatest partial sum of a pair in constant time.
"""

from collections import defaultdict
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from guardbit.model.sizing import End, Interval
from guardbit.sizing.lines import Line
from guardbit.sizing.problem import Ends, Extreme, Mark, Problem, class_ends, further

# int64, or object for sums that leave it
Numbers = NDArray[Any]
Labels = tuple[str, str]


def window_ends(problem: Problem) -> dict[Labels, Ends]:
    """Return the exact ends of every pair of labels, for a problem with a constant."""
    found: dict[Labels, Ends] = defaultdict(dict)
    for values, rows, columns in _by_values(problem):
        for end, sign in ((End.GREATEST, 1), (End.LEAST, -1)):
            table = _Table.of(problem, values, sign)
            for mark, labels, row, column in table.best(end, rows, columns):
                _keep(found[labels], mark, class_ends(problem, row, column)[mark])
    return dict(found)


def _keep(ends: Ends, mark: Mark, new: Extreme) -> None:
    ends[mark] = further(mark, ends[mark], new) if mark in ends else new


def _by_values(problem: Problem) -> list[tuple[Interval, list[Line], list[Line]]]:
    """Return the lines that go together, for each range of pixel values."""
    lines = (*problem.rows, *problem.columns)
    ranges = dict.fromkeys(a.values for a in lines if a.values is not None)
    return [
        (
            values,
            [a for a in problem.rows if a.values in (None, values)],
            [a for a in problem.columns if a.values in (None, values)],
        )
        for values in ranges or {problem.values: None}
    ]


def _sums(values: Numbers) -> Numbers:
    """Return the sums of the first 0, 1, 2... entries along the last axis."""
    zero = np.zeros_like(values[..., :1])
    return np.concatenate([zero, np.cumsum(values, axis=-1)], axis=-1)


def _suffix_max(values: Numbers) -> Numbers:
    return np.maximum.accumulate(values[..., ::-1], axis=-1)[..., ::-1]


@dataclass(frozen=True)
class _Table:
    """Prefix sums along each row of taps: of greatest inside and of fixed outside amounts."""

    inside: Numbers
    outside: Numbers
    outside_before: Numbers
    outside_after: Numbers

    @classmethod
    def of(cls, problem: Problem, values: Interval, sign: int) -> "_Table":
        rows = {dy: i for i, dy in enumerate(sorted({t.dy for t in problem.taps}))}
        columns = {dx: i for i, dx in enumerate(sorted({t.dx for t in problem.taps}))}
        constant = problem.constant or 0
        widest = max(abs(values.low), abs(values.high), abs(constant), 1)
        safe = 4 * widest * sum(abs(t.coefficient) for t in problem.taps) < 2**62
        taps = np.zeros((len(rows), len(columns)), dtype=np.int64 if safe else object)
        for tap in problem.taps:
            taps[rows[tap.dy], columns[tap.dx]] = sign * tap.coefficient
        inside = _sums(np.maximum(taps * values.low, taps * values.high))
        outside = _sums(taps * constant)
        before = np.maximum.accumulate(outside, axis=-1)
        return cls(inside, outside, before, _suffix_max(outside))

    def best(
        self, end: End, rows: Sequence[Line], columns: Sequence[Line]
    ) -> list[tuple[Mark, Labels, Line, Line]]:
        """Return, per mark and pair of labels, the pair of classes that goes furthest."""
        best: dict[tuple[Mark, Labels], tuple[Any, Line, Line]] = {}
        groups = _Rows.of(self, rows)
        width = self.inside.shape[1] - 1
        for before, lines in _by_before(columns).items():
            running = np.maximum.accumulate(self.inside[:, before:], axis=1)
            for column in lines:
                stop = width - column.after
                totals, peaks = self._rows_of(before, stop, running[:, stop - before])
                for partial, label, value, row in groups.best(totals, peaks):
                    key = ((partial, end), (label, column.label))
                    if key not in best or value > best[key][0]:
                        best[key] = (value, row, column)
        return [(mark, labels, row, column) for (mark, labels), (_, row, column) in best.items()]

    def _rows_of(self, start: int, stop: int, running: Numbers) -> tuple[Numbers, Numbers]:
        """Return each row's total and greatest prefix when columns start..stop-1 are inside."""
        shift = self.outside[:, start] - self.inside[:, start]
        back = shift + self.inside[:, stop] - self.outside[:, stop]
        peaks = np.maximum(self.outside_before[:, start], shift + running)
        return back + self.outside[:, -1], np.maximum(peaks, back + self.outside_after[:, stop])


def _by_before(columns: Sequence[Line]) -> dict[int, list[Line]]:
    groups: dict[int, list[Line]] = defaultdict(list)
    for column in columns:
        groups[column.before].append(column)
    return groups


@dataclass(frozen=True)
class _Rows:
    """The windows of rows, grouped by label, with what rows outside of them add."""

    lines: tuple[Line, ...]
    bounds: tuple[tuple[str, int, int], ...]
    start: NDArray[np.intp]
    stop: NDArray[np.intp]
    outside: Numbers
    peak_before: Numbers
    peak_after: Numbers

    @classmethod
    def of(cls, table: _Table, rows: Sequence[Line]) -> "_Rows":
        lines = sorted(rows, key=lambda line: line.label)
        labels = [line.label for line in lines]
        bounds = tuple(
            (name, labels.index(name), labels.index(name) + labels.count(name))
            for name in dict.fromkeys(labels)
        )
        height = table.inside.shape[0]
        outside = _sums(table.outside[:, -1])
        # the empty prefix is the row before's end, and at the very start the start value
        peaks = outside[:-1] + table.outside_before[:, -1]
        peaks = np.concatenate([outside[:1], peaks, outside[-1:]])
        return cls(
            tuple(lines),
            bounds,
            np.array([line.before for line in lines], dtype=np.intp),
            np.array([height - line.after for line in lines], dtype=np.intp),
            outside,
            np.maximum.accumulate(peaks)[:-1],
            _suffix_max(peaks[1:]),
        )

    def best(self, totals: Numbers, peaks: Numbers) -> list[tuple[bool, str, Any, Line]]:
        """Return (partial, label, value, line) of the furthest window of each label."""
        finals, partials = self._values(totals, peaks)
        made = []
        for label, first, last in self.bounds:
            for partial, values in ((False, finals), (True, partials)):
                at = first + int(np.argmax(values[first:last]))
                made.append((partial, label, values[at], self.lines[at]))
        return made

    def _values(self, totals: Numbers, peaks: Numbers) -> tuple[Numbers, Numbers]:
        inside = _sums(totals)
        shift = self.outside[self.start] - inside[self.start]
        back = shift + inside[self.stop] - self.outside[self.stop]
        partials = np.maximum(self.peak_before[self.start], back + self.peak_after[self.stop])
        height = len(peaks)
        heads = inside[:-1] + peaks
        # running[a, r]: the furthest that rows a..r go, counted from sums that began at 0
        grid = np.broadcast_to(heads, (height, height))
        low = heads.min()
        running = np.maximum.accumulate(
            np.where(np.tri(height, k=-1, dtype=bool), low, grid), axis=1
        )
        some = self.start < self.stop
        inner = running[self.start[some], self.stop[some] - 1]
        partials[some] = np.maximum(partials[some], shift[some] + inner)
        return back + self.outside[-1], partials
