"""What cannot be fitted is said: kind, place, values, and a sentence for each."""

from dataclasses import replace
from fractions import Fraction
from string import Formatter
from typing import Any

import pytest

from guardbit.fit.resolve import resolve
from guardbit.model.enums import Container, FitRule, Rounding
from guardbit.model.finding import Finding, SpecError
from guardbit.model.spec import Auto, Pinned, Registers, Spec, Sum
from guardbit.report.words_fit import WORDS

from .specs import EXACT, GAIN, PRELOADED, spec

AUTO = Auto.AUTO
RESPONSE = {"fit": FitRule.RESPONSE, "bits": 8}
PINNED = Pinned(((1, 2),), None, None)
VECTORS: dict[str, Any] = {"column": [1, 2], "row": [3, 4]}


def registered(
    taps: list[list[int | str]], registers: Registers, **coefficient: tuple[int] | int
) -> Spec:
    return spec(taps, coefficient={"frac": (0,), "registers": registers} | coefficient)


def findings(made: Spec) -> tuple[Finding, ...]:
    with pytest.raises(SpecError) as caught:
        resolve(made)
    assert caught.value.status == 2
    return caught.value.findings


CASES: list[tuple[str, Spec, str, dict[str, Any]]] = [
    (
        "tap-too-wide",
        spec([[1, 2], [-200, 130]], coefficient={"bits": 8, "frac": (0,)}),
        "coefficient.bits",
        {"tap": "taps[1][0]", "integer": "-200", "needed": 9, "bits": 8, "sign": "signed"},
    ),
    (
        "tap-too-wide",
        # A tie at the top rounds to even, out of the register: an error, never clamped.
        spec([["15/2"]], coefficient={"bits": 4, "frac": (0,)}),
        "coefficient.bits",
        {"integer": "8", "ideal": "15/2", "needed": 5},
    ),
    (
        "tap-too-wide",
        spec(column=[1, 2], row=[3, 9], coefficient={"bits": 4, "frac": (0, 0)}),
        "coefficient.bits",
        {"tap": "row[1]", "needed": 5},
    ),
    (
        "tap-too-wide",
        spec([[300]], coefficient=EXACT | {"bits": 9}),
        "coefficient.bits",
        {"needed": 10},
    ),
    (
        "tap-too-wide",
        spec([[1, 2]], coefficient={"bits": 2, "frac": (0,), "pinned": PINNED}),
        "coefficient.pinned",
        {"tap": "taps[0][1]", "needed": 3},
    ),
    (
        "tap-over-limit",
        spec([[1]], coefficient={"frac": (40,)}),
        "coefficient.bits",
        {"needed": 42},
    ),
    (
        "tap-negative",
        spec([[3, -1]], coefficient={"bits": 8, "signed": False, "frac": (0,)}),
        "coefficient.signed",
        {"tap": "taps[0][1]", "integer": "-1"},
    ),
    (
        "gain-impossible",
        spec([[5, 5]], coefficient=GAIN | {"bits": 3, "frac": (0,)}),
        "coefficient.fit",
        {"sum": "10", "least": -8, "greatest": 6},
    ),
    (
        "bits-auto-inexact",
        spec([[1, "1/3"]]),
        "coefficient.bits",
        {"tap": "taps[0][1]", "value": "1/3", "frac": "auto"},
    ),
    (
        "bits-auto-inexact",
        spec([[1, "1/4"]], coefficient={"frac": (1,)}),
        "coefficient.bits",
        {"tap": "taps[0][1]", "frac": 1},
    ),
    (
        "bits-auto-inexact",
        spec([[1, Fraction(1, 2**65)]], coefficient=GAIN),  # type: ignore[list-item]
        "coefficient.bits",
        {"tap": "taps[0][1]", "frac": "auto"},
    ),
    (
        "no-frac-fits",
        spec([[1, 2**80]], coefficient={"bits": 8}),
        "coefficient.frac",
        {"tap": "taps[0][1]", "ideal": "about 1.20892581961E+24"},
    ),
    (
        # A negative tap "fits" an unsigned register only when scaled to nothing.
        "no-frac-fits",
        spec([[-1, 5, -2]], coefficient={"bits": 8, "signed": False}),
        "coefficient.frac",
        {"tap": "taps[0][2]", "ideal": "-2"},
    ),
    (
        "no-frac-fits",
        spec([[1]], coefficient=GAIN | {"bits": 1}),
        "coefficient.frac",
        {"bits": 1, "sign": "signed"},
    ),
    (
        "exact-tap-not-integer",
        spec([[1, "3/2"]], coefficient=EXACT),
        "kernel.taps",
        {"tap": "taps[0][1]", "value": "3/2"},
    ),
    (
        "exact-divisor-not-integer",
        spec([[1]], kernel={"divisor": (Fraction(5, 2),)}, coefficient=EXACT),
        "kernel.divisor",
        {"divisor": "5/2"},
    ),
    (
        "exact-divisor-not-integer",
        spec([[1, -3]], kernel={"divisor": (Sum.SUM,)}, coefficient=EXACT),
        "kernel.divisor",
        {"divisor": "-2"},
    ),
    (
        "divisor-sum-zero",
        spec([[-1, 0, 1]], kernel={"divisor": (Sum.SUM,)}),
        "kernel.divisor",
        {"taps": "kernel.taps"},
    ),
    (
        "scalar-with-pair",
        spec(**VECTORS, kernel={"divisor": (Fraction(4),)}, coefficient={"frac": (1, 1)}),
        "kernel.divisor",
        {"cause": "coefficient.frac"},
    ),
    (
        "scalar-with-pair",
        spec(**VECTORS, kernel={"divisor": (2, 2)}, coefficient={"frac": (3,)}),
        "coefficient.frac",
        {"cause": "kernel.divisor"},
    ),
    (
        # Written out, even the default is a scalar.
        "scalar-with-pair",
        spec(**VECTORS, lines={"coefficient.frac": 7}, intermediate={}),
        "coefficient.frac",
        {"cause": "intermediate"},
    ),
    (
        "pair-needs-vectors",
        spec([[1]], intermediate={}),
        "intermediate",
        {"cause": "intermediate"},
    ),
    (
        "pair-needs-vectors",
        spec([[1]], coefficient={"frac": (1, 2)}),
        "coefficient.frac",
        {"cause": "coefficient.frac"},
    ),
    (
        "pinned-shape",
        spec([[1], [2]], coefficient={"bits": 8, "frac": (0,), "pinned": PINNED}),
        "coefficient.pinned",
        {"part": "taps", "wanted": "2x1", "given": "1x2"},
    ),
    (
        "pinned-shape",
        spec([[1, 2], [3, 4]], coefficient={"pinned": Pinned(((1, 2), (3,)), None, None)}),
        "coefficient.pinned",
        {"given": "ragged"},
    ),
    (
        "pinned-without-frac",
        spec([[1, 2]], coefficient={"pinned": PINNED}),
        "coefficient.frac",
        {},
    ),
    (
        "pinned-with-exact",
        spec([[1, 2]], coefficient=EXACT | {"pinned": PINNED}),
        "coefficient.pinned",
        {},
    ),
    ("response-not-pinned", spec([[1]], coefficient=RESPONSE), "coefficient.fit", {}),
    (
        # 200 is a code of the input, and not of a 7-bit output.
        "pedestal-no-code",
        spec([[1]], output={"bits": 7, "pedestal": 200}),
        "output.pedestal",
        {"code": 200, "least": 0, "greatest": 127, "table": "output"},
    ),
    (
        "pedestal-no-code",
        spec(**VECTORS, intermediate={"bits": 4, "pedestal": 8}),
        "intermediate.pedestal",
        {"greatest": 7, "table": "intermediate"},
    ),
    (
        "nominal-outside-limits",
        registered([[1, 9]], Registers(((0, 0),), ((9, 8),), None, None, ())),
        "coefficient.registers",
        {"tap": "taps[0][1]", "integer": 9, "least": 0, "greatest": 8},
    ),
    (
        "nominal-without-register",
        # 1/8 is fitted to 0, which its register holds
        registered([["1/8", 9]], Registers(((0, 0),), ((0, 9),), None, None, ()), bits=8),
        "coefficient.registers",
        {"tap": "taps[0][0]", "ideal": "1/8"},
    ),
    (
        "nominal-sum",
        registered([[1, 9]], Registers(((0, 0),), ((9, 9),), 9, None, ())),
        "coefficient.registers",
        {"got": 10, "sum": 9},
    ),
    (
        "nominal-magnitudes",
        registered([[1, -9]], Registers(((-9, -9),), ((9, 9),), -8, 9, ())),
        "coefficient.registers",
        {"got": 10, "magnitudes": 9},
    ),
    (
        "nominal-not-listed",
        registered([[1, 9]], Registers(((1, 1),), ((9, 9),), None, None, (((1, 1),), ((9, 9),)))),
        "coefficient.registers",
        {"taps": "[[1, 9]]"},
    ),
    ("range-reversed", spec([[1]], output={"range": (9, 3)}), "output.range", {"least": 9}),
    (
        "range-outside-format",
        # The output is signed because the input is.
        spec([[1]], input={"signed": True}, output={"range": (0, 255)}),
        "output.range",
        {"code": 255, "least": -128, "greatest": 127},
    ),
    (
        "container-too-small",
        spec([[1]], input={"bits": 12}, output={"container": Container.U8}),
        "output.container",
        {"container": "u8", "bits": 12, "smallest": "u16"},
    ),
    (
        "container-too-small",
        spec([[1]], input={"container": Container.I8}),
        "input.container",
        {"sign": "unsigned"},
    ),
    (
        "border-value-no-code",
        spec([[1]], border={"value": 256}),
        "border.value",
        {"code": 256, "table": "input"},
    ),
    (
        "preload-other-rounding",
        replace(spec([["1/2"]], output={"rounding": Rounding.TIES_TO_EVEN}), accumulator=PRELOADED),
        "accumulator.preload",
        {"rounding": "ties-to-even"},
    ),
    (
        "preload-with-exact",
        replace(spec([[1]], coefficient=EXACT), accumulator=PRELOADED),
        "accumulator.preload",
        {},
    ),
    (
        "preload-without-shift",
        spec(**VECTORS, intermediate={"accumulator": PRELOADED, "frac": 1}),
        "intermediate.accumulator.preload",
        {"shift": -1},
    ),
]


