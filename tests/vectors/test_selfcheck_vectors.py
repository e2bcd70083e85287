from pathlib import Path

import numpy as np
import pytest

from guardbit.cli import api
from guardbit.model.finding import SpecError
from guardbit.model.sizing import Sizing
from guardbit.reference.run import respond
from guardbit.vectors.selfcheck import noise, selfcheck

KERNEL = "[kernel]\ntaps = [[1, 2, 1], [2, 4, 2], [1, 2, 1]]\ndivisor = 16\n[input]\nbits = 8\n"


def sized(image: str) -> Sizing:
    path = Path("one.toml")
    path.write_text(f'[filter]\nname = "one"\n{KERNEL}[image]\n{image}\n', encoding="utf-8")
    return api.size(path)


def test_frames_are_few_and_reach_the_worst_cases(soften: Path) -> None:
    sizing = api.size(soften)
    vectors = selfcheck(sizing)
    assert sum(v.frame.size for v in vectors) < 3 * 4096
    sums = np.concatenate([v.response.accumulators[-1].ravel() for v in vectors])
    register = sizing.registers[0]
    assert (sums.min(), sums.max()) == (register.final.low, register.final.high)
    for vector in vectors:
        assert np.array_equal(respond(sizing.filter, vector.frame).output, vector.response.output)


def test_noise_is_the_published_generator(soften: Path) -> None:
    """x -> 1664525 x + 1013904223 mod 2^32 from 1: 1015568748, 1586005467, 2165703038."""
    frame = noise(api.size(soften).filter, (1, 3), 0, 255, 1)
    assert frame.ravel().tolist() == [1015568748 >> 24, 1586005467 >> 24, 2165703038 >> 24]


@pytest.mark.usefixtures("soften")
def test_large_images_only() -> None:
    vectors = selfcheck(sized("width = [320, 640]\nheight = [240, 480]"))
    assert [v.frame.shape for v in vectors] == [(240, 320, 1)]


@pytest.mark.usefixtures("soften")
def test_images_that_no_program_can_carry() -> None:
    with pytest.raises(SpecError) as caught:
        selfcheck(sized("width = [65535, 65535]\nheight = [65535, 65535]"))
    assert [found.kind for found in caught.value.findings] == ["selfcheck-too-large"]
