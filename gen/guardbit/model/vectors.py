"""Stimulus frames and the responses that the reference gives, as data."""

from dataclasses import dataclass
from enum import StrEnum

import numpy as np
from numpy.typing import NDArray

Codes = NDArray[np.int64]


class Purpose(StrEnum):
    """Why a frame is there."""

    IMPULSE = "impulse"
    WITNESS = "witness"
    STRUCTURE = "structure"
    RANDOM = "random"
    PHOTOGRAPH = "photograph"


@dataclass(frozen=True, eq=False)
class Response:
    """What the contract says a frame gives.

    `output` is (rows, columns, channels) of codes. `accumulators` holds, per pass, the final
    value of its accumulator as the requantiser reads it. The last pass's has the shape of
    `output`. The first of two passes' covers the positions that the second reads: for a
    vertical first pass (output rows, every extended column read, channels) in ascending
    order, for a horizontal first pass (every extended row read, output columns, channels).
    """

    output: Codes
    accumulators: tuple[NDArray[np.int64] | NDArray[np.object_], ...]


@dataclass(frozen=True, eq=False)
class Vector:
    """A named frame, (height, width, channels) of codes, and its response."""

    name: str
    purpose: Purpose
    frame: Codes
    response: Response