@pytest.mark.parametrize(("kind", "made", "key", "values"), CASES)
def test_one_finding(kind: str, made: Spec, key: str, values: dict[str, Any]) -> None:
    (found,) = findings(made)
    assert found.kind == kind
    assert (found.place.file, found.place.key) == ("station.toml", key)
    assert {name: found.value(name) for name in values} == values
    for sentence in WORDS[kind]:
        assert "{" not in sentence.format_map(dict(found.values))


def test_every_kind_with_words_is_raised() -> None:
    assert {kind for kind, _, _, _ in CASES} == set(WORDS)


def test_every_reason_says_its_values() -> None:
    for kind, made, _, _ in CASES:
        (found,) = findings(made)
        used = {name for text in WORDS[kind] for _, name, _, _ in Formatter().parse(text) if name}
        assert used <= dict(found.values).keys()


def test_all_findings_at_once_in_the_order_of_lines() -> None:
    made = spec(
        [[300]],
        coefficient={"bits": 8, "frac": (0,)},
        output={"bits": 4, "pedestal": 99, "range": (0, 77)},
        border={"value": -1},
        lines={"border.value": 30, "coefficient.bits": 9, "output.range": 20},
    )
    found = [(each.place.line, each.kind) for each in findings(made)]
    assert found == [
        (9, "tap-too-wide"),
        (20, "range-outside-format"),
        (30, "border-value-no-code"),
        (None, "pedestal-no-code"),
    ]


