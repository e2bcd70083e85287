"""The examples are true: their C is what emit writes, their data what the script makes.

The ladder on all of them is `make demo`; here it runs on three that differ most.
"""

import difflib
import re
from collections.abc import Callable
from functools import cache
from importlib.util import module_from_spec, spec_from_file_location
from pathlib import Path
from types import ModuleType

import numpy as np
import pytest

from guardbit.cli import api
from guardbit.cli.main import status_of
from guardbit.model.enums import BorderMode, Extent, FitRule, Outside, Overflow, Preload, Rounding
from guardbit.model.filter import Filter
from guardbit.model.routine import Codes
from guardbit.reference.run import respond

EXAMPLES = Path(__file__).parents[2] / "examples"
SPECS = sorted(EXAMPLES.glob("*.toml"))
NAMES = [spec.stem for spec in SPECS]
ACCEPT = "if that is meant, accept the new text with: make accept-examples"


@cache
def product(name: str) -> api.Product:
    return api.emit(EXAMPLES / f"{name}.toml")


@cache
def filter_of(name: str) -> Filter:
    return api.size(EXAMPLES / f"{name}.toml").filter


def module(name: str) -> ModuleType:
    found = spec_from_file_location(f"examples_{name}", EXAMPLES / f"{name}.py")
    assert found is not None and found.loader is not None
    made = module_from_spec(found)
    found.loader.exec_module(made)
    return made


@pytest.mark.parametrize("name", NAMES)
def test_committed_c_is_what_emit_writes(name: str) -> None:
    for file, text in product(name).files.items():
        path = EXAMPLES / "c" / file
        there = path.read_text(encoding="utf-8") if path.exists() else ""
        changes = difflib.unified_diff(there.split("\n"), text.split("\n"), file, "emit", n=1)
        difference = "\n".join(list(changes)[:40])
        assert there == text, f"examples/c/{file} is not what emit writes; {ACCEPT}\n{difference}"


def test_committed_c_has_no_other_files() -> None:
    made = {file for name in NAMES for file in product(name).files}
    there = {path.name for path in (EXAMPLES / "c").iterdir()}
    assert there == made, f"examples/c holds other files than emit writes; {ACCEPT}"


def test_three_specs_climb_the_ladder(capsys: pytest.CaptureFixture[str]) -> None:
    chosen = ("align6", "mosaic_green", "raw_smooth")
    status = status_of(["verify", *(str(EXAMPLES / f"{name}.toml") for name in chosen)])
    captured = capsys.readouterr()
    assert status == 0, captured.out + captured.err


@pytest.mark.parametrize("spec", SPECS, ids=NAMES)
def test_a_spec_says_what_it_is_for(spec: Path) -> None:
    text = spec.read_text(encoding="utf-8")
    assert re.match(r"# Why: .+\.\n", text)
    assert filter_of(spec.stem).summary
    assert filter_of(spec.stem).name == spec.stem


def test_the_table_names_every_spec() -> None:
    rows = (EXAMPLES / "README.md").read_text(encoding="utf-8").split("\n")
    listed = [row.split("`")[1] for row in rows if row.startswith("| `")]
    assert sorted(listed) == NAMES


SHOWN: dict[str, tuple[Callable[[Filter], object], set[object]]] = {
    "borders": (lambda f: f.border.mode, set(BorderMode)),
    "codes outside the range": (lambda f: f.outside, set(Outside)),
    "extents": (lambda f: f.geometry.extent, {Extent.SAME, Extent.VALID}),
    "fits": (lambda f: f.passes[0].kernel.rule, {FitRule.NEAREST, FitRule.GAIN}),
    "registers": (
        lambda f: f.passes[-1].accumulator.overflow,
        {Overflow.FORBID, Overflow.SATURATE},
    ),
    "preloads": (lambda f: f.passes[-1].accumulator.preload, set(Preload)),
    "roundings": (
        lambda f: f.passes[-1].requantiser.rounding,
        {
            Rounding.TIES_TO_EVEN,
            Rounding.TIES_TO_AWAY,
            Rounding.TIES_TO_POSITIVE,
            Rounding.TOWARD_ZERO,
        },
    ),
    "passes": (lambda f: len(f.passes), {1, 2}),
    "pedestals": (lambda f: (f.input.pedestal > 0, f.output.pedestal > 0), {(True, True)}),
    "divisors": (lambda f: f.passes[0].kernel.divisor, {1, 25}),
    "channels": (lambda f: f.geometry.channels, {1, 3}),
    "steps": (lambda f: f.geometry.rows.step, {1, 2}),
    "spacings": (lambda f: f.geometry.rows.spacing, {1, 2}),
}


