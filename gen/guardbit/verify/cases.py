"""A case of a rung: a call, and what the contract says that it gives."""

from collections.abc import Iterable
from dataclasses import dataclass

from guardbit.model.routine import Call, Codes, Routine, Status
from guardbit.model.vectors import Vector

NUMBERS = {status: number for number, status in enumerate(Status)}


@dataclass(frozen=True, eq=False)
class Case:
    """`output` is what is expected; None: nothing may be written.

    Where `specified` is False the contract leaves status and output open, and only harm
    counts. `size` is what `output_size` has to say; None: not looked at.
    """

    name: str
    call: Call
    status: Status
    output: Codes | None
    specified: bool = True
    size: tuple[int, int] | None = None


def from_vector(
    vector: Vector, src_gap: int = 0, dst_gap: int = 0, taps: tuple[int, ...] | None = None
) -> Case:
    """Return the case that a whole frame is, with gaps between rows and other taps if wanted."""
    output = vector.response.output
    shape = (output.shape[0], output.shape[1])
    call = Call(vector.frame, shape, src_gap=src_gap, dst_gap=dst_gap, taps=taps)
    return Case(vector.name, call, Status.OK, output, size=shape)


def from_vectors(vectors: Iterable[Vector], taps: tuple[int, ...] | None = None) -> list[Case]:
    """Return a case per vector; every third one has gaps between the rows of both images."""
    return [
        from_vector(vector, *((3, 5) if number % 3 == 1 else (0, 0)), taps)
        for number, vector in enumerate(vectors)
    ]


def work(case: Case, taps: int) -> int:
    """Return roughly how many products a case costs; a call that is refused costs none."""
    if case.status is not Status.OK:
        return 1
    rows, columns = case.call.shape
    channels = int(case.call.frame.shape[2])
    return max(1, rows * columns * channels * taps)


def has_status(routine: Routine) -> bool:
    """Return whether the routine's frame entry tells a status."""
    return routine.frame.status
