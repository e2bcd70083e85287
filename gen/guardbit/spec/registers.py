"""What may be loaded into the coefficient registers at run time, as far as a spec settles it.

Whether the kernel itself may be loaded is checked where its taps are fitted.
"""

from collections.abc import Callable, Mapping, Sequence
from fractions import Fraction
from functools import partial
from typing import TypeVar

from guardbit.model.enums import FitRule
from guardbit.model.spec import Auto, Registers
from guardbit.spec.fitting import paired
from guardbit.spec.forms import SUM_LIMIT, TAP_LIMIT, RegistersForm, Whole
from guardbit.spec.ideal import Ideal
from guardbit.spec.sheet import Sheet, note
from guardbit.spec.toml import Real
from guardbit.spec.values import FaultyError, convert, matrix, quoted, shown

_KEY = "coefficient.registers"
_BITS, _SIGNED = "coefficient.bits", "coefficient.signed"
_LIMITS = ("least", "greatest")
_WIDEST = 32
_WANTED = RegistersForm().wanted
_TAP = Whole(-(1 << _WIDEST - 1), (1 << _WIDEST) - 1)
_ROWS = "a whole number, or rows of whole numbers as the kernel has taps"
_NUMBERS = {"sum": Whole(-SUM_LIMIT, SUM_LIMIT), "magnitudes": Whole(0, SUM_LIMIT)}

T = TypeVar("T")
Integers = tuple[tuple[int, ...], ...]
Box = tuple[int, int]


def read_registers(sheet: Sheet, ideal: Ideal | None) -> Registers | None:
    """Return what may be loaded; None where taps are fixed, or after reporting what is wrong."""
    if _KEY not in sheet.given:
        return None
    _check_company(sheet)
    raw = sheet.values[_KEY]
    if not isinstance(raw, dict) or not _is_formed(raw):
        sheet.reject("registers-form", _KEY, got=shown(raw), expected=_WANTED)
        return None
    kernels = tuple(_noted(sheet, _integers, kernel) for kernel in raw.get("kernels", ()))
    limits = {name: _noted(sheet, _limit, raw[name]) for name in _LIMITS if name in raw}
    total, magnitudes = (
        _noted(sheet, partial(_number, name), raw[name]) if name in raw else None
        for name in _NUMBERS
    )
    if not sheet.usable(_KEY) or ideal is None:
        return None
    matrices = {f"kernels[{number}]": kernel for number, kernel in enumerate(kernels)} | limits
    if not _fit_the_box(sheet, matrices, ideal.box):
        return None
    listed = tuple(kernel for kernel in kernels if kernel is not None)
    ends = _ends_of(listed) if listed else _limits(sheet, limits, ideal.box)
    if ends is None:
        return None
    _check_limits(sheet, *ends)
    return Registers(*ends, total, magnitudes, listed)


def _check_company(sheet: Sheet) -> None:
    """Report keys that cannot stand beside registers."""
    keys = ("coefficient.pinned", "intermediate", "goal")
    others: list[str] = [key for key in keys if key in sheet.given]
    pairs = ("kernel.divisor", "coefficient.frac")
    if "intermediate" not in sheet.given and sheet.usable(*pairs) and paired(sheet):
        others += [key for key in pairs if len(sheet.get(key, tuple)) == 2][:1]
    rule = "coefficient.fit"
    if sheet.usable(rule) and sheet.get(rule, FitRule) is FitRule.RESPONSE:
        others.append(rule)
    for other in others:
        sheet.report("registers-with", _KEY, got=other)


def _is_formed(raw: Mapping[str, object]) -> bool:
    """Return whether the table has entries that go together."""
    if "kernels" in raw:
        return len(raw) == 1 and isinstance(raw["kernels"], list) and bool(raw["kernels"])
    return bool(raw) and set(raw) <= {*_LIMITS, *_NUMBERS}


def _noted(sheet: Sheet, read: Callable[[object], T], raw: object) -> T | None:
    """Return what is read; None after reporting what is wrong with it."""
    try:
        return read(raw)
    except FaultyError as error:
        note(sheet, _KEY, error.faults)
        return None


def _number(name: str, raw: object) -> int:
    return _whole(_NUMBERS[name], raw)


def _whole(form: Whole, raw: object) -> int:
    value = convert(form, raw)
    assert isinstance(value, int)
    return value


