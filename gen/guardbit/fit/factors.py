"""The matrices that are fitted on their own: one, or a column and a row.

Scalar or pair. `kernel.divisor` and `coefficient.frac` are both scalars or both pairs. A key
that was left out follows the other one: its default (1, or "auto") then stands for both
vectors. With `[intermediate]` both are pairs: each is left out or written as a pair. With
`scale = "exact"`, frac does not apply and is not looked at. Pairs need a kernel given as column
and row; a column and a row without pairs are one matrix, their outer product.
"""

from dataclasses import dataclass
from fractions import Fraction
from typing import TypeVar

from guardbit.fit.nearest import Integers
from guardbit.fit.places import place, source_key
from guardbit.model.enums import Scale
from guardbit.model.finding import Finding, finding
from guardbit.model.spec import Auto, Matrix, Pinned, Spec, Sum, Vector

_T = TypeVar("_T")


@dataclass(frozen=True)
class Factor:
    """One matrix to be fitted: taps as written, what divides them, and how.

    `name` is "taps", "column" (a matrix of one column) or "row" (of one row); `key` is the
    spec's key that gave the taps. `pinned` are the integers written for it, of its shape.
    """

    name: str
    key: str
    taps: Matrix
    divisor: Fraction
    frac: int | Auto
    pinned: Integers | None

    @property
    def ideal(self) -> Matrix:
        """Return the taps after division."""
        return tuple(tuple(tap / self.divisor for tap in row) for row in self.taps)

    def tap_name(self, y: int, x: int) -> str:
        """Return how a person finds the tap: indices from 0, as for the origin."""
        return f"{self.name}[{y}][{x}]" if self.name == "taps" else f"{self.name}[{y + x}]"


def factors(spec: Spec) -> tuple[tuple[Factor, ...], tuple[Finding, ...]]:
    """Return the factors (column before row), and findings on what hinders them.

    With findings the factors that are free of them are returned all the same.
    """
    paired = in_pairs(spec)
    found = _arity_findings(spec) if paired else ()
    if found:
        return (), found
    parts = _parts(spec, paired)
    pins, pin_findings = _pins(spec, parts)
    made = []
    found = pin_findings
    for i, (name, key, taps) in enumerate(parts):
        divisor = _divisor(spec, _entry(spec.kernel.divisor, i), key, taps)
        if isinstance(divisor, Finding):
            found = (*found, divisor)
        elif not pin_findings:
            frac = Auto.AUTO if _exact(spec) else _entry(spec.coefficient.frac, i)
            made.append(Factor(name, key, taps, divisor, frac, pins[i]))
    return tuple(made), found


def in_pairs(spec: Spec) -> bool:
    """Return whether column and row are fitted each on its own."""
    by_frac = not _exact(spec) and len(spec.coefficient.frac) == 2
    return spec.intermediate is not None or len(spec.kernel.divisor) == 2 or by_frac


def _exact(spec: Spec) -> bool:
    return spec.coefficient.scale is Scale.EXACT


def _arity_findings(spec: Spec) -> tuple[Finding, ...]:
    scalars = [
        (key, len(value) == 1 and (key in spec.lines or value != default))
        for key, value, default in _pairable(spec)
    ]
    found = [
        finding("scalar-with-pair", place(spec, key), cause=_cause(spec))
        for key, scalar in scalars
        if scalar
    ]
    if spec.kernel.column is None:
        found.append(finding("pair-needs-vectors", place(spec, _cause(spec)), cause=_cause(spec)))
    return tuple(found)


def _pairable(spec: Spec) -> list[tuple[str, tuple[object, ...], tuple[object, ...]]]:
    """Return key, value and default of each key that may be a scalar or a pair."""
    divisor = ("kernel.divisor", spec.kernel.divisor, (Fraction(1),))
    frac = ("coefficient.frac", spec.coefficient.frac, (Auto.AUTO,))
    return [divisor] if _exact(spec) else [divisor, frac]


def _cause(spec: Spec) -> str:
    """Return the key that asks for pairs."""
    if spec.intermediate is not None:
        return "intermediate"
    return "kernel.divisor" if len(spec.kernel.divisor) == 2 else "coefficient.frac"


def _entry(values: tuple[_T, ...], i: int) -> _T:
    return values[i if len(values) == 2 else 0]


def _parts(spec: Spec, paired: bool) -> list[tuple[str, str, Matrix]]:
    column, row, taps = spec.kernel.column, spec.kernel.row, spec.kernel.taps
    if column is None or row is None:
        return [("taps", source_key(spec, "taps"), taps or ())]
    if paired:
        return [
            ("column", source_key(spec, "column"), tuple((tap,) for tap in column)),
            ("row", source_key(spec, "row"), (row,)),
        ]
    return [("taps", source_key(spec, "column"), _outer(column, row))]


def _outer(column: Vector, row: Vector) -> Matrix:
    return tuple(tuple(a * b for b in row) for a in column)


def _divisor(spec: Spec, given: Fraction | Sum, key: str, taps: Matrix) -> Fraction | Finding:
    if not isinstance(given, Sum):
        return given
    total = sum((tap for row in taps for tap in row), Fraction(0))
    if total:
        return total
    return finding("divisor-sum-zero", place(spec, "kernel.divisor"), taps=key)


def _pins(
    spec: Spec, parts: list[tuple[str, str, Matrix]]
) -> tuple[tuple[Integers | None, ...], tuple[Finding, ...]]:
    pinned = spec.coefficient.pinned
    if pinned is None:
        return (None,) * len(parts), ()
    where = place(spec, "coefficient.pinned")
    if _exact(spec):
        return (), (finding("pinned-with-exact", where),)
    pins = tuple(_pin(pinned, name) for name, _, _ in parts)
    found = tuple(
        finding("pinned-shape", where, part=name, wanted=_shape(taps), given=_shape(pin))
        for pin, (name, _, taps) in zip(pins, parts, strict=True)
        if _shape(pin) != _shape(taps)
    )
    return pins, found


def _pin(pinned: Pinned, name: str) -> Integers | None:
    """Return the pinned integers of one part, laid out as the part is."""
    match name:
        case "column":
            return None if pinned.column is None else tuple((tap,) for tap in pinned.column)
        case "row":
            return None if pinned.row is None else (pinned.row,)
    return pinned.taps


def _shape(matrix: Matrix | Integers | None) -> str:
    """Return for example "3x5"; "none" without a matrix, "ragged" for unequal rows."""
    if matrix is None:
        return "none"
    lengths = {len(row) for row in matrix}
    return f"{len(matrix)}x{lengths.pop()}" if len(lengths) == 1 else "ragged"
