"""SciPy's sums on images extended by np.pad against the reference, over the whole geometry."""

from itertools import product
from pathlib import Path

import numpy as np
import pytest

from guardbit.fit.resolve import resolve
from guardbit.model.sizing import Sizing
from guardbit.reference.run import respond
from guardbit.sizing.analyse import analyse
from guardbit.spec.reader import parse_spec
from guardbit.verify.second import in_register, register, requantised, second_sums

MODES = ("constant", "replicate", "half-sample", "whole-sample", "periodic")
SIZES = ((1, 1), (1, 7), (2, 3), (5, 4), (9, 11), (16, 17))


def sizing(kernel: str, rest: str = "") -> Sizing:
    head = "" if "[input]" in rest else "[input]\nbits = 8\n"
    text = f'[filter]\nname = "trial"\n[kernel]\n{kernel}\n{head}{rest}\n'
    return analyse(resolve(parse_spec(text, "trial.toml", Path())))


def agree(made: Sizing, sizes: tuple[tuple[int, int], ...] = SIZES) -> int:
    """Assert that sums and codes agree on random frames; return how many values were sure."""
    f = made.filter
    rng = np.random.default_rng(5)
    may = tuple(
        which.accumulator.overflow == "saturate"
        and not (register(which).low <= r.partial.low and r.partial.high <= register(which).high)
        for which, r in zip(f.passes, made.registers, strict=True)
    )
    sure = 0
    for height, width in sizes:
        frame = rng.integers(
            f.input.low, f.input.high, (height, width, f.geometry.channels), np.int64, True
        )
        answer = respond(f, frame)
        second = second_sums(f, frame, may)
        if second is None:
            continue
        sums = in_register(f.passes[-1], second.sums)
        assert sums.shape == answer.output.shape
        assert np.array_equal(sums[second.sure], answer.accumulators[-1][second.sure])
        assert np.array_equal(requantised(f.passes[-1], answer.accumulators[-1]), answer.output)
        sure += int(second.sure.sum())
    return sure


@pytest.mark.parametrize(("mode", "extent"), list(product(MODES, ("same", "full", "valid"))))
def test_borders_and_extents(mode: str, extent: str) -> None:
    kernel = "taps = [[3, -5, 7, 1], [2, 0, -4, 9], [1, 1, -6, 2]]\norigin = [2, 0]"
    rest = f'[border]\nmode = "{mode}"\n[image]\nextent = "{extent}"\nstep = [2, 3]\nphase = [1, 2]'
    assert agree(sizing(kernel, "[output]\nbits = 20\nsigned = true\n" + rest)) > 10


@pytest.mark.parametrize("mode", MODES)
def test_spacing_on_the_site_grid_and_channels(mode: str) -> None:
    rest = f'[border]\nmode = "{mode}"\ngrid = "site"\n'
    rest += "[image]\nspacing = [3, 2]\nchannels = 3\nwidth = [2, 99]\nheight = [3, 99]"
    assert agree(sizing("taps = [[1, 2, 1], [2, -4, 3]]\ndivisor = 4", rest), SIZES[3:]) > 500


@pytest.mark.parametrize("mode", MODES)
def test_an_origin_far_away(mode: str) -> None:
    made = sizing("taps = [[1, -2]]\norigin = [900, -700]", f'[border]\nmode = "{mode}"')
    assert agree(made) > 100


def test_a_constant_and_pedestals() -> None:
    rest = "[input]\nbits = 10\npedestal = 64\n[border]\nvalue = 900\n[output]\npedestal = 3"
    assert agree(sizing("taps = [[1, 2], [3, -4]]\ndivisor = 4", rest)) > 100


def test_registers_that_wrap() -> None:
    rest = '[accumulator]\nbits = 9\noverflow = "wrap"\n[output]\nsigned = true\nbits = 9'
    assert agree(sizing("taps = [[100, -90], [77, 55]]", rest)) > 100


def test_sums_that_may_saturate_are_not_sure() -> None:
    rest = '[accumulator]\nbits = 10\noverflow = "saturate"\n[output]\nsigned = true\nbits = 12'
    made = sizing("taps = [[2, 1], [1, -2]]", rest)
    sure = agree(made)
    assert 0 < sure < sum(h * w for h, w in SIZES)


def test_a_preloaded_register() -> None:
    rest = '[accumulator]\npreload = "rounding"\n[border]\nmode = "replicate"'
    assert agree(sizing("taps = [[1, 2, 1]]\ndivisor = 4", rest)) > 100


@pytest.mark.parametrize("first", ["vertical", "horizontal"])
@pytest.mark.parametrize("mode", MODES)
def test_two_passes(first: str, mode: str) -> None:
    kernel = "column = [1, 4, 6, 4, 1]\nrow = [2, -6, 3]\ndivisor = [16, 4]"
    rest = (
        f'[coefficient]\nfrac = [4, 2]\n[intermediate]\nfirst = "{first}"\nbits = 8\n'
        f'signed = false\npedestal = 9\n[border]\nmode = "{mode}"\nVALUE\n[image]\nstep = [2, 1]'
    )
    assert agree(sizing(kernel, rest.replace("VALUE", "value = 9" * (mode == "constant")))) > 100


def test_sums_beyond_53_bits_are_exact() -> None:
    rest = "[input]\nbits = 16\n[coefficient]\nbits = 32\n[output]\nbits = 32\nsigned = true"
    kernel = "taps = [[2147483647, 2147483645], [2147483647, -2147483647]]"
    assert agree(sizing(kernel, rest)) > 100
