"""Filters whose coefficients are loaded at run time, and what is loaded."""

from collections.abc import Iterator
from dataclasses import dataclass, replace
from fractions import Fraction
from pathlib import Path

from guardbit.arith.tapset import is_member
from guardbit.fit.resolve import resolve
from guardbit.model.enums import BorderMode, Operation
from guardbit.model.filter import Filter, TapSet, Term
from guardbit.model.sizing import Sizing
from guardbit.sizing.analyse import analyse
from guardbit.spec.reader import parse_spec
from guardbit.verify.loadings import legal_loadings, nominal

Matrix = tuple[tuple[int, ...], ...]

BINOMIAL: Matrix = ((1, 2, 1), (2, 4, 2), (1, 2, 1))
SHARP: Matrix = ((0, -1, 0), (-1, 8, -1), (0, -1, 0))


@dataclass(frozen=True)
class Loadable:
    """A spec with the nominal kernel `taps`, and what may be loaded instead.

    `least` and `greatest` are limits of all taps, or of each, row by row of the kernel; cells
    in `fixed` are no registers.
    """

    taps: Matrix
    rest: str
    least: int | tuple[int, ...] = 0
    greatest: int | tuple[int, ...] = 127
    sum: int | None = None
    magnitudes: int | None = None
    kernels: tuple[Matrix, ...] = ()
    fixed: tuple[int, ...] = ()


def _border(mode: BorderMode) -> str:
    return f"\n[border]\nmode = '{mode}'" + ("\nvalue = 7" if mode is BorderMode.CONSTANT else "")


def cases() -> dict[str, Loadable]:
    """Every filter by name."""
    plain = "divisor = 16\n[input]\nbits = 8"
    signed = "divisor = 4\n[input]\nbits = 8\nsigned = true\n[output]\nrounding = 'ties-to-even'"
    made = {
        f"{extent}_{mode.replace('-', '_')}": Loadable(
            BINOMIAL, f"{plain}\n[image]\nextent = '{extent}'{_border(mode)}", sum=16
        )
        for extent in ("same", "full")
        for mode in BorderMode
    }
    return made | {
        "valid": Loadable(BINOMIAL, f"{plain}\n[image]\nextent = 'valid'\nwidth = [3, 99]", sum=16),
        "sharp": Loadable(SHARP, signed, -128, 127, sum=4, magnitudes=300),
        "cross": Loadable(SHARP, signed, -20, 20, fixed=(0, 2, 6, 8)),
        "own": Loadable(SHARP, signed, (-3,) * 4 + (0,) + (-3,) * 4, (3,) * 4 + (90,) + (3,) * 4),
        "listed": Loadable(
            SHARP, signed, -99, 99, kernels=(SHARP, ((1, 2, 3), (-9, 0, 5), (0, 1, 0)))
        ),
        "free": Loadable(BINOMIAL, plain, 0, 255),
        "clamps": Loadable(
            SHARP, signed + "\n[accumulator]\nbits = 10\noverflow = 'saturate'", -30, 60, sum=4
        ),
        "clamps_wide": Loadable(
            ((300, -100), (5, 7)),
            "divisor = 4\n[input]\nbits = 16\n[output]\nsigned = true\nbits = 32\n"
            "[coefficient]\nbits = 18\n[accumulator]\nbits = 33\noverflow = 'saturate'",
            -70000,
            70000,
        ),
        # the rounding constant alone is 2^63
        **{
            f"huge_{overflow}": Loadable(
                ((9, -1), (1, 5)),
                "[input]\nbits = 16\n[output]\nbits = 32\nsigned = true\nfrac = -64\n"
                f"[coefficient]\nfrac = 0\nbits = 32\n[accumulator]\nbits = 64\n"
                f"overflow = '{overflow}'\npreload = 'rounding'",
                -(1 << 31),
                (1 << 31) - 1,
            )
            for overflow in ("saturate", "wrap")
        },
        "wraps": Loadable(
            SHARP, signed + "\n[accumulator]\nbits = 9\noverflow = 'wrap'", -30, 60, sum=4
        ),
        "wraps_wide": Loadable(
            ((3, 1), (4, 1), (5, 9)),
            "divisor = 1\n[input]\nbits = 16\n[output]\nbits = 16\noverflow = 'wrap'\n"
            "[accumulator]\nbits = 31\noverflow = 'wrap'\n[coefficient]\nbits = 32",
            -(1 << 31),
            (1 << 31) - 1,
        ),
        "unsigned_taps": Loadable(
            ((3, 300), (0, 1)),
            "divisor = 16\n[input]\nbits = 8\n[output]\nbits = 16\n[coefficient]\nsigned = false",
            0,
            (3, 300, 0xFFFF, 1),
        ),
        "turned": Loadable(
            ((1, 2, 3), (-4, 5, 6)),
            "divisor = 4\n[filter]\noperation = 'correlation'\n[input]\nbits = 12\npedestal = 64\n"
            "range = [64, 4000]\noutside = 'clamp'\n[image]\nstep = [2, 1]\nspacing = [2, 3]\n"
            "channels = 2\n[border]\nmode = 'half-sample'",
            -9,
            9,
        ),
        "refuses": Loadable(
            BINOMIAL,
            "divisor = 16\n[input]\nbits = 10\noutside = 'reject'\nrange = [3, 900]\n"
            "[output]\npedestal = 5\noverflow = 'wrap'\n[border]\nmode = 'whole-sample'",
            0,
            16,
            sum=16,
        ),
    }


