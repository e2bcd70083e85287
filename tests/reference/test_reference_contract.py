"""The contract clause by clause. Numbers without a source are ours, worked by hand."""

from dataclasses import replace
from typing import Any

import numpy as np
import pytest

from guardbit.model.enums import (
    BorderMode,
    Extent,
    Grid,
    Operation,
    Outside,
    Overflow,
    Preload,
    Rounding,
)
from guardbit.reference.run import output_positions, rejects, respond

from .builders import MODES, Image, Taps, frame_of, make, output, pixels, sums, two_passes

S16 = pixels(16, signed=True)
SATURATE_9: dict[str, Any] = {
    "bits": 9,
    "overflow": Overflow.SATURATE,
    "mode": BorderMode.REPLICATE,
}
WRAP_9 = SATURATE_9 | {"overflow": Overflow.WRAP}

WORKED: dict[str, tuple[Image, Taps, dict[str, Any], Image]] = {
    "default origin, even kernel": ([[10, 20, 30, 40]], [[1, 2]], {}, [[10, 40, 70, 100]]),
    "same as correlation": (
        [[10, 20, 30, 40]],
        [[1, 2]],
        {"operation": Operation.CORRELATION},
        [[50, 80, 110, 40]],
    ),
    "origin outside the box is a shift": (
        [[10, 20, 30, 40]],
        [[1]],
        {"origin": (0, 2)},
        [[30, 40, 0, 0]],
    ),
    "full, origin 0": (
        [[10, 20, 30, 40]],
        [[1, 2]],
        {"origin": (0, 0), "extent": Extent.FULL},
        [[10, 40, 70, 100, 80]],
    ),
    "valid, spacing 2, step 2, phase 1": (
        [[1, 2, 3, 4, 5, 6, 7, 8]],
        [[1, 10, 100]],
        {"extent": Extent.VALID, "spacing": (1, 2), "step": (1, 2), "phase": (0, 1)},
        [[246, 468]],
    ),
    "saturating 9-bit accumulator": (
        [[200, 200, 200]],
        [[1, 1, 1, -1]],
        SATURATE_9,
        [[255, 255, 255]],
    ),
    "same taps reversed": ([[200, 200, 200]], [[-1, 1, 1, 1]], SATURATE_9, [[55, 55, 55]]),
    "wrapping 9-bit accumulator": (
        [[200, 200, 200]],
        [[1, 1, 1, -1]],
        WRAP_9,
        [[-112, -112, -112]],
    ),
    "pedestal 16, constant border": (
        [[16, 26]],
        [[1, 2]],
        {
            "source": pixels(8, pedestal=16),
            "value": 16,
            "to": pixels(16, signed=True, pedestal=5),
        },
        [[5, 15]],
    ),
    "exact division by 4, ties": ([[1, 2, 3, 6]], [[-1]], {"divisor": 4}, [[0, 0, -1, -1]]),
    "exact, half-sample 1x1": (
        [[7]],
        [[1, 1, 1, 1, 1]],
        {"divisor": 5, "mode": BorderMode.HALF_SAMPLE},
        [[7]],
    ),
    "left shift by output frac 2": ([[3]], [[5]], {"exponent": 2}, [[60]]),
    "output wraps signed 8": (
        [[200]],
        [[1]],
        {"to": pixels(8, signed=True), "limit": Overflow.WRAP},
        [[-56]],
    ),
}


@pytest.mark.parametrize("name", WORKED)
def test_worked_numbers(name: str) -> None:
    image, taps, knobs, expected = WORKED[name]
    assert output(make(taps, **({"to": S16} | knobs)), image) == expected


def test_two_dimensional_convolution_flips_both_axes() -> None:
    impulse = [[0, 0, 0], [0, 1, 0], [0, 0, 0]]
    taps = [[1, 2, 3], [4, 5, 6], [7, 8, 9]]
    assert output(make(taps), impulse) == taps
    reversed_twice = [[9, 8, 7], [6, 5, 4], [3, 2, 1]]
    assert output(make(taps, operation=Operation.CORRELATION), impulse) == reversed_twice