def _limit(raw: object) -> int | Integers:
    return _integers(raw) if isinstance(raw, list) else _whole(_TAP, raw)


def _integers(raw: object) -> Integers:
    """Return rows of whole numbers. Raises FaultyError."""
    return tuple(tuple(map(_tap, row)) for row in matrix(raw, _ROWS))


def _tap(value: Fraction) -> int:
    return _whole(_TAP, value.numerator if value.denominator == 1 else Real(quoted(value)))


def _fit_the_box(sheet: Sheet, matrices: Mapping[str, int | Integers | None], box: Box) -> bool:
    """Return whether every matrix has the kernel's box, after reporting those that have not."""
    boxes = {
        name: (len(value), len(value[0]))
        for name, value in matrices.items()
        if isinstance(value, tuple)
    }
    wrong = {name: its for name, its in boxes.items() if its != box}
    expected = f"{box[0]} x {box[1]}"
    for name, (height, width) in wrong.items():
        got = f"{height} x {width}"
        sheet.report("registers-box", _KEY, entry=name, got=got, expected=expected)
    return not wrong


def _limits(
    sheet: Sheet, given: Mapping[str, int | Integers | None], box: Box
) -> tuple[Integers, Integers] | None:
    """Return the least and the greatest of every cell; None after reporting that one is open."""
    if not sheet.usable(_BITS, _SIGNED):
        return None
    bits = sheet.width(_BITS)
    missing = [name for name in _LIMITS if name not in given]
    if missing and isinstance(bits, Auto):
        sheet.report("registers-without-limits", _KEY, missing=" and ".join(missing))
        return None
    word = _word(sheet)
    least, greatest = (
        _spread(given.get(name, end), box) for name, end in zip(_LIMITS, word, strict=True)
    )
    return least, greatest


def _spread(value: int | Integers | None, box: Box) -> Integers:
    return value if isinstance(value, tuple) else ((value or 0,) * box[1],) * box[0]


def _ends_of(kernels: Sequence[Integers]) -> tuple[Integers, Integers]:
    """Return the least and the greatest that the kernels have in each cell."""
    cells = [list(zip(*rows, strict=True)) for rows in zip(*kernels, strict=True)]
    least = tuple(tuple(min(taps) for taps in row) for row in cells)
    return least, tuple(tuple(max(taps) for taps in row) for row in cells)


def _check_limits(sheet: Sheet, least: Integers, greatest: Integers) -> None:
    """Report limits that hold nothing or that no register has, and registers without number."""
    pairs = [
        (y, x, low, high)
        for y, rows in enumerate(zip(least, greatest, strict=True))
        for x, (low, high) in enumerate(zip(*rows, strict=True))
    ]
    for y, x, low, high in pairs:
        if low > high:
            sheet.report("registers-reversed", _KEY, row=y, column=x, least=low, greatest=high)
            break
    loaded = sum(1 for _, _, low, high in pairs if low or high)
    if not loaded:
        sheet.report("registers-empty", _KEY)
    if loaded > TAP_LIMIT:
        sheet.report("registers-too-many", _KEY, got=loaded, limit=TAP_LIMIT)
    if sheet.usable(_BITS, _SIGNED):
        _check_bits(sheet, [end for _, _, *ends in pairs for end in ends])


def _check_bits(sheet: Sheet, taps: Sequence[int]) -> None:
    low, high = _word(sheet)
    outside = [tap for tap in taps if not low <= tap <= high]
    if outside:
        sign = "signed" if sheet.get(_SIGNED, bool) else "unsigned"
        bits = _bits(sheet)
        sheet.report(
            "registers-bits", _KEY, got=outside[0], bits=bits, sign=sign, low=low, high=high
        )


def _bits(sheet: Sheet) -> int:
    """Return the bits of a coefficient register; those of the widest where they are left open."""
    bits = sheet.width(_BITS)
    return _WIDEST if isinstance(bits, Auto) else bits


def _word(sheet: Sheet) -> tuple[int, int]:
    """Return the least and the greatest number that a coefficient register holds."""
    bits = _bits(sheet)
    if sheet.get(_SIGNED, bool):
        return -(1 << bits - 1), (1 << bits - 1) - 1
    return 0, (1 << bits) - 1
