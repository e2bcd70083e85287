"""Found numbers written into a spec's text: what changes, what does not, and how it reads."""

import tomllib
from pathlib import Path
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from guardbit.spec.pinning import PinValue, pinned_text
from guardbit.spec.reader import parse_spec, read_spec
from tools import examples

DATA = Path(__file__).parents[1] / "data" / "valid"
EXAMPLES = Path(__file__).parents[2] / "examples"

TAPS: dict[str, PinValue] = {"coefficient.frac": 5, "coefficient.pinned": [[3, -26, 3]]}
PAIR: dict[str, PinValue] = {
    "coefficient.frac": [4, 5],
    "coefficient.pinned": {"column": [1, 2, 1], "row": [-1, 0, 1]},
}

CASES: dict[str, tuple[str, dict[str, PinValue], str]] = {
    "a new table after the input's": (
        '[filter]\nname = "a"\n\n[input] # from the sensor\nbits = 8\n\n# the result\n[output]\n',
        TAPS,
        '[filter]\nname = "a"\n\n[input] # from the sensor\nbits = 8\n\n[coefficient]\nfrac = 5\n'
        "pinned = [\n    [  3, -26,   3],\n]\n\n# the result\n[output]\n",
    ),
    "a new table at the end, without a final line end": (
        "[input]\nbits = 8",
        TAPS,
        "[input]\nbits = 8\n\n[coefficient]\nfrac = 5\npinned = [\n    [  3, -26,   3],\n]\n",
    ),
    "new keys before what is about the next table": (
        '[coefficient]\nbits = 6 # the multiplier has 6\n\n# the frame\n[image]\nextent = "same"\n',
        TAPS,
        "[coefficient]\nbits = 6 # the multiplier has 6\nfrac = 5\n"
        'pinned = [\n    [  3, -26,   3],\n]\n\n# the frame\n[image]\nextent = "same"\n',
    ),
    "old keys in their places, with their comments": (
        '[coefficient]\npinned = [[1,2,\n 3]] # found\nfrac = "auto" # why not\nbits=6\n',
        TAPS,
        "[coefficient]\npinned = [\n    [  3, -26,   3],\n] # found\nfrac = 5 # why not\nbits=6\n",
    ),
    "a value that is right keeps its layout": (
        "[coefficient]\npinned = [[3, -26,\n           3]]\nfrac=5\n",
        TAPS,
        "[coefficient]\npinned = [[3, -26,\n           3]]\nfrac=5\n",
    ),
    "a column and a row": (
        "[coefficient]\nfrac = [1, 2]\n",
        PAIR,
        "[coefficient]\nfrac = [4, 5]\npinned = { column = [1, 2, 1], row = [-1, 0, 1] }\n",
    ),
    "dotted keys": (
        'coefficient.bits = 6\nfilter.name = "a"\n[input]\nbits = 8\n',
        {"coefficient.frac": 5},
        'coefficient.bits = 6\ncoefficient.frac = 5\nfilter.name = "a"\n[input]\nbits = 8\n',
    ),
    "an inline table": (
        "coefficient = { bits = 6 } # c\n",
        {"coefficient.frac": 5},
        "coefficient = { bits = 6, frac = 5} # c\n",
    ),
    "Windows line ends": (
        "[coefficient]\r\nbits = 6\r\n",
        TAPS,
        "[coefficient]\r\nbits = 6\r\nfrac = 5\r\npinned = [\r\n    [  3, -26,   3],\r\n]\r\n",
    ),
    "a table in a table": (
        "[intermediate]\nbits = 9\n[accumulator]\nbits = 20\n",
        {"intermediate.accumulator.bits": 14, "intermediate.bits": 8, "accumulator.bits": 18},
        "[intermediate]\nbits = 8\n\n[intermediate.accumulator]\nbits = 14\n\n"
        "[accumulator]\nbits = 18\n",
    ),
    "a document of comments": (
        "# nothing yet\n",
        {"output.bits": 8},
        "# nothing yet\n\n[output]\nbits = 8\n",
    ),
}


