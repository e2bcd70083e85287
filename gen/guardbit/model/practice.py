"""What real frames show: the error they measure, and registers that are too narrow for them."""

from dataclasses import dataclass
from fractions import Fraction

from guardbit.model.enums import Overflow


@dataclass(frozen=True)
class Measured:
    """The error of some frames in LSB, exactly: output code minus clamped ideal code.

    `signal` is the mean square of the clamped ideal code less the output pedestal, `power` that
    of the error.
    """

    outputs: int
    least: Fraction
    greatest: Fraction
    mean: Fraction
    power: Fraction
    signal: Fraction

    @property
    def variance(self) -> Fraction:
        """Return the mean square of the error less its mean."""
        return self.power - self.mean**2

    @property
    def snr(self) -> Fraction | None:
        """Return signal power over error power; None if there is no error."""
        return self.signal / self.power if self.power else None


@dataclass(frozen=True)
class MeasuredRounding:
    """Mean and variance of what one requantiser's rounding added, in LSB of its own codes.

    Over the `values` it rounded, whatever its overflow then made of them.
    """

    name: str
    values: int
    mean: Fraction
    variance: Fraction


@dataclass(frozen=True)
class Narrowed:
    """One register at one width and policy, all other registers safe.

    Of `sums` sums `overflowed` are not held: the register's final value differs from the sum.
    Of `outputs` output codes `differing` come out otherwise than with a safe register, by
    `largest` LSB at most and by `total` LSB added up.
    """

    bits: int
    policy: Overflow
    sums: int
    overflowed: int
    outputs: int
    differing: int
    largest: int
    total: int


@dataclass(frozen=True)
class RegisterPractice:
    """A register from six bits under its safe width up to that: a row per width and policy.

    Where `is_never_safe`, an unsigned register with sums below 0, `safe` is a signed one's width.
    """

    register: str
    safe: int
    rows: tuple[Narrowed, ...]
    is_never_safe: bool = False


@dataclass(frozen=True)
class Practice:
    """Overflow on real frames, by register."""

    registers: tuple[RegisterPractice, ...]
