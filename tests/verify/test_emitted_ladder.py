"""The whole ladder on emitted C whose rungs have more to say than on the examples."""

from pathlib import Path

import pytest

from guardbit.cli import api
from guardbit.model.certificate import RungResult

HEAD = '[filter]\nname = "one"\n'
SPECS = {
    # sums of 2^26 values: boundaries of the requantiser and a sample
    "wide sums": "[kernel]\ntaps = [[300, -200, 100], [-50, 700, 3]]\n[input]\nbits = 16\n"
    "[output]\nfrac = -9\nrounding = 'ties-to-even'\n[border]\nmode = 'half-sample'\n",
    # two passes, a mosaic, codes that are refused
    "two passes": "[kernel]\ncolumn = [1, 2, 1]\nrow = [1, -4, 1]\ndivisor = [4, 2]\n"
    "[input]\nbits = 10\npedestal = 64\nrange = [64, 1000]\noutside = 'reject'\n"
    "[intermediate]\nbits = 9\nfirst = 'horizontal'\nrounding = 'toward-zero'\n"
    "[output]\nbits = 16\nsigned = true\n"
    "[image]\nspacing = [2, 2]\nwidth = [2, 300]\nheight = [2, 300]\n"
    "[border]\nmode = 'whole-sample'\ngrid = 'site'\n",
    # sums that SciPy cannot confirm, in a first pass too
    "saturating": "[kernel]\ncolumn = [3, -1, 5]\nrow = [1, 2, 1]\ndivisor = [1, 1]\n"
    "[input]\nbits = 8\n[intermediate]\nbits = 12\noverflow = 'wrap'\n"
    "[intermediate.accumulator]\nbits = 10\noverflow = 'saturate'\n"
    "[accumulator]\nbits = 11\noverflow = 'wrap'\n[output]\nbits = 16\nsigned = true\n",
    # no image of legal size has an interior, and few have any output
    "small images": "[kernel]\ntaps = [[1, 2, 1], [2, 4, 2], [1, 2, 1]]\ndivisor = 16\n"
    "[input]\nbits = 8\n[image]\nwidth = [1, 3]\nheight = [1, 2]\nextent = 'full'\nchannels = 2\n"
    "step = [2, 3]\nphase = [1, 2]\n[border]\nvalue = 9\n",
    "a kernel of zeros": "[kernel]\ntaps = [[0, 0]]\n[input]\nbits = 8\n",
}


@pytest.fixture(scope="module", params=sorted(SPECS))
def climbed(
    request: pytest.FixtureRequest, tmp_path_factory: pytest.TempPathFactory
) -> tuple[str, dict[str, RungResult]]:
    path: Path = tmp_path_factory.mktemp("ladder") / "one.toml"
    path.write_text(HEAD + SPECS[request.param], encoding="utf-8")
    rungs = api.verify(path).certificate.rungs
    return request.param, {rung.name: rung for rung in rungs}


def test_every_rung_holds(climbed: tuple[str, dict[str, RungResult]]) -> None:
    for rung in climbed[1].values():
        assert rung.findings == (), rung.name
        assert rung.holds, rung


def test_what_is_not_covered_is_said(climbed: tuple[str, dict[str, RungResult]]) -> None:
    name, rungs = climbed
    said = {rung: " ".join(found.not_covered) for rung, found in rungs.items()}
    if name == "wide sums":
        assert "rounding boundaries, and" in said["requantiser"]
    if name == "saturating":
        assert "SciPy" in said["frames"]


def test_ends_that_are_held_are_shown_too(climbed: tuple[str, dict[str, RungResult]]) -> None:
    name, rungs = climbed
    covered = " ".join(rungs["witnesses"].covered)
    # 11 bits that wrap: -1024..1023
    held = "least value held -1024, greatest value held 1023"
    assert (held in covered) is (name == "saturating")
