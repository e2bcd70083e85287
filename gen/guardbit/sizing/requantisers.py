"""How wide a requantiser is inside, and what can leave it."""

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property

from guardbit.arith.intervals import (
    contains,
    hull,
    requantised_range,
    scale,
    shift,
    unlimited_range,
)
from guardbit.arith.rounding import adding_constant, capped_ratio
from guardbit.arith.words import bits_needed, format_range
from guardbit.model.enums import Overflow
from guardbit.model.filter import Pass, PixelFormat, Requantiser
from guardbit.model.sizing import Interval, RequantiserSizing
from guardbit.sizing.passes import is_preloaded
from guardbit.sizing.place import Held, Place
from guardbit.sizing.register import Register
from guardbit.sizing.results import Results, keeps_order


@dataclass(frozen=True)
class Requantised:
    """The codes that a pass makes of its register; `exact`: its pixels' range is."""

    its_pass: Pass
    register: Register
    exact: bool

    @property
    def wraps(self) -> bool:
        """Return whether codes wrap so that they do not follow the order of the sums."""
        p, argument = self.its_pass, self.register.held.range
        return not keeps_order(p.requantiser, is_preloaded(p), argument)

    @cached_property
    def codes(self) -> Held:
        """Return their range, exact where both ends are attained."""
        r, argument = self.its_pass.requantiser, self.register.held
        loose = requantised_range(r, is_preloaded(self.its_pass), argument.range)
        if not self.wraps:
            return Held(loose, self.exact and argument.exact)
        reaches = [each.reach for each in self.results]
        found = [shift(reach.ends, r.to.pedestal) for reach in reaches if reach is not None]
        if self.exact and found and len(found) == len(reaches):
            return Held(hull(found), True)
        return Held(loose, False)

    @cached_property
    def results(self) -> tuple[Results, ...]:
        """Return what is made in classes that show all the codes; none if they are too many."""
        codes, pedestal = legal_codes(self._to), self._to.pedestal
        sample = self._results(self.register.holding.sample)
        reaches = [results.reach for results in sample]
        if any(r is not None and shift(r.ends, pedestal) == codes for r in reaches):
            return sample
        return self._results(self.register.holding.places)

    @property
    def _to(self) -> PixelFormat:
        return self.its_pass.requantiser.to

    def _results(self, places: Sequence[Place]) -> tuple[Results, ...]:
        r, preloaded = self.its_pass.requantiser, is_preloaded(self.its_pass)
        return tuple(Results(place, r, preloaded) for place in places)


def size_requantiser(name: str, made: Requantised) -> RequantiserSizing:
    """Return the sizing of a pass's requantiser.

    Its width holds the scaled sum, that with the constant which add-then-floor needs for the
    rounding mode, and the rounded value with the pedestal, all in one word: unsigned if none
    is negative, else two's complement. A shift beyond the width of the argument counts as
    one by two bits more, which rounds alike.
    """
    r, preloaded = made.its_pass.requantiser, is_preloaded(made.its_pass)
    argument = made.register.held.range
    unlimited = unlimited_range(r, preloaded, argument)
    numerator, denominator = capped_ratio(r, argument)
    scaled = scale(argument, numerator)
    inside = (scaled, shift(scaled, adding_constant(r, preloaded, denominator)), unlimited)
    return RequantiserSizing(
        name=name,
        argument=argument,
        unlimited=unlimited,
        output=made.codes.range,
        bits=max(_bits(inside), 1),
        can_overflow=not contains(output_limits(r), unlimited),
        exact=made.exact and made.register.held.exact,
        output_exact=made.codes.exact,
    )


def output_limits(r: Requantiser) -> Interval:
    """Return the values that the overflow policy leaves as they are."""
    if r.overflow is Overflow.WRAP:
        return format_range(r.to.bits, r.to.signed)
    return legal_codes(r.to)


def legal_codes(pixels: PixelFormat) -> Interval:
    """Return the legal codes of a format."""
    return Interval(pixels.low, pixels.high)


def _bits(values: tuple[Interval, ...]) -> int:
    low, high = min(v.low for v in values), max(v.high for v in values)
    needed = bits_needed(low, high, low < 0)
    assert needed is not None
    return needed
