"""Coefficients that are loaded at run time, as the oracle understands `coefficient.registers`."""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction
from typing import Any

from oracle_words import between, limits, need

Matrix = list[list[Fraction]]
Integers = list[list[int]]
Kernel = tuple[Integers, Fraction, str]


@dataclass(frozen=True)
class Loadable:
    """What may be loaded as taps: each in its limits, or one of `kernels` if there are any."""

    least: Integers
    greatest: Integers
    sum: int | None
    magnitudes: int | None
    kernels: list[Integers]

    def holds(self, i: int, j: int) -> bool:
        """Whether the cell can be other than zero."""
        return self.least[i][j] != 0 or self.greatest[i][j] != 0

    def allows(self, taps: Integers) -> bool:
        """Whether the taps may be loaded."""
        if self.kernels:
            return taps in self.kernels
        for row, least, greatest in zip(taps, self.least, self.greatest, strict=True):
            for tap, low, high in zip(row, least, greatest, strict=True):
                if tap < low or tap > high:
                    return False
        total = sum(tap for row in taps for tap in row)
        size = sum(abs(tap) for row in taps for tap in row)
        summed = self.sum is None or total == self.sum
        return summed and (self.magnitudes is None or size <= self.magnitudes)


def box_of(value: int | Integers, box: tuple[int, int]) -> Integers:
    """Whole numbers for every cell of the box: one for all, or a matrix."""
    rows = [[value] * box[1]] * box[0] if isinstance(value, int) else value
    need(type(rows) is list and all(type(row) is list for row in rows), "registers")
    need([len(row) for row in rows] == [box[1]] * box[0], "box of the registers")
    need(all(between(-(2**31), 2**32 - 1, *row) for row in rows), "registers beyond 32 bits")
    return rows


def loadable_of(tables: dict[str, Any], box: tuple[int, int]) -> Loadable | None:
    """What the coefficient registers may hold; None where the taps are fixed."""
    table = tables["coefficient"]
    given = table["registers"]
    if given is None:
        return None
    need(type(given) is dict and bool(given), "registers")
    need(table["pinned"] is None and "intermediate" not in tables, "registers with another key")
    need(list not in (type(tables["kernel"]["divisor"]), type(table["frac"])), "pairs")
    low, high = limits(table["bits"], table["signed"])
    if "kernels" in given:
        need(len(given) == 1 and bool(given["kernels"]), "kernels")
        kernels = [box_of(kernel, box) for kernel in given["kernels"]]
        cells = [[[k[i][j] for k in kernels] for j in range(box[1])] for i in range(box[0])]
        least, greatest = ([[end(cell) for cell in row] for row in cells] for end in (min, max))
        made = Loadable(least, greatest, None, None, kernels)
    else:
        need(set(given) <= {"least", "greatest", "sum", "magnitudes"}, "an entry of registers")
        least = box_of(given.get("least", low), box)
        greatest = box_of(given.get("greatest", high), box)
        numbers = [given.get(key) for key in ("sum", "magnitudes")]
        need(all(number is None or type(number) is int for number in numbers), "sums")
        made = Loadable(least, greatest, numbers[0], numbers[1], [])
    pairs = [ends for rows in zip(least, greatest, strict=True) for ends in zip(*rows, strict=True)]
    need(all(low <= a <= b <= high for a, b in pairs), "limits of registers")
    need(any(ends != (0, 0) for ends in pairs), "registers that hold nothing")
    return made


def with_bits(tables: dict[str, Any]) -> dict[str, Any]:
    """The tables with the width of coefficients that hold all that may be loaded."""
    table = tables["coefficient"]
    given = table["registers"]
    if given is None or table["bits"] != "auto":
        return tables
    need(type(given) is dict, "registers")
    need("kernels" in given or {"least", "greatest"} <= set(given), "limits of registers")
    numbers: list[int] = []
    left = [given[key] for key in ("kernels", "least", "greatest") if key in given]
    while left:
        each = left.pop()
        left += each if type(each) is list else []
        numbers += [each] if type(each) is int else []
    fits = [
        bits
        for bits in range(1, 33)
        if all(between(*limits(bits, table["signed"]), number) for number in numbers)
    ]
    need(bool(fits), "no register holds the taps")
    return tables | {"coefficient": table | {"bits": fits[0]}}


def loaded_kernel(kernel: Kernel, ideal: Matrix, rule: Loadable, taps: Integers | None) -> Kernel:
    """The kernel with other taps loaded; its own must be among those that may be."""
    need(rule.allows(kernel[0]), "the kernel itself may not be loaded")
    for i, row in enumerate(ideal):
        for j, tap in enumerate(row):
            need(tap == 0 or rule.holds(i, j), "a tap without a register")
    need(taps is None or rule.allows(taps), "taps that may not be loaded")
    return kernel if taps is None else (taps, *kernel[1:])
