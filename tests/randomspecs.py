"""Random specs across the whole contract, and random frames for them.

Most specs are sound; some contradict themselves on purpose or by chance and must be refused. Widths
that `forbid` must prove are mostly chosen from a coarse worst case, so that few specs fail there.
"""

from __future__ import annotations

import random
from fractions import Fraction

import oracle
from randomframes import frames, random_frame
from randomkernels import Tables, add_kernel, limits, often, quoted, random_code
from randomregisters import add_registers, random_loading
from randomtext import ORDER, text_of

__all__ = ["frames", "is_sound", "random_frame", "random_loading", "random_spec"]

ROUNDINGS = ["toward-negative", "toward-positive", "toward-zero", "ties-to-even", "ties-to-away"]
ROUNDINGS += ["ties-to-positive"] * 3
MODES = ["constant", "replicate", "half-sample", "whole-sample", "periodic"]
CONTAINERS = {f"{kind}{bits}": (kind == "i", bits) for bits in (8, 16, 32) for kind in "ui"}


def random_container(rng: random.Random, bits: int, signed: bool) -> str:
    """The name of a container that holds the format; rarely any name."""
    low, high = limits(bits, signed)
    fits = [
        name
        for name, (sign, width) in CONTAINERS.items()
        if limits(width, sign)[0] <= low and high <= limits(width, sign)[1]
    ]
    return quoted(rng.choice(fits if fits and often(rng, 0.97) else list(CONTAINERS)))


def random_range(rng: random.Random, bits: int, signed: bool) -> str:
    """A range of codes of the format, some of a single code; rarely one step beyond the format."""
    low, high = limits(bits, signed)
    ends = sorted((random_code(rng, low, high), random_code(rng, low, high)))
    if often(rng, 0.02):
        ends[1] = high + 1
    return str(ends)


def random_input(rng: random.Random) -> dict[str, str]:
    """The input table."""
    bits = rng.choice([8, 8, 8, 8, 10, 12, 16, 1, 2, 3, 4, 5, 7, 9, 14])
    signed = often(rng, 0.3)
    low, high = limits(bits, signed)
    table = {"bits": str(bits)}
    if signed or often(rng, 0.1):
        table["signed"] = str(signed).lower()
    if often(rng, 0.35):
        table["frac"] = str(rng.choice([-64, 64, bits, bits + 3, *range(-4, 9), *range(-4, 9)]))
    if often(rng, 0.35):
        table["pedestal"] = str(random_code(rng, low, high))
    if often(rng, 0.4):
        table["range"] = random_range(rng, bits, signed)
    if often(rng, 0.25):
        table["container"] = random_container(rng, bits, signed)
    if often(rng, 0.6):
        table["outside"] = quoted(rng.choice(["clamp", "reject", "undefined"]))
    return table


def worst(
    stage: oracle.Stage, low: int, high: int, rule: oracle.Loadable | None = None
) -> tuple[int, int]:
    """Ends that no partial sum leaves, for a signal of low..high (coarse)."""
    limits_of = [(tap, tap) for _, _, tap in stage.terms]
    if rule is not None:
        rows = zip(rule.least, rule.greatest, strict=True)
        limits_of = [ends for row in rows for ends in zip(*row, strict=True)]
    products = [sorted(tap * code for tap in ends for code in (low, high)) for ends in limits_of]
    start = stage.register.preload
    return start + sum(min(p[0], 0) for p in products), start + sum(max(p[-1], 0) for p in products)


def width_for(low: int, high: int, signed: bool) -> int:
    """Bits that hold low..high, at least 2; unsigned ignores what is negative."""
    if not signed:
        return max(high.bit_length(), 2)
    return max(high.bit_length() + 1, (-low - 1).bit_length() + 1 if low < 0 else 1, 2)


