"""A spec's TOML text as the oracle understands it: every default applied, every tap an integer.

Written from the contract with the standard library alone; it shares nothing with the package, so
that a mistake there cannot hide here. Left out: kernels by formula, image files as kernels, the
response fit, and the sizing of registers (bits = "auto" of an accumulator stays open).
"""

from __future__ import annotations

import tomllib
from collections.abc import Sequence
from dataclasses import dataclass
from decimal import Decimal
from fractions import Fraction
from pathlib import Path
from typing import Any

from gainfit import ContradictionError, gain, nearest_even
from oracle_registers import (
    Integers,
    Kernel,
    Loadable,
    Matrix,
    loadable_of,
    loaded_kernel,
    with_bits,
)
from oracle_words import between, limits, need

Number = int | str | float | Decimal

FORMAT = {"frac": None, "signed": None, "pedestal": 0, "rounding": "ties-to-positive"}
REGISTER = {"bits": "auto", "signed": True, "overflow": "forbid", "preload": "zero"}
FREE = ("taps", "column", "row", "file", "divisor", "origin")
DEFAULTS: dict[str, dict[str, Any]] = {
    "filter": {"name": None, "operation": "convolution", "summary": ""},
    "kernel": dict.fromkeys(FREE),
    "input": {"bits": None, "signed": False, "frac": 0, "pedestal": 0, "range": None}
    | {"container": None, "outside": "undefined"},
    "coefficient": {"bits": "auto", "signed": True, "frac": None, "fit": "nearest"}
    | {"scale": "binary", "pinned": None, "registers": None},
    "intermediate": FORMAT
    | {"first": "vertical", "bits": None, "signed": True}
    | {"overflow": "saturate", "accumulator": REGISTER},
    "accumulator": REGISTER,
    "output": FORMAT | {"bits": None, "range": None, "container": None, "overflow": "saturate"},
    "border": {"mode": "constant", "value": None, "grid": "pixel"},
    "image": {"extent": "same", "width": [1, 65535], "height": [1, 65535], "step": [1, 1]}
    | {"phase": [0, 0], "spacing": [1, 1], "channels": 1},
}
TIES = ("ties-to-even", "ties-to-away", "ties-to-positive")
WORDS = {
    "operation": ("convolution", "correlation"),
    "outside": ("undefined", "clamp", "reject"),
    "fit": ("nearest", "gain"),
    "scale": ("binary", "exact"),
    "first": ("vertical", "horizontal"),
    "overflow": ("forbid", "wrap", "saturate"),
    "preload": ("zero", "rounding"),
    "rounding": ("toward-negative", "toward-positive", "toward-zero", *TIES),
    "mode": ("constant", "replicate", "half-sample", "whole-sample", "periodic"),
    "grid": ("pixel", "site"),
    "extent": ("same", "full", "valid"),
}


@dataclass(frozen=True)
class Format:
    """A pixel format; `low` and `high` are its legal codes, `bits` and `signed` all that exist."""

    bits: int
    signed: bool
    frac: int
    pedestal: int
    low: int
    high: int


@dataclass(frozen=True)
class Register:
    """An accumulator; `bits` is None where the width is sized elsewhere."""

    bits: int | None
    signed: bool
    overflow: str
    preload: int


@dataclass(frozen=True)
class Stage:
    """One pass: terms (dy, dx, coefficient) in order of adding, then value = sum * scale."""

    terms: tuple[tuple[int, int, int], ...]
    register: Register
    scale: Fraction
    rounding: str
    overflow: str
    target: Format


@dataclass(frozen=True)
class Contract:
    """All that decides the output; pairs are (rows, columns)."""

    name: str
    stages: tuple[Stage, ...]
    source: Format
    container: tuple[int, int]
    outside: str
    mode: str
    value: int
    grid: str
    extent: str
    reach: tuple[tuple[int, int], tuple[int, int]]
    step: tuple[int, int]
    phase: tuple[int, int]
    spacing: tuple[int, int]
    channels: int
    heights: tuple[int, int]
    widths: tuple[int, int]
    registers: Loadable | None = None
    taps: Integers | None = None


