"""Every clause of the arithmetic contract, as cases in files, against every implementation."""

import tomllib
from pathlib import Path
from typing import Any

import pytest

from implementations import (
    IllegalTapsError,
    Implementation,
    RefusedError,
    RejectedError,
    each_implementation,
)

CASES = Path(__file__).parent / "cases"
GROUPS = {
    "accumulator",
    "appendix",
    "border",
    "coefficients",
    "convolution",
    "extents",
    "pixels",
    "registers",
    "requantiser",
    "two_passes",
}
KEYS = {
    "title",
    "clause",
    "source",
    "spec",
    "image",
    "output",
    "accumulator",
    "refused",
    "rejected",
    "taps",
    "illegal",
}
ONE_PIXEL = [[[0]]]

Image = list[list[list[int]]]


def read_group(path: Path) -> list[dict[str, Any]]:
    """The cases of a file; there must be some, each with a source and an expectation."""
    cases: list[dict[str, Any]] = tomllib.loads(path.read_text(encoding="utf-8")).get("case", [])
    assert cases, f"{path.name} holds no case"
    for case in cases:
        assert {"title", "clause", "source", "spec"} <= set(case) <= KEYS, case.get("title")
        assert set(case) & {"output", "accumulator", "refused", "rejected", "illegal"}, case[
            "title"
        ]
    return cases


def all_cases() -> list[Any]:
    """One parameter per case, named by its group and title."""
    return [
        pytest.param(case, id=f"{path.stem}: {case['title']}")
        for path in sorted(CASES.glob("*.toml"))
        for case in read_group(path)
    ]


def pixels(rows: list[list[Any]]) -> Image:
    """The rows with each pixel as a list of channels (a bare number is one channel)."""
    return [[pixel if isinstance(pixel, list) else [pixel] for pixel in row] for row in rows]


def test_no_group_of_clauses_is_missing() -> None:
    assert {path.stem for path in CASES.glob("*.toml")} == GROUPS


def test_each_case_has_a_name_of_its_own() -> None:
    names = [parameter.id for parameter in all_cases()]
    assert len(names) == len(set(names))


@pytest.mark.parametrize("case", all_cases())
@each_implementation
def test_contract(case: dict[str, Any], implementation: Implementation) -> None:
    image = pixels(case["image"]) if "image" in case else ONE_PIXEL
    if case.get("refused") or case.get("rejected"):
        with pytest.raises(RefusedError if case.get("refused") else RejectedError):
            implementation(case["spec"], image, None)
        return
    taps = case.get("taps")
    if case.get("illegal"):
        with pytest.raises(IllegalTapsError):
            implementation(case["spec"], image, taps)
        return
    output, accumulator = implementation(case["spec"], image, taps)
    if "output" in case:
        assert output == pixels(case["output"])
    if "accumulator" in case and accumulator is not None:
        assert accumulator == pixels(case["accumulator"])