def random_register(rng: random.Random, ends: tuple[int, int], preload: int) -> dict[str, str]:
    """An accumulator table for sums within `ends`; `preload` is the rounding constant or 0."""
    table: dict[str, str] = {}
    overflow = rng.choice(["forbid"] * 5 + ["wrap", "wrap", "saturate", "saturate", "saturate"])
    low, high = ends[0], ends[1]
    if preload and preload.bit_length() < 24 and often(rng, 0.4):
        table["preload"] = quoted("rounding")
        high += preload
    signed = low < 0 or often(rng, 0.75)
    if overflow != "forbid" and often(rng, 0.15):
        signed = False
    if not signed:
        table["signed"] = "false"
    safe = width_for(low, high, signed)
    if overflow != "forbid":
        table["overflow"] = quoted(overflow)
        bits = max(2, safe + rng.choice([-6, -4, -3, -2, -2, -1, -1, -1, 0, 1]))
        if "preload" in table:
            bits = max(bits, width_for(0, preload, signed))
        table["bits"] = str(min(bits, 64))
    elif often(rng, 0.4):
        bits = safe + rng.choice([0, 0, 0, 1, 3, 8])
        table["bits"] = str(max(2, min(64, bits - (5 if often(rng, 0.05) else 0))))
    elif often(rng, 0.2):
        table["bits"] = '"auto"'
    return table


def sum_bits(ends: tuple[int, int]) -> int:
    """About the binary logarithm of the greater end."""
    return max(-ends[0], ends[1], 1).bit_length()


def fitting_shift(rng: random.Random, stage: oracle.Stage, ends: tuple[int, int], bits: int) -> int:
    """Fraction bits to gain from input to output so that few codes saturate; rarely extreme."""
    if often(rng, 0.03):
        return rng.choice([-64, -33, -32, -31, -17, -16, -8, 3, 9])
    size = Fraction(sum_bits(ends)) - Fraction(1 / stage.scale).numerator.bit_length() + 1
    return bits - int(size) + rng.choice([-3, -2, -2, -1, -1, 0, 0, 1])


