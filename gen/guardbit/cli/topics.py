"""The command `explain`: keys of the spec file, its tables, and the trade's words."""

from dataclasses import dataclass

from guardbit.cli.failure import show_failure
from guardbit.cli.machine import document
from guardbit.cli.session import Session
from guardbit.model.finding import SpecError
from guardbit.report.glossary import GLOSSARY, meaning
from guardbit.spec.entries import Key
from guardbit.spec.explain import explain
from guardbit.spec.keys import TABLES


@dataclass(frozen=True)
class Topic:
    """A title, the text under it, and named lines."""

    name: str
    text: str
    lines: tuple[tuple[str, str], ...] = ()


def run_explain(topic: str | None, json: bool) -> int:
    """Show what is known about a topic and return the exit status."""
    session = Session(json)
    try:
        topics = [*topics_of(topic)] if topic is not None else overview()
    except SpecError as error:
        return show_failure(session, "explain", error)
    if json:
        session.out(document("explain", 0, topics=topics))
    else:
        session.out("\n".join(_text(session, each) for each in topics))
    return 0


def overview() -> list[Topic]:
    """Return the tables of a spec file and the words, each with a line about it."""
    tables = tuple((table.name, table.explanation) for table in TABLES if not table.reserved)
    return [
        Topic("tables of a spec file", "guardbit explain TABLE lists its keys.", tables),
        Topic("words", "guardbit explain WORD or KEY tells one.", GLOSSARY),
    ]


def topics_of(topic: str) -> list[Topic]:
    """Return what is known about a key, a table or a word; a topic may be several of them.

    Raises SpecError, with the nearest name, if it is none.
    """
    asked = topic.strip()
    said = meaning(asked)
    word = [Topic(asked, said)] if said is not None else []
    try:
        keys = explain(asked.strip("[]"))
    except SpecError:
        if word:
            return word
        raise
    if len(keys) == 1 and keys[0].name == asked:
        return [*word, _key(keys[0])]
    table = next(table for table in TABLES if table.name == keys[0].table)
    return [*word, Topic(f"[{table.name}]", table.explanation), *map(_key, keys)]


def _key(key: Key) -> Topic:
    lines = (("values", key.form.wanted), ("default", key.default_text))
    details = tuple(("", detail) for detail in key.details)
    return Topic(key.name, key.explanation, (*lines, *details))


def _text(session: Session, topic: Topic) -> str:
    from guardbit.report.terminal import topic_text

    return topic_text(session.out_look, topic.name, topic.text, topic.lines)
