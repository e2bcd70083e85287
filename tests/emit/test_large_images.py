"""Index arithmetic at the greatest legal sizes, and on a frame of four megapixels."""

from pathlib import Path

import numpy as np
import pytest

import packaged
from guardbit.build.library import Library
from guardbit.model.routine import Call
from guardbit.reference.run import respond

BINOMIAL = "[[1,4,6,4,1],[4,16,24,16,4],[6,24,36,24,6],[4,16,24,16,4],[1,4,6,4,1]]"
VARIANTS = (
    '[border]\nmode = "periodic"\n',
    '[image]\nextent = "full"\n',
    '[border]\nmode = "whole-sample"\n[image]\nstep = [2, 3]\nchannels = 3\n',
    '[border]\nmode = "replicate"\n[image]\nspacing = [64, 64]\n',
)
SIZES = ((65535, 2), (2, 65535), (3, 65533), (2048, 2048))


@pytest.fixture(scope="module")
def built() -> tuple[list[packaged.Made], Library]:
    head = (
        f'[filter]\nname = "big"\n[kernel]\ntaps = {BINOMIAL}\ndivisor = 256\n[input]\nbits = 8\n'
    )
    made = [packaged.made(head + v, Path(), f"big{n}") for n, v in enumerate(VARIANTS)]
    return made, packaged.library(made, "large")


@pytest.mark.parametrize("size", SIZES)
@pytest.mark.parametrize("variant", range(len(VARIANTS)))
def test_large_frames(
    built: tuple[list[packaged.Made], Library], variant: int, size: tuple[int, int]
) -> None:
    made, library = built
    f = made[variant].sizing.filter
    frame = np.random.default_rng(1).integers(0, 256, (*size, f.geometry.channels))
    wanted = respond(f, frame).output
    call = Call(frame, (wanted.shape[0], wanted.shape[1]))
    (outcome,) = library.run([(made[variant].emission.routine, call)])
    assert (outcome.harm, outcome.statuses) == (None, (0,))
    assert outcome.output is not None
    assert np.array_equal(outcome.output, wanted)
