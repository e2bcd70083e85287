"""What one command found out about one spec, and the exit status that it calls for."""

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field

from guardbit.model.certificate import Certificate, Digest, RungResult
from guardbit.model.finding import Finding
from guardbit.model.frequency import ResponseFit
from guardbit.model.goal import GoalSearch
from guardbit.model.sheet import Sheet
from guardbit.model.sizing import Sizing, TapOrder

HOLDS = 0
FAILED = 1
WRONG = 2
MISSING = 3
FAULT = 70
INTERRUPTED = 130
ENDED = 143
PIPE_CLOSED = 141

# The first of these that any spec has is the exit status of a call with many.
_ORDER = (FAULT, WRONG, MISSING, FAILED, HOLDS)


@dataclass(frozen=True)
class Answer:
    """`files` are to be written, by name. `fault` is a traceback: an error in guardbit.

    `search` and `fit`: what was searched, where the spec left something open; `pinned`: it was
    written into the spec. `sheet`: what the sizing sheet shows. `orders`: what the order of
    the taps costs each register.
    """

    spec: str
    status: int = HOLDS
    findings: tuple[Finding, ...] = ()
    sizing: Sizing | None = None
    certificate: Certificate | None = None
    files: Mapping[str, bytes] = field(default_factory=dict)
    folder: str = ""
    written: tuple[Digest, ...] = ()
    fault: str = ""
    search: GoalSearch | None = None
    fit: ResponseFit | None = None
    pinned: bool = False
    sheet: Sheet | None = None
    orders: tuple[TapOrder, ...] = ()


def overall(statuses: Iterable[int]) -> int:
    """Return the exit status for many specs: a fault, else 2, else 3, else 1, else 0."""
    present = set(statuses)
    return next((status for status in _ORDER if status in present), HOLDS)


def _is_open(rung: RungResult) -> bool:
    """Return whether a rung could not tell, which is no fault of the C."""
    return rung.undecided > 0 and not rung.findings


def rung_status(rungs: Iterable[RungResult]) -> int:
    """Return 1 if a rung failed, else 3 if one could not run, else 0."""
    rungs = tuple(rungs)
    if not rungs or any(rung.ran and not rung.holds and not _is_open(rung) for rung in rungs):
        return FAILED
    return HOLDS if all(rung.ran for rung in rungs) else MISSING
