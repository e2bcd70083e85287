from dataclasses import replace
from fractions import Fraction
from math import floor
from pathlib import Path

import pytest

from guardbit.cli import api
from guardbit.model.certificate import RungResult
from guardbit.model.sizing import Sizing
from guardbit.vectors.stimuli import answered, stimuli
from guardbit.verify.error import result


def measure(sizing: Sizing) -> RungResult:
    return result(sizing, answered(sizing.filter, stimuli(sizing.filter)))


def sized(tables: str) -> Sizing:
    path = Path("one.toml")
    path.write_text('[filter]\nname = "one"\n' + tables, encoding="utf-8")
    return api.size(path)


def test_a_binary_scale_of_exact_taps(soften: Path) -> None:
    """Sixteenths, rounded half up: off by -7/16 at worst downwards, by 1/2 upwards."""
    rung = measure(api.size(soften))
    assert rung.holds and rung.cases > 20
    assert [(f.value, f.unit) for f in rung.figures] == [("-0.4375 .. +0.5", "LSB")]


@pytest.mark.usefixtures("soften")
def test_one_tap_against_plain_fractions() -> None:
    """A third, as an 8-bit coefficient: 85 / 256. Every code is worked out on its own."""
    sizing = sized(
        '[kernel]\ntaps = [["1/3"]]\n[input]\nbits = 8\npedestal = 16\n'
        "[coefficient]\nbits = 8\nfrac = 8\nsigned = false\n"
        "[output]\nbits = 10\nfrac = 2\npedestal = 40\n"
    )
    codes = {int(c) for s in stimuli(sizing.filter) for c in s.frame.ravel()}
    errors = []
    for code in codes:
        got = floor(Fraction((code - 16) * 85 * 4, 256) + Fraction(1, 2)) + 40
        ideal = Fraction((code - 16) * 4, 3) + 40
        errors.append(got - min(max(ideal, Fraction(0)), Fraction(1023)))
    low, high = (part.split() for part in str(measure(sizing).figures[0].value).split(" .. "))
    assert abs(Fraction(low[0]) - min(errors)) <= Fraction(1, 10**6)
    assert abs(Fraction(high[0]) - max(errors)) <= Fraction(1, 10**6)


@pytest.mark.usefixtures("soften")
@pytest.mark.parametrize(
    "tables",
    [
        "[kernel]\ncolumn = [1, 2, 1]\nrow = [1, 5, 1]\ndivisor = [4, 7]\n"
        "[coefficient]\nbits = 10\nfrac = [8, 8]\n[intermediate]\nbits = 10\n[input]\nbits = 8\n",
        "[kernel]\ntaps = [[1, 1, 1]]\ndivisor = 3\n[coefficient]\nscale = 'exact'\n"
        "[input]\nbits = 8\n[image]\nextent = 'valid'\nstep = [2, 2]\n",
        "[kernel]\ntaps = [[-1, 3, -1]]\n[input]\nbits = 6\nfrac = 2\n[output]\nfrac = -1\n"
        "[image]\nchannels = 3\nspacing = [1, 2]\n[border]\nmode = 'half-sample'\ngrid = 'site'\n",
        "[kernel]\ntaps = [[0]]\n[input]\nbits = 8\n",
    ],
)
def test_the_bound_is_kept(tables: str) -> None:
    rung = measure(sized(tables))
    assert rung.holds, rung.findings


def test_an_error_beyond_the_bound_is_a_finding(soften: Path) -> None:
    sizing = api.size(soften)
    narrow = replace(sizing, error=replace(sizing.error, high=Fraction(1, 4)))
    rung = measure(narrow)
    assert not rung.holds
    assert {found.kind for found in rung.findings} == {"error-beyond-bound"}
    open_ = replace(narrow, error=replace(narrow.error, assumes_no_wrap=True))
    assert measure(open_).holds
