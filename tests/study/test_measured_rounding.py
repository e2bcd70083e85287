"""Measured mean and variance of rounding against those of uniform residues, and by hand."""

from fractions import Fraction
from pathlib import Path

import numpy as np
import pytest

from guardbit.fit.resolve import resolve
from guardbit.model.sizing import Sizing
from guardbit.sizing.analyse import analyse
from guardbit.spec.reader import parse_spec
from guardbit.study.rounding import measured_rounding

ROUNDINGS = ["toward-negative", "toward-positive", "toward-zero"]
ROUNDINGS += ["ties-to-even", "ties-to-away", "ties-to-positive"]


def sized(tables: str) -> Sizing:
    return analyse(resolve(parse_spec('[filter]\nname = "one"\n' + tables, "a.toml", Path())))


@pytest.mark.parametrize("rounding", ROUNDINGS)
def test_all_codes_once_show_the_moments_of_all_residues(rounding: str) -> None:
    """One tap of 1/8: the codes 0..255 leave every residue, on even and odd codes, 16 times."""
    sizing = sized(
        "[kernel]\ntaps = [[1]]\ndivisor = 8\n[input]\nbits = 8\n"
        f"[output]\nrounding = '{rounding}'\n"
    )
    frame = np.arange(256).reshape(16, 16, 1)
    (found,) = measured_rounding(sizing.filter, [frame])
    (model,) = sizing.error.rounding
    assert found.name == model.name == "output"
    assert found.values == 256
    assert (found.mean, found.variance) == (model.mean, model.variance)


def test_noise_comes_near_the_model_in_both_passes() -> None:
    sizing = sized(
        "[kernel]\ncolumn = [1, 4, 6, 4, 1]\nrow = [1, 3, 3, 1]\ndivisor = [16, 8]\n"
        "[coefficient]\nfrac = ['auto', 'auto']\n[input]\nbits = 8\n"
        "[intermediate]\nbits = 8\nrounding = 'toward-negative'\n"
    )
    frame = np.random.default_rng(0).integers(0, 256, (256, 256, 1))
    found = measured_rounding(sizing.filter, [frame])
    assert [one.name for one in found] == ["intermediate", "output"]
    for one, model in zip(found, sizing.error.rounding, strict=True):
        assert abs(one.mean - model.mean) < Fraction(1, 100)
        assert abs(one.variance - model.variance) < Fraction(1, 200)


def test_a_rounding_constant_is_no_part_of_the_value() -> None:
    tables = "[kernel]\ntaps = [[1, 2, 1]]\ndivisor = 4\n[input]\nbits = 8\n[accumulator]\n"
    frames = [np.random.default_rng(1).integers(0, 256, (9, 9, 1)) for _ in range(2)]
    found = [
        measured_rounding(sized(f"{tables}preload = '{preload}'\n").filter, frames)
        for preload in ("zero", "rounding")
    ]
    assert found[0] == found[1]
    assert found[0][0].values == 162


def test_no_frames_show_nothing() -> None:
    sizing = sized("[kernel]\ntaps = [[1]]\n[input]\nbits = 8\n")
    assert measured_rounding(sizing.filter, []) == ()
