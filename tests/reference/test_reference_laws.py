"""Laws of linear shift-invariant systems on the accumulator, and SciPy on random filters."""

from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from guardbit.model.enums import BorderMode, Extent, Grid, Operation
from guardbit.reference.run import output_positions
from tools import examples

from .builders import MODES, Array, extended, make, output, pixels, sums, two_passes

SIGNED = pixels(9, signed=True)
QUICK = settings(max_examples=examples(60), deadline=None)

seeds = st.integers(0, 2**32 - 1)
sides = st.integers(1, 7)
modes = st.sampled_from(MODES)
offsets = st.integers(-4, 9)
gaps = st.integers(1, 3)


def draw(seed: int, *shape: int) -> Array:
    return np.random.default_rng(seed).integers(-128, 128, shape)


def convolve(a: Array, b: Array, mode: str) -> Array:
    """Return SciPy's convolution of int64 (it wraps silently in narrower types)."""
    from scipy.signal import convolve2d

    result: Array = convolve2d(a.astype(np.int64), b.astype(np.int64), mode=mode)
    return result


@QUICK
@given(seeds, st.tuples(sides, sides), st.tuples(sides, sides), st.tuples(offsets, offsets), modes)
def test_same_equals_pad_then_scipy(
    seed: int,
    size: tuple[int, int],
    box: tuple[int, int],
    origin: tuple[int, int],
    mode: BorderMode,
) -> None:
    image, taps = draw(seed, *size), draw(seed + 1, *box)
    got = sums(make(taps.tolist(), source=SIGNED, origin=origin, mode=mode, value=-77), image)
    pad = max(box) + 10
    every = convolve(extended(image, (pad, pad), mode, -77), taps, "full")
    top, left = pad + origin[0], pad + origin[1]
    assert np.array_equal(got, every[top : top + size[0], left : left + size[1]])


@QUICK
@given(
    seeds,
    st.tuples(sides, sides),
    st.tuples(sides, sides),
    st.tuples(gaps, gaps),
    st.sampled_from([Extent.FULL, Extent.VALID]),
    st.data(),
)
def test_full_and_valid_equal_scipy(
    seed: int,
    size: tuple[int, int],
    box: tuple[int, int],
    spacing: tuple[int, int],
    extent: Extent,
    data: st.DataObject,
) -> None:
    """Taps set apart are taps with zeros between them; steps keep some of the positions."""
    image, taps = draw(seed, *size), draw(seed + 1, *box)
    step = data.draw(st.tuples(st.integers(1, 4), st.integers(1, 4)))
    phase = tuple(data.draw(st.integers(0, s - 1)) for s in step)
    knobs: dict[str, Any] = {"spacing": spacing, "step": step, "phase": phase, "extent": extent}
    origin = data.draw(st.tuples(offsets, offsets))
    got = sums(make(taps.tolist(), source=SIGNED, origin=origin, **knobs), image)
    spread = apart(taps, spacing)
    whole = convolve(image, spread, "full")
    if extent is Extent.VALID:
        whole = whole[
            spread.shape[0] - 1 : max(size[0], spread.shape[0] - 1),
            spread.shape[1] - 1 : max(size[1], spread.shape[1] - 1),
        ]
    assert np.array_equal(got, whole[phase[0] :: step[0], phase[1] :: step[1]])


@QUICK
@given(seeds, st.tuples(sides, sides), st.tuples(sides, sides), modes, st.tuples(gaps, gaps))
def test_site_grid_filters_each_sublattice_alone(
    seed: int, size: tuple[int, int], box: tuple[int, int], mode: BorderMode, gap: tuple[int, int]
) -> None:
    image, taps = draw(seed, *size), draw(seed + 1, *box).tolist()
    knobs: dict[str, Any] = {"source": SIGNED, "mode": mode, "value": 50}
    got = sums(make(taps, spacing=gap, grid=Grid.SITE, **knobs), image)
    for row in range(min(gap[0], size[0])):
        for column in range(min(gap[1], size[1])):
            alone = sums(make(taps, **knobs), image[row :: gap[0], column :: gap[1]])
            assert np.array_equal(got[row :: gap[0], column :: gap[1]], alone)