def rational(value: Number) -> Fraction:
    """The exact value of a TOML number or of a ratio in a string."""
    try:
        return Fraction(value)
    except (ValueError, OverflowError, ZeroDivisionError, TypeError) as error:
        raise ContradictionError(f"no rational: {value!r}") from error


def completed(given: dict[str, Any], defaults: dict[str, Any]) -> dict[str, Any]:
    """The table with its defaults; unknown keys and unknown words are contradictions."""
    need(set(given) <= set(defaults), f"unknown among {sorted(given)}")
    table = defaults | given
    for key, value in table.items():
        need(key not in WORDS or value in WORDS[key], f"{key} = {value!r}")
    return table


def container_limits(name: str | None, form: Format) -> tuple[int, int]:
    """Limits of the named container, or of the smallest that holds the format."""
    every = {f"{kind}{bits}": limits(bits, kind == "i") for bits in (8, 16, 32) for kind in "ui"}
    low, high = limits(form.bits, form.signed)
    for key in every if name is None else [name]:
        need(key in every, f"container {key}")
        if every[key][0] <= low and high <= every[key][1]:
            return every[key]
    raise ContradictionError(f"container {name} is too small")


def pixel_format(table: dict[str, Any], least: int, most: int) -> Format:
    """The format that a completed table states."""
    need(between(least, most, table["bits"]), "bits")
    whole = limits(table["bits"], table["signed"])
    low, high = table.get("range") or whole
    need(between(*whole, low, high, table["pedestal"]) and low <= high, "range or pedestal")
    need(between(-64, 64, table["frac"]), "frac")
    return Format(table["bits"], table["signed"], table["frac"], table["pedestal"], low, high)


def register_of(table: dict[str, Any], scale: Fraction, rounding: str, exact: bool) -> Register:
    """The accumulator of a pass whose requantiser multiplies by `scale`."""
    bits = None if table["bits"] == "auto" else table["bits"]
    need(bits is None or between(2, 64, bits), "accumulator bits")
    preload = 0
    if table["preload"] == "rounding":
        need(not exact and rounding == "ties-to-positive" and scale < 1, "preload")
        preload = scale.denominator // 2
    return Register(bits, table["signed"], table["overflow"], preload)


def kernel_file(path: Path) -> list[list[Any]]:
    """The rows of a kernel file (.csv: decimals and ratios; .npy: exact values of floats)."""
    if path.suffix == ".csv":
        lines = [line for line in path.read_text(encoding="utf-8").splitlines() if line.strip()]
        return [[cell.strip() for cell in line.split(",")] for line in lines]
    need(path.suffix == ".npy", f"kernel file {path.name}")
    import numpy as np

    return [list(row) for row in np.load(path, allow_pickle=False).tolist()]


def divisor_of(ideal: Matrix, divisor: Number) -> Fraction:
    """The number that divides the ideal taps."""
    if divisor == "sum":
        total = sum((tap for row in ideal for tap in row), Fraction(0))
        need(total != 0, "taps without a sum")
        return total
    need(rational(divisor) > 0, "divisor")
    return rational(divisor)


def fitted(ideal: Matrix, frac: int, table: dict[str, Any], first: bool = False) -> Integers:
    """Integer taps at `frac` that fit the coefficient's bits, or ContradictionError.

    A declared `frac` leaves `gain` to find its best within the bits. At an automatic one the
    taps are fitted first and must then fit.
    """
    scaled = [[tap * Fraction(2) ** frac for tap in row] for row in ideal]
    free = table["bits"] == "auto"
    need(free or between(1, 32, table["bits"]), "coefficient bits")
    low, high = limits(32 if free else table["bits"], table["signed"])
    need(not free or all(tap.denominator == 1 for row in scaled for tap in row), "bits auto")
    if table["fit"] == "gain":
        if first:
            integers = gain(scaled, -(2**70), 2**70)
            need(all(low <= tap <= high for row in integers for tap in row), "a tap does not fit")
            return integers
        return gain(scaled, low, high)
    integers = [[nearest_even(tap) for tap in row] for row in scaled]
    need(all(low <= tap <= high for row in integers for tap in row), "a tap does not fit")
    return integers


