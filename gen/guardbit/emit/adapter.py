"""C of the user's own as a routine: its text, and behind it a function of known arguments."""

import re
from collections.abc import Sequence
from dataclasses import replace

from jinja2 import Environment, PackageLoader, StrictUndefined

from guardbit.model.enums import Container
from guardbit.model.filter import Filter
from guardbit.model.finding import Place, SpecError, finding
from guardbit.model.routine import Entry, Role, Routine, SourceFile

ROLES = (
    Role.SRC,
    Role.SRC_STRIDE,
    Role.DST,
    Role.DST_STRIDE,
    Role.WIDTH,
    Role.HEIGHT,
)
"""What an argument of the user's function may be, besides a whole number."""

_NAME = re.compile(r"[A-Za-z_][A-Za-z0-9_]*$")
_NUMBER = re.compile(r"-?[0-9]{1,10}$")


def foreign_routine(
    f: Filter, sources: Sequence[SourceFile], function: str, arguments: Sequence[str]
) -> Routine:
    """Return the routine that a function of the first source is, its arguments named in order.

    Each is a role or a whole number that is passed as it is. Rows without a stride follow one
    another. Raises SpecError.
    """
    main, *others = sources
    roles = _roles(main.name, function, arguments)
    name = f"{f.name}_against"
    text = f"{main.text.rstrip()}\n{_adapter(f, name, function, arguments, roles)}"
    return Routine(
        name=name,
        sources=(replace(main, text=text), *others),
        frame=Entry(name, roles, status=False),
        band=None,
        output_size=None,
        source=f.input.container,
        destination=f.output.container,
        channels=f.geometry.channels,
        word=None,
        scratch_per_column=0,
        scratch_fixed=0,
        widths=f.geometry.columns.sizes,
        heights=f.geometry.rows.sizes,
        foreign=True,
    )


def _roles(file: str, function: str, arguments: Sequence[str]) -> tuple[Role, ...]:
    known = {role.value: role for role in ROLES}
    where = Place(file)
    if not _NAME.match(function):
        raise SpecError(finding("against-function", where, got=function))
    wrong = [a for a in arguments if a not in known and not _NUMBER.match(a)]
    if wrong:
        raise SpecError(finding("against-argument", where, got=wrong[0], known=", ".join(known)))
    found = [known[a] for a in arguments if a in known]
    if len(set(found)) < len(found) or Role.SRC not in found or Role.DST not in found:
        raise SpecError(finding("against-arguments", where, got=",".join(arguments)))
    return tuple(role for role in ROLES if role in found)


def _adapter(
    f: Filter, name: str, function: str, arguments: Sequence[str], roles: Sequence[Role]
) -> str:
    words = {
        Role.SRC: f"const {_word(f.input.container)} *src",
        Role.DST: f"{_word(f.output.container)} *dst",
    }
    environment = Environment(
        loader=PackageLoader("guardbit.templates", ""), undefined=StrictUndefined
    )
    return environment.get_template("adapter.c.j2").render(
        name=name,
        function=function,
        arguments=", ".join(arguments),
        parameters=", ".join(words.get(role, f"size_t {role.value}") for role in roles),
    )


def _word(container: Container) -> str:
    return f"{'' if container.signed else 'u'}int{container.bits}_t"
