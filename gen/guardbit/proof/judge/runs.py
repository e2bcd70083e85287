"""One case run on the machine: every call that it makes, and what differs from the contract."""

from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass

from guardbit.model.enums import Overflow
from guardbit.model.filter import Filter
from guardbit.model.proof import Case, Codes, Place, Position
from guardbit.model.routine import Entry, Role, Routine, Status
from guardbit.proof.algebra.values import InexpressibleError, Value
from guardbit.proof.contract.expected import Expected
from guardbit.proof.judge.subject import (
    Memory,
    Subject,
    arguments,
    destination_block,
    source_block,
)
from guardbit.proof.machine.context import Where
from guardbit.proof.machine.memory import Content, Guard, Pointer

Pixels = Callable[[int, int, int], Value]

STATUSES = tuple(Status)


@dataclass(frozen=True)
class Difference:
    """A call does other than the contract says.

    `reason` names how; `position` is the output element, if one differs, with what is wanted and
    what was stored there.
    """

    reason: str
    place: Place | None
    position: Position | None = None
    wanted: Value | None = None
    got: Value | None = None


@dataclass
class Tally:
    """How many output elements were compared."""

    outputs: int = 0


@dataclass(frozen=True)
class Run:
    """A routine, the contract it is held to, and the case; `pixels` gives the source's codes."""

    filter: Filter
    routine: Routine
    subject: Subject
    case: Case
    pixels: Pixels
    compares: bool = True

    def expected(self, *, stepped: bool = False) -> Expected:
        """Return the contract's outputs for these pixels."""
        space, case = self.subject.program.cx.space, self.case
        return Expected(self.filter, space, case.height, case.width, self.pixels, stepped)

    def first_difference(self, tally: Tally) -> Difference | None:
        """Make every call and return the first difference; None if there is none.

        Raises BrokenError, RefusedError, BudgetError.
        """
        self.subject.program.begin()
        expected = self.expected()
        shape = expected.shape
        sized = self._sized(shape)
        if sized is not None:
            return sized
        for entry, rows in self._calls(shape):
            memory = self.memory(shape)
            legal = self._is_legal(expected, rows)
            found = self._call(entry, rows, memory, legal)
            if found is None and self.compares and legal:
                found = self._compared(expected, rows, memory, tally)
            if found is not None:
                return found
        return None

    def _calls(self, shape: tuple[int, int]) -> Iterator[tuple[Entry, tuple[int, int]]]:
        if not self.case.bands:
            yield self.routine.frame, (0, shape[0])
        for rows in self.case.bands:
            assert self.routine.band is not None
            yield self.routine.band, rows

    def memory(self, shape: tuple[int, int]) -> Memory:
        """Return a fresh source and destination."""
        src, src_stride = source_block(self.filter, self.routine, self.case, self.pixels)
        dst, dst_stride = destination_block(self.filter, self.routine, self.case, shape)
        across = shape[1] * self.filter.geometry.channels
        return Memory(src, src_stride, dst, dst_stride, across)

    def _is_legal(self, expected: Expected, rows: tuple[int, int]) -> bool:
        """Return whether no source row that is read holds the illegal pixel."""
        if self.case.codes is not Codes.ILLEGAL or self.case.illegal is None:
            return True
        return self.case.illegal[0] not in expected.rows_read(*rows)

    def _call(
        self,
        entry: Entry,
        rows: tuple[int, int],
        memory: Memory,
        legal: bool,
    ) -> Difference | None:
        given = arguments(self.routine, self.case, memory, rows).listed(entry)
        program = self.subject.program
        status = program.call(entry.function, given)
        if not entry.status:
            return None
        wanted = STATUSES.index(Status.OK if legal else Status.BAD_CODE)
        if status != wanted:
            got = status if isinstance(status, int) else None
            return Difference("status", self._where(entry), None, wanted, got)
        if not legal and memory.dst.places:
            return Difference("written-though-refused", _place(memory.dst.places))
        return None

    def _where(self, entry: Entry) -> Place | None:
        found = self.subject.program.functions[entry.function].where
        return None if found is None else found()

    def _compared(
        self, expected: Expected, rows: tuple[int, int], memory: Memory, tally: Tally
    ) -> Difference | None:
        first, stop = rows
        channels = self.filter.geometry.channels
        space = self.subject.program.cx.space
        cells, places = memory.dst.cells, memory.dst.places
        written = 0
        for row in range(first, stop):
            for column in range(expected.shape[1]):
                for channel in range(channels):
                    index = row * memory.dst_stride + column * channels + channel
                    content = cells.get(index)
                    position = (row, column, channel)
                    if content is None:
                        return Difference("not-written", None, position)
                    if isinstance(content, Guard | Pointer):
                        return Difference("not-always-written", places[index](), position)
                    wanted = expected.at(row, column, channel)
                    tally.outputs += 1
                    written += 1
                    if (
                        content is not wanted
                        and not space.same(content, wanted)
                        and not self._is_same_stepped(position, content)
                    ):
                        return Difference("output", places[index](), position, wanted, content)
        if len(places) != written:
            return self._gap(memory, rows)
        return None

    def _is_same_stepped(self, position: Position, content: Value) -> bool:
        """Return whether it is what the contract says if wrapping is written the other way."""
        if all(each.accumulator.overflow is not Overflow.WRAP for each in self.filter.passes):
            return False
        space = self.subject.program.cx.space
        try:
            return space.same(content, self.expected(stepped=True).at(*position))
        except InexpressibleError:
            return False

    def _gap(self, memory: Memory, rows: tuple[int, int]) -> Difference:
        """Return that a cell between rows was written."""
        inside = {
            row * memory.dst_stride + column
            for row in range(*rows)
            for column in range(memory.across)
        }
        index = min(set(memory.dst.places) - inside)
        return Difference("written-between-rows", memory.dst.places[index]())

    def _sized(self, shape: tuple[int, int]) -> Difference | None:
        """Return that the routine tells another output size than the contract, if it does."""
        name = self.routine.output_size
        if name is None:
            return None
        from guardbit.proof.machine.memory import Block

        kind = self.subject.program.types.size
        blocks = [Block(word, (kind.bits, False), 1) for word in ("out_width", "out_height")]
        pointers: list[Content] = [Pointer(block, 0, (0, 1)) for block in blocks]
        self.subject.program.call(name, [self.case.width, self.case.height, *pointers])
        told = (blocks[1].cells.get(0), blocks[0].cells.get(0))
        if told != shape:
            return Difference("output-size", None)
        return None


def _place(places: dict[int, Where]) -> Place:
    return places[min(places)]()


def faulty_call(run: Run, entry: Entry, changed: Mapping[Role, Content]) -> tuple[Content, Memory]:
    """Call an entry with some arguments replaced; return its status and the memory."""
    run.subject.program.begin()
    shape = run.expected().shape
    memory = run.memory(shape)
    given = arguments(run.routine, run.case, memory, (0, shape[0]))
    given.by_role.update(changed)
    status = run.subject.program.call(entry.function, given.listed(entry))
    return status, memory
