"""Frequency responses, and the coefficient fits that are judged by them.

A response is that of the whole filter from input to output, in output value per input value:
its gain, before any rounding. Frequencies are (vertical, horizontal), in cycles per pixel.
Float arithmetic may find another of several equal places on another machine, so that nothing
here enters what `emit` writes.
"""

from dataclasses import dataclass, field
from fractions import Fraction
from typing import TypeAlias

Place: TypeAlias = tuple[Fraction, Fraction]
Integers: TypeAlias = tuple[tuple[int, ...], ...]


@dataclass(frozen=True)
class Peak:
    """The largest magnitude of a response over all frequencies.

    It lies in attained..guaranteed. `attained` is reached at the frequency `at`; no frequency,
    on whatever grid or between, has more than `guaranteed`.
    """

    attained: Fraction
    guaranteed: Fraction
    at: Place


@dataclass(frozen=True)
class Gain:
    """Both responses at a frequency where they are real, exactly: sums of taps with signs."""

    at: Place
    ideal: Fraction
    fitted: Fraction

    @property
    def deviation(self) -> Fraction:
        """Return fitted - ideal."""
        return self.fitted - self.ideal


@dataclass(frozen=True)
class Frequency:
    """The responses of the ideal and the fitted taps compared.

    `largest` is the peak of |fitted - ideal|, `ideal` that of the ideal response. `gains` are
    at DC and at the Nyquist edges (1/2, 0), (0, 1/2) and (1/2, 1/2), in that order.
    """

    largest: Peak
    ideal: Peak
    gains: tuple[Gain, Gain, Gain, Gain]

    @property
    def deviation(self) -> Fraction:
        """Return what |fitted - ideal| exceeds at no frequency."""
        return self.largest.guaranteed

    @property
    def reference(self) -> Fraction:
        """Return what a deviation is measured against in dB: the ideal gain at DC.

        Where that is zero it is the largest ideal gain, as attained.
        """
        return abs(self.gains[0].ideal) or self.ideal.attained


@dataclass(frozen=True)
class FactorFit:
    """The `response` fit of one matrix (`name` "taps") or vector ("column", "row").

    `integers` stand for ideal * 2**frac; a column is a matrix of one column. `deviation` is
    guaranteed: no frequency has more. `bound`: no integers that the register holds and that
    have the ideal's symmetry deviate less; `floor`: nor do any others, with that symmetry or
    without. Both rest on the solver's word, less its tolerances (`study.tangents` says which).
    `nearest` is the deviation of the `nearest` fit, None if that does not fit the register.
    """

    name: str
    integers: Integers
    frac: int
    deviation: Fraction
    bound: Fraction
    floor: Fraction
    nearest: Fraction | None
    proved: bool

    @property
    def gap(self) -> Fraction:
        """Return by what share of the deviation better integers could still undercut it."""
        return (self.deviation - self.bound) / self.deviation if self.deviation else Fraction(0)


@dataclass(frozen=True)
class ResponseFit:
    """The `response` fit of a spec: one factor, or the column and the row, each fitted alone.

    `seconds` is how long it took, a decimal; it is measured and takes no part in equality.
    """

    factors: tuple[FactorFit, ...]
    seconds: str = field(compare=False)

    @property
    def proved(self) -> bool:
        """Return whether each factor is proved to be best, as near as `fit_response` asks."""
        return all(each.proved for each in self.factors)