def test_valid_positions_may_lie_outside_the_image() -> None:
    filter = make([[1, 1]], origin=(0, 5), extent=Extent.VALID)
    rows, columns = output_positions(filter, 1, 3)
    assert (rows, columns) == (range(0, 1), range(-4, -2))
    assert output(filter, [[1, 2, 4]]) == [[3, 6]]


def test_step_keeps_positions_counted_from_the_first_of_the_extent() -> None:
    filter = make([[1, 1, 1]], extent=Extent.FULL, step=(1, 2), phase=(0, 1))
    _, columns = output_positions(filter, 1, 4)
    assert list(columns) == [0, 2, 4]
    assert output(filter, [[1, 2, 4, 8]]) == [[3, 14, 8]]


@pytest.mark.parametrize("knobs", [{"extent": Extent.VALID}, {"step": (4, 4), "phase": (3, 3)}])
def test_empty_output(knobs: dict[str, Any]) -> None:
    filter = make([[1] * 5] * 5, **knobs)
    response = respond(filter, frame_of([[1, 2], [3, 4]]))
    assert response.output.shape == response.accumulators[0].shape == (0, 0, 1)
    assert response.output.dtype == np.int64


def test_empty_along_one_axis() -> None:
    filter = make([[1, 1, 1]], extent=Extent.VALID)
    assert respond(filter, frame_of([[1], [2]])).output.shape == (2, 0, 1)


def test_kernel_of_zeros_gives_the_pedestal() -> None:
    assert output(make([[0, 0]], to=pixels(8, pedestal=7)), [[1, 2]]) == [[7, 7]]


def test_channels_are_filtered_alone() -> None:
    rng = np.random.default_rng(3)
    frame = rng.integers(0, 256, (5, 6, 3))
    knobs: dict[str, Any] = {"mode": BorderMode.WHOLE_SAMPLE, "step": (2, 1), "spacing": (1, 2)}
    taps = [[1, 2, -3], [4, 0, 5], [-6, 7, 8]]
    together = respond(make(taps, channels=3, **knobs), frame).output
    for channel in range(3):
        alone = output(make(taps, **knobs), frame[:, :, channel])
        assert together[:, :, channel].tolist() == alone


def test_clamp_acts_on_codes_but_not_on_the_constant() -> None:
    source = replace(pixels(8), low=10, high=100)
    filter = make([[1, 1, 1]], source=source, value=200, outside=Outside.CLAMP)
    assert output(filter, [[0, 50, 255]]) == [[260, 160, 350]]
    assert output(make([[1, 1, 1]], source=source, value=200), [[0, 50, 255]]) == [[250, 305, 505]]


def test_clamp_to_a_range_beyond_the_frame_s_own_type() -> None:
    source = replace(pixels(16), low=40000, high=50000)
    frame = np.full((1, 1, 1), 255, np.uint8)
    filter = make([[1]], source=source, outside=Outside.CLAMP)
    assert respond(filter, frame).output.tolist() == [[[40000]]]


@pytest.mark.parametrize("kind", [np.uint8, np.int16, np.uint16, np.int32, np.uint64, np.int64])
def test_any_integer_type_of_frame(kind: type[np.generic]) -> None:
    frame = np.array([[[7], [120], [3]]], kind)
    assert respond(make([[-300, 1, 2]]), frame).output.ravel().tolist() == [-35993, -766, 243]


@pytest.mark.parametrize("shape", [(3, 3), (0, 3, 1), (3, 3, 2)])
def test_frames_of_another_shape_are_refused(shape: tuple[int, ...]) -> None:
    with pytest.raises(ValueError):
        respond(make([[1]]), np.zeros(shape, np.uint8))


def test_frames_of_floats_are_refused() -> None:
    with pytest.raises(ValueError):
        respond(make([[1]]), np.zeros((2, 2, 1)))


