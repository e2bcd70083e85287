"""Mutants of the C of every example: what the rungs notice, and whether the proof is sound.

    python tests/campaign/defects.py [--mutants 2000] [--jobs 2] [--only soften5] [--without-proof]

Every mutant is compiled with sanitizers and run beside the sound code on many calls, with two
compilers where it hides. A mutant that was proved and yet differs, or one that was refuted on
this machine's data model with a frame that compiled code does not show, gives exit status 1.
"""

from __future__ import annotations

import argparse
import sys
import tempfile
from collections import Counter
from collections.abc import Iterator, Sequence
from concurrent.futures import ProcessPoolExecutor
from pathlib import Path
from time import monotonic

from guardbit.build.compiler import find_compiler
from guardbit.cli.api import read
from guardbit.emit.emission import emit
from guardbit.fit.resolve import resolve
from guardbit.plan.direct import direct
from guardbit.sizing.analyse import analyse
from guardbit.verify.bench import Bench, Options, prepare
from guardbit.verify.defects.court import Court, Judgement, convene, judge
from guardbit.verify.defects.mutant import Mutant
from guardbit.verify.defects.rung import described
from guardbit.verify.defects.score import (
    table,
    table_text,
    unclaimed,
    unconfirmed,
    unsound,
    untested,
)
from guardbit.verify.defects.seeding import mutants, sample
from guardbit.verify.defects.workshop import second_compiler

EXAMPLES = Path(__file__).parents[2] / "examples"
PATCH = 8
_courts: dict[str, Court] = {}


def bench_of(path: Path) -> Bench:
    """Return the bench of a spec's emitted C, with the frames of the rungs."""
    sizing = analyse(resolve(read(path)))
    emission = emit(sizing, direct(sizing), ())
    return prepare(sizing, emission.routine, emission.probes, Options())


def court_of(path: Path, around: Path, proving: bool) -> Court:
    """Return this process's court for a spec, in a new folder; only the last one is kept."""
    if path.stem not in _courts:
        _courts.clear()
        folder = Path(tempfile.mkdtemp(dir=around))
        compiler = find_compiler()
        other = second_compiler(compiler)
        _courts[path.stem] = convene(bench_of(path), compiler, other, folder, proving)
    return _courts[path.stem]


def judged(path: Path, around: Path, some: Sequence[Mutant], proving: bool) -> list[Judgement]:
    """Return the judgements of some mutants of a spec."""
    court = court_of(path, around, proving)
    return [judge(court, mutant) for mutant in some]


def patches(specs: Sequence[Path], most: int) -> Iterator[tuple[Path, tuple[Mutant, ...]]]:
    """Yield each spec with a few of its mutants at a time; all specs have as many if they can."""
    share = -(-most // len(specs))
    for path in specs:
        chosen = sample(mutants(bench_of(path).routine), share)
        for first in range(0, len(chosen), PATCH):
            yield path, chosen[first : first + PATCH]


def report(every: Sequence[Judgement], show: int) -> None:
    """Print the table, and what should not be."""
    print(table_text(table(every)))
    for title, some in (
        ("PROVED, but differs", unsound(every)),
        ("proved, but a wrong call shows it", unclaimed(every)),
        ("refuted, but not reproduced", unconfirmed(every)),
        ("noticed by no test", untested(every)),
        ("the prover failed", [j for j in every if j.error]),
    ):
        print(f"{title}: {len(some)}")
        for j in some[:show]:
            said = f"{j.verdict or ''} {j.clause}{j.error}".strip()
            print(f"    {described(j)}\n        {said or 'not proved'}; {j.seen}")
    spent: Counter[str] = Counter()
    for j in every:
        spent.update(dict(j.seconds))
    print("seconds per mutant: " + ", ".join(f"{k} {v / len(every):.2f}" for k, v in spent.items()))


def main() -> int:
    """Run the campaign and return the exit status."""
    parser = argparse.ArgumentParser(description="seeded defects in the C of the examples")
    parser.add_argument("--mutants", type=int, default=2000)
    parser.add_argument("--jobs", type=int, default=2)
    parser.add_argument("--only", nargs="*", default=None, help="names of examples")
    parser.add_argument("--without-proof", action="store_true")
    parser.add_argument("--show", type=int, default=20, help="mutants listed of each kind")
    options = parser.parse_args()
    specs = [p for p in sorted(EXAMPLES.glob("*.toml")) if p.stem in (options.only or [p.stem])]
    began, every = monotonic(), []
    with (
        tempfile.TemporaryDirectory(prefix="guardbit-") as around,
        ProcessPoolExecutor(options.jobs) as pool,
    ):
        work = [
            pool.submit(judged, path, Path(around), some, not options.without_proof)
            for path, some in patches(specs, options.mutants)
        ]
        for done in work:
            every += done.result()
            if len(every) % (25 * PATCH) < PATCH:
                print(f"{len(every)} mutants, {monotonic() - began:.0f} s", flush=True)
    report(every, options.show)
    print(f"{len(every)} mutants, {monotonic() - began:.0f} s")
    return 1 if unsound(every) or unconfirmed(every) else 0


if __name__ == "__main__":
    sys.exit(main())
