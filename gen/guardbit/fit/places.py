"""Where a finding points to in the spec, and how it names taps and numbers."""

from decimal import Context, Decimal
from fractions import Fraction

from guardbit.model.finding import Place
from guardbit.model.spec import Spec

_SHORT = 24


def place(spec: Spec, key: str) -> Place:
    """Return the place of a dotted key; its line is None when the key was left out."""
    return Place(file=spec.path, line=spec.lines.get(key), key=key)


def source_key(spec: Spec, part: str) -> str:
    """Return the key that gave `part` ("taps", "column", "row") of the kernel its values."""
    keys = (f"kernel.{part}", "kernel.column", "kernel.file", "kernel.formula")
    return next((key for key in keys if key in spec.lines), keys[0])


def number(value: Fraction) -> str:
    """Return `value` as an exact ratio if that is short, else as "about" a decimal."""
    exact = _ratio(value)
    if exact is not None:
        return exact
    digits = Context(prec=12, Emin=-(10**9), Emax=10**9)
    return f"about {digits.divide(Decimal(value.numerator), Decimal(value.denominator))}"


def _ratio(value: Fraction) -> str | None:
    # Asking for the bits first keeps Python's limit on long decimal texts out of play.
    if max(value.numerator.bit_length(), value.denominator.bit_length()) > 4 * _SHORT:
        return None
    text = str(value)
    return text if len(text) <= _SHORT else None