@pytest.mark.parametrize(
    ("knobs", "bad_row", "refused"),
    [
        ({}, 0, True),
        ({}, 3, True),
        ({"step": (2, 1)}, 1, False),
        ({"step": (2, 1)}, 2, True),
        ({"step": (4, 1), "phase": (3, 0)}, 0, False),
        ({"origin": (2, 0)}, 0, False),
        ({"origin": (2, 0)}, 1, False),
        ({"origin": (2, 0)}, 2, True),
        ({"origin": (2, 0), "mode": BorderMode.PERIODIC}, 0, True),
        ({"origin": (9, 0)}, 3, False),
        ({"origin": (9, 0), "mode": BorderMode.REPLICATE}, 3, True),
        ({"origin": (9, 0), "mode": BorderMode.REPLICATE}, 2, False),
        ({"origin": (0, 99)}, 2, True),
        ({"extent": Extent.VALID, "spacing": (1, 9)}, 2, True),
    ],
)
def test_rejects_looks_at_the_rows_that_are_read(
    knobs: dict[str, Any], bad_row: int, refused: bool
) -> None:
    source = replace(pixels(8), high=100)
    frame = np.full((4, 5, 1), 50)
    frame[bad_row, 4] = 101
    filter = make([[1]], source=source, value=200, outside=Outside.REJECT, **knobs)
    assert rejects(filter, frame) is refused
    assert not rejects(filter, np.full((4, 5, 1), 50))
    assert not rejects(make([[1]], source=source, **knobs), frame)


def test_rejects_reads_nothing_for_an_empty_output() -> None:
    filter = make([[1, 1, 1]], source=pixels(1), outside=Outside.REJECT, extent=Extent.VALID)
    assert not rejects(filter, frame_of([[9, 9]]))
    assert rejects(filter, frame_of([[9, 9, 9]]))


def test_rejects_follows_both_passes() -> None:
    column = make([[0], [0], [1]], source=pixels(1), outside=Outside.REJECT)
    filter = two_passes(column, make([[1, 1]]))
    assert rejects(filter, frame_of([[0], [9], [0]]))
    assert not rejects(filter, frame_of([[0], [0], [9]]))


COLUMN, ROW = [[1], [2], [1]], [[1, 0, 3]]


def test_two_passes_by_hand_vertical_first() -> None:
    """The column's sums are quartered and rounded before the row sees them."""
    first = make(COLUMN, exponent=-2, to=pixels(8), mode=BorderMode.REPLICATE)
    filter = two_passes(first, make(ROW, exponent=-1, source=pixels(8)))
    image = [[10, 21], [30, 40]]
    response = respond(filter, frame_of(image))
    # Extended columns -1..2 are 10 10 21 21 over 30 30 40 40.
    assert response.accumulators[0][:, :, 0].tolist() == [[60, 60, 103, 103], [100, 100, 141, 141]]
    # Divided by 4, rounded: 15 15 26 26 and 25 25 35 35; then right + 3 * left.
    assert response.accumulators[1][:, :, 0].tolist() == [[71, 71], [110, 110]]
    assert response.output[:, :, 0].tolist() == [[36, 36], [55, 55]]


def test_two_passes_by_hand_horizontal_first() -> None:
    first = make(ROW, exponent=-1, to=pixels(8), mode=BorderMode.REPLICATE)
    filter = two_passes(first, make(COLUMN, source=pixels(8)))
    response = respond(filter, frame_of([[10, 21], [30, 40]]))
    # Rows -1..2; right + 3 * left.
    top, bottom = [51, 51], [130, 130]
    assert response.accumulators[0][:, :, 0].tolist() == [top, top, bottom, bottom]
    assert response.output[:, :, 0].tolist() == [[26 * 3 + 65] * 2, [26 + 65 * 3] * 2]


def test_the_constant_goes_through_the_first_pass() -> None:
    """The column of an outside column is all constant: (4 * 100 / 4 rounded) * 3 enters."""
    first = make(COLUMN, exponent=-2, to=pixels(8, pedestal=9), value=100)
    filter = two_passes(first, make(ROW, source=pixels(8, pedestal=9)))
    assert output(filter, [[100]]) == [[400]]
    # The pixel itself is not read by the row 1 0 3.
    assert output(filter, [[0]]) == [[400]]


