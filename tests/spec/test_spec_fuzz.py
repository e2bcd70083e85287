"""Whatever the bytes, a spec or findings: never another exception."""

import random
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from guardbit.model.finding import Finding, SpecError
from guardbit.report.wording import WORDS
from guardbit.spec.reader import parse_spec, read_spec
from tools import EXPLORING, examples

DATA = Path(__file__).parents[1] / "data"
SPECS = [path.read_bytes() for path in sorted((DATA / "valid").glob("*.toml"))]
SMALL = [data for data in SPECS if len(data) < 3000]
SPLICES = [b'"', b"'''", b"[", b"]", b"{}", b"[[", b".", b"=", b"\n", b"#", b"\\", b"\0", b"\xff"]
SPLICES += [b"nan", b"-inf", b"1e999", b"99999999999999999999", b"true", b'"auto"', b'"sum"', b"-"]
OTHERS = [b"[[1, 2], [3]]", b"[[1, nan]]", b"0", b"65", b"-129", b"0.5", b'"a b"', b'"wrap"']
OTHERS += [b"[2, 1]", b"[1, 9]", b'["sum", 3]', b"true", b'"exact"', b"1e999", b"[]", b'"none.csv"']
SPLICES += [b"1979-05-27", b"0x7f", b"[1, 2]", b"{ a = 1 }", b'"1/0"', b"\xef\xbb\xbf", b"_"]


def findings(text: str) -> tuple[Finding, ...]:
    """The findings about a text; every one has words, and its values fill them."""
    try:
        parse_spec(text, "fuzz.toml", DATA / "valid")
    except SpecError as error:
        for found in error.findings:
            values = {name: value for name, value in found.values if value is not None}
            said = "".join(words.format_map(values) for words in WORDS[found.kind])
            assert f"{said}{found.place.key or ''}".isprintable()
            assert 0 < (found.place.line or 1) <= text.count("\n") + 1
        assert error.findings
        return error.findings
    return ()


def other_value(rng: random.Random, data: bytes) -> bytes:
    """The spec with the value of one line replaced: still TOML, no longer sound."""
    lines = data.split(b"\n")
    at = rng.randrange(len(lines))
    key, equals, _ = lines[at].partition(b" = ")
    lines[at] = key + equals + rng.choice(OTHERS) if equals else lines[at]
    return b"\n".join(lines)


def mutated(rng: random.Random) -> bytes:
    chosen = rng.choice(SMALL)
    if rng.random() < 0.7:
        return other_value(rng, other_value(rng, chosen) if rng.random() < 0.5 else chosen)
    data = bytearray(chosen)
    for _ in range(rng.randint(1, 4)):
        at = rng.randrange(len(data) + 1)
        match rng.randrange(4):
            case 0:
                data[at : at + rng.randint(1, 8)] = b""
            case 1:
                data[at:at] = rng.choice(SPLICES)
            case 2:
                data[at : at + rng.randint(1, 6)] = rng.choice(SPLICES)
            case 3:
                start = rng.randrange(len(data) + 1)
                data[at:at] = data[start : start + rng.randint(1, 30)]
    return bytes(data)


def test_mutated_specs() -> None:
    rng = random.Random(None if EXPLORING else 2024)
    kinds: set[str] = set()
    for _ in range(examples(3000)):
        kinds |= {f.kind for f in findings(mutated(rng).decode("utf-8", "surrogateescape"))}
    assert len(kinds) > 30


@given(st.binary(max_size=200))
@settings(max_examples=examples(200), deadline=None)
def test_random_bytes_in_a_file(tmp_path_factory: pytest.TempPathFactory, data: bytes) -> None:
    path = tmp_path_factory.mktemp("fuzz") / "a.toml"
    path.write_bytes(data)
    with pytest.raises(SpecError) as caught:
        read_spec(path)
    assert caught.value.findings


KEYS = ["name", "taps", "bits", "frac", "range", "divisor", "pinned", "origin", "size", "file"]
TABLES = ["filter", "kernel", "input", "coefficient", "intermediate", "intermediate.accumulator"]
TABLES += ["accumulator", "output", "border", "image", "goal", "x"]
SCALAR = st.sampled_from(["1", "-3", "0.5", "nan", "true", '"auto"', '"1/2"', '"x"', "07:32:00"])
VALUE = st.recursive(SCALAR, lambda v: st.lists(v, max_size=4).map(lambda i: f"[{', '.join(i)}]"))
STATEMENTS = st.dictionaries(st.sampled_from(KEYS), VALUE, max_size=5)


@given(st.dictionaries(st.sampled_from(TABLES), STATEMENTS, max_size=6))
@settings(max_examples=examples(300), deadline=None)
def test_any_value_at_any_key(tables: dict[str, dict[str, str]]) -> None:
    blocks = [
        "\n".join([f"[{table}]", *(f"{key} = {value}" for key, value in statements.items())])
        for table, statements in tables.items()
    ]
    found = findings("\n".join(blocks))
    for table, statements in tables.items():
        wrong = [f"{table}.{key}" for key in statements if table in ("x", "goal")]
        assert not wrong or any(f.place.key == table for f in found)
