"""The implementations of the contract that the tests hold against published numbers."""

from __future__ import annotations

import tomllib
from collections.abc import Callable
from functools import cache
from pathlib import Path

import pytest

import oracle
from guardbit.build.library import Library
from guardbit.model.filter import Filter
from guardbit.model.finding import SpecError
from guardbit.model.routine import Call, Outcome
from guardbit.reference.run import rejects, respond
from packaged import (
    BAD_CODE,
    BAD_TAPS,
    Image,
    Made,
    cells_of,
    codes,
    image_of,
    library,
    made,
    sized,
    with_taps,
)

Rows = list[list[int]]
Taps = Rows | None
Implementation = Callable[[str, Image, Taps], tuple[Image, Image | None]]

FOLDER = Path(__file__).parent / "contract" / "cases"


class RefusedError(ValueError):
    """The implementation refuses the spec."""


class RejectedError(ValueError):
    """The implementation refuses the frame for a code outside the range (BAD_CODE)."""


class IllegalTapsError(ValueError):
    """The implementation refuses the taps (BAD_TAPS)."""


def by_oracle(spec: str, image: Image, taps: Taps = None) -> tuple[Image, Image | None]:
    """The oracle's output and accumulators."""
    try:
        contract = oracle.load(spec, FOLDER)
    except oracle.ContradictionError as error:
        raise RefusedError(str(error)) from error
    if taps is not None:
        assert contract.registers is not None
        if not contract.registers.allows(taps):
            raise IllegalTapsError
        contract = oracle.load(spec, FOLDER, taps)
    if oracle.rejects(contract, image):
        raise RejectedError
    return oracle.run(contract, image)


def by_reference(spec: str, image: Image, taps: Taps = None) -> tuple[Image, Image | None]:
    """The NumPy reference's output and accumulators."""
    try:
        f = sized(spec, FOLDER, "case").filter
    except SpecError as error:
        raise RefusedError(str(error)) from error
    f = f if taps is None else _loaded(f, taps)
    frame = codes(image)
    if rejects(f, frame):
        raise RejectedError
    response = respond(f, frame)
    accumulators = response.accumulators[-1].astype(object)
    return image_of(response.output), accumulators.tolist() if accumulators.size else []


def _loaded(f: Filter, taps: Rows) -> Filter:
    """The filter with other taps. Raises IllegalTapsError."""
    found = with_taps(f, taps)
    if found is None:
        raise IllegalTapsError
    return found


def by_compiled(spec: str, image: Image, taps: Taps = None) -> tuple[Image, Image | None]:
    """The emitted C's output; its accumulators are not seen."""
    found = _compiled_cases().get(spec) or _compiled(spec)
    if isinstance(found, SpecError):
        raise RefusedError(str(found)) from found
    made_, library_ = found
    outcome = _run(made_, library_, image, taps)
    assert outcome.harm is None, (outcome.harm, outcome.detail)
    if outcome.statuses == (BAD_CODE,):
        raise RejectedError
    if outcome.statuses == (BAD_TAPS,):
        raise IllegalTapsError
    assert outcome.statuses == (0,)
    assert outcome.output is not None
    return image_of(outcome.output), None


def _run(made_: Made, library_: Library, image: Image, taps: Taps) -> Outcome:
    frame = codes(image)
    shape = respond(made_.sizing.filter, frame).output.shape[:2]
    call = Call(frame, (shape[0], shape[1]), taps=None if taps is None else cells_of(taps))
    (outcome,) = library_.run([(made_.emission.routine, call)])
    assert outcome.size is None or outcome.size == shape or 0 in shape
    return outcome


Compiled = tuple[Made, Library] | SpecError


def _try(spec: str, name: str) -> Made | SpecError:
    try:
        return made(spec, FOLDER, name)
    except SpecError as error:
        return error


@cache
def _compiled(spec: str) -> Compiled:
    """The spec compiled alone."""
    name = f"one{abs(hash(spec))}"[:24]
    found = _try(spec, name)
    return found if isinstance(found, SpecError) else (found, library([found], name))


@cache
def _compiled_cases() -> dict[str, Compiled]:
    """All specs of the contract's cases, compiled together."""
    texts = [
        case["spec"]
        for path in sorted(FOLDER.glob("*.toml"))
        for case in tomllib.loads(path.read_text(encoding="utf-8"))["case"]
    ]
    found = {text: _try(text, f"case{number}") for number, text in enumerate(dict.fromkeys(texts))}
    shared = library([m for m in found.values() if isinstance(m, Made)], "cases")
    return {t: m if isinstance(m, SpecError) else (m, shared) for t, m in found.items()}


def implementations() -> list[tuple[str, Implementation]]:
    """A label and a function (spec, image, taps) -> (output, accumulators or None) for each.

    The spec is a text; taps are loaded into coefficient registers (None: those of the kernel).

    Images are lists of rows of pixels, a pixel a list of channels; an empty output is [].
    Paths in a spec are relative to the folder of the contract's cases. The function raises
    RefusedError for a spec that has no meaning and RejectedError for a frame with BAD_CODE.
    """
    return [("oracle", by_oracle), ("reference", by_reference), ("compiled", by_compiled)]


each_implementation = pytest.mark.parametrize(
    "implementation", [pytest.param(call, id=label) for label, call in implementations()]
)


def filtered(implementation: Implementation, spec: str, rows: Rows) -> Rows:
    """The output of a one-channel image, as rows of numbers."""
    return _plain(implementation(spec, _pixels(rows), None)[0])


def summed(implementation: Implementation, spec: str, rows: Rows) -> Rows | None:
    """The accumulators of a one-channel image, as rows of numbers, where they are seen."""
    accumulators = implementation(spec, _pixels(rows), None)[1]
    return None if accumulators is None else _plain(accumulators)


def _pixels(rows: Rows) -> Image:
    return [[[code] for code in row] for row in rows]


def _plain(image: Image) -> Rows:
    return [[pixel[0] for pixel in row] for row in image]