def automatic_frac(ideal: Matrix, table: dict[str, Any]) -> int:
    """The smallest exact frac if that fits, else the largest that fits; 0 for a zero kernel."""
    taps = [tap for row in ideal for tap in row]
    if not any(taps):
        return 0
    fracs = range(-64, 65)
    whole = [f for f in fracs if all((t * Fraction(2) ** f).denominator == 1 for t in taps)]
    tries: list[int] = [*whole[:1], *fracs[::-1]]
    for frac in tries:
        try:
            fitted(ideal, frac, table, first=True)
        except ContradictionError:
            continue
        return frac
    raise ContradictionError("no frac fits")


def quantised(
    ideal: Matrix,
    divisor: Number | None,
    frac: int | str | None,
    table: dict[str, Any],
    pinned: Integers | None,
) -> tuple[Integers, Fraction]:
    """Integer taps, and the factor that makes their sum of products real again."""
    by = divisor_of(ideal, 1 if divisor is None else divisor)
    if table["scale"] == "exact":
        need(pinned is None and frac is None, "pinned or frac with exact scale")
        need(by > 0 and by.denominator == 1, "exact divisor")
        need(all(tap.denominator == 1 for row in ideal for tap in row), "exact taps")
        return fitted(ideal, 0, table | {"fit": "nearest"}), 1 / by
    ideal = [[tap / by for tap in row] for row in ideal]
    if frac is None or isinstance(frac, str):
        need(frac in (None, "auto"), "coefficient frac")
        frac = automatic_frac(ideal, table)
    need(between(-64, 64, frac), "coefficient frac")
    if pinned is None:
        return fitted(ideal, frac, table), Fraction(2) ** -frac
    need([len(row) for row in pinned] == [len(row) for row in ideal], "pinned box")
    exact = [[Fraction(tap) for tap in row] for row in pinned]
    return fitted(exact, 0, table | {"fit": "nearest"}), Fraction(2) ** -frac


def outer(column: list[Any], row: list[Any]) -> list[list[Any]]:
    """The matrix column * row."""
    return [[upper * left for left in row] for upper in column]


def paired_kernels(tables: dict[str, Any], column: Matrix, row: Matrix) -> tuple[Kernel, Kernel]:
    """The kernels of the column and of the row, each fitted alone."""
    table, divisor = tables["coefficient"], tables["kernel"]["divisor"]
    divisors, fracs = divisor or [1, 1], table["frac"] or [None, None]
    need(type(divisors) is list and type(fracs) is list, "scalar and pair mixed")
    pins = table["pinned"] or {"column": None, "row": None}
    need(type(pins) is dict and set(pins) == {"column", "row"}, "pinned of a pair")
    upright = pins["column"] and [[tap] for tap in pins["column"]]
    down = quantised(column, divisors[0], fracs[0], table, upright)
    along = quantised(row, divisors[1], fracs[1], table, pins["row"] and [pins["row"]])
    return (*down, "vertical"), (*along, "horizontal")


KERNELS = ("taps", "column", "row", "file")


def ideal_of(tables: dict[str, Any], folder: Path) -> Matrix:
    """The ideal taps before division, as one matrix."""
    kernel = tables["kernel"]
    given = [key for key in KERNELS if kernel[key] is not None]
    if given == ["column", "row"]:
        column, row = ([rational(tap) for tap in kernel[key]] for key in given)
        need(bool(column) and bool(row), "empty kernel")
        return outer(column, row)
    need(len(given) == 1 and given[0] not in ("column", "row"), "kernel keys")
    rows = kernel["taps"] if given == ["taps"] else kernel_file(folder / kernel["file"])
    ideal = [[rational(tap) for tap in row] for row in rows]
    need(len({len(row) for row in ideal}) == 1 and bool(ideal[0]), "ragged or empty kernel")
    return ideal


