"""Random sets of taps that may be loaded at run time, as TOML, and random loadings of them."""

from __future__ import annotations

import random
from pathlib import Path

from gainfit import ContradictionError
from oracle_reading import kernels_of, tables_of
from oracle_registers import Integers, Loadable
from randomkernels import Tables, limits, often
from randomtext import text_of

WALK = 40


def add_registers(rng: random.Random, tables: Tables) -> None:
    """Lets taps of a kernel that is fitted as one matrix be loaded; rarely not its own."""
    table = tables["coefficient"]
    try:
        taps = nominal(tables)
    except ContradictionError:
        return
    numbers = [tap for row in taps for tap in row]
    signed = table.get("signed") != "false"
    bits = table.get("bits", '"auto"')
    low, high = limits(32 if "auto" in bits else int(bits), signed)
    if often(rng, 0.2):
        table["registers"] = f"{{ kernels = {random_kernels(rng, taps, low, high)} }}"
        return
    entries = random_limits(rng, taps, low, high, "auto" in bits)
    if often(rng, 0.4):
        entries["sum"] = str(sum(numbers) + (1 if often(rng, 0.02) else 0))
    if often(rng, 0.3):
        size = sum(map(abs, numbers))
        entries["magnitudes"] = str(size + rng.choice([0, 1, 2, size, rng.randint(0, 300)]))
    if not entries:
        entries["sum"] = str(sum(numbers))
    table["registers"] = f"{{ {', '.join(f'{k} = {v}' for k, v in entries.items())} }}"


def nominal(tables: Tables) -> Integers:
    """The integers that the kernel's own taps become."""
    ((taps, _, _),) = kernels_of(tables_of(text_of(tables)), Path())
    return taps


def random_limits(
    rng: random.Random, taps: Integers, low: int, high: int, needed: bool
) -> dict[str, str]:
    """Limits about the taps: one for all, a matrix, or none where they are not needed."""
    far = rng.choice([0, 1, 3, 20, 300])
    numbers = [tap for row in taps for tap in row]
    entries: dict[str, str] = {}
    for key, sign, end in (("least", -1, min(numbers)), ("greatest", 1, max(numbers))):
        if often(rng, 0.5):
            held = min(max(end + sign * rng.randint(0, far), low), high)
            entries[key] = str(held)
        elif needed or often(rng, 0.5):
            entries[key] = str(
                [
                    # a tap of 0 often stays one
                    [
                        0
                        if tap == 0 and often(rng, 0.5)
                        else moved(rng, tap, sign * far, low, high)
                        for tap in row
                    ]
                    for row in taps
                ]
            )
    if often(rng, 0.01):
        entries["least"] = str(max(numbers) + 1)
    return entries


def moved(rng: random.Random, tap: int, far: int, low: int, high: int) -> int:
    """The tap moved some way toward `far`, within the register."""
    return min(
        max(tap + rng.choice([0, 1, far and rng.randint(1, abs(far))]) * sign_of(far), low), high
    )


def sign_of(number: int) -> int:
    """-1, 0 or 1."""
    return (number > 0) - (number < 0)


def random_kernels(rng: random.Random, taps: Integers, low: int, high: int) -> list[Integers]:
    """A few kernels of the same box, the nominal one among them."""
    made = [
        [[moved(rng, tap, rng.choice([-9, 9]), low, high) for tap in row] for row in taps]
        for _ in range(rng.randint(0, 3))
    ]
    made.insert(rng.randint(0, len(made)), taps)
    return made


def random_loading(rng: random.Random, rule: Loadable, taps: Integers) -> Integers:
    """Taps that may be loaded, by a walk from some that may."""
    if rule.kernels:
        return rng.choice(rule.kernels)
    cells = [(i, j) for i, row in enumerate(taps) for j in range(len(row))]
    for _ in range(WALK):
        made = [list(row) for row in taps]
        (i, j), (k, m) = rng.choice(cells), rng.choice(cells)
        by = rng.randint(-1, 1) * rng.choice([1, 2, 10, rule.greatest[i][j] - rule.least[i][j]])
        made[i][j] += by
        if often(rng, 0.6):
            made[k][m] -= by
        if rule.allows(made):
            taps = made
    return taps
