"""Findings: what is wrong, where, with which values. The sentences live in `report`."""

from dataclasses import dataclass
from typing import TypeAlias

Value: TypeAlias = str | int | None


@dataclass(frozen=True)
class Place:
    """A file, a line in it from 1, and a dotted key of a spec; each may be unknown."""

    file: str | None = None
    line: int | None = None
    key: str | None = None


@dataclass(frozen=True)
class Finding:
    """`kind` names the sentence in `report.wording`; `values` fill it, by name."""

    kind: str
    place: Place
    values: tuple[tuple[str, Value], ...] = ()

    def value(self, name: str) -> Value:
        """Return the value of that name. Raises KeyError."""
        return dict(self.values)[name]


def finding(kind: str, place: Place | None = None, /, **values: Value) -> Finding:
    """Return a Finding with its values in the order given."""
    return Finding(kind, place or Place(), tuple(values.items()))


class GuardbitError(Exception):
    """Work cannot go on. Carries findings and the exit status they call for."""

    status = 2

    def __init__(self, *findings: Finding) -> None:
        super().__init__(*findings)
        self.findings = findings

    def __str__(self) -> str:
        return "; ".join(f"{f.kind} {dict(f.values)}" for f in self.findings)


class SpecError(GuardbitError):
    """The spec or the call is wrong."""

    status = 2


class MachineError(GuardbitError):
    """Something on this machine is missing: a compiler, space, a permission."""

    status = 3
