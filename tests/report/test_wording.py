"""Every finding that the sources can make has words, and the words use what it carries.

The sources are read as syntax trees. A function that hands its own parameter on as a
finding's kind (`refusal(kind, ...)`) counts as a maker of findings itself.
"""

import ast
import re
import string
from collections.abc import Iterator
from dataclasses import dataclass, replace
from pathlib import Path

import pytest

import guardbit
from guardbit.model.finding import Place, Value, finding
from guardbit.model.routine import Harm
from guardbit.report.wording import WORDS, sentence, where

SOURCES = sorted(Path(str(guardbit.__file__)).parent.rglob("*.py"))
Function = ast.FunctionDef | ast.AsyncFunctionDef


@dataclass(frozen=True)
class Maker:
    """A function that makes findings: where its kind stands, and which values it gives.

    `shapes` are what it makes of the kind, such as "{}" and "{}-bound"; `unknown` says that
    it gives values of its own that only run time knows.
    """

    position: int
    parameter: str
    own: frozenset[str]
    gives: frozenset[str]
    open: bool
    shapes: frozenset[str] = frozenset({"{}"})
    unknown: bool = False


@dataclass(frozen=True)
class Site:
    """One call that makes a finding. `names` is None if only run time knows its values."""

    where: str
    kind: str
    names: frozenset[str] | None


FINDING = Maker(0, "", frozenset(), frozenset(), True)
Makers = dict[tuple[str, str], Maker]
Made = tuple[str, Function | None, ast.Call, Maker]


def key(module: str, name: str) -> tuple[str, str]:
    """Return what a function is known by: a private one only in its own module."""
    return (module if name.startswith("_") else "", name)


def called(call: ast.Call) -> str:
    if isinstance(call.func, ast.Attribute):
        return call.func.attr
    return call.func.id if isinstance(call.func, ast.Name) else ""


def calls(tree: ast.AST) -> Iterator[tuple[Function | None, ast.Call]]:
    """Yield every call with the function around it."""

    def walk(node: ast.AST, around: Function | None) -> Iterator[tuple[Function | None, ast.Call]]:
        if isinstance(node, Function):
            around = node
        if isinstance(node, ast.Call):
            yield around, node
        for child in ast.iter_child_nodes(node):
            yield from walk(child, around)

    return walk(tree, None)


def kind_of(call: ast.Call, maker: Maker) -> ast.expr | None:
    if len(call.args) > maker.position:
        return call.args[maker.position]
    return next((k.value for k in call.keywords if k.arg == maker.parameter), None)


def given(call: ast.Call, maker: Maker) -> tuple[frozenset[str], bool]:
    """Return the names of the values that a call gives, and whether there may be more."""
    names = {k.arg for k in call.keywords if k.arg} - maker.own
    starred = any(k.arg is None for k in call.keywords)
    more = maker.unknown or (starred and maker.open)
    return maker.gives | (names if maker.open else set()), more


def parameters(function: Function) -> list[str]:
    arguments = function.args
    return [a.arg for a in [*arguments.posonlyargs, *arguments.args] if a.arg != "self"]


def kinds(node: ast.expr | None, around: Function | None) -> list[str]:
    """Return the texts that an expression can be, as far as it can be told."""
    if isinstance(node, ast.Constant) and isinstance(node.value, str):
        return [node.value]
    if isinstance(node, ast.IfExp):
        return kinds(node.body, around) + kinds(node.orelse, around)
    if isinstance(node, ast.Name) and around is not None:
        assigned = [
            n.value
            for n in ast.walk(around)
            if isinstance(n, ast.Assign)
            and any(isinstance(t, ast.Name) and t.id == node.id for t in n.targets)
        ]
        return [text for value in assigned for text in kinds(value, None)]
    return []


def handed_on(node: ast.expr | None, around: Function | None) -> tuple[str, str] | None:
    """Return the parameter that an expression is made of, and its shape: ("kind", "{}")."""
    names = parameters(around) if around else []
    if isinstance(node, ast.Name) and node.id in names:
        return node.id, "{}"
    if not isinstance(node, ast.JoinedStr):
        return None
    holes = [part.value for part in node.values if isinstance(part, ast.FormattedValue)]
    texts = [str(part.value) if isinstance(part, ast.Constant) else "{}" for part in node.values]
    if len(holes) == 1 and isinstance(holes[0], ast.Name) and holes[0].id in names:
        return holes[0].id, "".join(texts)
    return None


def passing(around: Function, call: ast.Call, maker: Maker) -> Maker | None:
    """Return the maker that a function is because of one call in it, if it is one."""
    passed = handed_on(kind_of(call, maker), around)
    if passed is None:
        return None
    names = parameters(around)
    gives, more = given(call, maker)
    keywords = around.args.kwarg
    # `**values` that a function only hands on are its callers', who are looked at themselves.
    own = [k.value for k in call.keywords if k.arg is None]
    passed_on = keywords is not None and all(
        isinstance(v, ast.Name) and v.id == keywords.arg for v in own
    )
    return Maker(
        names.index(passed[0]),
        passed[0],
        frozenset([*names, *(a.arg for a in around.args.kwonlyargs)]),
        gives,
        keywords is not None,
        frozenset(shape.format(passed[1]) for shape in maker.shapes),
        maker.unknown or (more and not passed_on),
    )


