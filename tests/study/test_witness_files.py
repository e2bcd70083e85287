"""Witness frames as files: read back, run, and compared with what the index says of them."""

import json
from pathlib import Path
from typing import Any

import numpy as np
import pytest

import packaged
from guardbit.arith.borders import positions
from guardbit.files.images import parse_image
from guardbit.model.filter import Filter, loaded, registers_of
from guardbit.model.routine import Call
from guardbit.model.sizing import Sizing
from guardbit.model.vectors import Codes
from guardbit.reference.run import respond
from guardbit.study.witnesses import witness_files
from guardbit.vectors.witnesses import witness_frames

EXAMPLES = sorted((Path(__file__).parents[2] / "examples").glob("*.toml"))

HEAD = """
[filter]
name = "probe"
operation = "correlation"
[kernel]
{kernel}
[input]
{input}
"""


def sizing_of(text: str, folder: Path = Path()) -> Sizing:
    return packaged.sized(text, folder, "probe")


def small(kernel: str, pixel: str, rest: str = "") -> Sizing:
    return sizing_of(HEAD.format(kernel=kernel, input=pixel) + rest)


def index_of(files: dict[str, bytes]) -> dict[str, Any]:
    (name,) = (name for name in files if name.endswith(".json"))
    index: dict[str, Any] = json.loads(files[name])
    return index


def place(sizing: Sizing, entry: dict[str, Any], frame: Codes) -> tuple[int, int] | None:
    geometry = sizing.filter.geometry
    rows = positions(geometry.rows, geometry.extent, frame.shape[0])
    columns = positions(geometry.columns, geometry.extent, frame.shape[1])
    y, x = entry["position"]
    return (rows.index(y), columns.index(x)) if y in rows and x in columns else None


def with_taps(f: Filter, entry: dict[str, Any]) -> Filter:
    """The filter with the taps loaded that an entry names, if it does."""
    s = registers_of(f)
    assert (s is None) == (entry["taps"] is None)
    return f if s is None else loaded(f, [entry["taps"][cell] for cell in s.cells])


def check(sizing: Sizing) -> dict[str, Any]:
    files = dict(witness_files(sizing))
    index, f = index_of(files), sizing.filter
    assert set(files) == {e["file"] for e in index["frames"]} | {f"{f.name}.witnesses.json"}
    for entry in index["frames"]:
        frame = parse_image(files[entry["file"]], entry["file"])
        assert frame.shape == (entry["height"], entry["width"], f.geometry.channels)
        assert f.input.low <= frame.min() <= frame.max() <= f.input.high
        response, at = respond(with_taps(f, entry), frame), place(sizing, entry, frame)
        assert entry["output"] == (None if at is None else int(response.output[at][0]))
        last = entry["register"] in ("accumulator", "output")
        if last and at is not None and entry["shows"] != "partial":
            shown = response.output if entry["shows"] == "code" else response.accumulators[-1]
            a = f.passes[-1].accumulator
            acts = sizing.registers[-1].held != sizing.registers[-1].final
            if entry["shows"] != "final" or not acts:
                assert int(shown[at][0]) == entry["value"], (a, entry)
    for end in index["ends"]:
        assert (end["file"] is None) == (end["why"] is not None)
        assert end["file"] is None or end["file"] in files
    return index


@pytest.mark.parametrize("path", EXAMPLES, ids=lambda path: path.stem)
def test_examples(path: Path) -> None:
    sizing = sizing_of(path.read_text("utf-8"), path.parent)
    index = check(sizing)
    assert all(end["file"] for end in index["ends"])
    assert len(index["ends"]) == 10 * len(sizing.registers)
    names = {entry["file"] for entry in index["frames"]}
    kind = "pgm" if sizing.filter.geometry.channels == 1 else "npy"
    for register in sizing.registers:
        unit = register.name.replace(".", "_")
        for ends in ("final-least", "final-greatest", "partial-least", "partial-greatest"):
            assert f"probe.{unit}-{ends}.{kind}" in names


def test_a_saturated_output_hides_ends_and_is_said_to() -> None:
    index = check(small("taps = [[-1, 3, -1]]", "bits = 8"))
    hidden = {(e["shows"], e["end"]): (e["output"], e["hidden"]) for e in index["frames"]}
    assert hidden["final", "greatest"] == (255, "saturated output")
    assert hidden["final", "least"] == (0, "saturated output")
    open_ = check(small("taps = [[-1, 3, -1]]", "bits = 8", "[output]\nbits = 11\nsigned = true\n"))
    assert all(entry["hidden"] is None for entry in open_["frames"])


def test_later_taps_hide_partial_sums() -> None:
    index = check(small("taps = [[1, 1, -1]]", "bits = 8\nrange = [16, 235]",
                        "[output]\nbits = 11\nsigned = true\n"))  # fmt: skip
    hidden = {(e["shows"], e["end"]): e["hidden"] for e in index["frames"]}
    assert hidden["partial", "greatest"] == "later taps"
    assert hidden["final", "greatest"] is None


