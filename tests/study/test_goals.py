"""The search for word lengths against going through all of them, and what it says about them."""

from collections.abc import Iterator, Sequence
from dataclasses import replace
from fractions import Fraction
from itertools import product
from pathlib import Path
from typing import TypeAlias

import numpy as np
import pytest

from guardbit.fit.resolve import resolve
from guardbit.model.decimals import lower, lower_decibels, upper_decibels
from guardbit.model.enums import WordLength
from guardbit.model.filter import Filter
from guardbit.model.finding import SpecError
from guardbit.model.goal import GoalSearch, Words
from guardbit.model.routine import Codes
from guardbit.model.spec import Auto, Spec
from guardbit.reference.run import respond
from guardbit.report.goals import goal_text
from guardbit.report.look import Look
from guardbit.sizing.analyse import analyse, unmet
from guardbit.sizing.frequency import frequency
from guardbit.spec.reader import parse_spec
from guardbit.study.goals import search as goals
from guardbit.study.goals.candidates import candidates
from guardbit.study.goals.choices import coefficient_choices, with_words
from guardbit.study.goals.pins import pin_goal
from guardbit.study.goals.screen import screen_of
from guardbit.study.goals.search import search, unmet_goals
from guardbit.study.goals.trials import greatest_error, power_ratio

ACCUMULATOR, INTERMEDIATE, COEFFICIENT = WordLength
ORDERS = [(ACCUMULATOR, INTERMEDIATE, COEFFICIENT), (COEFFICIENT, INTERMEDIATE, ACCUMULATOR)]
Rank: TypeAlias = tuple[tuple[int, ...], Fraction, tuple[int, ...]]


def one_pass(taps: str, divisor: int, goal: str, more: str = "") -> Spec:
    text = f"""[filter]
name = "demo"
[kernel]
taps = [[{taps}]]
divisor = {divisor}
[input]
bits = 4
{more}
[border]
mode = "replicate"
[goal]
{goal}
"""
    return parse_spec(text, "demo.toml", Path())


def two_passes(goal: str, coefficient: str, between: str, column: str = "1, 1, 1") -> Spec:
    text = f"""[filter]
name = "demo"
[kernel]
column = [{column}]
row = [1, 3, 1]
divisor = ["sum", "sum"]
[input]
bits = 4
[coefficient]
{coefficient}
[intermediate]
{between}
[border]
mode = "replicate"
[goal]
{goal}
"""
    return parse_spec(text, "demo.toml", Path())


def ranks(spec: Spec, every: Sequence[Words], order: Sequence[WordLength]) -> Iterator[Rank]:
    """Yield the rank of each choice that reaches the goal, by resolving and analysing it."""
    assert spec.goal is not None
    for words in every:
        made = with_words(spec, words)
        try:
            sizing = analyse(resolve(made))
        except SpecError:
            continue
        error, f = greatest_error(sizing.error), sizing.filter
        if unmet(sizing) or (spec.goal.error is not None and error > spec.goal.error):
            continue
        if spec.goal.response is not None and frequency(f).deviation > spec.goal.response:
            continue
        width = made.coefficient.bits
        lengths = {
            ACCUMULATOR: sum(register.bits for register in sizing.registers),
            INTERMEDIATE: f.passes[0].requantiser.to.bits if len(f.passes) == 2 else 0,
            COEFFICIENT: width if isinstance(width, int) else f.passes[0].kernel.bits,
        }
        fracs = (*(words.coefficient_frac or ()), words.intermediate_frac or 0)
        yield tuple(lengths[word] for word in order), error, fracs


def rank_of(found: GoalSearch, order: Sequence[WordLength]) -> Rank:
    fracs = (*(found.words.coefficient_frac or ()), found.words.intermediate_frac or 0)
    return tuple(found.figures.bits(word) for word in order), found.figures.error, fracs


def ordered(spec: Spec, order: tuple[WordLength, ...]) -> Spec:
    assert spec.goal is not None
    return replace(spec, goal=replace(spec.goal, minimise=order))


@pytest.mark.parametrize("order", ORDERS)
@pytest.mark.parametrize("fit", ["nearest", "gain"])
@pytest.mark.parametrize(
    ("taps", "divisor", "goal"),
    [
        ("1, 3, 1", 9, "error = 0.75"),
        ("-1, 4, -1", 3, "error = 2"),
        ("-3, 5, 2", 7, "error = 0.6\nresponse = 0.02"),
        ("5", 3, "response = 0.01"),
        ("1, 2", 3, "error = 20"),
    ],
)
def test_one_pass_against_all(
    taps: str, divisor: int, goal: str, fit: str, order: tuple[WordLength, ...]
) -> None:
    spec = ordered(one_pass(taps, divisor, goal, f'[coefficient]\nfit = "{fit}"'), order)
    every = [Words(bits, (frac,)) for bits in range(1, 13) for frac in range(-1, 13)]
    assert rank_of(search(spec), order) == min(ranks(spec, every, order))


