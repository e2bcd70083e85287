"""Frames that attain the exact worst cases, from the sizing."""

from dataclasses import dataclass

import numpy as np

from guardbit.model.sizing import RegisterSizing, Sizing, Witness
from guardbit.model.vectors import Codes, Purpose
from guardbit.vectors.stimuli import Stimulus

MOST_PIXELS = 1 << 22


@dataclass(frozen=True, eq=False)
class Attained:
    """A witness with its frame; `stimulus` is None where it has too many pixels to run."""

    pass_index: int
    register: RegisterSizing
    witness: Witness
    stimulus: Stimulus | None


def witnesses(sizing: Sizing, most_pixels: int = MOST_PIXELS) -> tuple[Attained, ...]:
    """Return every witness of every register, in order."""
    channels = sizing.filter.geometry.channels
    return tuple(
        Attained(index, register, witness, _stimulus(witness, channels, most_pixels))
        for index, register in enumerate(sizing.registers)
        for witness in register.witnesses
    )


def witness_frame(witness: Witness, channels: int) -> Codes:
    """Return the frame of a witness, (height, width, channels); all channels are alike."""
    frame = np.full((witness.height, witness.width, channels), witness.fill, np.int64)
    for row, column, code in witness.pixels:
        frame[row, column] = code
    return frame


def _stimulus(witness: Witness, channels: int, most_pixels: int) -> Stimulus | None:
    if witness.height * witness.width > most_pixels:
        return None
    kind = "partial" if witness.partial else "final"
    name = f"{witness.register}-{kind}-{witness.end}".replace(" ", "-")
    return Stimulus(name, Purpose.WITNESS, witness_frame(witness, channels))
