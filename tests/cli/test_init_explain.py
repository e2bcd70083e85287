import json
import re
import tomllib
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

from guardbit.cli.starter import starter_text
from guardbit.cli.topics import topics_of
from guardbit.model.finding import SpecError
from guardbit.report.glossary import GLOSSARY
from guardbit.spec.keys import KEYS, TABLES

Guardbit = Callable[..., Any]


def test_the_starter_is_sound(
    guardbit: Guardbit, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.chdir(tmp_path)
    ran = guardbit("init", "glare7")
    assert (ran.status, ran.err) == (0, "")
    assert ran.out == "written: glare7.toml\n-> guardbit size glare7.toml\n"
    assert guardbit("size", "glare7.toml").status == 0


def test_the_starter_names_every_key() -> None:
    text = starter_text("glare7", "glare7.toml")
    for table in TABLES:
        assert (f"[{table.name}]" in text) is not table.reserved
    for key in KEYS.values():
        short = key.name.rpartition(".")[2]
        assert short == "*" or re.search(rf"^#?{short} =", text, re.MULTILINE), key.name


def test_a_default_that_is_written_out_changes_nothing() -> None:
    """Every commented default can be uncommented: it is TOML, and the default."""
    text = starter_text("glare7", "glare7.toml")
    before = tomllib.loads(text)
    opened = re.sub(r"^#(\[|\w+ = \S)", r"\1", text, flags=re.MULTILINE)
    after = tomllib.loads(re.sub(r"^\w+ =\s*#.*$", "", opened, flags=re.MULTILINE))
    assert after["accumulator"]["bits"] == "auto" and "bits" not in before["accumulator"]
    assert after["image"]["width"] == [1, 65535]


def test_init_elsewhere(guardbit: Guardbit, tmp_path: Path) -> None:
    target = tmp_path / "specs" / "a b.toml"
    assert guardbit("init", "glare7", "-o", target).status == 0
    assert tomllib.loads(target.read_text())["filter"]["name"] == "glare7"


@pytest.mark.parametrize("existing", ["file", "folder", "link"])
def test_init_never_overwrites(
    guardbit: Guardbit, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, existing: str
) -> None:
    monkeypatch.chdir(tmp_path)
    target = Path("glare7.toml")
    if existing == "file":
        target.write_text("mine")
    elif existing == "folder":
        target.mkdir()
    else:
        target.symlink_to("nowhere")
    ran = guardbit("init", "glare7")
    assert ran.status == 2 and ran.err.startswith("glare7.toml: ")
    assert existing != "file" or target.read_text() == "mine"


@pytest.mark.parametrize(
    "name", ["", "while", "class", "1st", "a b", 'a"b', "a\nb", "a*/", "../up", "x" * 25, "\u00e9"]
)
def test_init_refuses_a_bad_name(
    guardbit: Guardbit, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, name: str
) -> None:
    monkeypatch.chdir(tmp_path)
    ran = guardbit("init", name)
    assert ran.status == 2 and ran.err.startswith("filter.name: ")
    assert list(tmp_path.iterdir()) == []


def test_init_for_machines(guardbit: Guardbit, tmp_path: Path) -> None:
    target = tmp_path / "x.toml"
    document = json.loads(guardbit("init", "glare7", "-o", target, "--json").out)
    assert (document["file"], document["status"]) == (str(target), 0)
    again = json.loads(guardbit("init", "glare7", "-o", target, "--json").out)
    assert again["status"] == 2 and again["findings"][0]["kind"] == "starter-exists"


@pytest.mark.parametrize("key", [key for key in KEYS if not key.endswith("*")])
def test_explain_every_key(key: str) -> None:
    topic = topics_of(key)[-1]
    assert topic.name == key and topic.text == KEYS[key].explanation
    assert dict(topic.lines)["default"] == KEYS[key].default_text


@pytest.mark.parametrize("table", [table.name for table in TABLES if not table.reserved])
def test_explain_every_table(table: str) -> None:
    names = [topic.name for topic in topics_of(table)]
    assert f"[{table}]" in names and len(names) > 2
    assert topics_of(f"[{table}]")[-1] == topics_of(table)[-1]


@pytest.mark.parametrize("word", [name for name, _ in GLOSSARY])
def test_explain_every_word(guardbit: Guardbit, word: str) -> None:
    ran = guardbit("explain", *word.split())
    assert ran.status == 0 and ran.out.startswith(f"{word}\n")


def test_explain_everything(guardbit: Guardbit) -> None:
    said = guardbit("explain").out
    assert all(f"  {name} " in said for name, _ in GLOSSARY)
    assert all((f"  {t.name} " in said) is not t.reserved for t in TABLES if t.name != "code")


def test_explain_suggests() -> None:
    with pytest.raises(SpecError) as caught:
        topics_of("acumulator.bits")
    assert caught.value.findings[0].value("nearest") == "accumulator.bits"


def test_explain_for_machines(guardbit: Guardbit) -> None:
    document = json.loads(guardbit("explain", "input.bits", "--json").out)
    assert document["topics"][0]["name"] == "input.bits"
    assert json.loads(guardbit("explain", "zzz", "--json").out)["status"] == 2