def kernels_of(tables: dict[str, Any], folder: Path) -> list[Kernel]:
    """Integer taps, factor and direction of each pass, in the order of the passes."""
    kernel, table = tables["kernel"], tables["coefficient"]
    divisor, frac, pinned = kernel["divisor"], table["frac"], table["pinned"]
    paired = "intermediate" in tables or list in (type(divisor), type(frac))
    if not paired:
        ideal = ideal_of(tables, folder)
        return [(*quantised(ideal, divisor, frac, table, pinned), "both")]
    need([kernel[key] is not None for key in KERNELS] == [False, True, True, False], "pairs")
    column, row = ([rational(tap) for tap in kernel[key]] for key in ("column", "row"))
    need(bool(column) and bool(row), "empty kernel")
    down, along = paired_kernels(tables, [[tap] for tap in column], [row])
    if "intermediate" in tables:
        return [down, along] if tables["intermediate"]["first"] == "vertical" else [along, down]
    return [(outer([tap for (tap,) in down[0]], along[0][0]), down[1] * along[1], "both")]


def stage_of(
    tables: dict[str, Any],
    kernel: Kernel,
    origin: Sequence[int],
    frac: int,
    into: dict[str, Any],
    rule: Loadable | None = None,
) -> Stage:
    """The pass that applies `kernel` to a signal of `frac` and requantises as `into` says.

    Terms are all taps that are not zero, or that could be loaded so.
    """
    taps, factor, direction = kernel
    sign = 1 if tables["filter"]["operation"] == "correlation" else -1
    pitch = tables["image"]["spacing"]
    at = 0 if direction == "horizontal" else origin[0], 0 if direction == "vertical" else origin[1]
    # The order of the contract: upper row first, then left to right, of the pixels read.
    terms = sorted(
        (sign * (i - at[0]) * pitch[0], sign * (j - at[1]) * pitch[1], tap)
        for i, row in enumerate(taps)
        for j, tap in enumerate(row)
        if tap or (rule is not None and rule.holds(i, j))
    )
    target = pixel_format(into, 2 if "accumulator" in into else 1, 32)
    scale = factor * Fraction(2) ** (target.frac - frac)
    exact = tables["coefficient"]["scale"] == "exact"
    adder = into.get("accumulator", tables["accumulator"])
    register = register_of(adder, scale, into["rounding"], exact)
    rounding = "toward-negative" if register.preload else into["rounding"]
    return Stage(tuple(terms), register, scale, rounding, into["overflow"], target)


def without_goal(given: dict[str, Any]) -> dict[str, Any]:
    """The document without its goal, which decides no output once no word is left to a search."""
    if "goal" not in given:
        return given
    table, between = given.get("coefficient", {}), given.get("intermediate")
    frac = table.get("frac")
    numbers = [table.get("bits"), *(frac if type(frac) is list else [frac])]
    settled = "pinned" in table or table.get("scale") == "exact"
    need(settled or all(type(number) is int for number in numbers), "open coefficients")
    words = [1, 1] if between is None else [between.get("bits"), between.get("frac")]
    need(all(type(word) is int for word in words), "open intermediate")
    return {name: table for name, table in given.items() if name != "goal"}


