"""The package's reference and its compiled C, in the shape of tests/implementations.py."""

from __future__ import annotations

import atexit
import tempfile
from collections.abc import Sequence
from dataclasses import dataclass, replace
from functools import cache
from pathlib import Path

import numpy as np

from guardbit.arith.tapset import is_member
from guardbit.build.compiler import find_compiler
from guardbit.build.library import Library, compile_library
from guardbit.emit.emission import emit
from guardbit.fit.resolve import resolve
from guardbit.model.filter import Filter, loaded, raster, registers_of
from guardbit.model.finding import SpecError
from guardbit.model.routine import Codes, Emission
from guardbit.model.sizing import Sizing
from guardbit.plan.direct import direct
from guardbit.sizing.analyse import analyse, unmet
from guardbit.spec.reader import parse_spec

Image = list[list[list[int]]]
Rows = list[list[int]]
BAD_CODE, BAD_TAPS = 5, 6


@dataclass(frozen=True)
class Made:
    """A spec taken through the generator."""

    sizing: Sizing
    emission: Emission


def sized(spec: str, folder: Path, name: str) -> Sizing:
    """The sizing of a spec's text, its filter renamed. Raises SpecError, also for what is unmet."""
    f = replace(resolve(parse_spec(spec, "case.toml", folder)), name=name)
    sizing = analyse(f)
    if findings := unmet(sizing):
        raise SpecError(*findings)
    return sizing


def made(spec: str, folder: Path, name: str) -> Made:
    """The emission of a spec's text. Raises SpecError."""
    sizing = sized(spec, folder, name)
    return Made(sizing, emit(sizing, direct(sizing), ()))


@cache
def scratch_folder() -> Path:
    """A folder that goes when the tests end."""
    folder = tempfile.TemporaryDirectory(prefix="guardbit-tests-")
    atexit.register(folder.cleanup)
    return Path(folder.name)


def library(filters: Sequence[Made], label: str) -> Library:
    """One shared library of many filters, which is far quicker than one each."""
    folder = scratch_folder() / label
    folder.mkdir(exist_ok=True)
    routines = [m.emission.routine for m in filters]
    return compile_library(find_compiler(), routines, (), folder)


def cells_of(taps: Rows) -> tuple[int, ...]:
    """The taps as a call takes them."""
    return tuple(tap for row in taps for tap in row)


def with_taps(f: Filter, taps: Rows) -> Filter | None:
    """The filter with taps that are given row by row of its kernel; None: they are not legal."""
    s = registers_of(f)
    assert s is not None
    cells = cells_of(taps)
    chosen = [cells[cell] for cell in s.cells]
    legal = is_member(s, chosen) and raster(s, chosen) == cells
    return loaded(f, chosen) if legal else None


def codes(image: Image) -> Codes:
    """The image as an array of rows, columns, channels."""
    return np.array(image, dtype=np.int64)


def image_of(array: Codes) -> Image:
    """The array as lists; an image without pixels is []."""
    rows: Image = array.tolist() if array.size else []
    return rows
