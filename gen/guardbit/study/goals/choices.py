"""The coefficient words that a search has to look at, and a spec with words put in."""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from fractions import Fraction
from functools import cached_property
from itertools import product

from guardbit.fit.coefficients import Fitted, fit
from guardbit.fit.factors import Factor, factors
from guardbit.fit.nearest import FRACS, Integers, width
from guardbit.fit.open import COEFFICIENT_BITS, COEFFICIENT_FRAC, open_words
from guardbit.model.enums import FitRule
from guardbit.model.finding import Finding, SpecError
from guardbit.model.goal import Words
from guardbit.model.spec import Auto, Spec

_WIDEST = 32


@dataclass(frozen=True)
class Sums:
    """Two sums of one factor's taps: over those whose ideal is above zero, and over the rest."""

    above: int | Fraction
    rest: int | Fraction

    def total(self, p: int | Fraction, q: int | Fraction) -> int | Fraction:
        """Return the sum of products with p where the ideal is above zero and q elsewhere."""
        return self.above * p + self.rest * q


@dataclass(frozen=True)
class Coefficients:
    """Bits and fracs of the coefficients, None where the spec settles them, and the integers.

    There is one matrix of integers, or column and row.
    """

    bits: int | None
    fracs: tuple[int, ...] | None
    factors: tuple[Fitted, ...]

    @property
    def width(self) -> int:
        """Return the length of a coefficient."""
        return self.bits or max(each.bits for each in self.factors)

    @cached_property
    def sums(self) -> tuple[Sums, ...]:
        """Return the sums of each factor's integers."""
        return tuple(_sums(each, each.integers) for each in self.factors)


def ideal_sums(fitted: Fitted) -> Sums:
    """Return the sums of a factor's ideal taps."""
    return _sums(fitted, fitted.ideal)


def _sums(fitted: Fitted, taps: Sequence[Sequence[int | Fraction]]) -> Sums:
    pairs = [
        (ideal > 0, tap)
        for ideals, line in zip(fitted.ideal, taps, strict=True)
        for ideal, tap in zip(ideals, line, strict=True)
    ]
    return Sums(
        sum(tap for is_above, tap in pairs if is_above),
        sum(tap for is_above, tap in pairs if not is_above),
    )


def with_words(spec: Spec, words: Words) -> Spec:
    """Return the spec with words put in, and without its goal.

    A `response` fit that is not pinned becomes `nearest`: no search runs inside a search.
    """
    table, between = spec.coefficient, spec.intermediate
    if words.coefficient_bits is not None:
        table = replace(table, bits=words.coefficient_bits)
    if words.coefficient_frac is not None:
        table = replace(table, frac=words.coefficient_frac)
    if table.fit is FitRule.RESPONSE and table.pinned is None:
        table = replace(table, fit=FitRule.NEAREST)
    if between is not None and words.intermediate_bits is not None:
        between = replace(between, bits=words.intermediate_bits)
    if between is not None and words.intermediate_frac is not None:
        between = replace(between, frac=words.intermediate_frac)
    return replace(spec, coefficient=table, intermediate=between, goal=None)


def coefficient_choices(spec: Spec) -> tuple[Coefficients, ...]:
    """Return every choice of coefficient bits and frac that makes a filter of its own.

    Left out are choices that give the integers of another one in a wider register: more bits
    than the integers need, and fracs below the one at which every tap has become zero (a tap
    that is fitted to zero stays zero when its target is halved). Raises SpecError where no
    choice holds the taps.
    """
    plain = with_words(spec, Words())
    parts, found = factors(plain)
    if found:
        raise SpecError(*found)
    keys = open_words(spec)
    if not {COEFFICIENT_BITS, COEFFICIENT_FRAC} & set(keys):
        return (Coefficients(None, None, tuple(_fitted(plain, part) for part in parts)),)
    bits = plain.coefficient.bits
    options = [_options(plain, part) for part in parts]
    lists = [list(each) for each in options]
    if not all(lists):
        # says which tap does not fit, and why
        for part in parts:
            _fitted(_at_bits(plain, _WIDEST if isinstance(bits, Auto) else bits), part)
    made = (_joined(combination, bits) for combination in product(*lists))
    return tuple(each for choices in made for each in choices)


def _fitted(spec: Spec, part: Factor) -> Fitted:
    made = fit(spec, part)
    if isinstance(made, Finding):
        raise SpecError(made)
    return made


def _at_bits(spec: Spec, bits: int) -> Spec:
    return replace(spec, coefficient=replace(spec.coefficient, bits=bits))


@dataclass(frozen=True)
class _Option:
    """One factor at one frac, by the register's bits: those left out are the next lower's."""

    frac: int
    by_bits: dict[int, Fitted]

    def at(self, bits: int) -> Fitted | None:
        """Return the factor fitted to a register of `bits` bits, None if it does not fit."""
        held = [each for each in self.by_bits if each <= bits]
        return replace(self.by_bits[max(held)], bits=bits) if held else None


def _options(spec: Spec, part: Factor) -> Iterator[_Option]:
    """Yield the factor at every frac, from the highest to the first that loses all taps."""
    fracs = FRACS[::-1] if isinstance(part.frac, Auto) else (part.frac,)
    for frac in fracs:
        option = _option(spec, replace(part, frac=frac))
        if option is None:
            continue
        yield option
        if not any(tap for row in option.by_bits[max(option.by_bits)].integers for tap in row):
            return


def _option(spec: Spec, part: Factor) -> _Option | None:
    """Return the factor at its frac in every register that makes a difference."""
    assert isinstance(part.frac, int)
    bits = spec.coefficient.bits
    if not isinstance(bits, Auto):
        made = fit(spec, part)
        return _Option(part.frac, {bits: made}) if isinstance(made, Fitted) else None
    by_bits: dict[int, Fitted] = {}
    bits = _WIDEST
    while bits > 0 and isinstance(made := fit(_at_bits(spec, bits), part), Fitted):
        needed = _needed(made.integers, spec.coefficient.signed)
        by_bits[needed] = made
        # a register that holds these integers changes nothing; a narrower one may
        bits = needed - 1 if spec.coefficient.fit is FitRule.GAIN else 0
    return _Option(part.frac, by_bits) if by_bits else None


def _needed(integers: Integers, signed: bool) -> int:
    needed = width((tap for row in integers for tap in row), signed)
    assert needed is not None
    return needed


def _joined(options: tuple[_Option, ...], bits: int | Auto) -> Iterator[Coefficients]:
    """Yield what one frac for each factor gives in every register that makes a difference."""
    all_bits = {each for option in options for each in option.by_bits}
    for each in sorted(all_bits) if isinstance(bits, Auto) else (bits,):
        held = [option.at(each) for option in options]
        fitted = tuple(made for made in held if made is not None)
        if len(fitted) == len(options):
            yield Coefficients(each, tuple(option.frac for option in options), fitted)
