"""Small changes of a few inputs, added up: the cheapest for each change of a sum, in a window.

An optimal integer choice lies near an optimal real one (W. Cook, A. M. H. Gerards, A. Schrijver,
É. Tardos, Mathematical Programming 34, 1986): so from a real choice, rounded, the best integer
one is looked for among changes that move the sum by little.
"""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Costs = NDArray[np.int64]

UNREACHED = 1 << 61


@dataclass(frozen=True)
class Option:
    """A change of one input by `change`: what it adds to the sum, and to the cost."""

    change: int
    size: int
    cost: int


@dataclass(frozen=True)
class Stage:
    """One of `options` is taken for input number `key`, or none."""

    key: int
    options: tuple[Option, ...]


def repeated(key: int, size: int, cost: int, most: int) -> Iterator[Stage]:
    """Yield stages that together change an input by any of 0..most times (size, cost).

    A negative `most` changes it downwards.
    """
    covered, sign = 0, 1 if most > 0 else -1
    while covered < abs(most):
        more = min(covered + 1, abs(most) - covered)
        yield Stage(key, (Option(sign * more, sign * more * size, sign * more * cost),))
        covered += more


@dataclass(frozen=True)
class Window:
    """The least cost of each change -reach..reach of the sum, after 0, 1, 2... stages."""

    reach: int
    stages: Sequence[Stage]
    tables: Sequence[Costs]

    @classmethod
    def of(cls, stages: Sequence[Stage], reach: int) -> "Window":
        """Return the window of all stages, none of which need be taken."""
        costs = np.full(2 * reach + 1, UNREACHED, dtype=np.int64)
        costs[reach] = 0
        tables = [costs]
        for stage in stages:
            best = tables[-1].copy()
            for option in stage.options:
                _take(best, tables[-1], option)
            tables.append(best)
        return cls(reach, stages, tables)

    @property
    def costs(self) -> Costs:
        """Return the least costs of all stages; about UNREACHED where a change cannot be."""
        return self.tables[-1]

    def changes(self, change: int) -> dict[int, int]:
        """Return by how much to change each input for a change of the sum, which can be."""
        at, found = change + self.reach, dict[int, int]()
        for stage, before, after in zip(
            reversed(self.stages), self.tables[-2::-1], self.tables[:0:-1], strict=True
        ):
            if before[at] == after[at]:
                continue
            for option in stage.options:
                came = at - option.size
                if 0 <= came < len(before) and before[came] + option.cost == after[at]:
                    found[stage.key] = found.get(stage.key, 0) + option.change
                    at = came
                    break
        return found


def _take(best: Costs, before: Costs, option: Option) -> None:
    size = option.size
    if abs(size) >= len(best):
        return
    if size >= 0:
        np.minimum(best[size:], before[: len(best) - size] + option.cost, out=best[size:])
    else:
        np.minimum(best[:size], before[-size:] + option.cost, out=best[:size])
