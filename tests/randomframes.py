"""Random frames for a contract: corner tables, then random codes."""

from __future__ import annotations

import random
from collections.abc import Iterator

import oracle
from randomkernels import often

Image = list[list[list[int]]]
LARGEST_SIDE = 12


def random_size(rng: random.Random, contract: oracle.Contract) -> tuple[int, int]:
    """A legal height and width, small ones more often."""
    sides = []
    filled = contract.extent == "valid" and often(rng, 0.85)
    for (least, greatest), reach in zip(
        (contract.heights, contract.widths), contract.reach, strict=True
    ):
        # A valid extent is empty below the box's span, which some frames should exceed.
        span = reach[1] - reach[0] + 1
        start = max(least, min(span, greatest)) if filled and span < 24 else least
        most = max(start, min(greatest, LARGEST_SIDE))
        sides.append(rng.randint(start, rng.choice([min(start + 3, most), most])))
    return sides[0], sides[1]


def frame_of(
    kind: str, size: tuple[int, int], rng: random.Random, contract: oracle.Contract
) -> Image:
    """A frame of legal codes: a corner table by name, or random codes."""
    low, high = contract.source.low, contract.source.high
    base = min(max(contract.source.pedestal, low), high)
    spot = rng.randrange(size[0]), rng.randrange(size[1])
    ends = rng.choice([(low, high), (high, low)])

    def code(y: int, x: int) -> int:
        return {
            "low": low,
            "high": high,
            "rows": ends[y % 2],
            "columns": ends[x % 2],
            "checks": ends[(x + y) % 2],
            "impulse": ends[0] if (y, x) == spot else base,
            "hole": ends[0] if (y, x) == spot else ends[1],
            "ends": rng.choice(ends),
        }.get(kind, rng.randint(low, high))

    return [
        [[code(y, x) for _ in range(contract.channels)] for x in range(size[1])]
        for y in range(size[0])
    ]


CORNERS = ("low", "high", "checks", "rows", "columns", "impulse", "hole", "ends")


def spoilt(rng: random.Random, contract: oracle.Contract, image: Image) -> Image:
    """The frame, sometimes with codes outside the range where the spec says what they mean."""
    low, high = contract.source.low, contract.source.high
    least, greatest = contract.container
    beyond = [code for code in (low - 1, high + 1, least, greatest) if not low <= code <= high]
    beyond = [code for code in beyond if least <= code <= greatest]
    chance = {"clamp": 0.6, "reject": 0.3}.get(contract.outside, 0.0)
    if beyond and often(rng, chance):
        for _ in range(rng.choice([1, 1, 2, 5])):
            pixel = rng.choice(rng.choice(image))
            pixel[rng.randrange(len(pixel))] = rng.choice(beyond)
    return image


def frames(rng: random.Random, contract: oracle.Contract) -> Iterator[Image]:
    """Frames without end: the corner tables first, then random ones, each of a size of its own."""
    for kind in CORNERS:
        frame = frame_of(kind, random_size(rng, contract), rng, contract)
        yield frame if kind in ("low", "high") else spoilt(rng, contract, frame)
    while True:
        yield spoilt(rng, contract, frame_of("random", random_size(rng, contract), rng, contract))


def random_frame(rng: random.Random, contract: oracle.Contract) -> Image:
    """One frame: a corner table or random codes."""
    kind = rng.choice([*CORNERS, *["random"] * len(CORNERS)])
    return spoilt(rng, contract, frame_of(kind, random_size(rng, contract), rng, contract))
