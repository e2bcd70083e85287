"""What exact range analysis found: intervals, the bits they need, and frames that attain them."""

from dataclasses import dataclass
from enum import StrEnum
from fractions import Fraction

from guardbit.model.filter import Filter


@dataclass(frozen=True)
class Interval:
    """The integers low..high, both included."""

    low: int
    high: int


class End(StrEnum):
    LEAST = "least"
    GREATEST = "greatest"


@dataclass(frozen=True)
class Witness:
    """A frame that attains one end of one register.

    The frame is height x width pixels of code `fill`, except `pixels` = (row, column, code);
    every channel is alike. At output position `position` (row, column, in image coordinates)
    the register named reaches `value` after adding `after` taps (all taps: the final value).
    It may also name a requantiser, and `value` then is the code that leaves it. `taps` are
    what coefficient registers hold meanwhile, in the order of the kernel's terms; None: the
    filter's own coefficients.
    """

    register: str
    end: End
    partial: bool
    height: int
    width: int
    fill: int
    pixels: tuple[tuple[int, int, int], ...]
    position: tuple[int, int]
    after: int
    value: int
    taps: tuple[int, ...] | None = None


@dataclass(frozen=True)
class ClassRange:
    """Ranges at output positions of one border class, as (vertical, horizontal) labels."""

    label: tuple[str, str]
    final: Interval
    partial: Interval


@dataclass(frozen=True)
class RegisterSizing:
    """One accumulator.

    `final` and `partial` are ranges of the unlimited sum (partial: of every partial sum in
    the contract's order, start value included). `held` is what the register, with its
    width and policy, can hold at the end. `exact` says that each end is attained by a legal
    frame; otherwise they are bounds. `bits_forbid` is the least width no partial sum leaves,
    `bits_wrap` the least width that holds every final value. `headroom` is the ratio of the
    width's limit to the worst case, the lesser of both ends. An unsigned register holds no
    negative sum at any width: then these widths are a signed one's and `spare` is None.
    `held_exact` says that both ends of `held` are attained: by `held_witnesses`, or where there
    is none for an end, by the frame of the final's.
    """

    name: str
    bits: int
    signed: bool
    final: Interval
    partial: Interval
    held: Interval
    exact: bool
    bits_forbid: int
    bits_wrap: int
    spare: int | None
    headroom: Fraction | None
    rule_l1: int
    rule_count: int
    classes: tuple[ClassRange, ...]
    witnesses: tuple[Witness, ...]
    held_exact: bool = True
    held_witnesses: tuple[Witness, ...] = ()

    @property
    def is_never_safe(self) -> bool:
        """Return whether no width holds every sum: an unsigned register with sums below 0."""
        return not self.signed and self.partial.low < 0


@dataclass(frozen=True)
class TapOrder:
    """What the order of accumulation costs one accumulator, in bits under `forbid`.

    `contract` is what the contract's order needs, `best` what the best order found needs and
    `floor` what any order needs. `order` is the best one, as numbers of taps, from 1 in the
    kernel's order, zero taps left out; it is the contract's where that is as good. This is
    advice for those who may choose: the contract's order is fixed.
    """

    register: str
    contract: int
    best: int
    floor: int
    order: tuple[int, ...]

    @property
    def is_proved_best(self) -> bool:
        """Return whether no order at all needs fewer bits."""
        return self.best == self.floor


@dataclass(frozen=True)
class RequantiserSizing:
    """One requantiser: its input, the widest value inside, and what leaves it.

    `unlimited` is the rounded value with the pedestal added, before overflow; `bits` holds
    every value inside (the scaled sum, with its rounding constant, and `unlimited`). `exact`
    says that both ends of `unlimited` are attained, by the frames of the register's ends.
    `output_exact` says so of `output`; where codes wrap, so that the frames of its ends are
    others, they are `witnesses`.
    """

    name: str
    argument: Interval
    unlimited: Interval
    output: Interval
    bits: int
    can_overflow: bool
    exact: bool = True
    output_exact: bool = True
    witnesses: tuple[Witness, ...] = ()


@dataclass(frozen=True)
class ErrorPart:
    """The exact interval of one cause of error, in LSB of the output code."""

    cause: str
    low: Fraction
    high: Fraction


@dataclass(frozen=True)
class RoundingStatistics:
    """Mean and variance of what one requantiser's rounding adds, in LSB of its own codes.

    They hold where all `residues` of the exact value, which is a multiple of 1/residues, are
    equally frequent: a model of busy images, not a bound.
    """

    name: str
    residues: int
    mean: Fraction
    variance: Fraction


@dataclass(frozen=True)
class DcGain:
    """The gain of a constant image, in output value per input value: ideal, and as fitted.

    `at_full_scale` is the difference in LSB of the output code at the legal code that is
    furthest from the pedestal.
    """

    ideal: Fraction
    fitted: Fraction
    at_full_scale: Fraction

    @property
    def error(self) -> Fraction:
        """Return fitted - ideal."""
        return self.fitted - self.ideal

    @property
    def relative(self) -> Fraction | None:
        """Return the error over the ideal gain; None where that is zero."""
        return self.error / self.ideal if self.ideal else None


@dataclass(frozen=True)
class ErrorBound:
    """Output code minus clamped ideal code, in LSB, for every legal input.

    When `assumes_no_wrap`, low..high is for inputs with which no accumulator wraps or
    saturates and no requantiser wraps, and `overall` (low, high) for all legal inputs. `exact`
    says that a legal frame attains low, and one high; otherwise they are bounds. Each part is
    the range of one cause alone; the bound is a joint maximum, not their sum.
    """

    low: Fraction
    high: Fraction
    parts: tuple[ErrorPart, ...]
    assumes_no_wrap: bool
    overall: tuple[Fraction, Fraction] | None = None
    exact: bool = False
    rounding: tuple[RoundingStatistics, ...] = ()
    gain: DcGain | None = None


@dataclass(frozen=True)
class Sizing:
    """The filter with every width resolved, and the evidence for each of them."""

    filter: Filter
    registers: tuple[RegisterSizing, ...]
    requantisers: tuple[RequantiserSizing, ...]
    error: ErrorBound
