"""Integers for the taps of one factor: `frac` and `bits` found, taps fitted and checked."""

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from fractions import Fraction
from typing import TypeAlias, TypeVar

from guardbit.fit.factors import Factor
from guardbit.fit.gain import gain, gain_sum, largest_gain_frac
from guardbit.fit.nearest import (
    Integers,
    exact,
    exact_frac,
    largest_nearest_frac,
    nearest,
    register,
    scaled,
    width,
)
from guardbit.fit.places import number, place
from guardbit.model.enums import FitRule, Scale
from guardbit.model.finding import Finding, Value, finding
from guardbit.model.spec import Auto, Matrix, Spec

_MOST_BITS = 32


@dataclass(frozen=True)
class Fitted:
    """Integers that stand for ideal * 2**frac, or with scale exact for ideal * divisor.

    `divisor` is 1 with scale binary and `frac` is 0 with exact. `bits` is the width of the
    coefficient register.
    """

    ideal: Matrix
    integers: Integers
    frac: int
    divisor: int
    bits: int


_T = TypeVar("_T")

Outcome: TypeAlias = Fitted | Finding


def fit(spec: Spec, factor: Factor) -> Outcome:
    """Return the factor's integers, or the first finding that stands in their way."""
    if spec.coefficient.scale is Scale.EXACT:
        return _fit_exact(spec, factor)
    if factor.pinned is not None:
        return _fit_pinned(spec, factor, factor.pinned)
    if spec.coefficient.fit is FitRule.RESPONSE:
        return finding("response-not-pinned", place(spec, "coefficient.fit"))
    frac = chosen_frac(spec, factor)
    return frac if isinstance(frac, Finding) else _fit_at(spec, factor, frac)


def _fit_exact(spec: Spec, factor: Factor) -> Outcome:
    integers = exact(factor.taps)
    if integers is None:
        return _inexact(spec, factor, factor.taps, "exact-tap-not-integer", factor.key)
    if factor.divisor.denominator != 1 or factor.divisor < 1:
        where = place(spec, "kernel.divisor")
        return finding("exact-divisor-not-integer", where, divisor=number(factor.divisor))
    divisor = factor.divisor.numerator
    return _held(spec, factor, Fitted(factor.ideal, integers, 0, divisor, 0))


def _fit_pinned(spec: Spec, factor: Factor, pinned: Integers) -> Outcome:
    # No rule finds the frac of integers that a search chose: it has to be written with them.
    if isinstance(factor.frac, Auto):
        return finding("pinned-without-frac", place(spec, "coefficient.frac"))
    draft = Fitted(factor.ideal, pinned, factor.frac, 1, 0)
    return _held(spec, factor, draft, "coefficient.pinned")


def _fit_at(spec: Spec, factor: Factor, frac: int) -> Outcome:
    targets = scaled(factor.ideal, frac)
    bits, signed = spec.coefficient.bits, spec.coefficient.signed
    if isinstance(bits, Auto) and exact(targets) is None:
        return _inexact(spec, factor, targets, "bits-auto-inexact", "coefficient.bits", frac=frac)
    if spec.coefficient.fit is not FitRule.GAIN or isinstance(bits, Auto):
        return _held(spec, factor, Fitted(factor.ideal, nearest(targets), frac, 1, 0))
    integers = gain(targets, *register(bits, signed))
    if integers is None:
        return _no_gain(spec, factor, targets, bits)
    return _held(spec, factor, Fitted(factor.ideal, integers, frac, 1, 0))


def _no_gain(spec: Spec, factor: Factor, targets: Matrix, bits: int) -> Finding:
    taps = sum(len(row) for row in targets)
    low, high = register(bits, spec.coefficient.signed)
    return finding(
        "gain-impossible",
        place(spec, "coefficient.fit"),
        part=factor.name,
        sum=number(Fraction(gain_sum(targets))),
        taps=taps,
        bits=bits,
        least=low * taps,
        greatest=high * taps,
    )


def chosen_frac(spec: Spec, factor: Factor) -> int | Finding:
    """Return the factor's frac; for "auto" the smallest exact one, else the largest fit."""
    if not isinstance(factor.frac, Auto):
        return factor.frac
    taps = [tap for row in factor.ideal for tap in row]
    found = exact_frac(taps)
    if isinstance(spec.coefficient.bits, Auto):
        return _not_exact(spec, factor) if found is None else found
    if found is not None and _fits(spec, scaled(factor.ideal, found)):
        return found
    found = _largest(spec, factor.ideal, taps, spec.coefficient.bits)
    return _no_frac(spec, factor, spec.coefficient.bits) if found is None else found


