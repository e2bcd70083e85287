"""Rung: wrong arguments get the status code that names them, and nothing is written."""

from collections.abc import Iterator

import numpy as np

from guardbit.arith.borders import positions
from guardbit.arith.words import container_range
from guardbit.model.certificate import Figure, RungResult
from guardbit.model.enums import Outside
from guardbit.model.routine import Call, Role, Status
from guardbit.model.vectors import Codes, Vector
from guardbit.reference.run import rejects, respond
from guardbit.verify.bench import Bench, Trials
from guardbit.verify.cases import Case
from guardbit.verify.compare import findings
from guardbit.verify.loadings import illegal_loadings
from guardbit.verify.wording import left_out

NAME = "calls"
_WORD = (1 << 64) - 1
_LARGE = 1 << 16


def cases(bench: Bench) -> list[Case]:
    """Return calls with one wrong argument each, and with codes outside the range."""
    vector = _vector(bench)
    if vector is None:
        return []
    wrong: list[Case] = []
    if bench.routine.frame.status:
        wrong = [*_wrong_arguments(bench, vector), *_wrong_taps(bench, vector)]
        wrong += _largest(bench, vector)
    return wrong + list(_codes(bench, vector))


def _vector(bench: Bench) -> Vector | None:
    """Return the smallest frame of two rows at least, in and out."""
    fit = [
        v
        for v in bench.frames
        if min(v.response.output.shape[:2]) >= 2 and min(v.frame.shape[:2]) >= 2
    ]
    some = fit or [v for v in bench.frames if v.response.output.size]
    return min(some, key=lambda v: v.frame.size, default=None)


def _wrong_arguments(bench: Bench, vector: Vector) -> Iterator[Case]:
    shape = vector.response.output.shape[:2]
    for name, role, value, status in _faults(bench, vector):
        # the stride of a single row is not used: the contract leaves open what comes of it
        single = {Role.SRC_STRIDE: vector.frame.shape[0], Role.DST_STRIDE: shape[0]}.get(role) == 1
        call = Call(vector.frame, shape, faults=((role, value),))
        yield Case(f"frame-{name}", call, status, None, specified=not single)
        if bench.routine.band is not None:
            call = Call(vector.frame, shape, ((0, shape[0]),), faults=((role, value),))
            yield Case(f"band-{name}", call, status, None, specified=not single)
    if bench.routine.band is not None:
        for first, last in ((1, 0), (0, shape[0] + 1), (shape[0] + 1, shape[0] + 1), (_WORD, 1)):
            faults = ((Role.FROM, first), (Role.TO, last))
            call = Call(vector.frame, shape, ((0, 0),), faults=faults)
            yield Case(f"band-rows-{first}-{last}", call, Status.BAD_SIZE, None)


def _largest(bench: Bench, vector: Vector) -> Iterator[Case]:
    """Yield calls for no row of the largest legal images: accepted, without their pixels."""
    f, routine = bench.filter, bench.routine
    if routine.band is None:
        return
    height, width, channels = vector.frame.shape
    for w, h in ((routine.widths[1], height), (width, routine.heights[1])):
        size = tuple(
            len(positions(axis, f.geometry.extent, n))
            for axis, n in ((f.geometry.rows, h), (f.geometry.columns, w))
        )
        arguments = {
            Role.WIDTH: w,
            Role.HEIGHT: h,
            Role.SRC_STRIDE: w * channels,
            Role.DST_STRIDE: size[1] * channels,
            Role.SCRATCH_LEN: max(1, routine.scratch_per_column * w + routine.scratch_fixed),
        }
        given = tuple(pair for pair in arguments.items() if pair[0] in routine.band.roles)
        call = Call(vector.frame, vector.response.output.shape[:2], ((0, 0),), faults=given)
        yield Case(f"largest-{w}x{h}", call, Status.OK, None, size=(size[0], size[1]))


def _wrong_taps(bench: Bench, vector: Vector) -> Iterator[Case]:
    """Yield calls with taps that may not be loaded, for a filter that takes any."""
    if bench.routine.taps is None:
        return
    shape = vector.response.output.shape[:2]
    for number, illegal in enumerate(illegal_loadings(bench.filter, bench.routine.taps.word)):
        bands = ((0, shape[0]),) if bench.routine.band and number % 2 else ()
        call = Call(vector.frame, shape, bands, taps=illegal.cells)
        yield Case(f"taps-{illegal.name}", call, Status.BAD_TAPS, None)


