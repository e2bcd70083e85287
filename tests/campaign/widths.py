"""Bits that exact ranges save against two textbook rules, over the examples and known filters.

    python tests/campaign/widths.py

The rules: pixel bits + ceil(log2(sum of |taps|)) + sign, and pixel bits + tap bits +
ceil(log2(number of taps)) + sign. Both never fall short; neither knows which sums occur.
"""

from __future__ import annotations

import sys
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parents[1]))

import packaged

EXAMPLES = Path(__file__).parents[2] / "examples"

# Taps as published: RFC 6386 s.18.3; ISO/IEC 14496-10, 8.4.2.2; Rec. H.265, 8.5.3.3.3; the VP9
# decoder's tables; AV1 specification, 7.11.3.4 and 7.17.4; and kernels of the field (from memory).
LINES = {
    "VP8 six-tap 1/2": [3, -16, 77, 77, -16, 3],
    "VP8 six-tap 1/4": [2, -11, 108, 36, -8, 1],
    "H.264 luma 1/2": [1, -5, 20, 20, -5, 1],
    "H.265 luma 1/2": [-1, 4, -11, 40, 40, -11, 4, -1],
    "H.265 luma 1/4": [-1, 4, -10, 58, 17, -5, 1, 0],
    "H.265 chroma 3/8": [-6, 46, 28, -4],
    "VP9 sharp 1/2": [-4, 11, -23, 80, 80, -23, 11, -4],
    "VP9 smooth 1/2": [-1, -4, 14, 55, 55, 14, -4, -1],
    "AV1 sharp 1/2": [-4, 12, -24, 80, 80, -24, 12, -4],
    "AV1 Wiener, worst": [-5, -23, -17, 218, -17, -23, -5],
    "JPEG 2000 5/3 low": [-1, 2, 6, 2, -1],
}
PLANES = {
    "Sobel": [[-1, 0, 1], [-2, 0, 2], [-1, 0, 1]],
    "Scharr": [[-3, 0, 3], [-10, 0, 10], [-3, 0, 3]],
    "Laplacian": [[0, 1, 0], [1, -4, 1], [0, 1, 0]],
    "binomial 5x5": [[a * b for b in (1, 4, 6, 4, 1)] for a in (1, 4, 6, 4, 1)],
    "mean 7x7": [[1] * 7] * 7,
    "H.264 centre 6x6": [[a * b for b in (1, -5, 20, 20, -5, 1)] for a in (1, -5, 20, 20, -5, 1)],
    "Malvar green, doubled": [[0, 0, -2, 0, 0], [0, 0, 4, 0, 0], [-2, 4, 8, 4, -2],
                              [0, 0, 4, 0, 0], [0, 0, -2, 0, 0]],
}  # fmt: skip


@dataclass(frozen=True)
class Row:
    """One accumulator: the bits that it needs, and what the rules give."""

    name: str
    exact: int
    by_sum: int
    by_count: int


def standard_spec(taps: Sequence[Sequence[int]], depth: int) -> str:
    """The text of a spec that sums those taps as they are, common factors and all."""
    return (
        '[filter]\nname = "probe"\noperation = "correlation"\n'
        f"[kernel]\ntaps = {[list(row) for row in taps]}\n[input]\nbits = {depth}\n"
        "[coefficient]\nfrac = 0\n"
    )


def rows() -> Iterator[Row]:
    """The accumulators of the examples, and of the known filters at 8 and 10 bits."""
    for path in sorted(EXAMPLES.glob("*.toml")):
        yield from _rows(path.stem, path.read_text("utf-8"), EXAMPLES)
    for depth in (8, 10):
        for name, taps in [*((n, [line]) for n, line in LINES.items()), *PLANES.items()]:
            yield from _rows(f"{name}, {depth} bits", standard_spec(taps, depth), Path())


def _rows(name: str, text: str, folder: Path) -> Iterator[Row]:
    for register in packaged.sized(text, folder, "probe").registers:
        first = " (first pass)" if register.name.startswith("intermediate") else ""
        exact = register.bits_forbid
        yield Row(name + first, exact, register.rule_l1, register.rule_count)


def table(all_rows: Sequence[Row]) -> str:
    """A line per accumulator, and the totals."""
    lines = [f"{'accumulator':36}{'exact':>6}{'sum |h|':>9}{'saved':>6}{'count':>7}{'saved':>6}"]
    for row in all_rows:
        saved = row.by_sum - row.exact, row.by_count - row.exact
        lines.append(
            f"{row.name:36}{row.exact:6}{row.by_sum:9}{saved[0]:6}{row.by_count:7}{saved[1]:6}"
        )
    by_sum = [row.by_sum - row.exact for row in all_rows]
    by_count = [row.by_count - row.exact for row in all_rows]
    for rule, saved_bits in (("sum of |h|", by_sum), ("tap count", by_count)):
        lines.append(
            f"against the rule by {rule}: {sum(saved_bits)} bits on {len(all_rows)} accumulators, "
            f"{sum(bits > 0 for bits in saved_bits)} of them narrower, at most {max(saved_bits)}"
        )
    return "\n".join(lines)


if __name__ == "__main__":
    print(table(list(rows())))
