"""What the search for a goal found: word lengths, the figures they reach, and what binds."""

from dataclasses import dataclass
from fractions import Fraction

from guardbit.model.enums import WordLength
from guardbit.model.frequency import Integers


@dataclass(frozen=True)
class Words:
    """A choice of the words that are left open; None where the spec settles a word itself.

    `coefficient_frac` has one entry, or [column's, row's].
    """

    coefficient_bits: int | None = None
    coefficient_frac: tuple[int, ...] | None = None
    intermediate_bits: int | None = None
    intermediate_frac: int | None = None


@dataclass(frozen=True)
class Figures:
    """What one choice of words comes to.

    `bits`: of all accumulators together, of the intermediate (0 without one), of a
    coefficient. `error` is the bound of |error| in LSB for every legal input, `response` the
    guaranteed deviation (None: not asked for). `snr` is the power ratio on the goal's frames;
    None: not measured, or no error at all.
    """

    accumulators: tuple[int, ...]
    intermediate: int
    coefficient: int
    error: Fraction
    response: Fraction | None
    snr: Fraction | None

    def bits(self, word: WordLength) -> int:
        """Return the length that a search minimises under that name."""
        match word:
            case WordLength.ACCUMULATOR:
                return sum(self.accumulators)
            case WordLength.INTERMEDIATE:
                return self.intermediate
            case WordLength.COEFFICIENT:
                return self.coefficient


@dataclass(frozen=True)
class Shortfall:
    """A goal that a choice misses: "error" and "response" at most, "snr" (a ratio) at least."""

    goal: str
    reached: Fraction
    wanted: Fraction

    @property
    def share(self) -> Fraction:
        """Return how far it is missed: over 1, and the more the farther."""
        high, low = max(self.reached, self.wanted), min(self.reached, self.wanted)
        return high / low if low else Fraction(10**9)


@dataclass(frozen=True)
class Binding:
    """Why a word is no shorter, with what counts more at its least.

    Of all choices with fewer `word` bits the one that comes nearest to the goals has `bits`
    of them and misses `missed`; both are None where there is no such choice at all.
    `proved`: no other such choice comes nearer; otherwise they were too many to look at.
    """

    word: WordLength
    bits: int | None
    missed: Shortfall | None
    proved: bool


@dataclass(frozen=True)
class GoalSearch:
    """The choice with the least bits in the goal's order; of equals the least error bound.

    `values` are the keys that the search found, with their numbers: what pinning writes.
    `integers`, where the fit is `response`: the taps to be pinned, one matrix per factor.
    `choices` counts all that were considered, `analysed` those that a lower bound of their
    error or bits did not settle.
    """

    words: Words
    figures: Figures
    values: tuple[tuple[str, int | tuple[int, ...]], ...]
    integers: tuple[Integers, ...] | None
    bindings: tuple[Binding, ...]
    choices: int
    analysed: int