def sized(name: str, case: Loadable | None = None) -> Sizing:
    """The sizing of a filter with its registers."""
    case = case or cases()[name]
    head, rest = _tables(name, case)
    f = resolve(
        parse_spec(f"{head}\n[kernel]\ntaps = {[*map(list, case.taps)]}\n{rest}", name, Path())
    )
    only = f.passes[0]
    terms = _terms(f, case)
    registers = _registers(f, case, terms)
    kernel = replace(only.kernel, terms=terms, registers=registers)
    return analyse(replace(f, passes=(replace(only, kernel=kernel),)))


def _tables(name: str, case: Loadable) -> tuple[str, str]:
    """The [filter] table and all others."""
    head = f"[filter]\nname = 'taps_{name}'"
    operation = "[filter]\noperation = 'correlation'\n"
    if operation in case.rest:
        return f"{head}\noperation = 'correlation'", case.rest.replace(operation, "")
    return head, case.rest


def _places(f: Filter, case: Loadable) -> dict[tuple[int, int], int]:
    """The cell of the box, row by row of the kernel, that each offset reads by."""
    axes = (f.geometry.rows, f.geometry.columns)
    counts = (len(case.taps), len(case.taps[0]))
    rows, columns = (
        [
            -axis.least - index * axis.spacing
            if f.operation is Operation.CONVOLUTION
            else index * axis.spacing - axis.greatest
            for index in range(count)
        ]
        for axis, count in zip(axes, counts, strict=True)
    )
    return {
        (dy, dx): row * counts[1] + column
        for row, dy in enumerate(rows)
        for column, dx in enumerate(columns)
    }


def _terms(f: Filter, case: Loadable) -> tuple[Term, ...]:
    """A term for every register; those that are nominally zero are not in the fitted kernel."""
    known = {(t.dy, t.dx): t for t in f.passes[0].kernel.terms}
    places = _places(f, case)
    assert known.keys() <= places.keys()
    return tuple(
        known.get(at, Term(*at, Fraction(0), 0))
        for at in sorted(places)
        if places[at] not in case.fixed
    )


def _registers(f: Filter, case: Loadable, terms: tuple[Term, ...]) -> TapSet:
    places = _places(f, case)
    cells = tuple(places[t.dy, t.dx] for t in terms)
    count = len(places)
    least, greatest = (
        tuple((limit,) * count if isinstance(limit, int) else limit)
        for limit in (case.least, case.greatest)
    )
    flat = [tuple(tap for row in kernel for tap in row) for kernel in case.kernels]
    made = TapSet(
        count,
        cells,
        tuple(least[cell] for cell in cells),
        tuple(greatest[cell] for cell in cells),
        case.sum,
        case.magnitudes,
        tuple(tuple(kernel[cell] for cell in cells) for kernel in flat),
    )
    assert is_member(made, [t.integer for t in terms])
    return made


def loads(f: Filter, most: int = 5) -> Iterator[tuple[int, ...]]:
    """The nominal taps, and some others that may be loaded."""
    yield nominal(f)
    yield from legal_loadings(f)[:most]
