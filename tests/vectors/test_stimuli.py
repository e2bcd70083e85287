"""Frames that are legal, the same every time, and that reach the places meant."""

from pathlib import Path

import numpy as np

from guardbit.fit.resolve import resolve
from guardbit.model.sizing import Sizing
from guardbit.model.vectors import Purpose
from guardbit.sizing.analyse import analyse
from guardbit.spec.reader import parse_spec
from guardbit.vectors.stimuli import answered, level, scaled_photograph, stimuli
from guardbit.vectors.witnesses import witnesses

SPEC = """
[filter]
name = "trial"
[kernel]
taps = [[-1, -2, -1], [-2, 20, -2], [-1, -2, -1]]
divisor = 8
[input]
bits = 12
pedestal = 256
range = [64, 4032]
[output]
pedestal = 256
[border]
mode = "half-sample"
[image]
channels = 2
width = [3, 40]
height = [2, 2]
"""


def sizing(text: str = SPEC) -> Sizing:
    return analyse(resolve(parse_spec(text, "trial.toml", Path())))


def test_frames_are_legal_and_repeatable() -> None:
    f = sizing().filter
    first, second = stimuli(f), stimuli(f)
    assert len({s.name for s in first}) == len(first)
    for one, other in zip(first, second, strict=True):
        assert np.array_equal(one.frame, other.frame)
        height, width, channels = one.frame.shape
        assert (height, channels) == (2, 2)
        assert 3 <= width <= 40
        assert one.frame.min() >= 64
        assert one.frame.max() <= 4032


def test_sizes_around_the_kernel_are_there() -> None:
    widths = {s.frame.shape[1] for s in stimuli(sizing().filter)}
    assert {3, 4, 7} <= widths


def test_codes_beyond_the_range_only_where_they_are_clamped() -> None:
    clamping = SPEC.replace("range = [64, 4032]", 'range = [64, 4032]\noutside = "clamp"')
    names = [s.name for s in stimuli(sizing(clamping).filter)]
    assert "beyond-the-range" in names
    assert "beyond-the-range" not in [s.name for s in stimuli(sizing().filter)]


def test_narrow_frames_stay_inside_the_output_range() -> None:
    f = sizing().filter
    some = [s for s in stimuli(f) if s.name.startswith("narrow")]
    outputs = np.concatenate([v.response.output.ravel() for v in answered(f, some)])
    inside = (outputs > f.output.low) & (outputs < f.output.high)
    assert inside.mean() > 0.9
    assert f.input.low <= level(f).code <= f.input.high


def test_photograph_is_mapped_onto_the_input_range() -> None:
    f = sizing().filter
    photograph = np.arange(50 * 60).reshape(50, 60) % 256
    made = scaled_photograph(f, photograph)
    assert made.purpose is Purpose.PHOTOGRAPH
    assert made.frame.shape == (2, 40, 2)
    assert made.frame.min() >= 64
    assert made.frame.max() <= 4032
    assert np.array_equal(made.frame[:, :, 0], made.frame[:, :, 1])


def test_witness_frames_attain_what_the_sizing_says() -> None:
    made = sizing()
    attained = [a for a in witnesses(made) if not a.witness.partial]
    assert attained
    for one in attained:
        assert one.stimulus is not None
        (vector,) = answered(made.filter, [one.stimulus])
        at = one.witness.position
        assert vector.response.accumulators[-1][at][0] == one.witness.value


def test_too_large_witnesses_are_left_out() -> None:
    assert all(a.stimulus is None for a in witnesses(sizing(), most_pixels=0))