def random_target(rng: random.Random, bits: int, signed: bool, middle: bool) -> dict[str, str]:
    """Keys that [output] and [intermediate] share."""
    low, high = limits(bits, signed)
    table = {"bits": str(bits), "signed": str(signed).lower()}
    if often(rng, 0.25):
        table["pedestal"] = str(random_code(rng, low, high) // rng.choice([1, 2, 8]))
    if often(rng, 0.6):
        table["rounding"] = quoted(rng.choice(ROUNDINGS))
    if often(rng, 0.5):
        table["overflow"] = quoted(rng.choice(["saturate", "wrap", "wrap"]))
    if not middle:
        if often(rng, 0.25) and table.get("overflow") != quoted("wrap"):
            table["range"] = random_range(rng, bits, signed)
        if often(rng, 0.2):
            table["container"] = random_container(rng, bits, signed)
    if (bits >= 24 and often(rng, 0.4)) or often(rng, 0.02):
        table["overflow"] = quoted("forbid")
        table.pop("range", None)
    return table


def chosen_target(
    rng: random.Random,
    stage: oracle.Stage,
    signal: tuple[int, int],
    frac: int,
    middle: bool,
    rule: oracle.Loadable | None = None,
) -> tuple[dict[str, str], dict[str, str]]:
    """The target table and the accumulator table of a stage that was read with frac = `frac`."""
    ends = worst(stage, *signal, rule)
    bits = rng.choice([8, 8, 8, 10, 12, 16, 16, 24, 32, rng.randint(1, 16)])
    bits = max(bits, 2) if middle else bits
    table = random_target(rng, bits, ends[0] < 0 if often(rng, 0.8) else often(rng, 0.5), middle)
    gained = max(-64, min(64, frac + fitting_shift(rng, stage, ends, bits)))
    if gained != frac or often(rng, 0.2):
        table["frac"] = str(gained)
    scale = stage.scale * Fraction(2) ** (gained - frac)
    ties = table.get("rounding", quoted("ties-to-positive")) == quoted("ties-to-positive")
    binary = scale.numerator == 1 and scale.denominator & (scale.denominator - 1) == 0
    preload = scale.denominator // 2 if ties and binary else 0
    return table, random_register(rng, ends, preload)


def add_targets(rng: random.Random, tables: Tables) -> None:
    """Chooses formats and registers from what the kernel's passes can reach."""
    if "intermediate" in tables:
        tables["intermediate"]["bits"] = "32"
    contract = oracle.load(text_of(tables))
    exact = tables["coefficient"].get("scale") == quoted("exact")
    codes = (contract.source.low, contract.source.high, contract.value)
    signal = min(codes) - contract.source.pedestal, max(codes) - contract.source.pedestal
    frac = contract.source.frac
    if "intermediate" in tables:
        table, register = chosen_target(rng, contract.stages[0], signal, frac, middle=True)
        tables["intermediate"] |= table
        if exact:
            register.pop("preload", None)
        tables["intermediate.accumulator"] = register
        pedestal = int(table.get("pedestal", "0"))
        low, high = limits(int(table["bits"]), table["signed"] == "true")
        signal = low - pedestal, high - pedestal
        frac = int(table.get("frac", frac))
    # The last stage was read with the input's frac before it; only the difference matters.
    stage, rule = contract.stages[-1], contract.registers
    table, register = chosen_target(rng, stage, signal, frac, middle=False, rule=rule)
    if "frac" not in table and frac != contract.source.frac:
        table["frac"] = str(frac)
    if exact:
        register.pop("preload", None)
    tables["output"], tables["accumulator"] = table, register
    for key in ("bits", "signed", "frac"):
        if table.get(key) == tables["input"].get(key) and often(rng, 0.5):
            table.pop(key, None)


def add_image(rng: random.Random, tables: Tables) -> None:
    """Fills border and image."""
    image, border = tables["image"], tables["border"]
    if often(rng, 0.55):
        image["extent"] = quoted(rng.choice(["same", "full", "full", "valid", "valid"]))
    spacing = [1, 1]
    if often(rng, 0.3):
        spacing = [rng.choice([1, 2, 2, 3, rng.choice([5, 64])]), rng.choice([1, 2, 2, 3])]
        image["spacing"] = str(spacing)
    if often(rng, 0.35):
        step = [rng.choice([1, 2, 2, 3, 5]), rng.choice([1, 2, 2, 3, 64])]
        phase = [rng.randrange(min(one, 6)) for one in step]
        if often(rng, 0.02):
            phase[0] = step[0]
        image |= {"step": str(step)} | ({"phase": str(phase)} if often(rng, 0.7) else {})
    if often(rng, 0.2):
        image["channels"] = str(rng.choice([1, 2, 3, 4]))
    if often(rng, 0.8):
        border["mode"] = quoted(rng.choice(MODES))
    site = often(rng, 0.5 if max(spacing) > 1 else 0.1)
    if site:
        border["grid"] = quoted("site")
    for axis, key in enumerate(("height", "width")):
        least, most = rng.choice([(1, 3), (1, 12), (2, 9), (5, 5), (1, 1), (4, 40)])
        if site and image.get("extent") == quoted("full") and often(rng, 0.95):
            least = max(least, spacing[axis])
            image[key] = str([least, max(least, most)])
        elif often(rng, 0.5):
            image[key] = str([least, most])


def drawn_spec(rng: random.Random, name: str) -> str:
    """A spec that may contradict itself."""
    tables: Tables = {table: {} for table in ORDER if not table.startswith("intermediate")}
    tables["filter"] = {"name": quoted(name)}
    if often(rng, 0.4):
        tables["filter"]["operation"] = quoted(rng.choice(["correlation", "convolution"]))
    tables["input"] = random_input(rng)
    add_image(rng, tables)
    bits, signed = int(tables["input"]["bits"]), tables["input"].get("signed") == "true"
    if tables["border"].get("mode", quoted("constant")) == quoted("constant") and often(rng, 0.5):
        tables["border"]["value"] = str(random_code(rng, *limits(bits, signed)))
    paired = add_kernel(rng, tables)
    if paired and often(rng, 0.75):
        tables["intermediate"] = {}
        if often(rng, 0.5):
            tables["intermediate"]["first"] = quoted(rng.choice(["vertical", "horizontal"]))
    if not paired and "pinned" not in tables["coefficient"] and often(rng, 0.25):
        add_registers(rng, tables)
    try:
        add_targets(rng, tables)
    except oracle.ContradictionError:
        tables["output"] = {}
    return text_of(tables)


def is_sound(spec: str) -> bool:
    """Whether the oracle finds a meaning in the spec."""
    try:
        oracle.load(spec)
    except oracle.ContradictionError:
        return False
    return True


def random_spec(rng: random.Random, name: str) -> str:
    """The TOML text of a random spec; about one in thirty contradicts itself."""
    while True:
        try:
            spec = drawn_spec(rng, name)
            sound = is_sound(spec)
        except NotImplementedError:
            # a `gain` fit that the oracle's plain search takes too long over
            continue
        if sound or often(rng, 0.15):
            return spec