@pytest.mark.parametrize("mode", MODES)
def test_ndimage_agrees_on_every_border(mode: BorderMode) -> None:
    """scipy.ndimage.convolve sums doubles: exact for numbers of this size."""
    from scipy.ndimage import convolve as ndimage_convolve

    names = {
        BorderMode.CONSTANT: "constant",
        BorderMode.REPLICATE: "nearest",
        BorderMode.HALF_SAMPLE: "reflect",
        BorderMode.WHOLE_SAMPLE: "mirror",
        BorderMode.PERIODIC: "wrap",
    }
    for size in [(1, 1), (1, 4), (2, 3), (5, 2), (13, 11)]:
        image, taps = draw(size[0], *size), draw(99, 7, 5)
        theirs = ndimage_convolve(image.astype(np.int64), taps, mode=names[mode], cval=9)
        ours = sums(make(taps.tolist(), source=SIGNED, mode=mode, value=9), image)
        assert np.array_equal(ours, theirs)


@QUICK
@given(seeds, st.tuples(sides, sides), modes, st.integers(-9, 9), st.integers(-9, 9))
def test_linearity(seed: int, size: tuple[int, int], mode: BorderMode, p: int, q: int) -> None:
    """Sums of linear borders: the constant is the pedestal, which stands for zero."""
    filter = make(draw(seed, 3, 4).tolist(), source=pixels(16, True), mode=mode)
    a, b = draw(seed + 1, *size), draw(seed + 2, *size)
    both = sums(filter, p * a + q * b)
    assert np.array_equal(both, p * sums(filter, a) + q * sums(filter, b))


@QUICK
@given(seeds, st.tuples(sides, sides), st.tuples(offsets, offsets))
def test_shift_invariance(seed: int, size: tuple[int, int], shift: tuple[int, int]) -> None:
    """A moved image gives the moved response: on a torus, and by moving the origin back."""
    taps, image = draw(seed, 4, 3).tolist(), draw(seed + 1, *size)
    knobs: dict[str, Any] = {"source": SIGNED, "mode": BorderMode.PERIODIC}
    moved = np.roll(image, shift, (0, 1))
    response = sums(make(taps, origin=(1, 1), **knobs), image)
    assert np.array_equal(
        sums(make(taps, origin=(1, 1), **knobs), moved), np.roll(response, shift, (0, 1))
    )
    back = (1 + shift[0], 1 + shift[1])
    assert np.array_equal(sums(make(taps, origin=back, **knobs), moved), response)


@QUICK
@given(seeds, st.tuples(sides, sides), st.tuples(sides, sides))
def test_commutativity_and_supports_that_add(
    seed: int, size: tuple[int, int], box: tuple[int, int]
) -> None:
    a, b = draw(seed, *size), draw(seed + 1, *box)
    knobs: dict[str, Any] = {"source": SIGNED, "extent": Extent.FULL}
    one, other = sums(make(b.tolist(), **knobs), a), sums(make(a.tolist(), **knobs), b)
    assert np.array_equal(one, other)
    assert one.shape == (size[0] + box[0] - 1, size[1] + box[1] - 1)


@QUICK
@given(seeds, st.tuples(sides, sides), st.tuples(sides, sides))
def test_convolved_kernels_do_what_two_filters_do(
    seed: int, first: tuple[int, int], second: tuple[int, int]
) -> None:
    a, b, image = draw(seed, *first), draw(seed + 1, *second), draw(seed + 2, 3, 4)
    knobs: dict[str, Any] = {"source": pixels(30, True), "extent": Extent.FULL}
    together = make(convolve(a, b, "full").tolist(), **knobs)
    in_turn = sums(make(b.tolist(), **knobs), sums(make(a.tolist(), **knobs), image))
    assert np.array_equal(sums(together, image), in_turn)


@QUICK
@given(seeds, st.tuples(sides, sides), st.tuples(offsets, offsets), st.sampled_from(Operation))
def test_impulse_response_is_the_kernel(
    seed: int, box: tuple[int, int], origin: tuple[int, int], operation: Operation
) -> None:
    taps = draw(seed, *box)
    filter = make(taps.tolist(), extent=Extent.FULL, origin=origin, operation=operation)
    response = sums(filter, np.ones((1, 1), int))
    flipped = taps[::-1, ::-1] if operation is Operation.CORRELATION else taps
    assert np.array_equal(response, flipped)
    rows, columns = output_positions(filter, 1, 1)
    sign = -1 if operation is Operation.CORRELATION else 1
    ends = [sorted(sign * (k - origin[i]) for k in (0, box[i] - 1)) for i in (0, 1)]
    assert [[rows[0], rows[-1]], [columns[0], columns[-1]]] == ends


