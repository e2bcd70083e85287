"""Rung: any split into bands gives the frame's bytes, whatever the strides."""

from collections.abc import Iterator
from itertools import pairwise

import numpy as np

from guardbit.model.certificate import Figure, RungResult
from guardbit.model.routine import Call, Status
from guardbit.model.vectors import Vector
from guardbit.verify.bench import Bench, Trials
from guardbit.verify.cases import Case
from guardbit.verify.compare import findings
from guardbit.verify.wording import left_out

NAME = "bands"
_MOST_FRAMES = 8
_MOST_SINGLE = 256
_LARGE = 1 << 16
_SEED = 27_182

Bands = tuple[tuple[int, int], ...]


def cases(bench: Bench) -> list[Case]:
    """Return splits of some frames of different sizes; none if there is no entry for bands."""
    if bench.routine.band is None:
        return []
    rng = np.random.default_rng(_SEED)
    return [case for vector in _chosen(bench) for case in _splits(vector, rng)]


def _chosen(bench: Bench) -> list[Vector]:
    """Return frames of different heights that give some output, the random ones first."""
    sized: dict[int, Vector] = {}
    for vector in sorted(bench.frames, key=lambda v: not v.name.startswith("narrow")):
        rows = vector.response.output.shape[0]
        if vector.response.output.size:
            sized.setdefault(rows, vector)
    small = [vector for vector in sized.values() if vector.frame.size <= _LARGE]
    return small[:_MOST_FRAMES] or list(sized.values())[:1]


def _splits(vector: Vector, rng: np.random.Generator) -> Iterator[Case]:
    rows = vector.response.output.shape[0]
    ways = _ways(rows, rng)
    if vector.frame.size > _LARGE:
        ways = {name: ways[name] for name in ("thin", "random", "empty")}
    for name, bands in ways.items():
        for src_gap, dst_gap in ((0, 0), (1, 7)):
            call = Call(vector.frame, vector.response.output.shape[:2], bands, src_gap, dst_gap)
            label = f"{vector.name}-{name}-gaps-{src_gap}-{dst_gap}"
            yield Case(label, call, Status.OK, vector.response.output)


def _ways(rows: int, rng: np.random.Generator) -> dict[str, Bands]:
    """Return splits of 0..rows by name: whole, single rows, at random, backwards, in part."""
    cuts = sorted(rng.integers(0, rows, 3, endpoint=True).tolist())
    ends = [0, *cuts, rows]
    random = tuple(pairwise(ends))
    thick = max(1, rows // _MOST_SINGLE)
    single = tuple((row, min(row + thick, rows)) for row in range(0, rows, thick))
    middle = rows // 2
    return {
        "whole": ((0, rows),),
        "thin": single,
        "random": random,
        "backwards": tuple(reversed(single)),
        "part": ((middle, rows),),
        "empty": ((middle, middle), (0, 0), (rows, rows)),
        "twice": ((0, middle + 1), (0, middle + 1)),
    }


def result(bench: Bench, trials: Trials) -> RungResult:
    """Return whether bands give what frames give."""
    if not trials.cases:
        why = "the routine has no entry for bands"
        if bench.routine.band is not None:
            why = "no frame that was run has an output"
        return RungResult(NAME, False, 0, (), (why,), (), ())
    found, failed, left = findings(bench, trials)
    heights = {case.call.shape[0] for case in trials.cases}
    return RungResult(
        NAME,
        ran=True,
        cases=trials.made,
        covered=(
            f"splits of {len(heights)} output heights into whole, thin, random, repeated, "
            "empty and backward bands, with gaps between rows and without",
        ),
        not_covered=left_out(left),
        figures=(Figure("band splits that failed", failed),),
        findings=found,
    )