def tables_of(text: str) -> dict[str, Any]:
    """The tables of the text with every default that is a plain value."""
    given = without_goal(tomllib.loads(text, parse_float=Decimal))
    need(set(given) <= set(DEFAULTS), f"unknown table among {sorted(given)}")
    need({"filter", "kernel", "input"} <= set(given), "a required table")
    tables = {
        name: completed(given.get(name, {}), defaults)
        for name, defaults in DEFAULTS.items()
        if name != "intermediate" or name in given
    }
    source, output, middle = tables["input"], tables["output"], tables.get("intermediate")
    need(tables["filter"]["name"] is not None and source["bits"] is not None, "a required key")
    for key in ("bits", "signed", "frac"):
        output[key] = source[key] if output[key] is None else output[key]
    need(output["overflow"] != "wrap" or output["range"] is None, "wrap with a range")
    if middle is not None:
        middle["frac"] = source["frac"] if middle["frac"] is None else middle["frac"]
        middle["accumulator"] = completed(middle["accumulator"], REGISTER)
    return tables


def check_geometry(contract: Contract) -> None:
    """Nothing; ContradictionError where steps, sizes or the grid cannot be."""
    need(between(1, 64, *contract.step, *contract.spacing), "step or spacing")
    need(between(1, 16, contract.channels), "channels")
    for axis, (least, greatest) in enumerate((contract.heights, contract.widths)):
        need(between(1, 65535, least, greatest) and least <= greatest, "width or height")
        need(between(0, contract.step[axis] - 1, contract.phase[axis]), "phase")
        empty = contract.grid == "site" and contract.spacing[axis] > least
        wide = contract.reach[axis][0] < contract.reach[axis][1]
        continues = contract.extent == "full" and contract.mode != "constant"
        need(not (empty and wide and continues), "an empty sublattice")


def load(text: str, folder: Path = Path(), taps: Integers | None = None) -> Contract:
    """The contract that the spec's text states; ContradictionError where it states none.

    `taps` are loaded into the coefficient registers, row by row of the kernel as it is written.
    """
    tables = with_bits(tables_of(text))
    image, border, kernel = tables["image"], tables["border"], tables["kernel"]
    source = pixel_format(tables["input"], 1, 16)
    kernels = kernels_of(tables, folder)
    box = max(len(taps) for taps, _, _ in kernels), max(len(taps[0]) for taps, _, _ in kernels)
    origin = kernel["origin"] or [(box[0] - 1) // 2, (box[1] - 1) // 2]
    need(between(1, 255, *box) and between(-1024, 1024, *origin), "box or origin")
    rule = loadable_of(tables, box)
    need(rule is not None or taps is None, "taps for a filter without registers")
    if rule is not None:
        kernels = [loaded_kernel(kernels[0], ideal_of(tables, folder), rule, taps)]
    into = [tables[name] for name in ("intermediate", "output") if name in tables]
    fracs = [source.frac, *(table["frac"] for table in into)]
    stages = tuple(
        stage_of(tables, part, origin, frac, table, rule)
        for part, frac, table in zip(kernels, fracs, into, strict=False)
    )
    container_limits(tables["output"]["container"], stages[-1].target)
    value = source.pedestal if border["value"] is None else border["value"]
    need(between(*limits(source.bits, source.signed), value), "border value")
    sign = -1 if tables["filter"]["operation"] == "correlation" else 1
    ends = [
        sorted(sign * (k - at) * pitch for k in (0, size - 1))
        for size, at, pitch in zip(box, origin, image["spacing"], strict=True)
    ]
    contract = Contract(
        name=tables["filter"]["name"],
        stages=stages,
        source=source,
        container=container_limits(tables["input"]["container"], source),
        outside=tables["input"]["outside"],
        mode=border["mode"],
        value=value,
        grid=border["grid"],
        extent=image["extent"],
        reach=((ends[0][0], ends[0][1]), (ends[1][0], ends[1][1])),
        channels=image["channels"],
        heights=tuple(image["height"]),
        widths=tuple(image["width"]),
        registers=rule,
        taps=kernels[0][0] if rule is not None else None,
        **{key: tuple(image[key]) for key in ("step", "phase", "spacing")},
    )
    check_geometry(contract)
    return contract
