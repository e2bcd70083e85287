"""Calls with one wrong argument: each must be refused by its status, with nothing written."""

from collections.abc import Iterator, Mapping

from guardbit.model.filter import TapSet, raster, registers_of
from guardbit.model.routine import Entry, Role, Status, Taps
from guardbit.proof.judge.runs import STATUSES, Difference, Run, faulty_call
from guardbit.proof.machine.memory import NULL, Block, Content, Pointer

_POINTERS = (Role.SRC, Role.DST, Role.SCRATCH, Role.TAPS)


def wrong_calls(run: Run) -> Difference | None:
    """Return the first call that does not get the status it should, or writes though refused."""
    for entry, changed, status in _calls(run):
        got, memory = faulty_call(run, entry, changed)
        wanted = STATUSES.index(status)
        if got != wanted:
            where = run.subject.program.functions[entry.function].where
            place = None if where is None else where()
            return Difference("status", place, None, wanted, got if isinstance(got, int) else None)
        if wanted and memory.dst.places:
            first = memory.dst.places[min(memory.dst.places)]
            return Difference("written-though-refused", first())
    return None


def _calls(run: Run) -> Iterator[tuple[Entry, Mapping[Role, Content], Status]]:
    frame, band = run.routine.frame, run.routine.band
    for role, value, status in _faults(run):
        if role in frame.roles:
            yield frame, {role: value}, status
        if band is not None and role in band.roles and role is not Role.HEIGHT:
            yield band, {role: value}, status
    rows, columns = run.expected().shape
    if band is not None:
        most = run.subject.program.types.size.high
        for first, stop in ((1, 0), (0, rows + 1), (rows + 1, rows + 1), (most, 1), (0, most)):
            yield band, {Role.FROM: first, Role.TO: stop}, Status.BAD_SIZE
    if run.routine.taps is not None and rows and columns:
        s = registers_of(run.filter)
        assert s is not None
        for cells in _loadings(s, run.routine.taps):
            status = Status.OK if _may_be_loaded(s, cells) else Status.BAD_TAPS
            yield frame, {Role.TAPS: _pointer(run.routine.taps, cells)}, status


def _faults(run: Run) -> Iterator[tuple[Role, Content, Status]]:
    routine, case, f = run.routine, run.case, run.filter
    channels = f.geometry.channels
    for role in _POINTERS:
        yield role, NULL, Status.BAD_POINTER
    most = run.subject.program.types.size.high
    for role, (least, greatest) in ((Role.WIDTH, routine.widths), (Role.HEIGHT, routine.heights)):
        for value in (0, least - 1, greatest + 1, most):
            if 0 <= value <= most and not least <= value <= greatest:
                yield role, value, Status.BAD_SIZE
    rows, columns = run.expected().shape
    if case.height > 1:
        yield Role.SRC_STRIDE, case.width * channels - 1, Status.BAD_STRIDE
    if rows > 1:
        yield Role.DST_STRIDE, columns * channels - 1, Status.BAD_STRIDE
    if rows and columns:
        needed = max(routine.scratch_per_column * case.width + routine.scratch_fixed, 1)
        yield Role.SCRATCH_LEN, needed - 1, Status.BAD_SCRATCH


def _pointer(taps: Taps, cells: tuple[int, ...]) -> Pointer:
    block = Block("taps", taps.word, len(cells), writable=False)
    block.fill(cells)
    return Pointer(block, 0, (0, len(cells)))


def _loadings(s: TapSet, taps: Taps) -> Iterator[tuple[int, ...]]:
    """Yield loadings about the edges of what is legal, those that the taps' type can hold."""
    bits, signed = taps.word
    least = -(1 << bits - 1) if signed else 0
    greatest = least + (1 << bits) - 1
    for cells in dict.fromkeys(_candidates(s, taps.nominal)):
        if least <= min(cells) and max(cells) <= greatest:
            yield cells


def _candidates(s: TapSet, nominal: tuple[int, ...]) -> Iterator[tuple[int, ...]]:
    yield nominal
    yield (0,) * s.count
    yield raster(s, s.least)
    yield raster(s, s.greatest)
    yield from (raster(s, kernel) for kernel in s.kernels)
    for cell in range(s.count):
        for by in (-1, 1):
            yield _with(nominal, cell, nominal[cell] + by)
    for k, cell in enumerate(s.cells):
        for value in (s.least[k] - 1, s.least[k], s.greatest[k], s.greatest[k] + 1):
            yield _with(nominal, cell, value)
    yield _spread(s, nominal)


def _spread(s: TapSet, nominal: tuple[int, ...]) -> tuple[int, ...]:
    """Return taps of the nominal sum whose magnitudes are large: one rises, the others fall."""
    taps = [nominal[cell] for cell in s.cells]
    top = max(range(len(taps)), key=lambda k: s.greatest[k] - taps[k])
    for k in range(len(taps)):
        if k != top:
            by = min(s.greatest[top] - taps[top], taps[k] - s.least[k])
            taps[top], taps[k] = taps[top] + by, taps[k] - by
    return raster(s, taps)


def _with(cells: tuple[int, ...], at: int, value: int) -> tuple[int, ...]:
    return (*cells[:at], value, *cells[at + 1 :])


def _may_be_loaded(s: TapSet, cells: tuple[int, ...]) -> bool:
    """Return whether the contract allows these cells."""
    taps = tuple(cells[cell] for cell in s.cells)
    if any(tap for cell, tap in enumerate(cells) if cell not in s.cells):
        return False
    if s.kernels:
        return taps in s.kernels
    limits = zip(s.least, taps, s.greatest, strict=True)
    return (
        all(low <= tap <= high for low, tap, high in limits)
        and (s.sum is None or sum(taps) == s.sum)
        and (s.magnitudes is None or sum(abs(tap) for tap in taps) <= s.magnitudes)
    )
