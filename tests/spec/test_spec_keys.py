"""The key table: whole, consistent with what the reader gives, and able to explain itself."""

from pathlib import Path

import pytest

from guardbit.files.reading import label
from guardbit.model.canonical import plain
from guardbit.model.finding import SpecError
from guardbit.spec.explain import explain
from guardbit.spec.keys import KEYS, TABLES, keys_of
from guardbit.spec.reader import parse_spec
from guardbit.spec.values import FaultyError, convert, shown

LEAST = '[filter]\nname = "a"\n[kernel]\ntaps = [[1]]\n[input]\nbits = 8\n'
ACCUMULATOR = "bits signed overflow preload"
CONTRACT = {
    "filter": "name operation summary",
    "kernel": "taps column row file formula size sigma axis neighbours divisor origin",
    "input": "bits signed frac pedestal range container outside",
    "coefficient": "bits signed frac fit scale pinned registers",
    "intermediate": "first bits signed frac pedestal rounding overflow",
    "intermediate.accumulator": ACCUMULATOR,
    "accumulator": ACCUMULATOR,
    "output": "bits signed frac pedestal range container rounding overflow",
    "border": "mode value grid",
    "image": "extent width height step phase spacing channels",
    "code": "*",
    "goal": "error snr frames response minimise",
    "budget": "*",
}
# Defaults that the contract words, and the formula's parameters.
DEFAULTS = {
    "filter.operation": '"convolution"',
    "filter.summary": '""',
    "kernel.divisor": "1",
    "input.frac": "0",
    "input.signed": "false",
    "input.outside": '"undefined"',
    "coefficient.bits": '"auto"',
    "coefficient.frac": '"auto"',
    "coefficient.fit": '"nearest"',
    "coefficient.pinned": "none",
    "coefficient.registers": "none: the taps are fixed",
    "intermediate.first": '"vertical"',
    "intermediate.bits": "required",
    "intermediate.signed": "true",
    "intermediate.frac": "the input's",
    "accumulator.overflow": '"forbid"',
    "accumulator.preload": '"zero"',
    "output.bits": "the input's",
    "output.rounding": '"ties-to-positive"',
    "output.overflow": '"saturate"',
    "border.mode": '"constant"',
    "border.value": "the input pedestal",
    "image.extent": '"same"',
    "image.width": "[1, 65535]",
    "image.step": "[1, 1]",
    "image.phase": "[0, 0]",
    "image.channels": "1",
    "goal.error": "none",
    "goal.minimise": '["accumulator", "intermediate", "coefficient"]',
}


def test_every_key_of_the_contract_and_no_other() -> None:
    found = {t.name: " ".join(k.name.rpartition(".")[2] for k in keys_of(t.name)) for t in TABLES}
    assert found == CONTRACT


@pytest.mark.parametrize("name", sorted(DEFAULTS))
def test_defaults_as_the_contract_words_them(name: str) -> None:
    assert KEYS[name].default_text == DEFAULTS[name]


@pytest.mark.parametrize("name", [name for name in KEYS if "*" not in name])
def test_every_key_explains_itself(name: str) -> None:
    key = KEYS[name]
    assert key.explanation.endswith(".") and key.form.wanted and key.default_text
    assert f"{key.explanation}{key.form.wanted}{key.default_text}".isprintable()


@pytest.mark.parametrize(
    "name", [n for n, key in KEYS.items() if key.default is not None and "intermediate" not in n]
)
def test_writing_a_default_changes_nothing(name: str) -> None:
    """A default, written out as it is shown, reads as the default."""
    table, _, key = name.rpartition(".")
    written = f"{key} = {KEYS[name].default_text}\n"
    if f"[{table}]\n" in LEAST:
        text = LEAST.replace(f"[{table}]\n", f"[{table}]\n{written}")
    else:
        text = f"{LEAST}[{table}]\n{written}"
    one, other = (plain(parse_spec(t, "x", Path())) for t in (LEAST, text))
    assert isinstance(one, dict) and isinstance(other, dict)
    assert one[table] == other[table]


def test_explain_one_a_table_and_all() -> None:
    assert [key.name for key in explain("border.mode")] == ["border.mode"]
    assert [key.name for key in explain("border")] == ["border.mode", "border.value", "border.grid"]
    assert len(explain()) == len(KEYS)
    (formula,) = explain("kernel.formula")
    assert len(formula.details) == 6
    assert any("positive where the image grows" in line for line in formula.details)


@pytest.mark.parametrize(
    ("asked", "nearest"),
    [
        ("border.mod", "border.mode"),
        ("bordr", "border"),
        ("frac", "input.frac, coefficient.frac, intermediate.frac, output.frac"),
        ("xyzzy", ", ".join(CONTRACT)),
    ],
)
def test_explain_something_else(asked: str, nearest: str) -> None:
    with pytest.raises(SpecError) as caught:
        explain(asked)
    (found,) = caught.value.findings
    assert (found.kind, found.value("nearest")) == ("explain-unknown", nearest)


@pytest.mark.parametrize(
    ("name", "low", "high"),
    [
        ("input.bits", 1, 16),
        ("output.bits", 1, 32),
        ("intermediate.bits", 2, 32),
        ("accumulator.bits", 2, 64),
        ("intermediate.accumulator.bits", 2, 64),
        ("coefficient.bits", 1, 32),
        ("input.frac", -64, 64),
        ("output.frac", -64, 64),
        ("image.channels", 1, 16),
    ],
)
def test_limits_at_and_beyond_their_ends(name: str, low: int, high: int) -> None:
    form = KEYS[name].form
    assert [convert(form, end) for end in (low, high)] == [low, high]
    for beyond in (low - 1, high + 1):
        with pytest.raises(FaultyError) as caught:
            convert(form, beyond)
        assert caught.value.faults[0].kind == "out-of-limits"


@pytest.mark.parametrize(
    ("name", "low", "high"),
    [
        ("kernel.origin", -1024, 1024),
        ("image.step", 1, 64),
        ("image.spacing", 1, 64),
        ("image.width", 1, 65535),
        ("image.height", 1, 65535),
        ("kernel.size", 1, 255),
    ],
)
def test_limits_of_pairs(name: str, low: int, high: int) -> None:
    form = KEYS[name].form
    assert convert(form, [low, high]) == (low, high)
    for beyond in ([low - 1, high], [low, high + 1]):
        with pytest.raises(FaultyError):
            convert(form, beyond)


def test_values_are_shown_short_and_printable() -> None:
    raws = ["x" * 1000, 10**5000, [[[1] * 9] * 4] * 4, "\x1b[2J\u202e", {"a": 1}, True]
    for raw in raws:
        assert len(shown(raw)) <= 60 and shown(raw).isprintable()
    assert shown(True) == "true" and shown([1, 2]) == "[1, 2]" and shown([0] * 9) == "a list of 9"


def test_a_path_is_printed_without_its_odd_characters() -> None:
    assert label("a\x1b[31m\udce4.toml") == "a\\x1b[31m\\udce4.toml"
