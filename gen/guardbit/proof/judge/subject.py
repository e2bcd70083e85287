"""The routine that is judged: its program, its arguments in memory, one call after another."""

from collections.abc import Callable
from dataclasses import dataclass, field
from functools import lru_cache

from guardbit.model.enums import Container
from guardbit.model.filter import Filter
from guardbit.model.proof import Case, DataModel, Place
from guardbit.model.routine import Entry, Role, Routine
from guardbit.proof.algebra.values import Form, Value
from guardbit.proof.c.program import Program
from guardbit.proof.c.types import Integer, Pointing, Type
from guardbit.proof.machine.errors import RefusedError
from guardbit.proof.machine.memory import Block, Content, Pointer

Cell = tuple[int, int, int]
"""Row, column and channel of a source pixel."""


@dataclass
class Subject:
    """A program with the pixels that its runs share: those of one place and range are the same."""

    program: Program
    pool: dict[tuple[Cell, int, int], Value] = field(default_factory=dict)
    places: dict[int, Cell] = field(default_factory=dict)

    def pixel(self, at: Cell, low: int, high: int) -> Value:
        """Return the open pixel at a place, of that range."""
        key = (at, low, high)
        found = self.pool.get(key)
        if found is None:
            found = self.pool[key] = self.program.cx.space.pixel(low, high)
            if isinstance(found, Form):
                (number,) = found.terms
                self.places[number] = at
        return found


@lru_cache(maxsize=16)
def subject(routine: Routine, model: DataModel, strict: bool) -> Subject:
    """Return a routine compiled for a data model, once per process. Raises RefusedError."""
    made = Program(routine.sources, model, strict=strict)
    for entry in (routine.frame, *(() if routine.band is None else (routine.band,))):
        _check_signature(routine, made, entry)
    return Subject(made)


def _check_signature(routine: Routine, program: Program, entry: Entry) -> None:
    """Refuse a function whose parameters are not what its roles say."""
    found = program.signature(entry.function)
    where = Place(routine.sources[0].name, 0, entry.function)
    if found is None:
        raise RefusedError("unknown-function", where, entry.function)
    if len(found.parameters) != len(entry.roles):
        raise RefusedError("argument-count", where, entry.function)
    for role, kind in zip(entry.roles, found.parameters, strict=True):
        if not _suits(routine, role, kind):
            raise RefusedError("argument-type", where, f"{entry.function}: {role.value}")
    if entry.status and not isinstance(found.returns, Integer):
        raise RefusedError("argument-type", where, entry.function)


def _suits(routine: Routine, role: Role, kind: Type) -> bool:
    cells = {
        Role.SRC: (routine.source.bits, routine.source.signed),
        Role.DST: (routine.destination.bits, routine.destination.signed),
        Role.SCRATCH: routine.word,
        Role.TAPS: None if routine.taps is None else routine.taps.word,
    }
    if role not in cells:
        return isinstance(kind, Integer)
    if not isinstance(kind, Pointing):
        return False
    to = kind.to
    while hasattr(to, "of"):
        to = to.of
    return isinstance(to, Integer) and (to.bits, to.signed) == cells[role]


@dataclass
class Memory:
    """The source and destination of a case. Rows are `*_stride` elements apart."""

    src: Block
    src_stride: int
    dst: Block
    dst_stride: int
    across: int


def source_block(
    f: Filter, routine: Routine, case: Case, pixels: Callable[[int, int, int], Value]
) -> tuple[Block, int]:
    """Return the source, its cells between rows without value, and its stride."""
    channels = f.geometry.channels
    across = case.width * channels
    stride = across + (case.src_gap if Role.SRC_STRIDE in routine.frame.roles else 0)

    def initial(index: int) -> Content:
        row, column = divmod(index, stride)
        return pixels(row, *divmod(column, channels)) if column < across else None

    count = (case.height - 1) * stride + across
    kind = (routine.source.bits, routine.source.signed)
    return Block("src", kind, count, initial=initial, writable=False), stride


def destination_block(
    f: Filter, routine: Routine, case: Case, shape: tuple[int, int]
) -> tuple[Block, int]:
    """Return the destination, its cells all without value, and its stride."""
    across = shape[1] * f.geometry.channels
    stride = across + (case.dst_gap if Role.DST_STRIDE in routine.frame.roles else 0)
    count = max((shape[0] - 1) * stride + across, 1)
    return Block("dst", (routine.destination.bits, routine.destination.signed), count), stride


@dataclass(frozen=True)
class Arguments:
    """What a call is given, by role."""

    by_role: dict[Role, Content]

    def listed(self, entry: Entry) -> list[Content]:
        """Return the arguments in the function's order."""
        return [self.by_role[role] for role in entry.roles]


def arguments(
    routine: Routine,
    case: Case,
    memory: Memory,
    rows: tuple[int, int],
) -> Arguments:
    """Return the arguments of a call for output rows `rows`, with scratch as long as promised."""
    first, stop = rows
    low = first * memory.dst_stride
    high = (stop - 1) * memory.dst_stride + memory.across if stop > first else low
    high = max(min(high, memory.dst.count), low)
    found: dict[Role, Content] = {
        Role.SRC: Pointer(memory.src, 0, (0, memory.src.count)),
        Role.SRC_STRIDE: memory.src_stride,
        Role.DST: Pointer(memory.dst, min(low, high), (min(low, high), high)),
        Role.DST_STRIDE: memory.dst_stride,
        Role.WIDTH: case.width,
        Role.HEIGHT: case.height,
        Role.FROM: first,
        Role.TO: stop,
    }
    if routine.word is not None:
        count = max(routine.scratch_per_column * case.width + routine.scratch_fixed, 1)
        found[Role.SCRATCH] = Pointer(Block("scratch", routine.word, count), 0, (0, count))
        found[Role.SCRATCH_LEN] = count
    if routine.taps is not None:
        taps = case.taps if case.taps is not None else routine.taps.nominal
        block = Block("taps", routine.taps.word, len(taps), writable=False)
        block.fill(taps)
        found[Role.TAPS] = Pointer(block, 0, (0, len(taps)))
    return Arguments(found)


def container_ends(container: Container) -> tuple[int, int]:
    """Return the least and greatest number that a container holds."""
    least = -(1 << container.bits - 1) if container.signed else 0
    return least, least + (1 << container.bits) - 1