@pytest.mark.parametrize("name", CASES)
def test_texts(name: str) -> None:
    text, values, wanted = CASES[name]
    assert pinned_text(text, values) == wanted
    assert pinned_text(wanted, values) == wanted


def test_an_array_that_looks_like_a_header_is_none() -> None:
    text = "[kernel]\ntaps = [\n[1, 2],\n[3, 4]\n]\n[input]\nbits = 8\n# end\n"
    made = pinned_text(text, {"coefficient.frac": 5})
    assert made == f"{text}\n[coefficient]\nfrac = 5\n"


SPECS = sorted(
    path
    for folder in (DATA, EXAMPLES)
    for path in folder.glob("*.toml")
    if path.stat().st_size < 20_000
)


@pytest.mark.parametrize("path", SPECS, ids=lambda path: path.stem)
def test_every_spec_at_hand_keeps_its_comments_and_reads_as_meant(path: Path) -> None:
    text = path.read_bytes().decode()
    values: dict[str, PinValue] = {"coefficient.frac": 3, "accumulator.bits": 33, "output.bits": 9}
    made = pinned_text(text, values)
    assert pinned_text(made, values) == made
    old, new = tomllib.loads(text), tomllib.loads(made)
    for key, value in values.items():
        table, _, name = key.partition(".")
        assert new[table].pop(name) == value
        old.setdefault(table, {}).pop(name, None)
    assert new == old
    left = iter(made.splitlines())
    # Every line that pins nothing is still there, in its old order.
    names = ("frac", "bits", "coefficient", "accumulator", "output")
    for line in text.splitlines():
        if not line.lstrip().startswith(names):
            assert line in left


def test_a_pinned_spec_reads_as_what_was_pinned() -> None:
    path = DATA / "response-without-pinned.toml"
    spec = read_spec(path)
    assert spec.coefficient.pinned is None
    made = pinned_text(path.read_text(), {"coefficient.bits": 6, **TAPS})
    pinned = parse_spec(made, str(path), path.parent).coefficient
    assert pinned.pinned is not None and pinned.pinned.taps == ((3, -26, 3),)
    assert (pinned.bits, pinned.frac, pinned.fit) == (6, (5,), spec.coefficient.fit)


INTEGERS = st.integers(-(2**31), 2**31)
VALUES = st.one_of(
    INTEGERS,
    st.sampled_from(["auto", "response", 'a "quoted" # word']),
    st.lists(INTEGERS, max_size=4),
    st.lists(st.lists(INTEGERS, min_size=1, max_size=4), min_size=1, max_size=3),
)
LINES = st.lists(
    st.sampled_from(
        ["# a note", "", "a = 1", "b = [1, # one\n 2]", "c = '''\n[input]\n'''", "d.e=1"]
    ),
    max_size=6,
    unique=True,
)
TABLES = ("filter", "input", "coefficient", "intermediate", "accumulator", "image")


@st.composite
def documents(draw: st.DrawFn) -> str:
    names = draw(st.lists(st.sampled_from(TABLES), unique=True))
    parts = [line for name in names for line in (f"[{name}]", *draw(LINES))]
    text = "\n".join(parts) + draw(st.sampled_from(["", "\n"]))
    return text.replace("\n", draw(st.sampled_from(["\n", "\r\n"])))


KEYS = st.sampled_from(
    ["coefficient.frac", "coefficient.pinned", "intermediate.bits", "intermediate.accumulator.bits"]
)


@given(documents(), st.dictionaries(KEYS, VALUES, min_size=1))
@settings(max_examples=examples(200), deadline=None)
def test_any_document_reads_as_the_old_one_with_the_values(
    text: str, values: dict[str, Any]
) -> None:
    made = pinned_text(text, values)
    document = tomllib.loads(made)
    for key, value in values.items():
        found: Any = document
        for part in key.split("."):
            found = found[part]
        assert found == value
    assert pinned_text(made, values) == made
    assert made.count("#") >= text.count("#")
    if "\r\n" in text:
        assert made.count("\r\n") == made.count("\n")
