"""The line of every key of a TOML 1.0 document, which the standard library's reader hides.

A scan of the text, not a second reader: on a document that tomllib accepts it finds every
key; on any other text it stops nowhere and promises nothing. It also bounds what tomllib is
given, whose time and stack grow with the length of dotted keys and the depth of brackets.
"""

import re
from collections.abc import Iterator
from dataclasses import dataclass, field
from typing import TypeAlias

# One alternative per lexical element of TOML 1.0. A string that is never closed runs to the
# end of its line (a long one: of the text), so that no text is looked at twice.
_TOKEN = re.compile(
    r"(?P<comment>\#[^\n]*)"
    r"|(?P<newline>\n)"
    r"|(?P<space>[ \t\r]+)"
    r'|(?P<long>"""(?:\\.|[^\\])*?(?:"{3,5}|\\?\Z)|\'\'\'.*?(?:\'{3,5}|\Z))'
    r'|(?P<basic>"(?:\\[^\n]|[^"\\\n])*"?)'
    r"|(?P<literal>'[^'\n]*'?)"
    r"|(?P<mark>[][{}=,.])"
    r"|(?P<word>[^][{}=,.\"'\#\s]+|\s)",
    re.DOTALL,
)

_Token: TypeAlias = tuple[str, str, int]
_Path: TypeAlias = tuple[str, ...]

# Parts kept of a dotted key: more than any reader wants, few enough to join at no cost.
_KEPT = 32


@dataclass
class Scan:
    """What a scan found.

    `keys`: dotted key (and table) to the line where it first stands, from 1. `items`: dotted
    key of an array and number of an item, from 0, to the item's line. `order`: each key as
    often as it stands, with its line. `deepest`: brackets open at once; `longest_key`: parts
    of the longest dotted key, `longest_word`: characters of the longest bare word, each with
    its line.
    """

    keys: dict[str, int] = field(default_factory=dict)
    items: dict[tuple[str, int], int] = field(default_factory=dict)
    order: list[tuple[str, int]] = field(default_factory=list)
    deepest: tuple[int, int] = (0, 1)
    longest_key: tuple[int, int] = (0, 1)
    longest_word: tuple[int, int] = (0, 1)

    def add(self, path: _Path, line: int) -> None:
        """Note a key and the tables it implies; of a key of absurd length, that it is there."""
        self.longest_key = max(self.longest_key, (len(path), line))
        if len(path) >= _KEPT:
            return
        self.order.append((dotted(path), line))
        for length in range(len(path), 0, -1):
            prefix = dotted(path[:length])
            if prefix in self.keys:
                break
            self.keys[prefix] = line


def dotted(path: _Path) -> str:
    """Return a key's parts as one dotted key, quoted where TOML asks for quotes."""
    return ".".join(part if _BARE.fullmatch(part) else _quoted(part) for part in path)


_BARE = re.compile(r"[A-Za-z0-9_-]+")


def _quoted(part: str) -> str:
    safe = part.encode("unicode_escape").decode("ascii").replace('"', '\\"')
    return f'"{safe}"'


def scan(text: str) -> Scan:
    """Return the keys of a document and their lines. Never raises."""
    found = Scan()
    tokens = _Tokens(text, found)
    table: _Path = ()
    while (token := tokens.take(skip_newlines=True)) is not None:
        if token[1] == "[" and token[0] == "mark":
            table = _header(tokens, found)
        else:
            _statement(tokens, found, table, token)
    return found


class _Tokens:
    """The tokens that mean something, one ahead."""

    def __init__(self, text: str, found: Scan) -> None:
        self._stream = _tokens(text, found)
        self._next = next(self._stream, None)

    def peek(self) -> _Token | None:
        return self._next

    def take(self, skip_newlines: bool = False) -> _Token | None:
        token = self._next
        while skip_newlines and token is not None and token[0] == "newline":
            token = next(self._stream, None)
        self._next = next(self._stream, None) if token is not None else None
        return token

    def skip_line(self) -> None:
        while self._next is not None and self._next[0] != "newline":
            self.take()


