"""From a spec that asks for a search to one that `emit` takes, and what is said in between."""

from dataclasses import replace
from pathlib import Path

import pytest

from guardbit.cli import api
from guardbit.fit.resolve import resolve
from guardbit.model.enums import FitRule
from guardbit.model.finding import SpecError
from guardbit.model.frequency import ResponseFit
from guardbit.model.spec import Spec
from guardbit.report.wording import sentence
from guardbit.sizing.frequency import frequency
from guardbit.spec.reader import parse_spec
from guardbit.study.response.fit import fit_response
from guardbit.study.response.pins import pin_fit, pin_response

HEAD = '[filter]\nname = "blur"\n[input]\nbits = 8\n'
MATRIX = HEAD + (
    '[kernel] # measured\nformula = "gaussian"\nsize = 3\nsigma = 0.8\n'
    '[coefficient]\nbits = 5 # of the multiplier\nfit = "response"\n'
)
PAIR = HEAD + (
    '[kernel]\ncolumn = ["1/3", "1/3", "1/3"]\nrow = ["1/7", "5/7", "1/7"]\n'
    '[coefficient]\nbits = 5\nfrac = ["auto", 4]\nfit = "response"\n[intermediate]\nbits = 12\n'
)


def read(text: str) -> Spec:
    return parse_spec(text, "blur.toml", Path())


@pytest.mark.parametrize("text", [MATRIX, PAIR])
def test_a_search_is_pinned_and_then_emitted(text: str) -> None:
    spec = read(text)
    found = fit_response(spec, 10)
    made = pin_response(spec, text, 10)
    pinned = read(made)
    assert pinned.digest != spec.digest
    kernels = [each.kernel for each in resolve(pinned).passes]
    assert [k.frac for k in kernels] == [each.frac for each in found.factors]
    assert [sorted(t.integer for t in k.terms) for k in kernels] == [
        sorted(tap for row in each.integers for tap in row) for each in found.factors
    ]
    assert all(k.rule is None for k in kernels)
    files = api.emit(pinned).files
    assert "blur.c" in files
    assert pin_response(pinned, made, 10) == made
    if len(found.factors) == 1:
        assert frequency(resolve(pinned)).deviation == found.factors[0].deviation


def test_comments_stay_and_the_rule_is_named() -> None:
    text = MATRIX.replace('fit = "response"', 'fit = "gain" # for now')
    made = pin_response(read(text), text, 10)
    assert "[kernel] # measured\n" in made and "bits = 5 # of the multiplier\n" in made
    assert 'fit = "response" # for now\n' in made
    assert read(made).coefficient.fit is FitRule.RESPONSE


def test_nothing_is_searched_by_emit() -> None:
    with pytest.raises(SpecError) as caught:
        api.emit(read(MATRIX))
    (found,) = caught.value.findings
    assert (found.kind, found.place.line) == ("response-not-pinned", 11)
    assert "guardbit size --pin" in sentence(found)


def pinned_wrongly(change: dict[str, int]) -> SpecError:
    """Return what reading says of a pinned spec after a change of a found number."""
    spec = read(MATRIX)
    (factor,) = (found := fit_response(spec, 10)).factors
    rows = [list(row) for row in factor.integers]
    if "tap" in change:
        rows[0][0] = change["tap"]
    if "rows" in change:
        rows = rows[: change["rows"]]
    wrong = ResponseFit((replace(factor, integers=tuple(map(tuple, rows))),), found.seconds)
    with pytest.raises(SpecError) as caught:
        read(pin_fit(spec, MATRIX, wrong))
    return caught.value


def test_pinned_numbers_are_checked_against_bits_and_box() -> None:
    (wide,) = pinned_wrongly({"tap": 16}).findings
    assert (wide.kind, wide.place.key) == ("pinned-bits", "coefficient.pinned")
    assert "16 does not fit 5 bits, -16..15" in sentence(wide)
    (short,) = pinned_wrongly({"rows": 2}).findings
    assert short.kind == "pinned-box"
    assert "2 x 3" in sentence(short) and "3 x 3" in sentence(short)


def test_pinned_numbers_need_their_frac() -> None:
    made = pin_response(read(MATRIX), MATRIX, 10)
    frac = next(line for line in made.splitlines() if line.startswith("frac"))
    with pytest.raises(SpecError) as caught:
        resolve(read(made.replace(frac, 'frac = "auto"')))
    assert [found.kind for found in caught.value.findings] == ["pinned-without-frac"]