def _fits(spec: Spec, targets: Matrix) -> bool:
    needed = width((int(tap) for row in targets for tap in row), spec.coefficient.signed)
    bits = spec.coefficient.bits
    return needed is not None and (isinstance(bits, Auto) or needed <= bits)


def _largest(spec: Spec, ideal: Matrix, taps: Sequence[Fraction], bits: int) -> int | None:
    """Return the largest frac at which the fitted taps fit.

    None also where the register has no code at all of some tap's sign: the tap would "fit"
    once it is scaled to nothing, and the filter would be another one.
    """
    signed = spec.coefficient.signed
    low, high = register(bits, signed)
    if (min(taps) < 0 and low == 0) or (max(taps) > 0 and high == 0):
        return None
    if spec.coefficient.fit is FitRule.GAIN:
        return largest_gain_frac(ideal, bits, signed)
    return largest_nearest_frac(taps, bits, signed)


def _not_exact(spec: Spec, factor: Factor) -> Finding:
    """Return the finding for `bits = "auto"` where no frac makes every tap an integer."""
    return _inexact(
        spec,
        factor,
        scaled(factor.ideal, 64),
        "bits-auto-inexact",
        "coefficient.bits",
        frac="auto",
    )


def _no_frac(spec: Spec, factor: Factor, bits: int) -> Finding:
    signed = spec.coefficient.signed
    y, x = _greatest(factor.ideal, abs if signed else _negated)
    return finding(
        "no-frac-fits",
        place(spec, "coefficient.frac"),
        tap=factor.tap_name(y, x),
        ideal=number(factor.ideal[y][x]),
        bits=bits,
        sign=_sign(signed),
    )


def _inexact(
    spec: Spec, factor: Factor, targets: Matrix, kind: str, key: str, **values: Value
) -> Finding:
    """Return a finding that names the first tap that is not an integer."""
    y, x = _greatest(targets, lambda tap: tap.denominator != 1)
    return finding(
        kind,
        place(spec, key),
        tap=factor.tap_name(y, x),
        value=number(factor.ideal[y][x] if key == "coefficient.bits" else targets[y][x]),
        **values,
    )


def _held(spec: Spec, factor: Factor, draft: Fitted, key: str = "coefficient.bits") -> Outcome:
    """Return the draft with its bits, which "auto" makes as many as needed, if they suffice."""
    given = spec.coefficient.bits
    needed = width((tap for row in draft.integers for tap in row), spec.coefficient.signed)
    most = _MOST_BITS if isinstance(given, Auto) else given
    if needed is None or needed > most:
        return _too_wide(spec, factor, draft.integers, most, key)
    return replace(draft, bits=needed if isinstance(given, Auto) else given)


def _too_wide(spec: Spec, factor: Factor, integers: Integers, bits: int, key: str) -> Finding:
    signed = spec.coefficient.signed
    negative = not signed and any(tap < 0 for row in integers for tap in row)
    y, x = _greatest(integers, _negated if negative else _magnitude)
    values: dict[str, Value] = {
        "tap": factor.tap_name(y, x),
        "integer": number(Fraction(integers[y][x])),
        "ideal": number(factor.ideal[y][x]),
        "bits": bits,
    }
    if negative:
        return finding("tap-negative", place(spec, "coefficient.signed"), **values)
    needed = width((integers[y][x],), signed) or 0
    kind = "tap-too-wide" if needed <= _MOST_BITS else "tap-over-limit"
    return finding(kind, place(spec, key), **values, needed=needed, sign=_sign(signed))


def _greatest(
    matrix: Sequence[Sequence[_T]], rank: Callable[[_T], Fraction | int]
) -> tuple[int, int]:
    """Return the first position, in raster order, of the greatest rank."""
    ranked = {(y, x): rank(tap) for y, row in enumerate(matrix) for x, tap in enumerate(row)}
    return max(ranked, key=ranked.__getitem__)


def _negated(value: Fraction | int) -> Fraction | int:
    return -value


def _magnitude(value: int) -> int:
    return value if value >= 0 else ~value


def _sign(signed: bool) -> str:
    return "signed" if signed else "unsigned"
