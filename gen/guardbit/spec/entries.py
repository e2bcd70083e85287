"""What the key table is made of."""

from dataclasses import dataclass
from enum import Enum

from guardbit.spec.forms import Form


@dataclass(frozen=True)
class Key:
    """One key: its dotted name, form, default and explanation (one sentence or two)."""

    name: str
    form: Form
    explanation: str
    default: object = None
    shown: str = ""
    required: bool = False
    details: tuple[str, ...] = ()

    @property
    def table(self) -> str:
        """The table that holds the key."""
        return self.name.rpartition(".")[0]

    @property
    def default_text(self) -> str:
        """The default as a person reads it."""
        if self.required:
            return "required"
        return self.shown or _written(self.default)


@dataclass(frozen=True)
class Table:
    """One table of the file. A `reserved` one belongs to a later version."""

    name: str
    explanation: str
    required: bool = False
    reserved: bool = False


def _written(value: object) -> str:
    match value:
        case None:
            return "none"
        case bool():
            return "true" if value else "false"
        case Enum() | str():
            return f'"{value}"'
        case tuple() if len(value) == 1:
            return _written(value[0])
        case tuple():
            return f"[{', '.join(_written(item) for item in value)}]"
    return str(value)