def _faults(bench: Bench, vector: Vector) -> Iterator[tuple[str, Role, int | None, Status]]:
    """Yield (name, role, wrong value, the status that it deserves) for the roles there are."""
    routine = bench.routine
    _, width, channels = vector.frame.shape
    columns = vector.response.output.shape[1]
    length = max(1, routine.scratch_per_column * width + routine.scratch_fixed)
    wanted: list[tuple[str, Role, int | None, Status]] = [
        ("no-source", Role.SRC, None, Status.BAD_POINTER),
        ("no-destination", Role.DST, None, Status.BAD_POINTER),
        ("no-scratch", Role.SCRATCH, None, Status.BAD_POINTER),
        ("no-taps", Role.TAPS, None, Status.BAD_POINTER),
        ("short-scratch", Role.SCRATCH_LEN, length - 1, Status.BAD_SCRATCH),
        ("empty-scratch", Role.SCRATCH_LEN, 0, Status.BAD_SCRATCH),
    ]
    for role, sizes in ((Role.WIDTH, routine.widths), (Role.HEIGHT, routine.heights)):
        for size in sorted({0, sizes[0] - 1, sizes[1] + 1, _WORD}):
            wanted.append((f"{role}-{size}", role, size, Status.BAD_SIZE))
    for name, role, stride in (
        ("short-source-stride", Role.SRC_STRIDE, width * channels - 1),
        ("short-destination-stride", Role.DST_STRIDE, columns * channels - 1),
    ):
        wanted.append((name, role, stride, Status.BAD_STRIDE))
    yield from (fault for fault in wanted if fault[1] in routine.frame.roles)


def _codes(bench: Bench, vector: Vector) -> Iterator[Case]:
    """Yield frames with one code, or all, outside the range, where the container holds any."""
    f = bench.filter
    stored = container_range(f.input.container)
    bad = [
        code
        for code in (stored.low, f.input.low - 1, f.input.high + 1, stored.high)
        if stored.low <= code <= stored.high and not f.input.low <= code <= f.input.high
    ]
    frames = [_with_code(vector.frame, place, code) for code in bad for place in _places(vector)]
    frames += [np.full(vector.frame.shape, code, np.int64) for code in bad]
    for number, frame in enumerate(frames):
        shape = vector.response.output.shape[:2]
        name = f"illegal-code-{number}"
        if f.outside is Outside.UNDEFINED:
            yield Case(name, Call(frame, shape), Status.OK, None, specified=False)
        elif f.outside is Outside.REJECT and rejects(f, frame):
            yield Case(name, Call(frame, shape), Status.BAD_CODE, None)
        else:
            yield Case(name, Call(frame, shape), Status.OK, respond(f, frame).output)


def _places(vector: Vector) -> list[tuple[int, int, int]]:
    height, width, channels = vector.frame.shape
    if vector.frame.size > _LARGE:
        return [(height // 2, width - 1, channels - 1)]
    rows, columns = {0, height // 2, height - 1}, {0, width - 1}
    return [(r, c, channels - 1) for r in sorted(rows) for c in sorted(columns)]


def _with_code(frame: Codes, place: tuple[int, int, int], code: int) -> Codes:
    changed = frame.copy()
    changed[place] = code
    return changed


def _is_of_code(case: Case) -> bool:
    """Return whether it is a frame with codes outside the range, not a wrong argument."""
    return not case.call.faults and case.call.taps is None


def result(bench: Bench, trials: Trials) -> RungResult:
    """Return whether wrong calls are refused, and codes outside the range are treated."""
    if not trials.cases:
        why = "the routine tells no status, and its type holds no code outside the range"
        return RungResult(NAME, False, 0, (), (why,), (), ())
    found, failed, left = findings(bench, trials)
    refused = sum(case.status is not Status.OK for case in trials.cases)
    codes = sum(_is_of_code(case) for case in trials.cases)
    largest = sum(case.name.startswith("largest-") for case in trials.cases)
    notes = [] if codes else ["the input's type holds no code outside the range"]
    if any(not case.specified and _is_of_code(case) for case in trials.cases):
        notes.append("outputs for codes outside the range are unspecified: looked at for harm only")
    if not bench.routine.frame.status:
        notes.append("the routine tells no status")
    return RungResult(
        NAME,
        ran=True,
        cases=trials.made,
        covered=(
            *(
                [f"{refused} calls that must be refused, with the destination untouched"]
                * (refused > 0)
            ),
            *([f"{largest} calls for no row of the largest legal images"] * (largest > 0)),
            *(
                [f"{codes} frames with codes outside the range ({bench.filter.outside})"]
                * (codes > 0)
            ),
        ),
        not_covered=(*notes, *left_out(left)),
        figures=(Figure("wrong calls that failed", failed),),
        findings=found,
    )
