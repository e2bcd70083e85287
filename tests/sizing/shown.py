"""What a witness's frame does at its position, from the definitions."""

import numpy as np

from guardbit.model.filter import Filter
from guardbit.model.sizing import Witness

from .small import Ints, Seen, middle_values, products, register, source_values


def witness_frame(f: Filter, witness: Witness) -> Ints:
    """Return a witness's frame as one row of codes, all of them legal."""
    frame = np.full((1, witness.height * witness.width), witness.fill, dtype=np.int64)
    for y, x, value in witness.pixels:
        frame[0, y * witness.width + x] = value
    assert f.input.low <= frame.min() <= frame.max() <= f.input.high
    return frame


def seen_in(f: Filter, witness: Witness, which: int) -> Seen:
    """Return what register number `which` does at a witness's position in its frame."""
    size, frame = (witness.height, witness.width), witness_frame(f, witness)
    p = f.passes[which]
    offsets = [(witness.position[0] + t.dy, witness.position[1] + t.dx) for t in p.kernel.terms]
    if which == 0:
        columns = [source_values(f, frame, size, y, x) for y, x in offsets]
    else:
        columns = [middle_values(f, frame, size, place, {}) for place in offsets]
    return Seen(witness.position, *register(p, products(p, columns, 1)))


def attained(f: Filter, witness: Witness, which: int) -> int:
    """Return what the sum of register number `which` reaches in a witness's frame."""
    return int(seen_in(f, witness, which).sums[0, witness.after])


def left_holding(f: Filter, witness: Witness, which: int) -> int:
    """Return what register number `which` holds at the end in a witness's frame."""
    return int(seen_in(f, witness, which).held[0])
