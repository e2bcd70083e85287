"""Random kernels and their coefficients, as TOML, for the random specs."""

from __future__ import annotations

import random
from dataclasses import dataclass
from fractions import Fraction

Tables = dict[str, dict[str, str]]


def quoted(word: str) -> str:
    """The word as a TOML string."""
    return f'"{word}"'


def often(rng: random.Random, chance: float) -> bool:
    """True with that chance."""
    return rng.random() < chance


def limits(bits: int, signed: bool) -> tuple[int, int]:
    """Least and greatest number of the format."""
    return (-(1 << bits - 1), (1 << bits - 1) - 1) if signed else (0, (1 << bits) - 1)


def random_code(rng: random.Random, low: int, high: int) -> int:
    """A code of low..high, often an end or near one."""
    near = [low, high, min(low + 1, high), max(high - 1, low), min(max(0, low), high)]
    return rng.choice(near) if often(rng, 0.3) else rng.randint(low, high)


@dataclass(frozen=True)
class Taps:
    """Ideal taps of a matrix or a vector (one row), as values and as TOML."""

    values: list[list[Fraction]]
    tokens: list[list[str]]


def side(rng: random.Random) -> int:
    """A length of a kernel's side, mostly 1 to 5."""
    return rng.choice([1, 2, 2, 3, 3, 3, 3, 4, 5, 5, rng.choice([6, 7, 9, 14])])


def random_tap(rng: random.Random, style: str) -> tuple[Fraction, str]:
    """A tap and its TOML."""
    if often(rng, 0.15):
        return Fraction(0), "0"
    if style == "integer":
        number = rng.choice([rng.randint(-4, 4), rng.randint(-20, 40)])
        return Fraction(number), str(number)
    if style == "positive":
        number = rng.randint(1, 12)
        return Fraction(number), str(number)
    if style == "large":
        number = rng.randint(-40000, 40000)
        return Fraction(number), str(number)
    if style == "decimal":
        text = f"{rng.uniform(-1.5, 2):.{rng.randint(1, 5)}f}"
        return Fraction(text), text
    over = rng.choice([2, 4, 8, 16, 64]) if style == "dyadic" else rng.choice([3, 5, 6, 7, 12, 100])
    number = rng.randint(-20, 30)
    return Fraction(number, over), quoted(f"{number}/{over}")


def mirrored(rng: random.Random, taps: Taps) -> Taps:
    """The taps, sometimes made symmetric about an axis or the diagonal."""
    values, tokens = [list(row) for row in taps.values], [list(row) for row in taps.tokens]
    rows, columns = len(values), len(values[0])
    for flip in rng.sample(["rows", "columns", "diagonal"], rng.choice([0, 1, 2, 3])):
        for i in range(rows):
            for j in range(columns):
                to = {"rows": (rows - 1 - i, j), "columns": (i, columns - 1 - j)}.get(flip, (j, i))
                if flip != "diagonal" or rows == columns:
                    values[to[0]][to[1]], tokens[to[0]][to[1]] = values[i][j], tokens[i][j]
    return Taps(values, tokens)


def random_taps(rng: random.Random, rows: int, columns: int, exact: bool) -> Taps:
    """A matrix of ideal taps; integers only where `exact`."""
    whole = ["integer", "integer", "positive", "positive", "large"]
    styles = whole if exact else [*whole, "dyadic", "dyadic", "decimal", "ratio"]
    style = rng.choice(styles)
    drawn = [[random_tap(rng, style) for _ in range(columns)] for _ in range(rows)]
    taps = Taps([[v for v, _ in row] for row in drawn], [[t for _, t in row] for row in drawn])
    return mirrored(rng, taps) if often(rng, 0.4) else taps


def random_divisor(rng: random.Random, taps: Taps, exact: bool) -> tuple[Fraction, str]:
    """A divisor and its TOML."""
    total = sum((tap for row in taps.values for tap in row), Fraction(0))
    if total > 0 and often(rng, 0.25):
        return total, quoted("sum")
    if exact:
        number = rng.choice([1, 2, 3, 4, 5, 7, 9, 10, 16, 25, 49, 100, 273, 1000])
        return Fraction(number), str(number)
    text = rng.choice(["1", "1", "2", "4", "8", "16", "256", "3", "9", "25", "0.5", '"5/3"'])
    return Fraction(text.strip('"')), text