def merged(one: Maker | None, other: Maker) -> Maker:
    if one is None:
        return other
    return replace(
        other,
        gives=one.gives | other.gives,
        shapes=one.shapes | other.shapes,
        unknown=one.unknown or other.unknown,
    )


def all_calls(trees: dict[str, ast.Module], makers: Makers) -> Iterator[Made]:
    for module, tree in trees.items():
        for around, call in calls(tree):
            maker = makers.get(key(module, called(call)))
            if maker is not None:
                yield module, around, call, maker


def find_makers(trees: dict[str, ast.Module]) -> Makers:
    makers: Makers = {("", "finding"): FINDING}
    while True:
        found = dict(makers)
        for module, around, call, maker in all_calls(trees, makers):
            new = passing(around, call, maker) if around else None
            if new is not None and around is not None and around.name != "finding":
                name = key(module, around.name)
                found[name] = merged(found.get(name), new)
        if found == makers:
            return makers
        makers = found


def all_sites() -> tuple[list[Site], list[str]]:
    """Return every call that makes a finding, and the places of those that tell no kind."""
    trees = {str(path): ast.parse(path.read_text("utf-8")) for path in SOURCES}
    sites, dark = [], []
    for module, around, call, maker in all_calls(trees, find_makers(trees)):
        node = kind_of(call, maker)
        if handed_on(node, around):
            continue
        place = f"{Path(module).parent.name}/{Path(module).name}:{call.lineno}"
        names, more = given(call, maker)
        told = [shape.format(kind) for kind in kinds(node, around) for shape in maker.shapes]
        sites += [Site(place, kind, None if more else names) for kind in told]
        dark += [] if told else [place]
    return sites, dark


SITES, DARK = all_sites()


def fields(kind: str) -> set[str]:
    texts = " ".join(WORDS[kind])
    return {name for _, name, _, _ in string.Formatter().parse(texts) if name is not None}


def strings() -> list[str]:
    """Return patterns of every text, formatted ones included, outside the tables of words."""
    trees = [ast.parse(p.read_text("utf-8")) for p in SOURCES if not p.name.startswith("words_")]
    nodes = [node for tree in trees for node in ast.walk(tree)]
    texts = {n.value for n in nodes if isinstance(n, ast.Constant) and isinstance(n.value, str)}
    formatted = [n.values for n in nodes if isinstance(n, ast.JoinedStr)]
    shapes = {
        "".join(re.escape(str(p.value)) if isinstance(p, ast.Constant) else ".+" for p in parts)
        for parts in formatted
    }
    named = {shape for shape in shapes if re.match(r"[a-z]{3,}\\-", shape)}
    return [*map(re.escape, texts), *named]


def test_the_sources_make_findings() -> None:
    assert len({site.kind for site in SITES}) > 20


def test_every_kind_has_words() -> None:
    assert [(s.where, s.kind) for s in SITES if s.kind not in WORDS] == []


def test_words_use_only_what_is_given() -> None:
    told = [s for s in SITES if s.names is not None and s.kind in WORDS]
    wrong = [(s.where, s.kind, sorted(fields(s.kind) - (s.names or set()))) for s in told]
    assert [each for each in wrong if each[2]] == []


def test_no_words_are_idle() -> None:
    used = re.compile("|".join(strings()))
    told = {site.kind for site in SITES}
    assert [kind for kind in sorted(WORDS) if kind not in told and not used.fullmatch(kind)] == []


@pytest.mark.parametrize("harm", [harm for harm in Harm if harm is not Harm.NOT_RUN])
def test_every_harm_has_words(harm: Harm) -> None:
    assert f"harm-{harm}" in WORDS


@pytest.mark.parametrize("kind", sorted(WORDS))
def test_words_are_sentences(kind: str) -> None:
    values: dict[str, Value] = dict.fromkeys(fields(kind), "X")
    text = sentence(finding(kind, Place("a.toml", 3, "b.c"), **values))
    assert text.startswith("a.toml:3: b.c: ")
    assert text.endswith(".") and not text.endswith("..") and ".. " not in text
    assert not re.match(r"[a-z]", text.removeprefix("a.toml:3: b.c: "))
    assert "  " not in text and "None" not in text
    assert text.isascii()


@pytest.mark.parametrize(
    ("place", "start"),
    [
        (Place("a.toml", 3, "input.bits"), "a.toml:3: input.bits: "),
        (Place("a.toml", None, "input.bits"), "a.toml: input.bits: "),
        (Place("a.toml"), "a.toml: "),
        (Place(None, 7, "input.bits"), "input.bits: "),
        (Place(), ""),
    ],
)
def test_unknown_parts_are_left_out(place: Place, start: str) -> None:
    said = "Not a certificate: cut off. Write it again with guardbit emit --force."
    assert sentence(finding("certificate-syntax", place, reason="cut off")) == start + said


def test_values_are_never_read_as_templates() -> None:
    text = sentence(finding("certificate-syntax", reason="{0} {x!r} {"))
    assert "{0} {x!r} {" in text


def test_a_value_that_is_not_known() -> None:
    assert "unknown" in sentence(finding("certificate-syntax", reason=None))


def test_a_kind_without_words_is_an_error() -> None:
    with pytest.raises(KeyError):
        sentence(finding("no-such-kind"))


def test_where() -> None:
    assert [where(p) for p in (Place(), Place("a"), Place("a", 2))] == ["", "a", "a:2"]