def test_both_vectors_are_reported() -> None:
    made = spec(column=["1/3"], row=["1/5"], kernel={"divisor": (1, 1)})
    assert [each.value("tap") for each in findings(made)] == ["column[0]", "row[0]"]


def test_pinned_vectors_of_the_wrong_kind() -> None:
    pinned = Pinned(((1,),), None, None)
    made = spec(column=[1], row=[1, 1], coefficient={"frac": (0, 0), "pinned": pinned})
    shapes = [(each.value("part"), each.value("given")) for each in findings(made)]
    assert shapes == [("column", "none"), ("row", "none")]


@pytest.mark.parametrize(
    ("lines", "key"),
    [({"kernel.file": 4}, "kernel.file"), ({"kernel.formula": 4}, "kernel.formula")],
)
def test_place_is_the_key_that_gave_the_taps(lines: dict[str, int], key: str) -> None:
    (found,) = findings(spec([["1/2"]], coefficient=EXACT, lines=lines))
    assert (found.place.key, found.place.line) == (key, 4)


# Beyond 4300 digits Python refuses to print an integer.
ENORMOUS = {
    "large": Fraction(10**5000),
    "negative": Fraction(-(10**5000)),
    "small": Fraction(1, 10**5000),
    "tiny": Fraction(7, 10**400),
}


@pytest.mark.parametrize("name", ENORMOUS)
@pytest.mark.parametrize("keys", [{}, {"frac": (3,), "bits": 8}, GAIN | {"bits": 8}, EXACT])
def test_enormous_numbers_are_no_obstacle(name: str, keys: dict[str, Any]) -> None:
    made = spec([[1]], coefficient=keys)
    made = replace(made, kernel=replace(made.kernel, taps=((ENORMOUS[name],),)))
    try:
        assert resolve(made).passes
    except SpecError as error:
        for found in error.findings:
            reason, _ = WORDS[found.kind]
            assert len(reason.format_map(dict(found.values))) < 400
