"""The command `init`: a commented spec to start from, made from the key table."""

from collections.abc import Mapping
from json import dumps
from pathlib import Path
from textwrap import wrap

from guardbit.cli.failure import show_failure
from guardbit.cli.machine import document
from guardbit.cli.session import Session
from guardbit.model.finding import Finding, GuardbitError, Place, SpecError, finding
from guardbit.report.text import shown
from guardbit.spec.entries import Key, Table
from guardbit.spec.forms import Choice
from guardbit.spec.keys import TABLES, keys_of

_COLUMNS = 88
# Written so that the spec is sound as it stands: three by three, binomial, gain one.
_SET = {
    "filter.summary": '"3x3 binomial, gain 1: put your own taps below"',
    "kernel.taps": "[\n    [1, 2, 1],\n    [2, 4, 2],\n    [1, 2, 1],\n]",
    "kernel.divisor": "16",
    "input.bits": "8",
    "border.mode": '"replicate"',
}


def run_init(name: str, output: str | None, json: bool) -> int:
    """Write the spec and return the exit status."""
    session = Session(json)
    path = Path(output if output is not None else f"{name}.toml")
    try:
        write_starter(name, path)
    except GuardbitError as error:
        return show_failure(session, "init", error)
    if json:
        session.out(document("init", 0, file=str(path)))
    else:
        session.out(_done(session, path))
    return 0


def _done(session: Session, path: Path) -> str:
    from guardbit.report.terminal import next_line, written_text

    look = session.out_look
    return written_text(look, str(path)) + next_line(look, f"guardbit size {path}")


def write_starter(name: str, path: Path) -> None:
    """Write a spec called `name` to `path`.

    Raises SpecError if the name is not one for a filter or if `path` exists, MachineError if
    it cannot be written.
    """
    from guardbit.spec.reader import parse_spec

    text = starter_text(name, path.name)
    try:
        parse_spec(text, str(path), path.parent)
    except SpecError as error:
        raise SpecError(*(_unplaced(each) for each in error.findings)) from None
    _create(path, text)


def starter_text(name: str, file: str) -> str:
    """Return the text of a spec called `name` that will stand in `file`."""
    from jinja2 import Environment, PackageLoader, StrictUndefined

    environment = Environment(
        loader=PackageLoader("guardbit.templates", ""),
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
        keep_trailing_newline=True,
        autoescape=False,
    )
    # A JSON string is a TOML string; a name with a quote in it must reach the reader whole.
    values = {"filter.name": dumps(name), **_SET}
    tables = [_table(table, values) for table in TABLES if not table.reserved]
    template = environment.get_template("starter.toml.j2")
    return template.render(name=shown(name), file=shown(file), tables=tables)


def _table(table: Table, values: Mapping[str, str]) -> dict[str, object]:
    # The header alone would ask for two passes, or for a search without a goal.
    off = table.name.partition(".")[0] in ("intermediate", "goal")
    return {
        "comment": _wrapped(table.explanation),
        "header": f"#[{table.name}]" if off else f"[{table.name}]",
        "entries": [_key(key, values.get(key.name)) for key in keys_of(table.name)],
    }


def _key(key: Key, value: str | None) -> dict[str, object]:
    choices = f" One of: {key.form.wanted}." if isinstance(key.form, Choice) else ""
    name = key.name.rpartition(".")[2]
    line = _unset(name, key) if value is None else f"{name} = {value}"
    return {"comment": _wrapped(key.explanation + choices), "line": line}


def _unset(name: str, key: Key) -> str:
    if key.required:
        return f"#{name} =    # required"
    if key.shown:
        return f"#{name} =    # default: {key.shown}"
    return f"#{name} =" if key.default is None else f"#{name} = {key.default_text}"


def _wrapped(text: str) -> list[str]:
    return wrap(text, _COLUMNS, break_on_hyphens=False)


def _unplaced(found: Finding) -> Finding:
    """Return the finding without file and line, which nobody has seen."""
    return Finding(found.kind, Place(key=found.place.key), found.values)


def _create(path: Path, text: str) -> None:
    from guardbit.files.writing import write_atomic

    if path.exists() or path.is_symlink():
        raise SpecError(finding("starter-exists", Place(str(path)), path=str(path)))
    write_atomic(path.parent, {path.name: text.encode("utf-8")})
