"""Coefficients that are given at run time: their array, and the check of what may be loaded."""

from dataclasses import dataclass

from guardbit.emit import expressions as c
from guardbit.model.filter import Filter, TapSet, raster, registers_of
from guardbit.model.plan import Cell, Plan


@dataclass(frozen=True)
class TapsText:
    """The array of coefficients and its check.

    `low` and `high` are what a tap is compared with, None where its type holds nothing
    beyond; `least` and `greatest` are the tables that they may name. `sum` and `size` (of
    magnitudes) are None where there is no such condition; `work` is the type of both sums,
    which no taps within the limits leave. `listed` are the kernels to choose from, if any.
    """

    type: str
    nominal: tuple[int, ...]
    low: str | None
    high: str | None
    least: tuple[int, ...]
    greatest: tuple[int, ...]
    sum: str | None
    size: str | None
    is_signed: bool
    work: str
    listed: tuple[tuple[int, ...], ...]


def taps_text(f: Filter, plan: Plan) -> TapsText | None:
    """Return the text of the coefficients; None: they are fixed."""
    s = registers_of(f)
    if s is None or plan.taps is None:
        return None
    cell = plan.taps
    least, greatest = raster(s, s.least), raster(s, s.greatest)
    lowest = -(1 << (cell.bits - 1)) if cell.signed else 0
    highest = (1 << (cell.bits - cell.signed)) - 1
    # compilers warn of a comparison that is always false
    low = None if s.kernels or max(least) <= lowest else _limit("least", least)
    high = None if s.kernels or min(greatest) >= highest else _limit("greatest", greatest)
    return TapsText(
        type=c.cell_type(cell),
        nominal=raster(s, tuple(t.integer for t in f.passes[0].kernel.terms)),
        low=low,
        high=high,
        least=least if low == "least[k]" else (),
        greatest=greatest if high == "greatest[k]" else (),
        sum=None if s.sum is None or s.kernels else c.number(s.sum),
        size=None if s.kernels else _most(s),
        is_signed=cell.signed,
        work=_work(s, cell),
        listed=tuple(raster(s, kernel) for kernel in s.kernels),
    )


def _limit(table: str, values: tuple[int, ...]) -> str:
    """Return the C expression of a tap's limit: a number if it is that of all cells."""
    return c.number(values[0]) if min(values) == max(values) else f"{table}[k]"


def _magnitudes(s: TapSet) -> int:
    """Return what the magnitudes of taps within the limits add up to at most."""
    return sum(max(-low, high) for low, high in zip(s.least, s.greatest, strict=True))


def _most(s: TapSet) -> str | None:
    """Return the limit of the magnitudes, if taps within their limits can pass it."""
    free = s.magnitudes is None or _magnitudes(s) <= s.magnitudes
    return None if free or s.magnitudes is None else c.number(s.magnitudes)


def _work(s: TapSet, cell: Cell) -> str:
    """Return a signed type, wider than a tap's, that holds every sum of taps in their limits."""
    return "int32_t" if cell.bits < 32 and _magnitudes(s) < 1 << 31 else "int64_t"


def tap_words(name: str, s: TapSet) -> tuple[str, ...]:
    """Return what may be loaded, in lines for the header's reader."""
    order = f"{name.upper()}_TAPS taps given at each call, row by row of the kernel;"
    return (order, *(f"{line};" for line in _conditions(s)), "no others are legal")


def _conditions(s: TapSet) -> tuple[str, ...]:
    if s.kernels:
        return (f"they are one of the {len(s.kernels)} kernels that the spec lists",)
    low, high = min(s.least), max(s.greatest)
    alike = min(s.greatest) == high and max(s.least) == low
    lines = [f"each is {low} to {high}" + ("" if alike else ", or has narrower limits of its own")]
    if len(s.cells) < s.count:
        lines.append("those in cells that the kernel leaves out are zero")
    if s.sum is not None:
        lines.append(f"their sum is {s.sum}")
    if _most(s) is not None:
        lines.append(f"their magnitudes add up to at most {s.magnitudes}")
    return tuple(lines)
