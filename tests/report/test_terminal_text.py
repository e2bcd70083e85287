from collections.abc import Callable
from dataclasses import replace
from fractions import Fraction
from io import StringIO

import pytest

from guardbit.model.certificate import Digest, RungResult
from guardbit.model.decimals import lower, signed, upper
from guardbit.model.filter import TapSet
from guardbit.model.finding import Place, finding
from guardbit.model.sizing import Interval, Sizing
from guardbit.report.glossary import GLOSSARY, meaning
from guardbit.report.look import Look, look_of
from guardbit.report.terminal import emit_text, finding_line, next_line, size_text, verify_text
from guardbit.report.text import grouped, ratio, shown

Snapshot = Callable[[str, str], None]
PIPE = Look()
NARROW = Look(80, colour=True, fine=True)


def _two_passes(sizing: Sizing) -> Sizing:
    """Return the sizing with a second register, 64 bits wide, that is too narrow."""
    huge = Interval(-(2**66), 2**66)
    wide = replace(
        sizing.registers[0],
        name="intermediate.accumulator",
        bits=64,
        final=huge,
        partial=huge,
        exact=False,
        bits_forbid=68,
        bits_wrap=68,
        spare=-4,
        headroom=Fraction(2**63 - 1, 2**66),
    )
    filter_ = replace(sizing.filter, passes=sizing.filter.passes * 2)
    first = replace(sizing.requantisers[0], name="intermediate")
    return replace(
        sizing,
        filter=filter_,
        registers=(wide, sizing.registers[0]),
        requantisers=(first, sizing.requantisers[0]),
    )


def test_size_in_a_pipe(sizing: Sizing, snapshot: Snapshot) -> None:
    snapshot("size_pipe.txt", size_text(PIPE, sizing))


def test_size_on_a_terminal(sizing: Sizing, snapshot: Snapshot) -> None:
    snapshot("size_terminal.txt", size_text(NARROW, sizing))


def test_size_of_two_passes(sizing: Sizing, snapshot: Snapshot) -> None:
    snapshot("size_two_passes.txt", size_text(PIPE, _two_passes(sizing)))


def test_size_of_taps_that_are_loaded(sizing: Sizing) -> None:
    (only,) = sizing.filter.passes
    terms = only.kernel.terms
    count = len(terms)
    held = TapSet(count, tuple(range(count)), (-9,) * count, (99,) * count, None, None, ())
    kernel = replace(only.kernel, registers=held)
    filter_ = replace(sizing.filter, passes=(replace(only, kernel=kernel),))
    text = size_text(PIPE, replace(sizing, filter=filter_))
    assert f"{count} taps loaded in" in text
    assert "of the spec's own kernel" in text and "own kernel" not in size_text(PIPE, sizing)


def test_emit(sizing: Sizing, snapshot: Snapshot) -> None:
    files = (Digest("soften3.h", "ab" * 32), Digest("soften3.cert.json", "cd" * 32))
    snapshot("emit_pipe.txt", emit_text(PIPE, sizing.filter, "out", files))


def test_verify_in_a_pipe(
    sizing: Sizing, rungs: tuple[RungResult, ...], snapshot: Snapshot
) -> None:
    snapshot("verify_pipe.txt", verify_text(PIPE, sizing.filter, sizing.error, rungs))


def test_verify_on_a_terminal(
    sizing: Sizing, rungs: tuple[RungResult, ...], snapshot: Snapshot
) -> None:
    snapshot("verify_terminal.txt", verify_text(NARROW, sizing.filter, sizing.error, rungs))


@pytest.mark.parametrize(
    ("kept", "verdict"),
    [
        ((0,), "holds"),
        ((0, 1), "FAILS"),
        ((0, 2), "FAILS"),
        ((0, 3), "incomplete"),
        ((1, 3), "FAILS"),
        ((), "incomplete"),
    ],
)
def test_verdict(
    sizing: Sizing, rungs: tuple[RungResult, ...], kept: tuple[int, ...], verdict: str
) -> None:
    text = verify_text(PIPE, sizing.filter, sizing.error, [rungs[i] for i in kept])
    assert verdict in text.splitlines()[-1]


@pytest.mark.parametrize("width", [40, 60, 80, 100, 110])
def test_no_line_is_too_long(sizing: Sizing, rungs: tuple[RungResult, ...], width: int) -> None:
    look = Look(width)
    two = _two_passes(sizing)
    text = size_text(look, two) + verify_text(look, two.filter, two.error, rungs)
    assert max(len(line) for line in text.splitlines()) <= width
    assert not any(line.endswith(" ") for line in text.splitlines())