@pytest.mark.parametrize("what", SHOWN)
def test_the_set_shows_each_feature(what: str) -> None:
    read, wanted = SHOWN[what]
    assert wanted <= {read(filter_of(name)) for name in NAMES}


@pytest.mark.parametrize(
    ("name", "total"), [("raw_smooth", 16384), ("label_psf", 256), ("seam", 0)]
)
def test_a_gain_fit_keeps_the_sum(name: str, total: int) -> None:
    kernel = filter_of(name).passes[0].kernel
    assert sum(term.integer for term in kernel.terms) == total
    assert kernel.residual == 0


def frame(height: int, width: int) -> Codes:
    codes: Codes = np.random.default_rng(18).integers(0, 256, (height, width, 1), np.int64)
    return codes


def six_taps(codes: Codes, axis: int) -> Codes:
    """RFC 6386, section 18.3: the half-sample filter, rounded and clamped to a pixel."""
    padding = [(2, 3) if each == axis else (0, 0) for each in range(codes.ndim)]
    wide = np.pad(codes, padding, mode="edge")
    n = codes.shape[axis]
    taps = (3, -16, 77, 77, -16, 3)
    total = sum(tap * wide.take(range(k, k + n), axis) for k, tap in enumerate(taps))
    pixels: Codes = np.clip((np.asarray(total, np.int64) + 64) >> 7, 0, 255)
    return pixels


@pytest.mark.parametrize("shape", [(1, 1), (2, 3), (17, 23)])
def test_align6_does_the_published_arithmetic(shape: tuple[int, int]) -> None:
    codes = frame(*shape)
    expected = six_taps(six_taps(codes, 1), 0)
    assert np.array_equal(respond(filter_of("align6"), codes).output, expected)


def test_mean25_divides_exactly() -> None:
    codes = frame(9, 11)
    wide = np.pad(codes[:, :, 0], 2, constant_values=240)
    sums = np.lib.stride_tricks.sliding_window_view(wide, (5, 5)).sum((2, 3))
    output = respond(filter_of("mean25"), codes).output[:, :, 0]
    assert np.array_equal(output, (2 * sums + 25) // 50)


def test_flat_raw_frames_keep_their_level() -> None:
    for code in (64, 256, 1000, 4032):
        flat = np.full((8, 9, 1), code, np.int64)
        assert np.array_equal(respond(filter_of("raw_smooth"), flat).output, flat)


def test_the_script_makes_the_committed_data() -> None:
    made: dict[str, bytes] = module("make_data").files()
    assert set(made) == {path.name for path in (EXAMPLES / "data").iterdir()}
    for name, data in made.items():
        assert (EXAMPLES / "data" / name).read_bytes() == data, name


def test_a_mosaic_takes_one_colour_per_pixel() -> None:
    pictures = module("pictures")
    codes = np.arange(4 * 4 * 3, dtype=np.int64).reshape(4, 4, 3)
    colour = pictures.Photograph("", codes, "")
    to = filter_of("mosaic_green").input
    raw = pictures.shot(filter_of("mosaic_green"), colour, colour).frame[:, :, 0]
    stretched = to.low + (codes * (to.high - to.low) + 127) // 255
    assert raw[2, 2] == stretched[2, 2, 0]
    assert raw[2, 3] == stretched[2, 3, 1]
    assert raw[3, 2] == stretched[3, 2, 1]
    assert raw[3, 3] == stretched[3, 3, 2]


def test_images_hold_their_codes_or_say_that_they_are_scaled() -> None:
    pictures = module("pictures")
    signed = np.array([[[-40], [0]], [[20], [10]]], np.int64)
    files, said = pictures.saved(signed, filter_of("slope_x").output, "x")
    assert set(files) == {"x.png", "x.npy"}
    assert "scaled" in said
    files, said = pictures.saved(np.abs(signed), filter_of("soften5").output, "y")
    assert set(files) == {"y.png"}
    assert "scaled" not in said
