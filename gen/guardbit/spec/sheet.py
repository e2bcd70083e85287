"""The keys of one file against the key table: values, defaults, and everything wrong."""

import difflib
from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any, TypeVar

from guardbit.files.reading import label
from guardbit.model.finding import Finding, Place, Value, finding
from guardbit.model.spec import Auto
from guardbit.spec.forms import listed
from guardbit.spec.keys import KEYS, TABLES, keys_of
from guardbit.spec.lines import Scan, dotted
from guardbit.spec.values import Fault, FaultyError, convert, shown

T = TypeVar("T")

_TABLES = {table.name: table for table in TABLES}


@dataclass
class Sheet:
    """What a file says, key by key.

    `values` has every key of the table, its default where the file is silent. `given` holds
    the keys and tables that stand in the file, `faulty` those whose value is not usable.
    """

    name: str
    found: Scan
    values: dict[str, object] = field(default_factory=dict)
    given: set[str] = field(default_factory=set)
    faulty: set[str] = field(default_factory=set)
    findings: list[Finding] = field(default_factory=list)

    def get(self, key: str, kind: type[T]) -> T:
        """Return a key's value, which must be of that type."""
        value = self.values[key]
        if not isinstance(value, kind):
            raise TypeError(f"{key} is {value!r}")
        return value

    def maybe(self, key: str, kind: type[T]) -> T | None:
        """Return a key's value, or None where it is left to a later stage."""
        return None if self.values[key] is None else self.get(key, kind)

    def width(self, key: str) -> int | Auto:
        """Return the value of a key that may be "auto"."""
        value = self.values[key]
        return Auto.AUTO if value is Auto.AUTO else self.get(key, int)

    def maybe_width(self, key: str) -> int | Auto | None:
        """Return the value of a key that may be "auto"; None where it is left to a later stage."""
        return None if self.values[key] is None else self.width(key)

    def usable(self, *keys: str) -> bool:
        """Return whether every one of these keys has a value without fault."""
        return not self.faulty.intersection(keys)

    def report(self, kind: str, key: str, /, **values: Value) -> None:
        """Note a finding at a key."""
        self.findings.append(finding(kind, self.place(key), **values))

    def report_at(self, kind: str, place: Place, /, **values: Value) -> None:
        """Note a finding at a place within a key."""
        self.findings.append(finding(kind, place, **values))

    def reject(self, kind: str, key: str, /, **values: Value) -> None:
        """Note a finding at a key, and use its value for nothing more."""
        self.report(kind, key, **values)
        self.faulty.add(key)

    def place(self, key: str, item: int | None = None) -> Place:
        """Return where a key stands, or that item of its array; else its table's place."""
        lines = self.found.keys
        line = self.found.items.get((key, item)) if item is not None else None
        parent = key
        while line is None and parent:
            line = lines.get(parent)
            parent = parent.rpartition(".")[0]
        return Place(label(self.name), line, key)


def read_sheet(document: Mapping[str, Any], found: Scan, name: str) -> Sheet:
    """Return the sheet of a document: defaults filled in, each value converted."""
    sheet = Sheet(name, found)
    for key in KEYS.values():
        sheet.values[key.name] = key.default
    _read_table(sheet, "", document)
    _require(sheet)
    return sheet


def _read_table(sheet: Sheet, table: str, content: Mapping[str, Any]) -> None:
    for part, raw in content.items():
        name = f"{table}.{part}" if table else part
        if name in _TABLES:
            _read_subtable(sheet, name, raw)
        elif name in KEYS and not _TABLES[table].reserved:
            _read_key(sheet, name, raw)
        else:
            _unknown(sheet, table, part)


def _read_subtable(sheet: Sheet, name: str, raw: object) -> None:
    sheet.given.add(name)
    if _TABLES[name].reserved:
        sheet.report("not-in-this-version", name, got=name)
    elif isinstance(raw, dict):
        _read_table(sheet, name, raw)
    else:
        sheet.report("type-wrong", name, got=shown(raw), expected=f"a table, [{name}]")
        sheet.faulty.update(key.name for key in keys_of(name))


def _read_key(sheet: Sheet, name: str, raw: object) -> None:
    sheet.given.add(name)
    try:
        sheet.values[name] = convert(KEYS[name].form, raw)
    except FaultyError as error:
        note(sheet, name, error.faults)


def note(sheet: Sheet, key: str, faults: tuple[Fault, ...]) -> None:
    """Report the faults of a key's value."""
    sheet.faulty.add(key)
    for fault in faults:
        place = sheet.place(key, fault.item)
        sheet.findings.append(Finding(fault.kind, place, fault.values))


def _unknown(sheet: Sheet, table: str, part: str) -> None:
    """Report a name that is neither key nor table, with the legal name that is nearest."""
    written = dotted((part,))
    key = f"{table}.{written}" if table else written
    legal = _legal(table)
    short = [name.removeprefix(f"{table}.") for name in legal]
    close = difflib.get_close_matches(part[:60].lower(), short, 1, 0.6)
    elsewhere = [name for name in KEYS if name.rpartition(".")[2] == part]
    nearest = legal[short.index(close[0])] if close else listed(tuple(elsewhere))
    if nearest:
        kind = "key-misspelt" if table else "table-misspelt"
    else:
        kind = "key-unknown" if table else "table-unknown"
    expected = ", ".join(short)
    sheet.report(kind, key, got=written[:60], nearest=nearest or None, expected=expected)


def _legal(table: str) -> list[str]:
    inside = [name for name in _TABLES if name.rpartition(".")[0] == table]
    keys = [key.name for key in keys_of(table)] if table else []
    return keys + [name for name in inside if not _TABLES[name].reserved]


def _require(sheet: Sheet) -> None:
    """Report required keys that are left out; those of a table only if it is there."""
    if "intermediate.accumulator" in sheet.given:
        sheet.given.add("intermediate")
    for key in KEYS.values():
        wanted = key.required and (_TABLES[key.table].required or key.table in sheet.given)
        if wanted and key.name not in sheet.given and sheet.usable(key.name):
            sheet.reject("key-missing", key.name, got=key.name, expected=key.form.wanted)
