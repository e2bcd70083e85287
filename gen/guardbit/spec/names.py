"""Text that goes into C: names that prefix symbols, and a line that stands in a comment."""

import json
import re
from typing import TypeAlias

from guardbit.model.finding import Value
from guardbit.spec.forms import SUMMARY_LIMIT

_Faults: TypeAlias = list[tuple[str, tuple[tuple[str, Value], ...]]]

NAME = re.compile(r"[A-Za-z][A-Za-z0-9_]{0,23}")

# C99 6.4.1, and what C11, C17 and C23 add, without those that begin with an underscore.
_C = """
auto break case char const continue default do double else enum extern float for goto if
inline int long register restrict return short signed sizeof static struct switch typedef
union unsigned void volatile while
alignas alignof bool constexpr false nullptr static_assert thread_local true typeof
typeof_unqual asm fortran
"""

# C++17 [lex.key], the alternative tokens of [lex.digraph], and what C++20 adds.
_CPP = """
alignas alignof and and_eq asm auto bitand bitor bool break case catch char char16_t char32_t
char8_t class co_await co_return co_yield compl concept const const_cast consteval constexpr
constinit continue decltype default delete do double dynamic_cast else enum explicit export
extern false float for friend goto if inline int long mutable namespace new noexcept not
not_eq nullptr operator or or_eq private protected public register reinterpret_cast requires
return short signed sizeof static static_assert static_cast struct switch template this
thread_local throw true try typedef typeid typename union unsigned using virtual void volatile
wchar_t while xor xor_eq
"""

KEYWORDS = frozenset(_C.split()) | frozenset(_CPP.split())

# "soften_selfcheck.c" is a file that the filter "soften" emits.
RESERVED_ENDING = "_selfcheck"

_BREAKS_COMMENT = ("*/", "/*", "??/")


def name_faults(name: str) -> _Faults:
    """Return what keeps `name` from prefixing C and C++ symbols; nothing if it can."""
    got = ("got", _quoted(name))
    if not NAME.fullmatch(name):
        return [("name-malformed", (got, ("why", _malformed(name))))]
    if name in KEYWORDS:
        return [("name-keyword", (got,))]
    if "__" in name or name.endswith("_"):
        # C++17 [lex.name] reserves every name with two underscores in a row.
        return [("name-underscores", (got,))]
    if name.lower().endswith(RESERVED_ENDING):
        return [("name-reserved", (got, ("ending", RESERVED_ENDING)))]
    return []


def _malformed(name: str) -> str:
    if not name:
        return "it is empty"
    odd = next((c for c in name if not re.fullmatch("[A-Za-z0-9_]", c)), None)
    if odd is not None:
        return f"it holds {_quoted(odd)}"
    if len(name) > 24:
        return f"it has {len(name)} characters"
    return "it does not begin with a letter"


def line_faults(text: str) -> _Faults:
    """Return what keeps `text` from standing in a C comment on one line."""
    faults: _Faults = []
    if len(text) > SUMMARY_LIMIT:
        faults.append(("summary-long", (("got", len(text)), ("limit", SUMMARY_LIMIT))))
    for mark in _BREAKS_COMMENT:
        if mark in text:
            faults.append(("summary-comment", (("got", _quoted(mark)),)))
    if text.endswith("\\"):
        faults.append(("summary-comment", (("got", "a backslash at its end"),)))
    odd = next((c for c in text if not c.isprintable()), None)
    if odd is not None:
        faults.append(("summary-unprintable", (("got", _quoted(odd)),)))
    return faults


def _quoted(text: str) -> str:
    whole = json.dumps(text)
    return whole if len(whole) <= 60 else whole[:57] + "..."