def test_a_saturated_intermediate_hides_the_first_pass() -> None:
    passes = "column = [3, -1]\nrow = [1, 1]\ndivisor = [1, 1]"
    rest = "[intermediate]\nbits = 9\nsigned = false\n[output]\nbits = 12\n"
    index = check(small(passes, "bits = 8", rest))
    hidden = {
        (e["register"], e["end"]): e["hidden"] for e in index["frames"] if e["shows"] == "final"
    }
    assert hidden["intermediate.accumulator", "greatest"] == "saturated intermediate"
    assert hidden["accumulator", "greatest"] is None


def test_signed_codes_and_several_channels_go_to_array_files() -> None:
    for pixel, rest in (("bits = 8\nsigned = true", ""), ("bits = 8", "[image]\nchannels = 3\n")):
        sizing = small("taps = [[1, 2, 1]]", pixel, rest)
        files = witness_files(sizing)
        assert "probe.accumulator-final-least.npy" in files
        check(sizing)
    sizing = small("taps = [[1, 2, 1]]", "bits = 12")
    assert witness_files(sizing)["probe.accumulator-final-greatest.pgm"].startswith(
        b"P5\n3 1\n4095\n"
    )


def test_registers_and_codes_that_wrap_have_frames_of_their_own() -> None:
    rest = '[accumulator]\nbits = 8\noverflow = "wrap"\n[output]\nbits = 4\noverflow = "wrap"\n'
    index = check(small("taps = [[3, 5]]", "bits = 6", rest))
    shows = {(e["register"], e["shows"], e["end"]): e["value"] for e in index["frames"]}
    assert shows["accumulator", "held", "least"] == -128
    assert shows["accumulator", "held", "greatest"] == 127
    assert shows["output", "code", "least"] == 0
    assert shows["output", "code", "greatest"] == 15
    files = [e["file"] for e in index["ends"] if (e["unit"], e["range"]) == ("output", "code")]
    assert files == ["probe.output-code-least.pgm", "probe.output-code-greatest.pgm"]


def test_what_is_only_a_bound_says_so() -> None:
    """A register of 40 bits that wraps: too many sums to list."""
    rest = '[coefficient]\nbits = 32\n[accumulator]\nbits = 40\noverflow = "wrap"\n'
    index = check(small("taps = [[2147483647, 1]]", "bits = 16", rest))
    held = [e for e in index["ends"] if e["range"] == "held"]
    assert [e["file"] for e in held] == [None, None]
    assert all(e["why"].startswith("bound") for e in held)


COMPILED = [
    ('[accumulator]\nbits = 8\noverflow = "wrap"\n', "taps = [[3, 5]]"),
    ('[accumulator]\nbits = 7\noverflow = "saturate"\n[border]\nmode = "replicate"\n'
     "[image]\nwidth = [1, 1]\nheight = [1, 1]\n", "taps = [[3, -1, 5, -4]]"),
    ('[intermediate]\nbits = 5\noverflow = "wrap"\n[border]\nmode = "half-sample"\n',
     "column = [3, -2]\nrow = [1, -3, 1]\ndivisor = [1, 1]"),
]  # fmt: skip


@pytest.mark.parametrize("overflow", ["saturate", "wrap"])
def test_taps_that_are_to_be_loaded_are_named(overflow: str) -> None:
    kernel = "taps = [[1, -4, 1], [0, 6, 0]]\ndivisor = 4"
    rest = "[coefficient]\nregisters = { least = -9, greatest = [[3, 9, 1], [3, 8, 2]], sum = 4 }\n"
    output = f"[output]\nbits = 6\noverflow = '{overflow}'\n"
    index = check(small(kernel, "bits = 4", rest + output))
    assert any(entry["taps"] != [1, -4, 1, 0, 6, 0] for entry in index["frames"])
    for entry in index["frames"]:
        assert sum(entry["taps"]) == 4 and len(entry["taps"]) == 6


def test_compiled_c_gives_what_the_index_says() -> None:
    specs = [HEAD.format(kernel=kernel, input="bits = 4") + rest for rest, kernel in COMPILED]
    made = [packaged.made(text, Path(), f"probe{n}") for n, text in enumerate(specs)]
    compiled = packaged.library(made, "witness-files")
    compared = 0
    for each in made:
        files, f = witness_files(each.sizing), each.sizing.filter
        for entry in index_of(dict(files))["frames"]:
            frame = parse_image(files[entry["file"]], entry["file"])
            expected = respond(f, frame).output
            call = Call(frame, (expected.shape[0], expected.shape[1]))
            (outcome,) = compiled.run([(each.emission.routine, call)])
            assert outcome.output is not None
            assert np.array_equal(outcome.output, expected)
            at = place(each.sizing, entry, frame)
            compared += at is not None and int(outcome.output[at][0]) == entry["output"]
    assert compared > 15


def test_frames_as_data() -> None:
    sizing = small("taps = [[-1, 3, -1]]", "bits = 8")
    made = witness_frames(sizing)
    assert [w for w, _ in made] == list(sizing.registers[0].witnesses)
    for witness, frame in made:
        assert frame.dtype == np.int64
        assert frame.shape == (witness.height, witness.width, 1)
