"""Frames that attain the exact worst cases, from the sizing."""

from dataclasses import dataclass
from enum import StrEnum

import numpy as np

from guardbit.model.filter import Filter
from guardbit.model.sizing import RegisterSizing, Sizing, Witness
from guardbit.model.vectors import Codes, Purpose
from guardbit.vectors.stimuli import Stimulus

MOST_PIXELS = 1 << 22


class Shows(StrEnum):
    """What reaches the witness's value: a sum, a register at the end, or the code made of it."""

    FINAL = "final"
    PARTIAL = "partial"
    HELD = "held"
    CODE = "code"


@dataclass(frozen=True, eq=False)
class Attained:
    """A witness with its frame; `stimulus` is None where it has too many pixels to run."""

    pass_index: int
    register: RegisterSizing
    witness: Witness
    stimulus: Stimulus | None
    shows: Shows = Shows.FINAL

    @property
    def name(self) -> str:
        """Return what the frame is called."""
        return _name(self.witness, self.shows)


def witnesses(sizing: Sizing, most_pixels: int = MOST_PIXELS) -> tuple[Attained, ...]:
    """Return every witness of every register and requantiser, those of the sums first."""
    made = []
    for index, (register, requantiser) in enumerate(
        zip(sizing.registers, sizing.requantisers, strict=True)
    ):
        shown = [
            *((w, Shows.PARTIAL if w.partial else Shows.FINAL) for w in register.witnesses),
            *((w, Shows.HELD) for w in register.held_witnesses),
            *((w, Shows.CODE) for w in requantiser.witnesses),
        ]
        for witness, shows in shown:
            stimulus = _stimulus(sizing.filter, witness, shows, most_pixels)
            made.append(Attained(index, register, witness, stimulus, shows))
    extra = (Shows.HELD, Shows.CODE)
    return tuple(sorted(made, key=lambda attained: attained.shows in extra))


def witness_frames(sizing: Sizing) -> tuple[tuple[Witness, Codes], ...]:
    """Return every witness with its frame, (height, width, channels) of codes.

    Frames of more than MOST_PIXELS pixels are left out.
    """
    return tuple(
        (each.witness, each.stimulus.frame)
        for each in witnesses(sizing)
        if each.stimulus is not None
    )


def witness_frame(witness: Witness, channels: int) -> Codes:
    """Return the frame of a witness, (height, width, channels); all channels are alike."""
    frame = np.full((witness.height, witness.width, channels), witness.fill, np.int64)
    for row, column, code in witness.pixels:
        frame[row, column] = code
    return frame


def _stimulus(filter: Filter, witness: Witness, shows: Shows, most_pixels: int) -> Stimulus | None:
    if witness.height * witness.width > most_pixels:
        return None
    frame = witness_frame(witness, filter.geometry.channels)
    return Stimulus(_name(witness, shows), Purpose.WITNESS, frame)


def _name(witness: Witness, shows: Shows) -> str:
    return f"{witness.register}-{shows}-{witness.end}"
