"""Checks of divisor, frac, scale and pinned taps, as far as a spec settles them.

What depends on fitted taps is checked where they are fitted.
"""

from fractions import Fraction
from typing import Any

from guardbit.model.enums import Preload, Scale
from guardbit.model.spec import Auto, Pinned, Sum
from guardbit.spec.forms import PinnedForm
from guardbit.spec.ideal import Ideal
from guardbit.spec.sheet import Sheet, note
from guardbit.spec.values import FaultyError, matrix, quoted, vector

_DIVISOR = "kernel.divisor"
_FRAC = "coefficient.frac"
_SCALE = "coefficient.scale"
_PINNED = "coefficient.pinned"


def paired(sheet: Sheet) -> bool:
    """Return whether column and row are fitted each alone.

    They are where divisor or frac is a pair, and always with [intermediate].
    """
    pairs = [key for key in (_DIVISOR, _FRAC) if len(sheet.get(key, tuple)) == 2]
    return bool(pairs) or "intermediate" in sheet.given


def in_pairs(sheet: Sheet, key: str) -> tuple[Any, ...]:
    """Return divisor or frac as one entry, or as two where column and row are fitted alone."""
    value = sheet.get(key, tuple)
    return value * 2 if paired(sheet) and len(value) == 1 else value


def check_fitting(sheet: Sheet, ideal: Ideal | None) -> None:
    """Report contradictions between the kernel and how it is to become integers."""
    if sheet.usable(_DIVISOR, _FRAC):
        _check_pairs(sheet, ideal)
    if sheet.usable(_SCALE) and sheet.get(_SCALE, Scale) is Scale.EXACT:
        _check_exact(sheet, ideal)
    if ideal is not None and sheet.usable(_DIVISOR):
        _check_sums(sheet, ideal)


def _check_pairs(sheet: Sheet, ideal: Ideal | None) -> None:
    """Report scalars among pairs, and pairs where there are no two vectors."""
    pairs = [key for key in (_DIVISOR, _FRAC) if len(sheet.get(key, tuple)) == 2]
    scalars = [key for key in (_DIVISOR, _FRAC) if key in sheet.given and key not in pairs]
    two_passes = "intermediate" in sheet.given
    for scalar in scalars:
        if two_passes:
            sheet.report("intermediate-without-pairs", scalar, got=scalar)
        elif pairs:
            sheet.report("pair-and-scalar", scalar, pair=pairs[0], scalar=scalar)
    if ideal is None or ideal.separable:
        return
    if two_passes:
        sheet.report("intermediate-without-vectors", "intermediate")
    elif pairs:
        sheet.report("pair-without-vectors", pairs[0], got=pairs[0])


def _check_exact(sheet: Sheet, ideal: Ideal | None) -> None:
    for key in (_FRAC, "coefficient.fit", _PINNED):
        if key in sheet.given:
            sheet.report("exact-with", key, got=key)
    broken = ideal.broken if ideal is not None else None
    if broken is not None:
        sheet.report("exact-taps", _SCALE, got=quoted(broken))
    if not sheet.usable(_DIVISOR):
        return
    divisors = sheet.get(_DIVISOR, tuple)
    for divisor in divisors:
        if isinstance(divisor, Fraction) and divisor.denominator != 1:
            sheet.report("exact-divisor", _DIVISOR, got=quoted(divisor))
    if any(divisor != 1 for divisor in divisors):
        _check_exact_preload(sheet)


def _check_exact_preload(sheet: Sheet) -> None:
    """Report a rounding constant where no shift says which power of two it would be."""
    for table in ("intermediate.accumulator", "accumulator"):
        key = f"{table}.preload"
        if sheet.usable(key) and sheet.get(key, Preload) is Preload.ROUNDING:
            sheet.report("preload-exact", key)


def _check_sums(sheet: Sheet, ideal: Ideal) -> None:
    """Report sums that cannot divide."""
    exact = sheet.usable(_SCALE) and sheet.get(_SCALE, Scale) is Scale.EXACT
    divisors = sheet.get(_DIVISOR, tuple)
    first, second = ideal.sums
    sums = (first * second,) if len(divisors) == 1 else (first, second)
    for divisor, total in zip(divisors, sums, strict=True):
        if divisor is not Sum.SUM:
            continue
        if total == 0:
            sheet.report("sum-is-zero", _DIVISOR)
        elif total < 0 and exact:
            sheet.report("exact-divisor", _DIVISOR, got=quoted(total))


def read_pinned(sheet: Sheet, ideal: Ideal | None) -> Pinned | None:
    """Return the pinned taps; None where there are none, or after reporting what is wrong."""
    if _PINNED not in sheet.given:
        return None
    raw = sheet.values[_PINNED]
    try:
        pinned = _pinned(raw)
    except FaultyError as error:
        note(sheet, _PINNED, error.faults)
        return None
    if pinned is None:
        sheet.reject("pinned-form", _PINNED, expected=PinnedForm().wanted)
        return None
    _check_pinned(sheet, pinned, ideal)
    return pinned


def _pinned(raw: object) -> Pinned | None:
    wanted = PinnedForm().wanted
    if not isinstance(raw, dict):
        taps = matrix(raw, wanted)
        return Pinned(tuple(map(_whole, taps)), None, None) if _all_whole(taps) else None
    if set(raw) != {"column", "row"}:
        return None
    column, row = vector(raw["column"], wanted), vector(raw["row"], wanted)
    if not _all_whole((column, row)):
        return None
    return Pinned(None, _whole(column), _whole(row))


def _all_whole(rows: tuple[tuple[Fraction, ...], ...]) -> bool:
    return all(tap.denominator == 1 for row in rows for tap in row)


def _whole(taps: tuple[Fraction, ...]) -> tuple[int, ...]:
    return tuple(map(int, taps))


def _check_pinned(sheet: Sheet, pinned: Pinned, ideal: Ideal | None) -> None:
    rows = pinned.taps if pinned.taps is not None else (pinned.column or (), pinned.row or ())
    _check_pinned_bits(sheet, rows)
    if ideal is None or not sheet.usable(_DIVISOR, _FRAC):
        return
    if (pinned.taps is None) is not paired(sheet):
        expected = "column and row" if paired(sheet) else "a matrix"
        sheet.report("pinned-kind", _PINNED, expected=expected)
        return
    box = (len(rows), len(rows[0])) if pinned.taps is not None else tuple(map(len, rows))
    if box != ideal.box:
        got, expected = (f"{height} x {width}" for height, width in (box, ideal.box))
        sheet.report("pinned-box", _PINNED, got=got, expected=expected)


def _check_pinned_bits(sheet: Sheet, rows: tuple[tuple[int, ...], ...]) -> None:
    if not sheet.usable("coefficient.bits", "coefficient.signed"):
        return
    bits = sheet.values["coefficient.bits"]
    if bits is Auto.AUTO or not isinstance(bits, int):
        return
    signed = sheet.get("coefficient.signed", bool)
    low, high = (-(1 << bits - 1), (1 << bits - 1) - 1) if signed else (0, (1 << bits) - 1)
    outside = [tap for row in rows for tap in row if not low <= tap <= high]
    if outside:
        sheet.report("pinned-bits", _PINNED, got=outside[0], low=low, high=high, bits=bits)
