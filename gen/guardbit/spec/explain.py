"""What the key table says about a key, for people who ask."""

import difflib

from guardbit.model.finding import Place, SpecError, finding
from guardbit.spec.entries import Key
from guardbit.spec.keys import KEYS, TABLES, keys_of


def explain(key: str | None = None) -> tuple[Key, ...]:
    """Return the key of that dotted name, a table's keys, or all keys.

    Raises SpecError, with the nearest name, for one that is neither.
    """
    if key is None:
        return tuple(KEYS.values())
    if key in KEYS:
        return (KEYS[key],)
    found = keys_of(key)
    if found:
        return found
    tables = [table.name for table in TABLES]
    close = difflib.get_close_matches(key, [*KEYS, *tables], 1, 0.5)
    named = [name for name in KEYS if name.rpartition(".")[2] == key]
    raise SpecError(
        finding(
            "explain-unknown",
            Place(key=key),
            got=key,
            nearest=", ".join(named or close or tables),
        )
    )