def fitting_frac(rng: random.Random, taps: Taps, divisor: Fraction, bits: int) -> int:
    """A frac at which the rounded taps mostly fit."""
    most = max(abs(tap / divisor) for row in taps.values for tap in row)
    frac = bits - 2 - (most.numerator // most.denominator).bit_length()
    while most and frac < 40 and most * Fraction(2) ** (frac + 1) < 2 ** (bits - 2):
        frac += 1
    frac -= rng.choice([0, 0, 0, 1, 2, -1 if often(rng, 0.1) else 0])
    return max(-64, min(64, frac))


def dyadic(taps: Taps, divisor: Fraction) -> bool:
    """Whether every ideal tap is an integer at some frac."""
    return all(
        (tap / divisor).denominator & ((tap / divisor).denominator - 1) == 0
        for row in taps.values
        for tap in row
    )


def random_pins(rng: random.Random, taps: Taps, bits: int, signed: bool) -> list[list[int]]:
    """Integers for pinned taps of the same box."""
    low, high = limits(min(bits, 10), signed)
    return [[random_code(rng, low, high) for _ in row] for row in taps.values]


def add_coefficients(rng: random.Random, tables: Tables, parts: list[Taps], paired: bool) -> None:
    """Fills the kernel's divisor and the coefficient table; `parts` are fitted one by one."""
    kernel, table = tables["kernel"], tables["coefficient"]
    exact = table.get("scale") == quoted("exact")
    divisors = [random_divisor(rng, part, exact) for part in parts]
    if paired or divisors[0][1] != "1":
        kernel["divisor"] = f"[{', '.join(t for _, t in divisors)}]" if paired else divisors[0][1]
    if paired and "sum" in kernel["divisor"]:
        divisors = [(Fraction(1), "1") for _ in parts]
        kernel["divisor"] = "[1, 1]"
    pairs = list(zip(parts, (number for number, _ in divisors), strict=True))
    negative = any(tap < 0 for part in parts for row in part.values for tap in row)
    signed = negative or often(rng, 0.7)
    if not signed:
        table["signed"] = "false"
    bits = rng.choice([6, 8, 8, 8, 10, 12, 16, 18, 32])
    if exact:
        if often(rng, 0.2):
            table["bits"] = rng.choice(["18", "32", '"auto"', str(bits)])
        return
    if all(dyadic(*pair) for pair in pairs) and often(rng, 0.6):
        if often(rng, 0.3):
            table["bits"] = rng.choice(["32", '"auto"'])
        return
    table["bits"] = str(bits)
    pinned = often(rng, 0.1)
    small = bits <= 8 and sum(len(row) for part in parts for row in part.values) <= 4
    gain = often(rng, 0.3) and not pinned
    if pinned or not often(rng, 0.3) or (gain and not small):
        fracs = [fitting_frac(rng, *pair, bits) for pair in pairs]
        table["frac"] = str(fracs) if paired else str(fracs[0])
    if gain:
        table["fit"] = quoted("gain")
    if pinned:
        pins = [random_pins(rng, part, bits, signed) for part in parts]
        column = [tap for row in pins[0] for tap in row]
        table["pinned"] = str(pins[0])
        if paired:
            table["pinned"] = f"{{ column = {column}, row = {pins[1][0]} }}"


def listed(rows: list[list[str]]) -> str:
    """A TOML matrix."""
    return "[" + ", ".join("[" + ", ".join(row) + "]" for row in rows) + "]"


def random_origin(rng: random.Random, box: tuple[int, int]) -> str:
    """An origin inside or outside the box, rarely very far."""
    if often(rng, 0.65):
        return str([rng.randrange(box[0]), rng.randrange(box[1])])
    far = [-1024, 1024, 100, -77] if often(rng, 0.1) else list(range(-6, 11))
    return str([rng.choice(far), rng.choice([*far, 0])])


def add_kernel(rng: random.Random, tables: Tables) -> bool:
    """Fills kernel and coefficient; whether the taps are fitted in pairs."""
    box = (side(rng), side(rng))
    if max(box) > 5:
        box = (box[0], rng.choice([1, 2])) if box[0] > 5 else (rng.choice([1, 2]), box[1])
    kernel = tables["kernel"]
    exact = often(rng, 0.25)
    if exact:
        tables["coefficient"]["scale"] = quoted("exact")
    way = rng.choice(["taps"] * 6 + ["outer"] + ["pairs"] * 5)
    if way == "taps":
        taps = random_taps(rng, *box, exact)
        kernel["taps"] = listed(taps.tokens)
        add_coefficients(rng, tables, [taps], paired=False)
    else:
        upright, row = random_taps(rng, box[0], 1, exact), random_taps(rng, 1, box[1], exact)
        kernel["column"] = listed([[token for (token,) in upright.tokens]])[1:-1]
        kernel["row"] = listed(row.tokens)[1:-1]
        if way == "pairs":
            add_coefficients(rng, tables, [upright, row], paired=True)
        else:
            outer = [[upper * left for left in row.values[0]] for (upper,) in upright.values]
            add_coefficients(rng, tables, [Taps(outer, row.tokens)], paired=False)
            tables["coefficient"].pop("pinned", None)
    if often(rng, 0.45):
        kernel["origin"] = random_origin(rng, box)
    return way == "pairs"
