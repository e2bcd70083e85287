"""Specs in files, each with what is expected of it in a file beside it.

Adding a case is adding two files. `valid/NAME.expect`: lines `path = JSON` about the Spec.
`invalid/NAME.expect`: lines `kind line key`, one per finding, "-" for what is not known.
"""

import json
from pathlib import Path

import pytest

from guardbit.model.canonical import plain
from guardbit.model.finding import Finding, SpecError
from guardbit.report.wording import WORDS
from guardbit.spec.reader import parse_spec, read_spec

DATA = Path(__file__).parents[1] / "data"
VALID = sorted((DATA / "valid").glob("*.toml"))
INVALID = sorted((DATA / "invalid").glob("*.toml"))


def test_there_are_cases() -> None:
    assert len(VALID) >= 20
    assert len(INVALID) >= 80


@pytest.mark.parametrize("folder", ["valid", "invalid"])
def test_every_case_has_an_expectation(folder: str) -> None:
    expected = {path.stem for path in (DATA / folder).glob("*.expect")}
    assert {path.stem for path in (DATA / folder).glob("*.toml")} == expected


@pytest.mark.parametrize("path", VALID, ids=lambda path: path.stem)
def test_valid(path: Path) -> None:
    spec = plain(read_spec(path))
    lines = path.with_suffix(".expect").read_text(encoding="utf-8").splitlines()
    assert lines
    for line in lines:
        name, _, value = line.partition(" = ")
        found = spec
        for part in name.split("."):
            assert isinstance(found, dict)
            found = found[part]
        assert found == json.loads(value), name


def findings_of(path: Path) -> tuple[Finding, ...]:
    with pytest.raises(SpecError) as caught:
        read_spec(path)
    assert caught.value.status == 2
    return caught.value.findings


@pytest.mark.parametrize("path", INVALID, ids=lambda path: path.stem)
def test_invalid(path: Path) -> None:
    found = findings_of(path)
    lines = [f"{f.kind} {f.place.line or '-'} {f.place.key or '-'}" for f in found]
    assert lines == path.with_suffix(".expect").read_text(encoding="utf-8").splitlines()
    assert {f.place.file for f in found} == {str(path)}


@pytest.mark.parametrize("path", INVALID, ids=lambda path: path.stem)
def test_a_finding_fills_its_sentences_with_printable_text(path: Path) -> None:
    for found in findings_of(path):
        values = {name: value for name, value in found.values if value is not None}
        reason, remedy = (text.format_map(values) for text in WORDS[found.kind])
        assert reason and f"{reason} {remedy}".isprintable()
        assert (remedy or found.kind == "more-like-these") and len(reason) < 300
        assert (found.place.key or "").isprintable()


def test_text_and_file_give_the_same_spec() -> None:
    path = DATA / "valid" / "table-file.toml"
    text = path.read_bytes().decode()
    assert parse_spec(text, str(path), path.parent) == read_spec(path)