@pytest.mark.parametrize("order", ORDERS)
@pytest.mark.parametrize("overflow", ["saturate", "wrap", "forbid"])
def test_the_intermediate_against_all(overflow: str, order: tuple[WordLength, ...]) -> None:
    between = f'bits = "auto"\noverflow = "{overflow}"'
    spec = ordered(two_passes("error = 1.4", "bits = 5", between), order)
    spec = replace(spec, coefficient=replace(spec.coefficient, frac=(5, 4)))
    every = [Words(None, None, bits, frac) for bits in range(2, 13) for frac in range(-8, 7)]
    assert rank_of(search(spec), order) == min(ranks(spec, every, order))


@pytest.mark.parametrize("first", ["vertical", "horizontal"])
def test_two_passes_against_all(first: str) -> None:
    between = f'bits = "auto"\nfirst = "{first}"\nrounding = "toward-zero"'
    spec = two_passes("error = 3", "signed = false", between, "-1, 4")
    spec = replace(spec, coefficient=replace(spec.coefficient, signed=True, bits=4))
    every = [
        Words(4, fracs, bits, frac)
        for fracs in product(range(-1, 4), repeat=2)
        for bits in range(3, 9)
        for frac in range(-2, 4)
    ]
    found = search(spec)
    assert found.figures.bits(COEFFICIENT) == 4
    assert rank_of(found, ORDERS[0]) == min(ranks(spec, every, ORDERS[0]))


def test_more_bits_can_be_worse_and_the_search_knows() -> None:
    """1/9, 3/9, 1/9 rounded to 8 bits err all to one side, rounded to 7 they do not (ours)."""
    text = "[coefficient]\nfrac = {}"
    errors = {}
    for frac in (7, 8):
        spec = one_pass("1, 3, 1", 9, "error = 100", text.format(frac))
        spec = replace(spec, input=replace(spec.input, bits=8))
        errors[frac] = search(spec).figures
    assert errors[7].coefficient < errors[8].coefficient
    assert errors[7].error < errors[8].error
    between = (errors[7].error + errors[8].error) / 2
    spec = one_pass("1, 3, 1", 9, f'error = "{between}"\nminimise = ["coefficient"]')
    found = search(replace(spec, input=replace(spec.input, bits=8)))
    assert (found.figures.coefficient, found.figures.error) == (
        errors[7].coefficient,
        errors[7].error,
    )


def test_a_finer_intermediate_can_be_worse() -> None:
    """The mean of 3 x 3 in two passes of 5-bit coefficients, at fracs 0 and 1 (ours)."""
    errors = []
    for frac in (0, 1):
        spec = two_passes("error = 9", "bits = 5\nfrac = [5, 5]", f"bits = 12\nfrac = {frac}")
        spec = replace(spec, kernel=replace(spec.kernel, row=spec.kernel.column))
        errors.append(search(spec).figures.error)
    assert errors[0] < errors[1]


def test_what_binds() -> None:
    spec = one_pass("1, 3, 1", 9, "error = 0.75")
    found = search(spec)
    accumulator, coefficient = found.bindings
    assert accumulator.word is ACCUMULATOR and accumulator.missed is not None
    assert accumulator.bits is not None and accumulator.bits < found.figures.bits(ACCUMULATOR)
    every = [Words(bits, (frac,)) for bits in range(1, 13) for frac in range(-1, 13)]
    free = replace(spec, goal=replace(spec.goal, error=Fraction(10**6)) if spec.goal else None)
    narrower = [
        error
        for lengths, error, _ in ranks(free, every, ORDERS[0])
        if lengths[0] < found.figures.bits(ACCUMULATOR)
    ]
    assert accumulator.missed.goal == "error" and accumulator.proved
    assert accumulator.missed.reached == min(narrower)
    assert accumulator.missed.wanted == Fraction(3, 4)
    assert coefficient.word is COEFFICIENT


def test_the_text_says_what_was_found_and_what_binds() -> None:
    found = search(one_pass("1, 3, 1", 9, "error = 0.75"))
    said = goal_text(Look(), found)
    for key, value in found.values:
        assert f"    {key} " in said and f"  {value}\n" in said
    assert "at best with fewer (" in said and " LSB, over 0.75\n" in said