def test_plain_text_is_ascii_and_tame(sizing: Sizing, rungs: tuple[RungResult, ...]) -> None:
    text = size_text(PIPE, sizing) + verify_text(PIPE, sizing.filter, sizing.error, rungs)
    assert text.isascii()
    assert all(c == "\n" or c.isprintable() for c in text)


def test_colour_never_stands_alone(sizing: Sizing, rungs: tuple[RungResult, ...]) -> None:
    """Each state keeps its word and its sign when the colours are taken away."""
    for look in (PIPE, NARROW):
        text = verify_text(look, sizing.filter, sizing.error, rungs)
        for state, word in (("holds", "holds"), ("fails", "FAILS"), ("not run", "not run")):
            assert f"{look.sign(state)} {word}" in text


def test_foreign_escape_sequences_do_not_reach_a_terminal(sizing: Sizing) -> None:
    assert "\x1b[31m" not in size_text(NARROW, sizing)
    hostile = finding("starter-exists", Place("a\x1b]0;x\x07.toml"), path="\x1b[2Jx")
    assert "\x1b" not in finding_line(PIPE, hostile)
    assert finding_line(NARROW, hostile).count("\x1b") == 2


def test_finding_stays_on_one_line() -> None:
    found = finding("starter-exists", Place("a.toml", 3, "filter.name"), path="x" * 300)
    line = finding_line(Look(40), found)
    assert line.startswith("a.toml:3: filter.name: ")
    assert line.count("\n") == 1


def test_next_line_wraps() -> None:
    assert next_line(Look(40), "go " * 20).count("\n") > 1


class _Terminal(StringIO):
    encoding = "utf-8"

    def isatty(self) -> bool:
        return True


@pytest.mark.parametrize(
    ("environment", "colour"),
    [
        ({"TERM": "xterm-256color"}, True),
        ({"TERM": "xterm", "NO_COLOR": "1"}, False),
        ({"TERM": "xterm", "NO_COLOR": ""}, True),
        ({"TERM": "dumb"}, False),
        ({}, False),
    ],
)
def test_look_of_a_terminal(environment: dict[str, str], colour: bool) -> None:
    look = look_of(_Terminal(), environment, 80)
    assert (look.width, look.colour, look.fine) == (80, colour, colour)


@pytest.mark.parametrize(("columns", "width"), [(0, 40), (30, 40), (80, 80), (300, 110)])
def test_width_of_a_terminal(columns: int, width: int) -> None:
    assert look_of(_Terminal(), {"TERM": "xterm"}, columns).width == width


def test_look_of_a_pipe_does_not_depend_on_the_terminal() -> None:
    assert look_of(StringIO(), {"TERM": "xterm"}, 55) == Look(100)


@pytest.mark.parametrize(
    ("value", "low", "high"),
    [
        (Fraction(0), "0", "0"),
        (Fraction(1, 2), "0.5", "0.5"),
        (Fraction(1, 3), "0.333333", "0.333334"),
        (Fraction(-1, 3), "-0.333334", "-0.333333"),
        (Fraction(-7), "-7", "-7"),
        (Fraction(1, 10**9), "0", "0.000001"),
        (Fraction(-1, 10**9), "-0.000001", "0"),
        (Fraction(10**30, 3), "3" * 30 + ".333333", "3" * 30 + ".333334"),
        (Fraction(999999999, 10**9), "0.999999", "1"),
    ],
)
def test_decimals_are_rounded_outward(value: Fraction, low: str, high: str) -> None:
    assert (lower(value), upper(value)) == (low, high)
    assert Fraction(low) <= value <= Fraction(high)


@pytest.mark.parametrize(
    ("value", "text"),
    [
        (Fraction(32767, 1020), "32.1"),
        (Fraction(128, 1), "128"),
        (Fraction(9999, 10000), "0.999"),
        (Fraction(4095, 4080), "1.003"),
        (Fraction(1), "1"),
        (Fraction(2**40), "over 2^39"),
    ],
)
def test_ratio_never_promises_more(value: Fraction, text: str) -> None:
    assert ratio(value) == text


def test_small_texts() -> None:
    assert [signed(t) for t in ("0", "1", "-1")] == ["0", "+1", "-1"]
    assert grouped(1204) == "1,204"
    assert shown("a\tb\u202e\ud800\u00e9") == "a\\tb\\u202e\\ud800\u00e9"


def test_every_word_has_a_meaning() -> None:
    assert meaning("Spare-Bits") == meaning("spare bit") or meaning("spare bits") is not None
    assert meaning("taps") == meaning("tap") is not None
    assert meaning("no such word") is None
    assert len({name for name, _ in GLOSSARY}) == len(GLOSSARY)
