"""What a first pass makes at the positions of one class, and pixels that show it."""

from collections.abc import Mapping
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from guardbit.arith.intervals import requantised_range, shift, unlimited_range
from guardbit.arith.rounding import requantise
from guardbit.model.enums import Overflow
from guardbit.model.filter import Requantiser
from guardbit.model.sizing import Interval
from guardbit.sizing.clamping import Pixel
from guardbit.sizing.place import Held, Place
from guardbit.sizing.reach import MOST_VALUES, SET_BITS, Reach, codes_of


def keeps_order(r: Requantiser, preloaded: bool, argument: Interval) -> bool:
    """Return whether a requantiser keeps the order of all of `argument`."""
    if r.overflow is not Overflow.WRAP:
        return True
    values = unlimited_range(r, preloaded, argument)
    return (values.low - r.to.low) >> r.to.bits == (values.high - r.to.low) >> r.to.bits


@dataclass(frozen=True)
class Results:
    """The codes that a requantiser makes of a register, less the pedestal of their format."""

    place: Place
    requantiser: Requantiser
    preloaded: bool

    @cached_property
    def held(self) -> Held:
        """Return their range, exact where each end is attained by a frame."""
        argument = self.place.held
        if not keeps_order(self.requantiser, self.preloaded, argument.range):
            if self.reach is not None:
                return Held(self.reach.ends, True)
            argument = Held(argument.range, False)
        codes = requantised_range(self.requantiser, self.preloaded, argument.range)
        return Held(shift(codes, -self.requantiser.to.pedestal), argument.exact)

    @cached_property
    def reach(self) -> Reach | None:
        """Return all of them; None where these are too many to list."""
        sums = self.place.reach
        if sums is None or sums.mask.bit_count() > MOST_VALUES:
            return None
        codes = codes_of(self.requantiser, self.preloaded, sums)
        if codes.max() - codes.min() > SET_BITS:
            return None
        return Reach.of(codes - self.requantiser.to.pedestal)

    @property
    def is_interior(self) -> bool:
        """Return whether no read of the first pass leaves the image."""
        return self.place.row.is_interior and self.place.column.is_interior

    def pixels(self, value: int) -> Mapping[Pixel, int] | None:
        """Return pixels of the first pass that make `value`; None: not searched."""
        total = self._sum_of(value)
        return None if total is None else self.place.pixels(total)

    def _sum_of(self, value: int) -> int | None:
        """Return a sum of which the value is made: an end of what is held, or any."""
        code, held = value + self.requantiser.to.pedestal, self.place.held
        if held.exact:
            for end in (held.range.low, held.range.high):
                if requantise(self.requantiser, self.preloaded, end) == code:
                    return end
        sums = self.place.reach
        if sums is None:
            return None
        codes = codes_of(self.requantiser, self.preloaded, sums)
        return int(sums.members[int(np.argmax(codes == code))])