def _tokens(text: str, found: Scan) -> Iterator[_Token]:
    line = 1
    for match in _TOKEN.finditer(text):
        kind, words = match.lastgroup or "word", match.group()
        if kind not in ("space", "comment"):
            yield kind, words, line
        if kind == "word":
            found.longest_word = max(found.longest_word, (len(words), line))
        line += words.count("\n")


def _header(tokens: _Tokens, found: Scan) -> _Path:
    token = tokens.take()
    if token is not None and token[1] == "[":
        token = tokens.take()
    path, line = _key(tokens, token)
    found.add(path, line)
    tokens.skip_line()
    return path


def _key(tokens: _Tokens, token: _Token | None) -> tuple[_Path, int]:
    """Return the dotted key that begins with `token`; what ends it stays in `tokens`."""
    line = token[2] if token is not None else 1
    parts: list[str] = []
    while token is not None:
        if len(parts) < _KEPT:
            parts.append(_part(token))
        follows = tokens.peek()
        if follows is None or follows[1] != ".":
            break
        tokens.take()
        token = tokens.take()
    return tuple(parts), line


def _join(table: _Path, path: _Path) -> _Path:
    return (table + path)[:_KEPT]


def _part(token: _Token) -> str:
    kind, words, _ = token
    if kind == "literal":
        return words[1:-1]
    if kind == "basic":
        return _ESCAPE.sub(_unescape, words[1:-1])
    return words


_ESCAPE = re.compile(r"\\(?:u([0-9A-Fa-f]{4})|U([0-9A-Fa-f]{8})|(.))")
_NAMED = {"b": "\b", "t": "\t", "n": "\n", "f": "\f", "r": "\r"}


def _unescape(match: re.Match[str]) -> str:
    code = match[1] or match[2]
    if code is None:
        return _NAMED.get(match[3], match[3])
    return chr(int(code, 16)) if int(code, 16) < 0x110000 else match[0]


def _statement(tokens: _Tokens, found: Scan, table: _Path, token: _Token) -> None:
    path, line = _key(tokens, token)
    follows = tokens.peek()
    if follows is None or follows[1] != "=":
        tokens.skip_line()
        return
    tokens.take()
    whole = _join(table, path)
    found.add(whole, line)
    _value(tokens, found, whole)
    tokens.skip_line()


@dataclass
class _Open:
    """An array or inline table that is being read.

    `item` is the path of the value that is being read in it, None between two of them.
    """

    path: _Path
    inline: bool
    items: int = 0
    item: _Path | None = None


def _value(tokens: _Tokens, found: Scan, path: _Path) -> None:
    """Take the tokens of one value; an array may run over many lines."""
    stack: list[_Open] = []
    while (token := tokens.take(skip_newlines=bool(stack))) is not None:
        mark = token[1] if token[0] == "mark" else ""
        if mark in ("]", "}"):
            del stack[-1:]
        elif mark == "," and stack:
            stack[-1].item = None
        else:
            _element(tokens, found, stack, token, path)
        if not stack:
            return


def _element(tokens: _Tokens, found: Scan, stack: list[_Open], token: _Token, path: _Path) -> None:
    """Take what is neither a comma nor a closing bracket."""
    if stack and stack[-1].item is None:
        _begin(tokens, found, stack, token)
        if stack[-1].inline:
            return
    if token[0] == "mark" and token[1] in "[{":
        inside = stack[-1].item if stack else path
        stack.append(_Open(inside or path, token[1] == "{"))
        found.deepest = max(found.deepest, (len(stack), token[2]))


def _begin(tokens: _Tokens, found: Scan, stack: list[_Open], token: _Token) -> None:
    """Note the item, or the key of an inline table, that `token` begins."""
    top = stack[-1]
    if top.inline:
        parts, line = _key(tokens, token)
        top.item = _join(top.path, parts)
        found.add(top.item, line)
        return
    if len(stack) == 1:
        found.items[dotted(top.path), top.items] = token[2]
    top.items += 1
    top.item = top.path
