"""The C that calls a routine: prototypes, call expressions, the harness, probes."""

from collections.abc import Sequence
from functools import lru_cache

from jinja2 import Environment, PackageLoader, StrictUndefined

from guardbit.model.enums import Container
from guardbit.model.routine import Entry, Probe, Role, Routine, SourceFile

_TYPES = {
    Container.U8: "uint8_t",
    Container.I8: "int8_t",
    Container.U16: "uint16_t",
    Container.I16: "int16_t",
    Container.U32: "uint32_t",
    Container.I32: "int32_t",
}
_POINTERS = {Role.SRC: "src", Role.DST: "dst", Role.SCRATCH: "scratch", Role.TAPS: "taps"}


@lru_cache(maxsize=1)
def _templates() -> Environment:
    return Environment(
        loader=PackageLoader("guardbit.templates", ""),
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
        keep_trailing_newline=True,
    )


def argument_type(routine: Routine, role: Role) -> str:
    """Return the C type of an argument."""
    match role:
        case Role.SRC:
            return f"const {_TYPES[routine.source]} *"
        case Role.DST:
            return f"{_TYPES[routine.destination]} *"
        case Role.SCRATCH:
            return f"{_integer(routine.word or (8, False))} *"
        case Role.TAPS:
            word = routine.taps.word if routine.taps else (8, True)
            return f"const {_integer(word)} *"
        case _:
            return "size_t"


def _integer(word: tuple[int, bool]) -> str:
    """Return the C type of (bits, signed)."""
    bits, signed = word
    return f"{'' if signed else 'u'}int{bits}_t"


def prototype(routine: Routine, entry: Entry) -> str:
    """Return the declaration of an entry, with a semicolon."""
    types = ", ".join(argument_type(routine, role) for role in entry.roles)
    return f"{'int' if entry.status else 'void'} {entry.function}({types});"


def prototypes(routine: Routine) -> tuple[str, ...]:
    """Return the declarations of everything that a routine offers."""
    entries = [prototype(routine, entry) for _, entry in labelled(routine)]
    if routine.output_size:
        entries.append(f"void {routine.output_size}(size_t, size_t, size_t *, size_t *);")
    return tuple(entries)


def labelled(routine: Routine) -> tuple[tuple[str, Entry], ...]:
    """Return the entries that a job can call, in the order of their numbers."""
    frame = (("frame", routine.frame),)
    return frame if routine.band is None else (*frame, ("band", routine.band))


def kinds(entry: Entry) -> list[str]:
    """Return per argument the buffer that it points into, or "size"."""
    return [_POINTERS.get(role, "size") for role in entry.roles]


def harness(routine: Routine, probes: Sequence[Probe]) -> SourceFile:
    """Return the program that runs job files on one routine."""
    entries = [
        {"label": label, "status": entry.status, "expression": _expression(routine, entry)}
        for label, entry in labelled(routine)
    ]
    text = (
        _templates()
        .get_template("harness.c.j2")
        .render(
            name=routine.name,
            prototypes=prototypes(routine),
            entries=entries,
            output_size=routine.output_size,
            probes=[probe.function for probe in probes],
        )
    )
    return SourceFile("guardbit_harness.c", text)


def probing(source: str, probes: Sequence[Probe]) -> SourceFile:
    """Return a unit that includes `source` and calls its probes over arrays."""
    functions = [probe.function for probe in probes if probe.source == source]
    text = _templates().get_template("probe.c.j2").render(source=source, functions=functions)
    return SourceFile(f"guardbit_probe_{source}", text)


def _expression(routine: Routine, entry: Entry) -> str:
    arguments = [_argument(routine, role, i) for i, role in enumerate(entry.roles)]
    return f"{entry.function}({', '.join(arguments)})"


def _argument(routine: Routine, role: Role, index: int) -> str:
    if role not in _POINTERS:
        return f"(size_t)v[{index}]"
    kind = argument_type(routine, role)
    return f"v[{index}] < 0 ? NULL : ({kind})(void *)(b->{_POINTERS[role]} + v[{index}])"
