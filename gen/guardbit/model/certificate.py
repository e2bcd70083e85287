"""The machine-readable record of what was proved and measured for one spec."""

from dataclasses import dataclass

from guardbit.model.finding import Finding
from guardbit.model.sizing import Sizing


@dataclass(frozen=True)
class Digest:
    """SHA-256 of a file's bytes, in hexadecimal."""

    name: str
    sha256: str


@dataclass(frozen=True)
class Figure:
    """One measured number, as reported: a decimal string, or an integer, with its unit."""

    name: str
    value: str | int
    unit: str = ""


@dataclass(frozen=True)
class RungResult:
    """One rung of the ladder: what it ran, what that covered, and what it did not.

    A rung that could not run has `ran` False, with the reason in `not_covered`. It holds
    when it ran, ran at least one case, and has no findings. `undecided` counts cases that were
    neither shown nor refuted: it then does not hold, and nothing is known to be wrong either.
    """

    name: str
    ran: bool
    cases: int
    covered: tuple[str, ...]
    not_covered: tuple[str, ...]
    figures: tuple[Figure, ...]
    findings: tuple[Finding, ...]
    undecided: int = 0

    @property
    def holds(self) -> bool:
        """Return whether the rung ran, on something, and found nothing."""
        return self.ran and self.cases > 0 and not self.findings and not self.undecided


@dataclass(frozen=True)
class Certificate:
    """`schema` numbers the layout of the JSON text. No date, path or host is recorded."""

    schema: int
    tool: str
    cautions: tuple[str, ...]
    spec: Digest
    emitted: tuple[Digest, ...]
    plan: str
    sizing: Sizing
    rungs: tuple[RungResult, ...]
