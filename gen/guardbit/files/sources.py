"""C sources of the user's own, with the headers that they include from beside them."""

import re
from pathlib import Path

from guardbit.model.finding import Place, SpecError, finding
from guardbit.model.routine import SourceFile

_INCLUDE = re.compile(r'^[ \t]*#[ \t]*include[ \t]*"([^"]+)"', re.MULTILINE)
_MOST_BYTES = 4 << 20


def read_sources(path: Path) -> tuple[SourceFile, ...]:
    """Return a C file and every file that it includes by name from its folder, it first.

    Raises SpecError if one cannot be read, or is included from another folder.
    """
    found: dict[str, SourceFile] = {}
    waiting = [(path.name, Place(str(path)))]
    while waiting:
        name, asked = waiting.pop(0)
        if name in found:
            continue
        if "/" in name or "\\" in name:
            raise SpecError(finding("against-folder", asked, name=name))
        text = _read(path.parent / name, asked)
        found[name] = SourceFile(name, text)
        for match in _INCLUDE.finditer(text):
            line = text.count("\n", 0, match.start()) + 1
            waiting.append((match.group(1), Place(name, line)))
    return tuple(found.values())


def _read(path: Path, asked: Place) -> str:
    try:
        data = path.read_bytes()
    except OSError as error:
        reason = error.strerror or type(error).__name__
        raise SpecError(finding("against-unread", asked, name=path.name, reason=reason)) from None
    if len(data) > _MOST_BYTES:
        raise SpecError(finding("against-unread", asked, name=path.name, reason="over 4 MiB"))
    return data.decode("utf-8", errors="replace")