def test_intermediate_saturates() -> None:
    filter = two_passes(make([[3]], to=pixels(8)), make([[1, 1]], source=pixels(8)))
    assert output(filter, [[100, 90, 10]]) == [[255, 510, 285]]


def test_step_applies_only_at_the_end_of_two_passes() -> None:
    rng = np.random.default_rng(5)
    image = rng.integers(0, 256, (9, 8))
    for one, two in ((COLUMN, ROW), (ROW, COLUMN)):
        first = make(one, exponent=-3, to=pixels(8), mode=BorderMode.WHOLE_SAMPLE)
        every = np.array(output(two_passes(first, make(two)), image))
        some = two_passes(first, make(two, step=(3, 2), phase=(1, 1)))
        assert output(some, image) == every[1::3, 1::2].tolist()


def test_first_accumulators_cover_only_the_columns_that_are_read() -> None:
    first = make([[1], [1]], mode=BorderMode.PERIODIC)
    filter = two_passes(first, make([[1, 0, 1]], step=(1, 4)))
    response = respond(filter, frame_of([[1, 2, 4, 8, 16, 32, 64, 128]]))
    # Outputs 0 and 4 read columns -1, 1, 3 and 5.
    assert response.accumulators[0][:, :, 0].tolist() == [[256, 4, 16, 64]]
    assert response.output[:, :, 0].tolist() == [[260, 80]]


def test_first_accumulators_cover_only_the_rows_that_are_read() -> None:
    first = make([[1, 1]], mode=BorderMode.PERIODIC)
    filter = two_passes(first, make([[1], [0], [1]], step=(4, 1)))
    response = respond(filter, frame_of([[1], [2], [4], [8], [16], [32], [64], [128]]))
    assert response.accumulators[0][:, :, 0].tolist() == [[256], [4], [16], [64]]
    assert response.output[:, :, 0].tolist() == [[260], [80]]


@pytest.mark.parametrize("mode", MODES)
@pytest.mark.parametrize("preload", Preload)
def test_preload_changes_nothing_but_the_accumulator(mode: BorderMode, preload: Preload) -> None:
    image = np.random.default_rng(7).integers(0, 256, (4, 4))
    plain = make([[3, -5], [7, 11]], exponent=-4, mode=mode)
    loaded = make([[3, -5], [7, 11]], exponent=-4, mode=mode, preload=preload)
    assert output(loaded, image) == output(plain, image)
    start = 8 if preload is Preload.ROUNDING else 0
    assert np.array_equal(sums(loaded, image), sums(plain, image) + start)


def test_rounding_modes_reach_the_output() -> None:
    image = [[1, 2, 3, 5, 6, 7]]
    negative = {mode: output(make([[-1]], exponent=-2, rounding=mode), image) for mode in Rounding}
    assert negative == {
        Rounding.TOWARD_NEGATIVE: [[-1, -1, -1, -2, -2, -2]],
        Rounding.TOWARD_POSITIVE: [[0, 0, 0, -1, -1, -1]],
        Rounding.TOWARD_ZERO: [[0, 0, 0, -1, -1, -1]],
        Rounding.TIES_TO_EVEN: [[0, 0, -1, -1, -2, -2]],
        Rounding.TIES_TO_AWAY: [[0, -1, -1, -1, -2, -2]],
        Rounding.TIES_TO_POSITIVE: [[0, 0, -1, -1, -1, -2]],
    }


def test_site_grid_never_mixes_the_sites_of_a_mosaic() -> None:
    """Sites of colour 1 read 1 only, whatever the border; on the pixel grid they do not."""
    mosaic = np.zeros((5, 6), int)
    mosaic[::2, 1::2] = 1
    taps = [[1] * 5] * 5
    for mode in set(MODES) - {BorderMode.CONSTANT}:
        site = np.array(output(make(taps, spacing=(2, 2), mode=mode, grid=Grid.SITE), mosaic))
        assert np.array_equal(site, 25 * mosaic)
    pixel = np.array(output(make(taps, spacing=(2, 2), mode=BorderMode.REPLICATE), mosaic))
    assert not np.array_equal(pixel, 25 * mosaic)
