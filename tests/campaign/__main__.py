"""Thousands of random specs: compiled C == NumPy reference == plain-integer oracle, and SciPy.

    python tests/campaign [--specs 5000] [--frames 6] [--seed 1] [--jobs 2]

Exit status 1 if anything differs.
"""

from __future__ import annotations

import argparse
import sys
import time
from concurrent.futures import ProcessPoolExecutor
from functools import partial
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parents[1]))

from campaign.batches import BATCH, Tally, batch


def main() -> int:
    """Run the campaign; return the exit status."""
    parser = argparse.ArgumentParser(description="random specs, four ways")
    parser.add_argument("--specs", type=int, default=5000)
    parser.add_argument("--frames", type=int, default=6)
    parser.add_argument("--seed", type=int, default=1)
    parser.add_argument("--jobs", type=int, default=2)
    options = parser.parse_args()
    began = time.monotonic()
    seeds = range(options.seed, options.seed + -(-options.specs // BATCH))
    total = Tally()
    with ProcessPoolExecutor(options.jobs) as pool:
        for done in pool.map(partial(batch, frames=options.frames), seeds):
            total.add(done)
            print(f"{total.counts['specs']} specs, {len(total.mismatches)} mismatches", flush=True)
    report(total, time.monotonic() - began)
    return 1 if total.mismatches else 0


def report(total: Tally, seconds: float) -> None:
    """Print what was compared and every mismatch."""
    for text in total.mismatches[:20]:
        print(f"\nMISMATCH {text}")
    print()
    for name, count in total.counts.items():
        print(f"{name:24}{count:>12}")
    for ratio, part, whole in (
        ("single-tap changes noticed", "tap changes noticed", "tap changes"),
        ("outputs strictly inside", "outputs inside", "outputs"),
    ):
        print(f"{ratio:28}{100 * total.counts[part] / max(1, total.counts[whole]):7.1f} %")
    print("refused: " + ", ".join(f"{k} {n}" for k, n in total.refusals.most_common()))
    print(f"mismatches {len(total.mismatches)}, {seconds:.0f} s")


if __name__ == "__main__":
    sys.exit(main())
