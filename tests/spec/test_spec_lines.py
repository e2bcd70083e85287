"""Lines of keys: random documents are composed line by line, so that the truth is known."""

import time
import tomllib
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from guardbit.model.finding import SpecError
from guardbit.spec.lines import dotted, scan
from guardbit.spec.toml import DEPTH_LIMIT, Real, load
from tools import examples

BARE = st.sampled_from(["a", "b", "c9", "-", "_x", "1"])
QUOTED = st.sampled_from(['"a"', "'b'", '"x.y"', '"q\\"t"', "'[t]'", '"#"', '""', '"\\u0061z"'])
PART = BARE | QUOTED
SPACE = st.sampled_from(["", " ", "\t"])
COMMENT = st.sampled_from(["", " # c", ' # "', " # [x]", " # '''", " # a = 1"])
SCALARS = ["1", "-2.5e3", "true", '"s # ["', "'\\'", "1979-05-27 07:32:00Z", "nan", '""', "0x1F"]
LONG = ['"""\na = 1\n[t]\n"""', "'''\n'x' = 2\n# no\n'''", '"""x\\"""y"""', "'''a''''", '"""q"""""']


@st.composite
def keys(draw: st.DrawFn) -> str:
    parts = draw(st.lists(PART, min_size=1, max_size=3))
    gap = draw(SPACE)
    return f"{gap}.{gap}".join(parts)


def arrays(values: st.SearchStrategy[str]) -> st.SearchStrategy[str]:
    ends = st.sampled_from([",", ",\n", "\n,", " , # ]\n", "\n\n,"])
    items = st.lists(st.tuples(values, ends), max_size=4)
    return items.map(lambda pairs: f"[{''.join(v + e for v, e in pairs)}]")


def tables(values: st.SearchStrategy[str]) -> st.SearchStrategy[str]:
    pairs = st.lists(st.tuples(PART, values), max_size=3, unique_by=lambda pair: parts_of(pair[0]))
    return pairs.map(lambda items: f"{{ {', '.join(f'{k} = {v}' for k, v in items)} }}")


def parts_of(key: str) -> tuple[str, ...]:
    """The parts of a key, as tomllib reads it."""
    found: Any = tomllib.loads(f"{key} = 1")
    parts = []
    while isinstance(found, dict):
        ((part, found),) = found.items()
        parts.append(part)
    return tuple(parts)


VALUES = st.recursive(
    st.sampled_from(SCALARS + LONG), lambda inner: arrays(inner) | tables(inner), max_leaves=6
)
HEADER = st.tuples(keys(), st.booleans()).map(lambda h: f"[[{h[0]}]]" if h[1] else f"[{h[0]}]")
STATEMENT = st.tuples(keys(), SPACE, VALUES).map(lambda s: f"{s[0]}{s[1]}={s[1]}{s[2]}")
BLANK = st.sampled_from(["", "  ", "# comment = 1", "#[x]"])
PIECES = st.lists(st.tuples(HEADER | STATEMENT | BLANK, COMMENT), max_size=10)


def flattened(value: object, path: tuple[str, ...] = ()) -> set[str]:
    """Every dotted key of a document, as tomllib sees it."""
    if isinstance(value, list):
        return set().union(*(flattened(item, path) for item in value), set())
    if not isinstance(value, dict):
        return set()
    found: set[str] = set()
    for part, item in value.items():
        found |= {dotted((*path, part))} | flattened(item, (*path, part))
    return found


@given(PIECES, st.sampled_from(["\n", "\r\n"]))
@settings(max_examples=examples(300), deadline=None)
def test_lines_of_random_documents(pieces: list[tuple[str, str]], newline: str) -> None:
    """A document grows piece by piece; the keys that a piece adds stand in its lines."""
    text = ""
    known: dict[str, tuple[int, int]] = {}
    for piece, comment in pieces:
        longer = text + piece + comment + "\n"
        try:
            document = tomllib.loads(longer)
        except tomllib.TOMLDecodeError:
            continue  # a key twice: leave the piece out
        first = text.count("\n") + 1
        for key in flattened(document) - set(known):
            known[key] = (first, longer.count("\n"))
        text = longer
    found = scan(text.replace("\n", newline))
    assert set(found.keys) == set(known)
    for key, (first, last) in known.items():
        assert first <= found.keys[key] <= last


TEXT = """\
title = "x"
[kernel] # the taps
taps = [ # open
  [1, 2, 3], [4],

  # between
  [5,
   6],
]
row = [
  1, 2,
  3
]
[a."b.c"]
d = { e = 1, f = { g = [
  { h = 1 },
  { h = 2, i = 3 } ] } }
"""


def test_lines_by_hand() -> None:
    found = scan(TEXT)
    assert found.keys == {
        "title": 1,
        "kernel": 2,
        "kernel.taps": 3,
        "kernel.row": 10,
        "a": 14,
        'a."b.c"': 14,
        'a."b.c".d': 15,
        'a."b.c".d.e': 15,
        'a."b.c".d.f': 15,
        'a."b.c".d.f.g': 15,
        'a."b.c".d.f.g.h': 16,
        'a."b.c".d.f.g.i': 17,
    }
    taps = {n: line for (key, n), line in found.items.items() if key == "kernel.taps"}
    assert taps == {0: 4, 1: 4, 2: 7}
    assert {n: line for (key, n), line in found.items.items() if key == "kernel.row"} == {
        0: 11,
        1: 11,
        2: 12,
    }


@given(st.text(st.sampled_from("ab.=[]{},\"'\\\n\r #1\t"), max_size=60) | st.text(max_size=60))
@settings(max_examples=examples(500), deadline=None)
def test_a_scan_never_fails(text: str) -> None:
    assert all(1 <= line <= text.count("\n") + 1 for line in scan(text).keys.values())


@pytest.mark.parametrize(
    ("text", "kind"),
    [
        ("a = " + "[" * 5000, "toml-deep"),
        ("a = " + "{a=" * 100_000, "toml-deep"),
        (".".join("a" * 200_000) + " = 1", "toml-deep"),
        ("[" + ".".join("a" * 90_000) + "]\n" + "b = 1\n" * 60_000, "toml-deep"),
        ("[" + ".".join("a" * 15) + "]\n" + "b = 1\n" * 60_000, "toml-twice"),
        ("a = " + "9" * 5000, "toml-long-word"),
        ("a = 0x" + "f" * 100_000, "toml-long-word"),
        ('a = """\\' * 30_000, "toml-syntax"),
        ('a = "\\' * 100_000, "toml-syntax"),
        ("'''" + "''\n" * 100_000, "toml-syntax"),
    ],
)
def test_hostile_texts_are_refused_at_once(text: str, kind: str) -> None:
    begin = time.process_time()
    with pytest.raises(SpecError) as caught:
        load(text, "x.toml")
    assert [f.kind for f in caught.value.findings] == [kind]
    assert time.process_time() - begin < 5


def test_nesting_at_the_limit_is_read() -> None:
    deep = "[" * DEPTH_LIMIT + "]" * DEPTH_LIMIT
    assert load(f"a = {deep}", "x")[0]["a"]
    with pytest.raises(SpecError):
        load(f"a = [{deep}]", "x")


def test_numbers_keep_their_digits() -> None:
    document, _ = load("a = 0.1\nb = 1e999999999\nc = -inf\nd = 3", "x")
    assert document == {"a": Real("0.1"), "b": Real("1e999999999"), "c": Real("-inf"), "d": 3}
    assert [type(value) for value in document.values()] == [Real, Real, Real, int]