def test_numbers_that_are_written_stay() -> None:
    spec = one_pass("1, 3, 1", 9, "error = 2", "[coefficient]\nbits = 9\n[accumulator]\nbits = 17")
    found = search(spec)
    assert dict(found.values).keys() == {"coefficient.frac"}
    assert found.figures.accumulators == (17,) and found.figures.coefficient == 9
    assert found.bindings == ()


@pytest.mark.parametrize(
    ("goal", "more", "kind"),
    [
        ("error = 0.01", "", "goal-unreachable"),
        ("response = 1e-30", "[coefficient]\nbits = 6", "goal-unreachable"),
        ("error = 1", "[coefficient]\nbits = 16\nfrac = 15\n[accumulator]\nbits = 4", "no-choice"),
        ("error = 1", "[coefficient]\nbits = 2\nfrac = 9", "tap-too-wide"),
    ],
)
def test_a_goal_out_of_reach(goal: str, more: str, kind: str) -> None:
    with pytest.raises(SpecError) as caught:
        search(one_pass("1, 3, 1", 9, goal, more))
    assert kind in caught.value.findings[0].kind
    assert caught.value.status == 2


def test_screened_bounds_hold() -> None:
    """Whatever frames show is never above what analysis finds, in bits and in error."""
    spec = two_passes("error = 1", "bits = 5", 'bits = "auto"', "-1, 3")
    choices = coefficient_choices(spec)
    plain = with_words(spec, Words(5, choices[0].fracs, 32, 0))
    screen = screen_of(resolve(plain), choices[0], 5)
    assert screen is not None
    found = candidates(spec, choices, screen)
    assert len(found) > 10_000
    for at in range(0, len(found), len(found) // 60):
        choice = choices[found.choice[at]]
        between = Words(None, None, int(found.between_bits[at]), int(found.between_frac[at]))
        words = replace(between, coefficient_bits=choice.bits, coefficient_frac=choice.fracs)
        sizing = analyse(resolve(with_words(spec, words)))
        error = greatest_error(sizing.error)
        assert screen.shown_error(choice, between) <= error
        assert found.error[at] <= float(error)
        assert found.accumulators[at] <= sum(register.bits for register in sizing.registers)


def test_open_words_are_refused_and_pinned_ones_are_not() -> None:
    text = Path(__file__).parents[1].joinpath("data/valid/goal.toml").read_text()
    text = text.replace('snr = "99/2"\n', "").replace(
        'frames = ["spots/line1.pgm", "missing.npy"]\n', ""
    )
    text = text.replace("response = 1e-3", "response = 0.05")
    spec = parse_spec(text, "demo.toml", Path())
    with pytest.raises(SpecError) as caught:
        resolve(spec)
    keys = [each.value("got") for each in caught.value.findings]
    assert keys == [
        "coefficient.bits",
        "coefficient.frac",
        "intermediate.bits",
        "intermediate.frac",
    ]
    assert {each.kind for each in caught.value.findings} == {"word-open"}
    found = search(spec)
    pinned = parse_spec(pin_goal(spec, text, found), "demo.toml", Path())
    sizing = analyse(resolve(pinned))
    assert pinned.goal == spec.goal and isinstance(pinned.accumulator.bits, int)
    assert greatest_error(sizing.error) == found.figures.error
    assert tuple(register.bits for register in sizing.registers) == found.figures.accumulators
    assert unmet(sizing) == () and unmet_goals(pinned, sizing) == ()


def test_a_recorded_goal_is_checked_again() -> None:
    spec = one_pass(
        "1, 3, 1", 9, "error = 0.5\nresponse = 0.001", "[coefficient]\nbits = 6\nfrac = 5"
    )
    sizing = analyse(resolve(spec))
    found = unmet_goals(spec, sizing)
    assert [(each.kind, each.place.key) for each in found] == [
        ("goal-not-met", "goal.error"),
        ("goal-not-met", "goal.response"),
    ]


def test_a_response_fit_is_pinned() -> None:
    spec = one_pass("1, 3, 2", 9, "error = 2\nresponse = 0.02", '[coefficient]\nfit = "response"')
    found = search(spec)
    assert found.integers is not None and len(found.integers[0][0]) == 3
    text = '[filter]\nname = "demo"\n[kernel]\ntaps = [[1, 3, 2]]\ndivisor = 9\n[input]\nbits = 4\n'
    text += '[coefficient]\nfit = "response"\n[border]\nmode = "replicate"\n'
    text += "[goal]\nerror = 2\nresponse = 0.02\n"
    pinned = parse_spec(pin_goal(spec, text, found), "demo.toml", Path())
    assert unmet_goals(pinned, analyse(resolve(pinned))) == ()


def test_decibels() -> None:
    assert power_ratio(Fraction(20)) == 100 and power_ratio(Fraction(-10)) == Fraction(1, 10)
    assert abs(power_ratio(Fraction(3)) - Fraction("1.9952623149688796")) < Fraction(1, 10**15)


def power(f: Filter, frames: Sequence[Codes]) -> Fraction | None:
    """Return the power of the codes by that of their distance from the ideal, inside the frames."""
    signal, error = Fraction(0), Fraction(0)
    for frame in frames:
        output = respond(f, frame).output[:, :, 0]
        for y, x in np.ndindex(output.shape):
            ideal = Fraction(0)
            for term in f.passes[0].kernel.terms:
                at = min(max(x + term.dx, 0), frame.shape[1] - 1)
                ideal += term.ideal * int(frame[y, at, 0])
            signal += ideal**2
            error += (int(output[y, x]) - ideal) ** 2
    return signal / error if error else None


@pytest.mark.parametrize("decibels", [10, 20, 24])
def test_a_signal_to_noise_ratio_against_all(
    decibels: int, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(goals, "_power", power)
    spec = one_pass("1, 3, 1", 9, f'snr = {decibels}\nframes = ["a.pgm"]')
    frames = [np.arange(48).reshape(4, 12, 1) % 16]
    found = search(spec, frames)
    assert found.figures.snr is not None and found.figures.snr >= 10 ** (decibels // 10)
    reaching = [
        rank
        for words in (Words(bits, (frac,)) for bits in range(1, 13) for frac in range(-1, 13))
        for rank in ranks(spec, [words], ORDERS[0])
        if (ratio := power(analyse(resolve(with_words(spec, words))).filter, frames)) is None
        or ratio >= power_ratio(Fraction(decibels))
    ]
    assert rank_of(found, ORDERS[0]) == min(reaching)


def test_frames_that_do_not_fit(tmp_path: Path) -> None:
    spec = one_pass("1, 3, 1", 9, 'snr = 10\nframes = ["a.npy"]')
    spec = replace(spec, path=str(tmp_path / "demo.toml"))
    with pytest.raises(SpecError) as caught:
        search(spec)
    assert caught.value.findings[0].kind == "file-missing"
    for shape, most, kind in (((3, 4), 16, "codes"), ((3, 4, 3), 15, "channels")):
        np.save(tmp_path / "a.npy", np.full(shape, most, np.uint8))
        with pytest.raises(SpecError) as caught:
            search(spec)
        assert caught.value.findings[0].kind == f"goal-frame-{kind}"
        assert caught.value.findings[0].place.key == "goal.frames"


@pytest.mark.parametrize(
    ("more", "kind"),
    [("[image]\nwidth = [1, 3]", "size"), ("[image]\nheight = [4, 9]", "size"), ("range", "codes")],
)
def test_frames_outside_the_contract_do_not_count(tmp_path: Path, more: str, kind: str) -> None:
    """A frame without legal outputs shows no error, and any ratio would be reached."""
    spec = one_pass("1, 3, 1", 9, 'snr = 90\nframes = ["a.npy"]', "" if more == "range" else more)
    spec = replace(spec, path=str(tmp_path / "demo.toml"))
    if more == "range":
        spec = replace(spec, input=replace(spec.input, range=(0, 9)))
    np.save(tmp_path / "a.npy", np.full((3, 4), 12, np.uint8))
    with pytest.raises(SpecError) as caught:
        search(spec)
    assert [each.kind for each in caught.value.findings] == [f"goal-frame-{kind}"]


def test_a_fixed_intermediate_is_not_open() -> None:
    spec = two_passes("error = 3", "bits = 6", "bits = 8\nfrac = 2")
    assert isinstance(spec.accumulator.bits, Auto)
    found = search(spec)
    assert found.words.intermediate_bits is None
    assert [binding.word for binding in found.bindings] == [ACCUMULATOR]


def test_frames_without_output_reach_no_ratio() -> None:
    """No place of an image one pixel wide has all taps inside it."""
    spec = one_pass("1, 3, 1", 9, 'snr = 1\nframes = ["a.npy"]', "[image]\nextent = 'valid'")
    with pytest.raises(SpecError) as caught:
        search(spec, [np.full((4, 1, 1), 5)])
    assert [each.kind for each in caught.value.findings] == ["goal-unreachable"]


@pytest.mark.parametrize("tenths", [1, 305, 499, 733, 1999])
def test_a_ratio_of_decibels_is_shown_as_these(tenths: int) -> None:
    level = Fraction(tenths, 10)
    assert lower_decibels(power_ratio(level)) == upper_decibels(power_ratio(level)) == lower(level)