@QUICK
@given(seeds, st.sampled_from(MODES[1:]), st.tuples(sides, sides))
def test_borders_fold_the_kernel(seed: int, mode: BorderMode, size: tuple[int, int]) -> None:
    """Each output's weights over the image, read off by impulses, sum to the kernel's sum."""
    taps = draw(seed, 5, 4)
    filter = make(taps.tolist(), mode=mode)
    weights = np.zeros(size, int)
    for place in np.ndindex(*size):
        impulse = np.zeros(size, int)
        impulse[place] = 1
        weights += sums(filter, impulse)
    assert (weights == taps.sum()).all()


@QUICK
@given(seeds, modes, st.integers(-40, 40))
def test_pedestal_is_zero_light(seed: int, mode: BorderMode, pedestal: int) -> None:
    """Codes moved with their pedestal give the same sums."""
    taps, image = draw(seed, 3, 3).tolist(), draw(seed + 1, 4, 5)
    plain = make(taps, source=SIGNED, mode=mode, value=3)
    lifted = make(taps, source=pixels(9, True, pedestal), mode=mode, value=3 + pedestal)
    assert np.array_equal(sums(plain, image), sums(lifted, image + pedestal))


def test_blocks_of_rows_leave_no_seams() -> None:
    """A frame of many blocks equals SciPy, border rows included, steps included."""
    image, taps = draw(1, 700, 310), draw(2, 9, 3)
    expected = convolve(extended(image, (20, 20), BorderMode.WHOLE_SAMPLE), taps, "full")
    same = expected[20 + 4 : 20 + 4 + 700, 20 + 1 : 20 + 1 + 310]
    knobs: dict[str, Any] = {"source": SIGNED, "mode": BorderMode.WHOLE_SAMPLE}
    assert np.array_equal(sums(make(taps.tolist(), **knobs), image), same)
    stepped = sums(make(taps.tolist(), step=(3, 1), phase=(2, 0), **knobs), image)
    assert np.array_equal(stepped, same[2::3])


@QUICK
@given(
    seed=seeds,
    size=st.tuples(sides, sides),
    lengths=st.tuples(sides, sides),
    spacing=st.tuples(gaps, gaps),
    vertical=st.booleans(),
    mode=modes,
    step=st.tuples(gaps, gaps),
)
def test_two_passes_equal_scipy_on_the_extended_input(
    seed: int,
    size: tuple[int, int],
    lengths: tuple[int, int],
    spacing: tuple[int, int],
    vertical: bool,
    mode: BorderMode,
    step: tuple[int, int],
) -> None:
    """A padded frame filtered, rounded by 8 and clipped to 8 bits, then filtered again."""
    image = draw(seed, *size)
    shapes = [(lengths[0], 1), (1, lengths[1])]
    one, two = shapes if vertical else shapes[::-1]
    a, b = draw(seed + 1, *one), draw(seed + 2, *two)
    middle = pixels(8, True, pedestal=3)
    knobs: dict[str, Any] = {"spacing": spacing, "step": step}
    first = make(a.tolist(), source=SIGNED, mode=mode, value=-9, exponent=-3, to=middle, **knobs)
    second = make(b.tolist(), source=middle, exponent=-2, **knobs)
    wide = convolve(extended(image, (30, 30), mode, -9), apart(a, spacing), "same")
    codes = np.clip(((wide + 4) >> 3) + 3, -128, 127)
    every = (convolve(codes - 3, apart(b, spacing), "same") + 2) >> 2
    # SciPy centres a kernel with zeros between its taps anew: half a tap later, at times.
    top, left = (
        30 + d * ((n - 1) // 2) - d * (n - 1) // 2 for n, d in zip(lengths, spacing, strict=True)
    )
    same = every[top : top + size[0] : step[0], left : left + size[1] : step[1]]
    assert output(two_passes(first, second), image) == same.tolist()


def apart(taps: Array, spacing: tuple[int, int]) -> Array:
    """Return the taps with zeros between them."""
    spread = np.zeros([(n - 1) * d + 1 for n, d in zip(taps.shape, spacing, strict=True)], int)
    spread[:: spacing[0], :: spacing[1]] = taps
    return spread
